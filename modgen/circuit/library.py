"""The circuit library, loaded on first use and kept to itself.

Importing skidl the plain way changes the process it runs in: it opens log files in the working folder,
makes folders in HOME, reads ``./.skidlcfg``, replaces the logger class, adds builtins, prints warnings
and draws from the global random generator. Here its modules are loaded as a private copy instead. Each
module gets builtins of its own whose ``__import__`` hands out stand-ins for the few standard modules
through which those effects pass; everything else is the real thing, and skidl's code is not changed.

So nothing has to be put back afterwards, no other thread ever sees a patched ``logging`` or ``os``, and a
caller that uses skidl itself keeps an untouched one. Two things are shared with the process while the
lock is held: the ``skidl`` entries of ``sys.modules`` and one finder in ``sys.meta_path``; both are
restored on the way out.
"""

from __future__ import annotations

import builtins
import importlib
import logging
import os
import random
import sys
import threading
import types
import warnings
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from importlib.abc import InspectLoader, Loader, MetaPathFinder
from importlib.machinery import ModuleSpec, PathFinder
from typing import Any

NAME = "skidl"
#: skidl tries to import this (with its plotting library, half a second) and does without when it is absent
LEFT_OUT = "InSpice"
#: where the library believes it runs; it ends up in the text it writes, where it is replaced
SOURCE = "<interactive>"

#: skidl keeps names and the active logger in module globals: one circuit at a time
_lock = threading.RLock()
_state = threading.local()
_modules: dict[str, types.ModuleType] = {}


class _Discard(logging.Handler):
    """Stands for every handler the library makes: takes the arguments of all of them, writes nowhere."""

    def __init__(self, *args: object, **kwargs: object) -> None:
        super().__init__()

    def emit(self, record: logging.LogRecord) -> None:
        """Drop the record; what the library says is captured where it is wanted."""


def _copy(module: types.ModuleType, **changes: object) -> types.ModuleType:
    """A module with the contents of another and some of its names changed."""
    twin = types.ModuleType(module.__name__)
    twin.__dict__.update(module.__dict__)
    twin.__dict__.update(changes)
    return twin


def _private_logging() -> types.ModuleType:
    """``logging`` with loggers that the process does not know, and handlers that open nothing."""
    chosen: list[type[logging.Logger]] = [logging.Logger]
    made: dict[str, logging.Logger] = {}
    # a manager of its own, so that logging.disable() in the caller does not silence the rule check
    manager = logging.Manager(logging.RootLogger(logging.WARNING))

    def set_class(cls: type[logging.Logger]) -> None:
        chosen[0] = cls

    def get_logger(name: str) -> logging.Logger:
        if name not in made:
            made[name] = chosen[0](name)
            made[name].manager = manager
        return made[name]

    return _copy(logging, setLoggerClass=set_class, getLogger=get_logger, FileHandler=_Discard, StreamHandler=_Discard)


def _private_os() -> types.ModuleType:
    """``os`` without an environment of the caller's, that makes and removes nothing."""

    def nothing(*args: object, **kwargs: object) -> None:
        return None

    # the paths are named, never opened; they only have to be there so that the library does not warn
    symbols = {f"KICAD{n}_SYMBOL_DIR": "" for n in ("", 6, 7, 8, 9, 10)}
    environ = {"XDG_DATA_HOME": os.sep, **symbols}
    return _copy(
        os, environ=environ, getenv=environ.get, makedirs=nothing, mkdir=nothing, remove=nothing, getcwd=lambda: os.sep
    )


def _private_random() -> types.ModuleType:
    """``random`` with a generator of its own."""
    own = random.Random(0)
    methods = {name: getattr(own, name) for name in ("random", "randint", "randrange", "choice", "choices")}
    return _copy(random, **methods)


def _private_time() -> types.ModuleType:
    """``time`` that has no date to print."""
    import time

    def no_date(*args: object) -> str:
        return ""

    return _copy(time, strftime=no_date, ctime=no_date, asctime=no_date)


def _private_inspect(folder: str) -> types.ModuleType:
    """``inspect`` whose stack is empty but for the library: no path of the caller's, and no time spent.

    Half the time of a plain build goes into walking the stack for each part, net and group.
    """
    import inspect

    frame = types.SimpleNamespace(filename=os.path.join(folder, "scriptinfo.py"), lineno=0)

    def stack(*args: object) -> list[types.SimpleNamespace]:
        return [frame]

    return _copy(inspect, stack=stack)


def _private_sexp() -> types.ModuleType:
    """The library's S-expressions with another printer: same text, in time with its length."""
    import simp_sexp

    plain: Any = simp_sexp.Sexp

    class Sexp(plain):  # type: ignore[misc]
        """An S-expression that lays each list out once, not again at every level above it."""

        def to_str(self, *args: Any, **kwargs: Any) -> str:
            """The text; any layout but the default one is left to the library."""
            text: str = plain.to_str(self, *args, **kwargs) if args or kwargs else _lay_out(self, 1)
            return text

    return _copy(simp_sexp, Sexp=Sexp)


