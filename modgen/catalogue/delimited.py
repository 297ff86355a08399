"""A table as text (CSV) cell by cell, each cell with its place.

Encoding and separator are found out from the file: UTF-8 with or without a byte order mark, UTF-16 by its mark;
comma, semicolon or tab, whichever makes the needed columns of the first row. Cells are read as RFC 4180 has them.
What is not certain is refused, never guessed: a byte that is no text, a row with more or fewer cells than the header.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache
from pathlib import Path

from modgen.documents import nearest, read_bytes, shown, shown_path
from modgen.problems import InputError, Place, Problem

#: largest table that is read [byte]; 100 000 rows fit in
LARGEST_TABLE = 5_000_000
#: separators that are tried, and how messages call them
SEPARATORS: Mapping[str, str] = {",": "a comma", ";": "a semicolon", "\t": "a tab"}
#: problems of one table that are told one by one; the number of the others is told
MOST_PROBLEMS = 1000
#: most columns of a table
MOST_COLUMNS = 1000
#: columns that a message repeats
SHOWN_COLUMNS = 20

_BREAK = re.compile(r"\r\n|\r|\n")
_CONTROL = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f\x7f]")
_UTF16 = {b"\xff\xfe": "utf-16-le", b"\xfe\xff": "utf-16-be"}


@dataclass(frozen=True)
class Cell:
    """What stands in one cell, without blanks at its ends, and where the cell begins."""

    text: str
    place: Place

    def __str__(self) -> str:
        """What was found, for a message."""
        return f"'{shown(self.text)}'" if self.text else "empty"

    def problem(self, what: str, why: str = "", fix: str = "") -> Problem:
        """A problem that stands at this cell."""
        return Problem(self.place, what, why, fix)


class Collected:
    """The problems of one table: the first :data:`MOST_PROBLEMS` as they are, then how many more there are."""

    def __init__(self) -> None:
        self._problems: list[Problem] = []
        self._beyond: Place | None = None
        self._more = 0

    def add(self, problem: Problem) -> None:
        """Take a problem, in the order of the file."""
        if len(self._problems) < MOST_PROBLEMS:
            self._problems.append(problem)
            return
        self._more += 1
        self._beyond = self._beyond or problem.place

    def __len__(self) -> int:
        return len(self._problems) + self._more

    def all(self) -> list[Problem]:
        """Every problem that is told."""
        if self._beyond is None:
            return list(self._problems)
        what = f"{self._more} more problem{'s' if self._more > 1 else ''} from here on"
        return [*self._problems, Problem(self._beyond, what, "", "mend the ones above first")]


@dataclass(frozen=True)
class Table:
    """A table whose header has been read.

    separator: one of :data:`SEPARATORS`. wanted: the needed columns, in the order in which rows give them.
    """

    separator: str
    wanted: tuple[str, ...]
    _file: str
    _positions: tuple[int, ...]
    _width: int
    _records: Iterator[tuple[_Raw, ...]]

    def rows(self, problems: Collected) -> Iterator[tuple[Cell, ...]]:
        """The cells of the wanted columns, row by row, once; rows that do not fit the header are problems."""
        of_header = f"the {self._width} cells of the header"
        for record in self._records:
            if not any(raw.text for raw in record):
                continue  # spreadsheet programs leave empty rows at the end
            torn = [raw for raw in record if raw.torn]
            for raw in torn:
                problems.add(
                    Problem(
                        raw.place(self._file),
                        "the quotation marks of this cell do not hold it whole",
                        'a cell that begins with " ends with ", and " inside it is written twice',
                        "mend the quotation marks, or take them away",
                    )
                )
            if torn:
                continue
            if len(record) != self._width:
                # a row is cut behind the first cell too many
                over = len(record) > self._width
                problems.add(
                    Problem(
                        record[-1].place(self._file),
                        f"this row has more than {of_header}" if over else f"this row has {len(record)} of {of_header}",
                        f"{SEPARATORS[self.separator]} separates the cells of this file",
                        "give each column its cell; put a text that holds the separator between quotation marks",
                    )
                )
                continue
            yield tuple(Cell(record[n].text, record[n].place(self._file)) for n in self._positions)


def open_table(
    path: Path, what: str, wanted: Sequence[str], refused: Mapping[str, tuple[str, str]] | None = None
) -> Table:
    """Read a table up to its header.

    Parameters
    ----------
    path : Path
        The file. [-]
    what : str
        What it is, for messages: ``stock file``. [-]
    wanted : sequence of str
        Columns that must be there, two or more; they are found by name, in any case and order. [-]
    refused : mapping of str to (str, str)
        Columns that would be misunderstood if they were left aside, with why and what to do. [-]

    Returns
    -------
    Table
        Its rows are read when they are asked for. [-]

    Raises
    ------
    InputError
        The file cannot be read, is no text, or its header lacks a column or names one twice.
    """
    file = shown_path(path)
    text = _decoded(read_bytes(path, what=what, limit=LARGEST_TABLE, form="CSV"), file, what)
    found = {separator: _header(text, separator) for separator in SEPARATORS}
    # the separator that makes the most of the wanted columns; when it makes none, the one that makes most cells
    separator = max(found, key=lambda s: (sum(name in _names(found[s]) for name in wanted), len(found[s])))
    header = found[separator]
    if not all(found.values()):
        # nothing but separators and blanks, whichever of them separates
        example = ",".join(wanted)
        raise InputError([Problem(Place(file, 1, 1), f"this {what} is empty", "", f"begin it with the row {example}")])
    if len(header) > MOST_COLUMNS:
        place = header[MOST_COLUMNS].place(file)
        raise InputError(
            [
                Problem(
                    place,
                    f"this {what} has more than {MOST_COLUMNS} columns",
                    "",
                    f"check that it is a {what}",
                )
            ]
        )
    problems = _header_problems(header, wanted, refused or {}, file, what, SEPARATORS[separator])
    if problems:
        raise InputError(problems)
    names = _names(header)
    records = _records(text, separator, len(header))
    for record in records:
        if any(raw.text for raw in record):
            break  # the header itself
    return Table(separator, tuple(wanted), file, tuple(names.index(name) for name in wanted), len(header), records)


@dataclass(frozen=True, slots=True)
class _Raw:
    """A cell as it was cut out."""

    text: str
    line: int
    column: int
    torn: bool = False

    def place(self, file: str) -> Place:
        return Place(file, self.line, self.column)


def _header_problems(
    header: Sequence[_Raw],
    wanted: Sequence[str],
    refused: Mapping[str, tuple[str, str]],
    file: str,
    what: str,
    separator: str,
) -> list[Problem]:
    names = _names(header)
    problems = []
    for name in wanted:
        places = [raw.place(file) for raw, found in zip(header, names, strict=True) if found == name]
        if not places:
            others = [n for n in names if n and n not in wanted]
            shown_names = ", ".join(f"'{shown(raw.text)}'" for raw in header[:SHOWN_COLUMNS])
            more = ", ..." if len(header) > SHOWN_COLUMNS else ""
            near = nearest(name, others)
            problems.append(
                Problem(
                    header[0].place(file),
                    f"this {what} has no column '{name}'",
                    f"its first row, with {separator} between, names {shown_names}{more}",
                    f"is it '{shown(near)}'? Call it {name}"
                    if near
                    else f"name the columns {', '.join(wanted)} in the first row",
                )
            )
        if len(places) > 1:
            problems.append(
                Problem(
                    places[1],
                    f"the column '{name}' stands twice",
                    f"it stands at line {places[0].line}, column {places[0].column} already",
                    "leave one of the two",
                )
            )
    for raw, name in zip(header, names, strict=True):
        if name in refused:
            why, fix = refused[name]
            problems.append(Problem(raw.place(file), f"the column '{name}' is not read", why, fix))
    return problems


def _names(header: Sequence[_Raw]) -> list[str]:
    return [raw.text.casefold() for raw in header]


def _header(text: str, separator: str) -> tuple[_Raw, ...]:
    """The first row that is not empty."""
    return next((record for record in _records(text, separator, MOST_COLUMNS) if any(raw.text for raw in record)), ())


@lru_cache(maxsize=len(SEPARATORS))
def _cell(separator: str) -> re.Pattern[str]:
    """A cell and what ends it: between quotation marks, or up to the next separator or line break.

    The groups that cannot give back (``++``) keep the time linear, whatever is written.
    """
    return re.compile(
        rf' *"((?:[^"]++|"")*+)" *({separator}|\r\n|\r|\n|\Z)|([^{separator}\r\n]*)({separator}|\r\n|\r|\n|\Z)'
    )


def _records(text: str, separator: str, width: int) -> Iterator[tuple[_Raw, ...]]:
    """Every row, with empty ones; of a row that is wider than ``width`` one cell more."""
    pattern = _cell(separator)
    position = start = 0
    line = 1
    record: list[_Raw] = []
    while True:
        match = pattern.match(text, position)
        assert match is not None  # the second form matches everywhere
        quoted, quoted_end, plain, plain_end = match.groups()
        column = position - start + 1
        if quoted is not None:
            raw = _Raw(quoted.replace('""', '"').strip(), line, column)
        else:
            raw = _Raw(plain.strip(), line, column, torn=plain.lstrip(" ").startswith('"'))
        if len(record) <= width:
            record.append(raw)
        elif raw.text and not record[-1].text:
            record[-1] = raw  # so that a row is empty only when all of it is
        position = match.end()
        for end in _BREAK.finditer(text, match.start(), position):
            line, start = line + 1, end.end()
        stop = plain_end if quoted is None else quoted_end
        if stop != separator:
            yield tuple(record)
            record = []
        if not stop:
            return


def _decoded(data: bytes, file: str, what: str) -> str:
    """The bytes as text without a byte order mark."""
    marked = _UTF16.get(data[:2])
    skip = 2 if marked else 3 if data.startswith(b"\xef\xbb\xbf") else 0
    encoding = marked or "utf-8"
    try:
        text = data[skip:].decode(encoding)
    except UnicodeDecodeError as error:
        bad = error.start + skip
        before = data[skip:bad].decode(encoding, "replace")
        name = "UTF-16" if marked else "UTF-8"
        why = "its first two bytes say UTF-16" if marked else "it is a binary file, or text in another encoding"
        raise InputError(
            [
                Problem(
                    _place_in(before, len(before), file),
                    f"this {what} is not {name} text: byte {bad + 1} is 0x{data[bad]:02X}",
                    why,
                    "save it as CSV in UTF-8",
                )
            ]
        ) from None
    control = _CONTROL.search(text)
    if control:
        raise InputError(
            [
                Problem(
                    _place_in(text, control.start(), file),
                    f"the control character U+{ord(control.group()):04X} stands in this {what}",
                    "it is a binary file, or text in another encoding, such as UTF-16 without its byte order mark",
                    "save it as CSV in UTF-8",
                )
            ]
        )
    return text


def _place_in(text: str, index: int, file: str) -> Place:
    """Line and column of a character."""
    starts = [end.end() for end in _BREAK.finditer(text, 0, index)]
    return Place(file, len(starts) + 1, index - (starts[-1] if starts else 0) + 1)
