"""What a rule is, what it measures and what the engine makes of it."""

from __future__ import annotations

import inspect
import re
from collections.abc import Iterable
from dataclasses import dataclass, field
from typing import ClassVar

from modgen.analysis.board import Board
from modgen.spec.model import Spec

LEVELS = ("error", "warning", "note")
HEADINGS = ("Checks", "Matters", "Fails", "Passes", "Limits", "References")


@dataclass(frozen=True)
class Fault:
    """What is wrong with what was measured."""

    message: str
    why: str
    fix: str
    level: str = ""  # the rule's own level when empty


@dataclass(frozen=True)
class Measurement:
    """One thing a rule looked at. ``margin`` is the share of the limit that is left [-], negative when it fails."""

    parts: tuple[str, ...]
    what: str
    measured: float | None = None
    limit: float | None = None
    unit: str = ""
    margin: float | None = None
    fault: Fault | None = None
    nets: tuple[str, ...] = ()
    #: the spec key that caused it, for pointing at the page
    key: str = ""


@dataclass(frozen=True)
class Finding:
    """A fault, as everybody sees it."""

    rule: str
    level: str
    parts: tuple[str, ...]
    message: str
    why: str
    fix: str
    measured: float | None = None
    limit: float | None = None
    unit: str = ""
    waived: str = ""  # the reason, when somebody answers for it
    nets: tuple[str, ...] = ()
    key: str = ""
    margin: float | None = None  # share of the limit that is left [-], as it was measured


@dataclass(frozen=True)
class Checked:
    """What one rule looked at: how many instances, and where the least margin was."""

    rule: str
    instances: int
    worst_margin: float | None
    worst: str  # what stood there, in words
    judged: bool = True
    not_judged: str = ""  # why not, when it was not


@dataclass(frozen=True)
class Report:
    """The verdict on one netlist."""

    findings: tuple[Finding, ...]
    checked: tuple[Checked, ...]

    @property
    def cleared(self) -> bool:
        """Whether no error stands that nobody answers for, and something was looked at."""
        return not any(f.level == "error" and not f.waived for f in self.findings)


@dataclass(frozen=True)
class Context:
    """What a rule may look at: the netlist seen as a board, and the spec where there is one."""

    board: Board
    spec: Spec | None = None
    #: (level, text) of the circuit library's own check
    library_messages: tuple[tuple[str, str], ...] | None = None
    #: every rule name there is
    known_rules: tuple[str, ...] = field(default=())
    #: only for rules that run last: what the others found, and which of them ran
    findings: tuple[Finding, ...] = field(default=())
    ran: tuple[str, ...] = field(default=())
    #: the circuit that the spec asks for, as it was before anybody else had it in hands
    intended: Board | None = None


class Rule:
    """Base of every rule; name, subject and docstring headings are checked when the class is defined.

    A rule is one module named for its fault; the docstring has, in this order, a summary line and the
    headings of ``HEADINGS`` (each ``Heading:`` alone on its line, text indented below it). ``Fails`` and ``Passes``
    hold a small netlist in the words of :mod:`modgen.rules.examples`, which a test runs.
    """

    name: ClassVar[str] = ""
    subject: ClassVar[str] = ""  # wiring, supply, ratings, signal, function, ordering
    level: ClassVar[str] = "error"
    needs_spec: ClassVar[bool] = False
    #: whether it makes sense only where 0 V and the rails bear the names that the netlist conventions give them
    needs_rails: ClassVar[bool] = True
    needs_library: ClassVar[bool] = False  # the circuit library's own check
    needs_intended: ClassVar[bool] = False  # the netlist that the spec asks for
    runs_last: ClassVar[bool] = False  # looks at what the other rules found

    def __init_subclass__(cls) -> None:
        """Refuse a rule that is malformed, at import."""
        super().__init_subclass__()
        module = cls.__module__.rpartition(".")[2]
        if not re.fullmatch(r"[a-z]+(-[a-z]+)*", cls.name):
            raise TypeError(f"rule {cls.__name__}: name {cls.name!r} must be lower-case words joined by hyphens")
        if cls.name.replace("-", "_") != module:
            raise TypeError(f"rule {cls.name!r} must live in a module called {cls.name.replace('-', '_')}")
        if cls.level not in LEVELS:
            raise TypeError(f"rule {cls.name!r}: level {cls.level!r} is none of {', '.join(LEVELS)}")
        doc = inspect.getdoc(cls) or ""
        found = [line[:-1] for line in doc.splitlines() if line.endswith(":") and line[:-1] in HEADINGS]
        if tuple(found) != HEADINGS:
            raise TypeError(f"rule {cls.name!r}: docstring headings must be {', '.join(HEADINGS)}, in that order")

    def measure(self, context: Context) -> Iterable[Measurement]:
        """Everything the rule looked at, faulty or not."""
        raise NotImplementedError
