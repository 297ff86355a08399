"""What a page is made of: nodes with their text and place, and how messages name what was found."""

from __future__ import annotations

import difflib
from collections.abc import Iterable
from dataclasses import dataclass

from modgen.problems import Place, Problem

#: longest piece of the user's text that a message repeats
SHOWN = 60


@dataclass(frozen=True)
class Node:
    """A piece of a YAML page and where it begins.

    kind: ``mapping``, ``sequence`` or ``scalar``. text: what a scalar says, as written (escapes and
    folding resolved). plain: false for a quoted or block scalar. items: of a sequence. entries: the
    (key, value) pairs of a mapping in the order of the page; keys are scalars, each different.
    """

    kind: str
    place: Place
    text: str = ""
    plain: bool = True
    items: tuple[Node, ...] = ()
    entries: tuple[tuple[Node, Node], ...] = ()

    @property
    def blank(self) -> bool:
        """Whether nothing was written (``key:`` with nothing after it)."""
        return self.kind == "scalar" and self.plain and not self.text

    def get(self, key: str) -> Node | None:
        """The value of a key of a mapping, or None."""
        return next((value for name, value in self.entries if name.text == key), None)

    def key(self, key: str) -> Node | None:
        """The key itself, for its place, or None."""
        return next((name for name, _ in self.entries if name.text == key), None)

    def keys(self) -> tuple[str, ...]:
        """The keys of a mapping, in the order of the page."""
        return tuple(name.text for name, _ in self.entries)

    def __str__(self) -> str:
        """What was found, for a message: ``'4k7'``, ``a list``, ``a mapping``, ``nothing``."""
        if self.kind == "mapping":
            return "a mapping"
        if self.kind == "sequence":
            return "a list"
        return "nothing" if self.blank else f"'{shown(self.text)}'"

    def problem(self, what: str, why: str = "", fix: str = "", level: str = "error") -> Problem:
        """A problem that stands at this node."""
        return Problem(self.place, what, why, fix, level)


def nearest(word: str, names: Iterable[str]) -> str:
    """The name most like a word, or an empty text when none is near."""
    lower = {name.casefold(): name for name in names}
    found = difflib.get_close_matches(word[:SHOWN].casefold().replace(" ", "_"), lower, 1, 0.6)
    return lower[found[0]] if found else ""


def unknown(node: Node, names: Iterable[str], subject: str, where: str = "") -> Problem:
    """The problem for a scalar that is none of ``names``; ``subject`` says what it ought to be.

    The wording is ``unknown <subject> '<text>' in <where>``, then every known name, then the nearest one.
    """
    known = list(names)
    near = nearest(node.text, known)
    return node.problem(
        f"unknown {subject} '{shown(node.text)}'" + (f" in {where}" if where else ""),
        f"known here: {', '.join(known)}" if known else "no names are known here",
        f"did you mean '{near}'?" if near else "use one of the known names",
    )


def shown(text: str) -> str:
    """The user's text as a message repeats it: one line, nothing invisible, at most 60 characters."""
    cut = text if len(text) <= SHOWN else text[: SHOWN - 1] + "…"
    return "".join(c if c.isprintable() else c.encode("unicode_escape").decode("ascii") for c in cut)