def _lay_out(items: list[Any], level: int) -> str:
    """One list: its words on the first line, each list inside it on a line of its own."""
    words = [_lay_out(item, level + 1) if isinstance(item, list) else str(item) for item in items]
    gaps = [f"\n{'  ' * level}" if isinstance(item, list) else " " for item in items]
    if gaps and gaps[0] == " ":
        gaps[0] = ""
    return f"({''.join(gap + word for gap, word in zip(gaps, words, strict=True))})"


def _private_builtins(folder: str) -> types.ModuleType:
    """Builtins for the library's modules: an import that hands out stand-ins, and no files."""

    def no_file(path: object, *args: object, **kwargs: object) -> Any:
        raise FileNotFoundError(f"the circuit library may not open {path!r}")

    def quiet(*args: object, **kwargs: object) -> None:
        return None

    def import_(
        name: str,
        globals: dict[str, object] | None = None,
        locals: dict[str, object] | None = None,
        fromlist: Sequence[str] = (),
        level: int = 0,
    ) -> types.ModuleType:
        if level == 0:
            top = name.partition(".")[0]
            if top == LEFT_OUT:
                raise ModuleNotFoundError(f"No module named {name!r}", name=name)
            if top in stand_ins and (name == top or not fromlist):
                return stand_ins[top]
        return builtins.__import__(name, globals, locals, fromlist, level)

    own = _copy(builtins, __import__=import_, open=no_file, print=quiet)
    stand_ins = {
        "builtins": own,
        "logging": _private_logging(),
        "os": _private_os(),
        "random": _private_random(),
        "time": _private_time(),
        "inspect": _private_inspect(folder),
        "simp_sexp": _private_sexp(),
        # without a __file__ the library takes the session for an interactive one and looks no further
        "__main__": types.ModuleType("__main__"),
    }
    return own


class _PrivateLoader(Loader):
    """Runs a module's own code with the private builtins."""

    def __init__(self, inner: InspectLoader, own: types.ModuleType) -> None:
        self._inner = inner
        self._own = own

    def create_module(self, spec: ModuleSpec) -> None:
        """Leave it to the import system."""

    def exec_module(self, module: types.ModuleType) -> None:
        """Run the code."""
        code = self._inner.get_code(module.__name__)
        if code is None:
            raise ImportError(f"{module.__name__} has no code to run", name=module.__name__)
        module.__dict__["__builtins__"] = self._own.__dict__
        exec(code, module.__dict__)


class _PrivateFinder(MetaPathFinder):
    """Finds the library's modules where they are installed, and has them loaded privately."""

    def __init__(self) -> None:
        self._own: types.ModuleType | None = None

    def find_spec(
        self, fullname: str, path: Sequence[str] | None = None, target: types.ModuleType | None = None
    ) -> ModuleSpec | None:
        """The spec of a module of the library; None for anything else."""
        if fullname.partition(".")[0] != NAME or threading.get_ident() != getattr(_state, "owner", None):
            return None
        spec = PathFinder.find_spec(fullname, path)
        if spec is None or not isinstance(spec.loader, InspectLoader):
            return spec
        if self._own is None:
            self._own = _private_builtins(os.path.dirname(str(spec.origin)))
        spec.loader = _PrivateLoader(spec.loader, self._own)
        return spec


_finder = _PrivateFinder()


def _take_out() -> dict[str, types.ModuleType]:
    """Remove the library's modules from ``sys.modules`` and return them."""
    names = [name for name in sys.modules if name.partition(".")[0] == NAME]
    return {name: sys.modules.pop(name) for name in names}


def _load() -> types.ModuleType:
    """Import the library for the first time."""
    with warnings.catch_warnings():
        # old code in the library's own dependencies warns about itself; no concern of the user's
        warnings.simplefilter("ignore")
        return importlib.import_module(NAME)


@contextmanager
def library() -> Iterator[Any]:
    """The skidl module, for as long as the block runs; one thread at a time.

    Yields
    ------
    module
        The private copy of skidl, without environment, files, console or clock.

    Raises
    ------
    ImportError
        When skidl is not installed.
    """
    with _lock:
        outer = getattr(_state, "owner", None)
        _state.owner = threading.get_ident()
        theirs = _take_out()
        sys.modules.update(_modules)
        sys.meta_path.insert(0, _finder)
        try:
            yield sys.modules[NAME] if _modules else _load()
        finally:
            sys.meta_path.remove(_finder)
            ours = _take_out()
            if NAME in ours:
                _modules.update(ours)
            sys.modules.update(theirs)
            _state.owner = outer
