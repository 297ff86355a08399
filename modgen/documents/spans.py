"""Quoted texts and bracketed collections of a page that is no YAML: where each ends, or why it does not.

Lines and columns count from 0 here, as the marks of the YAML scanner do.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

from modgen.documents.nodes import shown

COLON = re.compile(r":(?=[ \t]|$)")
CLOSING = {"{": "}", "[": "]"}
_COMMENT = re.compile(r"(?:^|(?<=[ \t]))#")
_FLOW_COLON = re.compile(r":(?=[ \t,\[\]{}]|$)")
_AFTER_GAP = re.compile(r"[ \t]*([^ \t])")

At = tuple[int, int]


class TroubleError(Exception):
    """The first thing that does not fit, and where it begins."""

    def __init__(self, at: At, what: str, why: str, fix: str) -> None:
        self.at = at
        self.what = what
        self.why = why
        self.fix = fix
        super().__init__(what)


class UnclearError(Exception):
    """The page uses a form that is not followed here."""


@dataclass(frozen=True)
class Source:
    """The lines of the page, and where the YAML scanner stopped."""

    lines: tuple[str, ...]
    stop: At

    def begins(self, line: int, owner: int) -> str:
        """What begins on a line that cannot belong to the value of the key in column ``owner``, or an empty text."""
        text = self.lines[line]
        column = indent(text)
        if column > owner:
            return ""
        if text.startswith("- ", column):
            return "an item"
        word = key_word(text[column:])
        return f"the key '{shown(word)}'" if word else ""


@dataclass
class _Bracket:
    at: At
    mark: str
    #: where the colon of the entry that is being read stands
    colon: At | None = None


def indent(text: str) -> int:
    """How many blanks a line begins with."""
    return len(text) - len(text.lstrip(" "))


def without_comment(text: str) -> str:
    """A piece of a line up to its comment, without blanks at the end."""
    found = _COMMENT.search(text)
    return (text[: found.start()] if found else text).rstrip(" \t")


def key_word(content: str) -> str:
    """The plain key that a line without its indentation begins with, or an empty text."""
    if content[:1] in ("#", "'", '"', *"[]{},&*!|>%@`?"):
        return ""
    content = without_comment(content)
    found = COLON.search(content)
    return content[: found.start()].rstrip() if found else ""


def quoted_end(page: Source, at: At, owner: int) -> At:
    """Where a quoted text ends, in block context; nothing but a comment may follow."""
    end, suspect = _closing_quote(page, at, owner)
    tail = without_comment(page.lines[end[0]][end[1] :].lstrip(" \t"))
    if tail.startswith(":"):
        raise UnclearError
    if tail:
        raise _after_quote(page, at, end, suspect)
    return end


def flow_end(page: Source, at: At, owner: int) -> At:
    """Where a collection in brackets ends, in block context; nothing but a comment may follow."""
    line, column = end = _closing_bracket(page, at, owner)
    rest = page.lines[line][column:]
    tail = without_comment(rest.lstrip(" \t"))
    column += len(rest) - len(rest.lstrip(" \t"))
    if tail.startswith(":"):
        raise UnclearError
    if tail[:1] in ("]", "}"):
        raise closes_nothing((line, column), tail[0])
    if tail:
        bracket = CLOSING[page.lines[at[0]][at[1]]]
        raise TroubleError(
            (line, column),
            f"the text '{shown(tail)}' stands after the closing {bracket}",
            f"the value of a key ends with its {bracket}",
            "remove it, or begin a line of its own with it",
        )
    return end


def closes_nothing(at: At, bracket: str) -> TroubleError:
    """A bracket too many."""
    return TroubleError(at, f"this {bracket} closes nothing", "every bracket is closed already", "remove it")


def _closing_quote(page: Source, at: At, owner: int) -> tuple[At, str]:
    """The place behind the closing quote, and what begins on the way that ought to stand outside."""
    line, column = at
    quote = page.lines[line][column]
    column += 1
    suspect = ""
    while line < len(page.lines):
        text = page.lines[line]
        if line > at[0] and not suspect:
            suspect = _before(page, line, owner)
        while column < len(text):
            if text[column] == "\\" and quote == '"':
                column += 2
                continue
            if text[column] == quote:
                if quote == "'" and text.startswith("'", column + 1):
                    column += 2
                    continue
                return (line, column + 1), suspect
            column += 1
        line, column = line + 1, 0
    raise _unclosed_quote(page, at, suspect)


def _closing_bracket(page: Source, at: At, owner: int) -> At:
    """The place behind the closing bracket; what does not fit inside is raised."""
    stack: list[_Bracket] = []
    suspect: TroubleError | None = None
    line, column = at
    begins = True  # whether a value or a key begins here, so that a quote is one
    while line < len(page.lines):
        text = page.lines[line]
        if line > at[0] and not suspect and (reason := _before(page, line, owner)):
            suspect = _unclosed(stack[-1], reason)
        while column < len(text):
            here, c = (line, column), text[column]
            if here > page.stop:
                raise suspect or UnclearError()
            column += 1
            if c in " \t":
                continue
            if c == "#" and (here[1] == 0 or text[here[1] - 1] in " \t"):
                break
            if c in "'\"" and begins:
                (line, column), inside = _closing_quote(page, here, owner)
                text = page.lines[line]
                if (found := _AFTER_GAP.match(text, column)) and found[1] not in ",]}:#":
                    raise _after_quote(page, here, (line, column), inside)
                begins = False
            elif c in CLOSING:
                stack.append(_Bracket(here, c))
                begins = True
            elif c in "]}":
                if c != CLOSING[stack[-1].mark]:
                    raise _wrong_bracket(stack, here, c)
                stack.pop()
                begins = False
                if not stack:
                    return line, column
            elif c == ",":
                stack[-1].colon, begins = None, True
            elif c == ":" and (_FLOW_COLON.match(text, here[1]) or (not begins and text[here[1] - 1] in "'\"")):
                if stack[-1].mark == "{" and stack[-1].colon:
                    raise suspect or _two_colons(page, stack[-1].colon, here)
                stack[-1].colon, begins = here, True
            else:
                begins = False
        line, column = line + 1, 0
    raise suspect or _unclosed(stack[-1], "the page ends while it is open")


def _before(page: Source, line: int, owner: int) -> str:
    """The reason why a value that began earlier ought to have ended before a line, or an empty text."""
    found = page.begins(line, owner)
    return f"line {line + 1} begins {found} while it is open" if found else ""


def _unclosed(bracket: _Bracket, why: str) -> TroubleError:
    mark, number = bracket.mark, bracket.at[0] + 1
    return TroubleError(
        bracket.at,
        f"the {mark} that opens here is not closed",
        why,
        f"close the {mark} that opens on line {number} with a {CLOSING[mark]}",
    )


def _unclosed_quote(page: Source, at: At, suspect: str) -> TroubleError:
    quote = page.lines[at[0]][at[1]]
    return TroubleError(
        at,
        f"the quote {quote} that opens here is not closed",
        suspect or "the page ends while it is open",
        f"close the quote that opens on line {at[0] + 1} with a {quote} where the text ends",
    )


def _after_quote(page: Source, at: At, end: At, suspect: str) -> TroubleError:
    """Text behind a closing quote: the quote was part of the text, or an earlier one was not closed."""
    if suspect:
        return _unclosed_quote(page, at, suspect)
    rest = page.lines[end[0]][end[1] :]
    quote = page.lines[at[0]][at[1]]
    if quote == "'":
        fix = "write a ' that belongs to the text twice (''), or put the whole text in double quotes"
    else:
        fix = 'write a " that belongs to the text as \\", or put the whole text in single quotes'
    return TroubleError(
        (end[0], end[1] + len(rest) - len(rest.lstrip(" \t"))),
        f"text stands after the closing quote: {shown(without_comment(rest.lstrip(' ')))}",
        f"the quote {quote} that opens in column {at[1] + 1} of line {at[0] + 1} is closed before it",
        fix,
    )


def _wrong_bracket(stack: list[_Bracket], here: At, closing: str) -> TroubleError:
    """A closing bracket that is not the one of the last opening one."""
    top = stack[-1]
    where = f"the {closing} in column {here[1] + 1} of line {here[0] + 1}"
    if any(CLOSING[bracket.mark] == closing for bracket in stack):
        return _unclosed(top, f"{where} comes first")
    return TroubleError(
        here,
        f"this {closing} does not fit the {top.mark} in column {top.at[1] + 1} of line {top.at[0] + 1}",
        f"a {top.mark} is closed by a {CLOSING[top.mark]}",
        f"write {CLOSING[top.mark]} instead",
    )


def _two_colons(page: Source, first: At, second: At) -> TroubleError:
    """Two colons between two commas: a comma is missing, or the value holds a colon."""
    line, column = second
    begin = len(page.lines[line][:column].rstrip(" \t"))
    while begin and page.lines[line][begin - 1] not in " \t,:[]{}":
        begin -= 1
    word = page.lines[line][begin:column].strip()
    if line == first[0] and not page.lines[line][first[1] + 1 : begin].strip():
        return TroubleError(
            (line, begin),
            f"a second colon stands in one value, after '{shown(word)}'",
            "a colon and a blank end a key",
            "put a value that holds a colon in quotes",
        )
    return TroubleError(
        (line, begin),
        f"there is no comma before '{shown(word)}'",
        "commas stand between the keys in braces",
        f"write a comma before '{shown(word)}'",
    )
