"""Where the trouble of a page that is no YAML begins, in the words of the page.

The scanner of YAML stops where it can go no further, which is often lines after the slip, and says so in words of
its own. This survey follows the page as people write it (keys in columns, each with a value on its line or below it)
and names the first thing that does not fit. What it does not follow it leaves to the scanner's words.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

from modgen.documents.nodes import shown
from modgen.documents.spans import (
    COLON,
    At,
    Source,
    TroubleError,
    UnclearError,
    closes_nothing,
    flow_end,
    indent,
    quoted_end,
    without_comment,
)
from modgen.problems import Place, Problem

_LINE_END = re.compile("\r\n|\r|\n")
_ITEM = re.compile(r"-(?: +|$)")
_NO_COLON = re.compile(r"([^\s:=]+)(\s*[:=]?\s*)(.*)", re.DOTALL)
_SAME_COLUMN = "the keys of one mapping begin in the same column"


def explain(text: str, file: str, stop: At) -> Problem | None:
    """The first thing on a page that does not fit, or None when the survey finds nothing it is sure of.

    Parameters
    ----------
    text : str
        The page.
    file : str
        The name that stands in the place.
    stop : tuple of int
        Line and column where the YAML scanner stopped; both count from 0. Nothing after it is blamed.
    """
    try:
        _Survey(Source(tuple(_LINE_END.split(text)), stop)).run()
    except TroubleError as trouble:
        if trouble.at <= stop:
            place = Place(file, trouble.at[0] + 1, trouble.at[1] + 1)
            return Problem(place, trouble.what, trouble.why, trouble.fix)
    except UnclearError:
        pass
    return None


def missing_colon(text: str) -> tuple[str, str, str] | None:
    """What, why and fix of a key and a value without a colon and a blank between them; None for other texts."""
    found = _NO_COLON.fullmatch(text)
    if not found:
        return None
    word, between, value = shown(found[1]), found[2].strip(), shown(found[3])
    why = "a key is followed by a colon and a blank"
    fix = f"write '{word}: {value}'" if value else f"write '{word}:' and its value after it"
    if between == ":":
        return f"there is no blank after the colon of '{word}'", why, fix
    if between == "=":
        return f"an equals sign follows '{word}' instead of a colon", why, fix
    return f"there is no colon after '{word}'", why, fix


@dataclass
class _Level:
    """A mapping that is open: its last key; or an item, or a text, that has no key.

    value: ``plain`` text, a ``whole`` one that ends by itself, or empty when it stands below. loose: the first
    line of plain text below the key.
    """

    column: int
    line: int
    name: str
    value: str = ""
    count: int = 1
    loose: At | None = None


class _Survey:
    """Goes from line to line and raises the first trouble."""

    def __init__(self, page: Source) -> None:
        self.page = page
        self.levels: list[_Level] = []

    def run(self) -> None:
        """Every line up to the one where the scanner stopped."""
        number = 0
        while number <= self.page.stop[0] and number < len(self.page.lines):
            number = self._line(number)

    def _line(self, number: int) -> int:
        """One line that begins outside of every value; the number of the next such line."""
        text = self.page.lines[number]
        column = indent(text)
        if not without_comment(text) or text.startswith(("---", "...", "%")):
            return number + 1
        item = False
        while found := _ITEM.match(text, column):
            while self.levels and self.levels[-1].column > column:
                self.levels.pop()
            column = found.end()
            item = True
        if column >= len(without_comment(text)):
            return number + 1
        first = text[column]
        if first in "?&*!|>,%@`":
            raise UnclearError
        if first in "]}":
            raise closes_nothing((number, column), first)
        name, after = self._key(number, column)
        if after is not None:
            level = self._open(number, column, name, item)
            return self._value(number, after, level)
        if first in "'\"[{":
            owner = column if item else self.levels[-1].column if self.levels else -1
            if self.levels and not item:
                self.levels[-1].value = "whole"
            return self._span(number, column, owner)
        self._text(number, column, item)
        return number + 1

    def _key(self, number: int, column: int) -> tuple[str, int | None]:
        """The key that begins in a column and where its value can begin; None when there is no key."""
        text = without_comment(self.page.lines[number])
        quote = text[column]
        if quote in "[{":
            return "", None
        begin = column
        if quote in "'\"":
            begin = text.find(quote, column + 1) + 1
            if not begin or not COLON.match(text[begin:].lstrip(" ")):
                return "", None
        found = COLON.search(text, begin)
        if not found:
            return "", None
        return shown(text[column : found.start()].rstrip().strip("'\"")), found.end()

    def _open(self, number: int, column: int, name: str, item: bool) -> _Level:
        """Take in a key: the next of its mapping, the first of a new one, or trouble."""
        level = _Level(column, number, name)
        if item:
            self.levels.append(level)
            return level
        inner = self._leave(column)
        top = self.levels[-1] if self.levels else None
        if top and top.column == column:
            if not top.name:
                raise self._no_colon(top)
            level.count = top.count + 1
            self.levels[-1] = level
            return level
        if inner:
            raise self._no_such_column(level, inner, top)
        if top and top.loose:
            raise self._no_colon(top)
        if top and top.value:
            raise self._below_a_value(level, top)
        self.levels.append(level)
        return level

    def _leave(self, column: int) -> _Level | None:
        """Close the mappings further to the right; the outermost of them."""
        inner = None
        while self.levels and self.levels[-1].column > column:
            inner = self.levels.pop()
        return inner

    def _text(self, number: int, column: int, item: bool) -> None:
        """Take in a line without a key: an item, more of a plain text, or a key whose colon is missing."""
        level = _Level(column, number, "", "plain", loose=(number, column))
        if item:
            self.levels.append(level)
            return
        inner = self._leave(column)
        top = self.levels[-1] if self.levels else None
        if inner or (top and ((top.name and top.column == column) or top.value == "whole")):
            raise self._no_colon(level)
        if top is None:
            self.levels.append(level)
        elif top.loose is None:
            top.loose = (number, column)

    def _value(self, number: int, column: int, level: _Level) -> int:
        """The value on the line of its key; the number of the line behind it."""
        text = self.page.lines[number]
        rest = text[column:]
        column += len(rest) - len(rest.lstrip(" \t"))
        value = without_comment(text[column:])
        if not value or text[column] == "#":
            return number + 1
        level.value = "whole"
        first = value[0]
        if first in "'\"[{":
            return self._span(number, column, level.column)
        if first in "]}":
            raise closes_nothing((number, column), first)
        if first in "&*!" or value.startswith("? "):
            raise UnclearError
        if first in "|>":
            number += 1
            while number < len(self.page.lines) and (
                not self.page.lines[number].strip() or indent(self.page.lines[number]) > level.column
            ):
                number += 1
            return number
        if first in "%@`,":
            raise TroubleError(
                (number, column),
                f"the value of '{level.name}' begins with {first}",
                "YAML keeps that character for itself",
                f"put the value in quotes: {level.name}: {_in_quotes(value)}",
            )
        if value.startswith("- "):
            raise TroubleError(
                (number, column),
                f"a list begins on the line of '{level.name}'",
                "an item that begins with a hyphen has a line of its own",
                f"put the list in brackets: {level.name}: [{shown(value[2:].strip())}]",
            )
        found = COLON.search(value)
        if found:
            raise TroubleError(
                (number, column),
                f"a second colon stands in the value of '{level.name}': '{shown(value)}'",
                "a colon and a blank end a key, and a line has one key",
                f"put the value in quotes, {level.name}: {_in_quotes(value)}, or in braces when it is made of keys, "
                f"{level.name}: {{{shown(value)}}}",
            )
        level.value = "plain"
        return number + 1

    def _span(self, number: int, column: int, owner: int) -> int:
        """A quoted text or a collection in brackets; the number of the line behind it."""
        inside = flow_end if self.page.lines[number][column] in "[{" else quoted_end
        return inside(self.page, (number, column), owner)[0] + 1

    def _no_colon(self, level: _Level) -> TroubleError:
        """The colon is missing in the line of plain text below a key, or that began the page."""
        at = level.loose or (level.line, level.column)
        said = missing_colon(without_comment(self.page.lines[at[0]][at[1] :]))
        if said is None:
            raise UnclearError
        return TroubleError(at, *said)

    def _no_such_column(self, level: _Level, inner: _Level, top: _Level | None) -> TroubleError:
        """A key further to the left than the mapping before it, and in no other."""
        if not inner.name:
            return self._no_colon(inner)
        if top is None and inner.count == 1:
            return TroubleError(
                (inner.line, inner.column),
                f"'{inner.name}' is indented by {_blanks(inner.column)}, and '{level.name}' on line {level.line + 1} "
                f"is {f'by {_blanks(level.column)}' if level.column else 'not'}",
                _SAME_COLUMN,
                f"begin '{inner.name}' in column {level.column + 1}",
            )
        other = f", or in column {top.column + 1}, like '{top.name}' on line {top.line + 1}" if top and top.name else ""
        return TroubleError(
            (level.line, level.column),
            f"'{level.name}' begins in column {level.column + 1}, where no key before it does",
            _SAME_COLUMN,
            f"begin it in column {inner.column + 1}, like '{inner.name}' on line {inner.line + 1}{other}",
        )

    def _below_a_value(self, level: _Level, top: _Level) -> TroubleError:
        """A key that is indented though the key before it has a value."""
        if not top.name:
            raise UnclearError
        more = level.column - top.column
        other = f", or remove the value of '{top.name}' if '{level.name}' belongs to it" if more > 1 else ""
        return TroubleError(
            (level.line, level.column),
            f"'{level.name}' is indented by {_blanks(more)} more than '{top.name}' on line {top.line + 1}, "
            "which has its value already",
            _SAME_COLUMN,
            f"begin '{level.name}' in column {top.column + 1}, like '{top.name}'{other}",
        )


def _blanks(count: int) -> str:
    return "one blank" if count == 1 else f"{count} blanks"


def _in_quotes(value: str) -> str:
    """A value as it stands in quotes."""
    text = shown(value)
    return f"'{text}'" if "'" not in text else '"' + text.replace('"', '\\"') + '"'
