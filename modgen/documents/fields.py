"""The keys of one mapping, taken one by one."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable
from dataclasses import replace

from modgen.documents.nodes import Node, unknown
from modgen.documents.syntax import missing_colon
from modgen.problems import Place, Problem

#: unknown keys that are reported one by one in one mapping
UNKNOWN_SHOWN = 20


class Fields:
    """The keys of one mapping, taken one by one; what is left over is unknown.

    Parameters
    ----------
    node : Node
        The mapping; anything else is reported at once and read as a mapping without keys.
    problems : list[Problem]
        Shared by everything that reads the page; problems are added to it.
    where : str
        What the mapping is called in messages: ``glide``, ``parts.R-1k``; empty for the whole page.
    example : str
        What a mapping could look like, for the message when there is none.
    """

    def __init__(self, node: Node, problems: list[Problem], where: str = "", example: str = "") -> None:
        self.node = node = _with_decimal_commas(node)
        self.problems = problems
        self.where = where
        self._known: list[str] = []
        self._entries = {name.text: (name, value) for name, value in node.entries}
        if node.kind != "mapping":
            subject = where or "the page"
            fix = f"write it like this: {example}" if example else "write it as lines of 'key: value'"
            problems.append(
                node.problem(f"{subject} is {node}, not a mapping", f"{subject} is made of keys and values", fix)
            )

    def take(self, key: str) -> Node | None:
        """The value of a key, or None when the page does not state it; the key counts as known."""
        if key not in self._known:
            self._known.append(key)
        entry = self._entries.get(key)
        return entry[1] if entry else None

    def place(self, key: str) -> Place:
        """Where the key stands; where the mapping begins when the page does not state it."""
        entry = self._entries.get(key)
        return entry[0].place if entry else self.node.place

    def rest(self, known: Iterable[str] = (), elsewhere: Callable[[Node], Problem | None] | None = None) -> None:
        """Report every key that was neither taken nor is in ``known``, with the nearest known one.

        ``elsewhere`` may know better what such a key is: its problem takes the place of the usual one.
        """
        names = list(dict.fromkeys([*self._known, *known]))
        strangers = [entry for text, entry in self._entries.items() if text not in names]
        for name, value in strangers[:UNKNOWN_SHOWN]:
            found = _without_colon(name, value, names) or (elsewhere(name) if elsewhere else None)
            self.problems.append(found or unknown(name, names, "key", self.where))
        if len(strangers) > UNKNOWN_SHOWN:
            self.problems.append(
                strangers[UNKNOWN_SHOWN][0].problem(
                    f"{len(strangers) - UNKNOWN_SHOWN} more unknown keys in {self.where or 'the page'}",
                    "",
                    "mend the ones above first",
                )
            )


def _without_colon(name: Node, value: Node, names: Iterable[str]) -> Problem | None:
    """The problem of ``{positive 12 V}``, which reads as a key without a value."""
    word = re.split(r"[\s:=]", name.text, maxsplit=1)[0]
    said = missing_colon(name.text) if value.blank and word in names else None
    return name.problem(*said) if said else None


def _with_decimal_commas(node: Node) -> Node:
    """The mapping with ``{longest: 0,5 ms}`` as the one value that was meant, for its reader to refuse.

    In braces the comma ends the value, and what follows it is a key without a value. Keys of digits stand for
    nothing else when they follow a digit and a comma without a blank.
    """
    entries: list[tuple[Node, Node]] = []
    for name, value in node.entries:
        before = entries[-1][1] if entries else None
        if (
            before is not None
            and value.blank
            and before.plain
            and before.text[-1:].isdigit()
            and name.text[:1].isdigit()
            and name.place.line == before.place.line
            and name.place.column == before.place.column + len(before.text) + 1
        ):
            entries[-1] = (entries[-1][0], replace(before, text=f"{before.text},{name.text}"))
        else:
            entries.append((name, value))
    return replace(node, entries=tuple(entries)) if len(entries) < len(node.entries) else node
