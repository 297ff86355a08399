"""What is wrong with an input: where, what, why and how to mend it.

Every reader (spec, catalogue, netlist, price file) collects :class:`Problem` values and raises
them all at once as one :class:`InputError`; the command line prints them and exits with status 2.
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, order=True)
class Place:
    """A position in a text file; lines and columns count from 1, 0 means unknown."""

    file: str
    line: int = 0
    column: int = 0

    def __str__(self) -> str:
        """``file:line:column``, without what is unknown."""
        if not self.line:
            return self.file
        return f"{self.file}:{self.line}:{self.column}"


@dataclass(frozen=True, order=True)
class Problem:
    """One thing that is wrong with an input."""

    place: Place
    what: str
    why: str = ""
    fix: str = ""
    level: str = "error"

    def __str__(self) -> str:
        """The message as it is printed: place, level, what; then why and fix, indented."""
        lines = [f"{self.place}: {self.level}: {self.what}"]
        if self.why:
            lines.append(f"    why: {self.why}")
        if self.fix:
            lines.append(f"    fix: {self.fix}")
        return "\n".join(lines)


class InputError(Exception):
    """The input cannot be used; carries every problem that was found, in the order of the file."""

    def __init__(self, problems: list[Problem] | tuple[Problem, ...]) -> None:
        self.problems: tuple[Problem, ...] = tuple(sorted(problems))
        super().__init__("\n".join(str(p) for p in self.problems))
