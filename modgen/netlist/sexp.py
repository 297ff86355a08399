"""Nested lists of words, with the place where each list begins.

``simp_sexp`` reads the same language, but gives no places, takes a file that is cut off for a whole one,
and turns words into numbers (``1e3`` of a value, ``0x10`` of a name); what comes back from somebody
else's program wants none of that.
"""

from __future__ import annotations

import re
from bisect import bisect_right
from collections.abc import Iterator
from typing import TypeAlias

from modgen.problems import InputError, Place, Problem

#: lists inside lists; a netlist needs seven
DEEPEST = 40
#: words and parentheses in one file; a netlist of 1000 channels needs a tenth of this
MOST_TOKENS = 5_000_000

_TOKEN = re.compile(
    r"""\s+|(?P<open>\()|(?P<close>\))|"(?P<text>[^"\\]*+(?:\\.[^"\\]*+)*+)"|(?P<word>[^\s()"]+)|(?P<stray>")""",
    re.DOTALL,
)
_ESCAPE = re.compile(r"\\(.)", re.DOTALL)
_ESCAPES = {"n": "\n", "r": "\r", "t": "\t"}


class Lines:
    """Turns offsets in a text into lines and columns."""

    def __init__(self, text: str, file: str) -> None:
        self.file = file
        self._starts = [0, *(match.end() for match in re.finditer("\n", text))]

    def place(self, offset: int) -> Place:
        """The place of an offset; lines and columns count from 1."""
        line = bisect_right(self._starts, offset)
        return Place(self.file, line, offset - self._starts[line - 1] + 1)


class SList:
    """One list: where its parenthesis stands, its first word, and what follows."""

    __slots__ = ("at", "head", "items")

    def __init__(self, at: int) -> None:
        self.at = at
        self.head = ""
        self.items: list[Item] = []

    def lists(self, head: str) -> Iterator[SList]:
        """The lists inside that begin with a word."""
        return (item for item in self.items if isinstance(item, SList) and item.head == head)

    def first(self, head: str) -> SList | None:
        """The first of them, or None."""
        return next(self.lists(head), None)

    def word(self) -> str:
        """The first word after the head; empty when there is none."""
        return next((item for item in self.items if isinstance(item, str)), "")

    def text(self, head: str) -> str:
        """The word of the first list inside that begins with ``head``: ``R1`` of ``(comp (ref R1))``."""
        found = self.first(head)
        return found.word() if found else ""


Item: TypeAlias = "str | SList"


def _unescaped(text: str) -> str:
    """The text of a quoted word."""
    if "\\" not in text:
        return text
    return _ESCAPE.sub(lambda match: _ESCAPES.get(match[1], match[1]), text)


def parse(text: str, lines: Lines) -> SList:
    """The one list that a text holds.

    Parameters
    ----------
    text
        The whole file.
    lines
        Its lines, for places.

    Returns
    -------
    SList
        The outermost list.

    Raises
    ------
    InputError
        When the text is not one whole list, or nests deeper than ``DEEPEST``.
    """

    def stop(at: int, what: str, why: str, fix: str) -> InputError:
        return InputError([Problem(lines.place(at), what, why, fix)])

    whole: SList | None = None
    stack: list[SList] = []
    fresh = False  # the last thing read was an opening parenthesis, so a word now is a head
    count = 0
    for match in _TOKEN.finditer(text):
        kind, at = match.lastgroup, match.start()
        if kind is None:
            continue
        count += 1
        if count > MOST_TOKENS:
            raise stop(
                at,
                f"the file has more than {MOST_TOKENS} words and parentheses",
                "a netlist of 64 channels has a twentieth of that",
                "check that this is the netlist, not some other file",
            )
        if kind == "stray":
            raise stop(
                at,
                "the quote that begins here is never closed",
                "the file was cut off, or edited by hand",
                "write the netlist again from the program that made it",
            )
        if whole is not None and not stack:
            raise stop(
                at,
                "there is something after the end of the netlist",
                f"the list that begins the file was closed before: {match[0][:20]!r} belongs to nothing",
                "write the netlist again from the program that made it",
            )
        if kind == "open":
            if len(stack) >= DEEPEST:
                raise stop(
                    at,
                    f"lists nest deeper than {DEEPEST}",
                    "a netlist needs seven levels",
                    "check that this is the netlist, not some other file",
                )
            made = SList(at)
            if stack:
                stack[-1].items.append(made)
            else:
                whole = made
            stack.append(made)
        elif not stack:
            raise stop(
                at,
                f"this is not a netlist: it begins with {match[0][:20]!r}",
                "a netlist is one list that begins with '(export'",
                "give the S-expression netlist (often called .net) that the layout editor exports",
            )
        elif kind == "close":
            stack.pop()
        else:
            word = match["word"] if kind == "word" else _unescaped(match["text"])
            if fresh:
                stack[-1].head = word
            else:
                stack[-1].items.append(word)
        fresh = kind == "open"
    if stack:
        raise stop(
            len(text),
            f"the file ends in the middle of ({stack[-1].head}, which begins at line {lines.place(stack[-1].at).line}",
            f"{len(stack)} parentheses are still open: the file was cut off",
            "write the netlist again from the program that made it",
        )
    if whole is None:
        raise stop(
            0,
            "the file is empty",
            "a netlist is one list that begins with '(export'",
            "give the S-expression netlist (often called .net) that the layout editor exports",
        )
    return whole
