"""Using the library leaves nothing behind in the process, on the disk or on the console."""

from __future__ import annotations

import json
import pickle
import subprocess
import sys
import threading
from collections.abc import Callable
from pathlib import Path

import pytest

from modgen.circuit import build
from modgen.circuit.library import library
from modgen.design.model import Design

ROOT = Path(__file__).parents[2]

# Runs in a process of its own, as a script called app.py with an app.log beside it that belongs to the user.
SCRIPT = """
import builtins, json, logging, os, pickle, random, sys
sys.path.insert(0, sys.argv[1])
import modgen.circuit
imported_early = [name for name in sys.modules if name.partition(".")[0] in ("skidl", "InSpice", "matplotlib")]
with open(sys.argv[2], "rb") as file:
    design = pickle.load(file)

def state():
    return {
        "builtins": sorted(vars(builtins)),
        "logger class": str(logging.getLoggerClass()),
        "root handlers": str(logging.getLogger().handlers),
        "skidl loggers": [n for n in logging.Logger.manager.loggerDict if "skidl" in n.lower() or "erc" in n.lower()],
        "disabled": logging.Logger.manager.disable,
        "random": str(random.getstate()),
        "environment": dict(os.environ),
        "folder": os.getcwd(),
        "folder holds": sorted(os.listdir()),
        "library modules": [n for n in sys.modules if n.partition(".")[0] in ("skidl", "InSpice", "matplotlib")],
        "finders": str(sys.meta_path),
        "path": list(sys.path),
        "os": [str(getattr(os, n)) for n in ("makedirs", "getcwd", "remove", "getenv")],
        "handler classes": [str(logging.FileHandler), str(logging.StreamHandler)],
        "excepthook": str(sys.excepthook),
    }

touched = []
def watch(event, args):
    if event == "open" and isinstance(args[0], str) and not args[0].endswith(".pyc") and ".pyc." not in args[0]:
        mode, flags = args[1], args[2]
        if flags & (os.O_WRONLY | os.O_RDWR | os.O_CREAT) or args[0].endswith("skidlcfg"):
            touched.append([event, args[0]])
    elif event in ("os.mkdir", "os.remove", "os.rename", "os.rmdir", "os.chdir", "os.putenv", "os.unsetenv",
                   "tempfile.mkdtemp", "tempfile.mkstemp", "subprocess.Popen", "socket.connect"):
        if "__pycache__" not in str(args[0]):
            touched.append([event, str(args[0])])

before = state()
sys.addaudithook(watch)
logging.disable(logging.CRITICAL)  # a caller's own choice must survive, and must not silence the check
before["disabled"] = logging.Logger.manager.disable
texts = [modgen.circuit.build(design) for _ in range(2)]
after = state()
print(json.dumps({
    "changed": {k: [before[k], after[k]] for k in before if before[k] != after[k]},
    "early": imported_early,
    "touched": touched,
    "messages": len(texts[0].netlist.library_messages),
    "same": texts[0] == texts[1],
    "text": texts[0].netlist_text,
}))
"""


def run(folder: Path, design: Design, environment: dict[str, str], *options: str) -> subprocess.CompletedProcess[str]:
    folder.mkdir()
    (folder / "app.py").write_text(SCRIPT)
    (folder / "app.log").write_text("the user's own log\n")
    (folder / ".skidlcfg").write_text("{ malformed")
    (folder / "design").write_bytes(pickle.dumps(design))
    return subprocess.run(
        [sys.executable, *options, "app.py", str(ROOT), "design"],
        cwd=folder,
        env=environment,
        capture_output=True,
        text=True,
        timeout=120,
        check=False,
    )


@pytest.fixture(scope="module")
def faulty(two: Design) -> Design:
    """A design of which the library's check has something to say."""
    import dataclasses

    parts = [dataclasses.replace(p, pins=(("1", "LONELY"), *p.pins[1:])) if p.ref == "R1" else p for p in two.parts]
    return dataclasses.replace(two, parts=tuple(parts))


def test_nothing_is_left_behind(tmp_path: Path, faulty: Design) -> None:
    # no HOME, and warnings as errors: both have stopped the plain import
    done = run(tmp_path / "bare", faulty, {"PYTHONHASHSEED": "1"}, "-W", "error")
    assert (done.returncode, done.stderr) == (0, "")
    said = json.loads(done.stdout)
    assert said["changed"] == {}
    assert said["early"] == []
    assert said["touched"] == []
    assert said["same"]
    assert said["messages"] == 1
    folder = tmp_path / "bare"
    assert sorted(p.name for p in folder.iterdir()) == [".skidlcfg", "app.log", "app.py", "design"]
    assert (folder / "app.log").read_text() == "the user's own log\n"

    # another hash seed, another folder, a HOME that cannot be made: the same text
    home = {"HOME": "/dev/null/home", "PYTHONHASHSEED": "77", "XDG_DATA_HOME": "/dev/null/data"}
    again = run(tmp_path / "with home", faulty, home)
    assert (again.returncode, again.stderr) == (0, "")
    assert json.loads(again.stdout)["text"] == said["text"]
    assert build(faulty).netlist_text == said["text"]


def test_threads_get_the_same_text(two: Design, design_of: Callable[..., Design]) -> None:
    other = design_of(channels=1, single=True, title="Another")
    wanted = {id(two): build(two), id(other): build(other)}
    wrong: list[str] = []

    def work(design: Design) -> None:
        wrong.extend(design.title for _ in range(3) if build(design) != wanted[id(design)])

    threads = [threading.Thread(target=work, args=(design,)) for design in (two, other) * 3]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert wrong == []


def test_a_library_that_the_caller_uses_stays_the_callers(two: Design, monkeypatch: pytest.MonkeyPatch) -> None:
    theirs = {name: object() for name in ("skidl", "skidl.circuit", "skidl.only_theirs")}
    for name, module in theirs.items():
        monkeypatch.setitem(sys.modules, name, module)
    build(two)
    assert {n: m for n, m in sys.modules.items() if n.partition(".")[0] == "skidl"} == theirs


def test_nested_use_and_use_after_an_error() -> None:
    with library() as outer, library() as inner:
        assert inner is outer
    with pytest.raises(ZeroDivisionError), library():
        1 / 0  # noqa: B018
    assert "skidl" not in sys.modules
    with library() as again:
        assert again is outer


def test_another_thread_finds_its_own_library() -> None:
    """While one thread holds the library, an import elsewhere does not get the private loader."""
    from modgen.circuit import library as module

    found = []
    with library():
        thread = threading.Thread(target=lambda: found.append(module._finder.find_spec("skidl")))
        thread.start()
        thread.join()
        mine = module._finder.find_spec("skidl")
    assert found == [None]
    assert mine is not None
    assert type(mine.loader).__name__ == "_PrivateLoader"


def test_without_a_folder_to_stand_in(two: Design, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    wanted = build(two)
    gone = tmp_path / "gone"
    gone.mkdir()
    monkeypatch.chdir(gone)
    gone.rmdir()
    assert build(two) == wanted
