"""What the HTML pages share: tables as data, text for people, and the template environment.

A page is one file that needs nothing else: no script, no picture from elsewhere, no network. All text that
comes from a spec or a catalogue is escaped by the templates; only this package's own drawings are markup.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from functools import cache
from typing import TYPE_CHECKING

from modgen.outputs.wording import (
    NOTHING,
    channel_words,
    percent,
    plural,
    prose,
    quantity,
    short_ranges,
    signed,
    verdict,
)

if TYPE_CHECKING:
    from jinja2 import Environment

    from modgen.rules.contract import Report

#: A table with no more rows than this is kept on one page when there is room.
ROWS_KEPT_TOGETHER = 3


@dataclass(frozen=True)
class Cell:
    """One cell of a table when it holds more than words.

    ``bands`` are colour names, drawn and written. ``sketch`` names a drawing of ``drawings.html.j2``, ``pins``
    is for those that draw a package. ``tone`` is ``stop``, ``warn``, ``go`` or empty. ``tick`` is a box to tick,
    ``blank`` a line to write on.
    """

    text: str = ""
    more: tuple[str, ...] = ()
    bands: tuple[str, ...] = ()
    sketch: str = ""
    pins: int = 0
    tone: str = ""
    tick: bool = False
    blank: bool = False


TICK = Cell(tick=True)

BLANK = Cell(blank=True)


@dataclass(frozen=True)
class Column:
    """A column heading; ``kind`` is ``text``, ``name`` (heads its row), ``number``, ``tick`` or ``blank``."""

    label: str
    kind: str = "text"


@dataclass(frozen=True)
class Table:
    """A table with its caption; every row has as many cells as there are columns.

    A ``narrow`` one stays a table on a small screen, where others become a list of its rows.
    """

    caption: str
    columns: tuple[Column, ...]
    rows: tuple[tuple[str | Cell, ...], ...]
    note: str = ""
    narrow: bool = False

    def __post_init__(self) -> None:
        for row in self.rows:
            if len(row) != len(self.columns):
                raise ValueError(f"table {self.caption!r}: {len(row)} cells in a row of {len(self.columns)} columns")

    @property
    def whole(self) -> bool:
        """Whether it is short enough to stay on one page."""
        return len(self.rows) <= ROWS_KEPT_TOGETHER


def columns(*labels: str) -> tuple[Column, ...]:
    """Columns from their labels: a leading ``#`` makes a column of numbers, ``!`` one that heads its row,
    ``_`` one to write in, and an empty label the column of boxes to tick.

    Parameters
    ----------
    labels
        Headings with their marks. [-]

    Returns
    -------
    tuple of Column
        In the same order.
    """
    kinds = {"#": "number", "!": "name", "_": "blank"}
    made = []
    for label in labels:
        if not label:
            made.append(Column("Done", "tick"))
        elif label[0] in kinds:
            made.append(Column(label[1:], kinds[label[0]]))
        else:
            made.append(Column(label))
    return tuple(made)


def collapsed(
    rows: Iterable[tuple[str, tuple[str, ...], tuple[str | Cell, ...]]],
) -> list[tuple[str, str, tuple[str | Cell, ...]]]:
    """Rows that show the same become one, in the order of the first of each.

    Parameters
    ----------
    rows
        What a row is about (a channel's number, or a word), its references, and the cells it shows. [-]

    Returns
    -------
    list of tuple
        Channels in words (what is no number has to be the same), references in ranges, the cells.

    Examples
    --------
    >>> collapsed([("1", ("R1",), ("a",)), ("2", ("R2",), ("b",)), ("3", ("R3",), ("a",))])
    [('channels 1, 3', 'R1, R3', ('a',)), ('channel 2', 'R2', ('b',))]
    """
    alike: dict[tuple[tuple[str | Cell, ...], str], tuple[list[str], list[str]]] = {}
    for about, refs, shown in rows:
        numbers, parts = alike.setdefault((shown, "" if about.isdecimal() else about), ([], []))
        numbers.append(about)
        parts.extend(refs)
    return [
        (
            channel_words(numbers) if numbers[0].isdecimal() else numbers[0],
            short_ranges(parts) or NOTHING,
            shown,
        )
        for (shown, _), (numbers, parts) in alike.items()
    ]


@cache
def environment() -> Environment:
    """The template environment: everything escaped, nothing undefined passed over in silence.

    Returns
    -------
    jinja2.Environment
        With this module's filters.
    """
    from jinja2 import Environment, PackageLoader, StrictUndefined

    env = Environment(
        loader=PackageLoader("modgen.outputs", "templates"),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
    )
    env.filters.update(q=quantity, signed=signed, percent=percent, refs=short_ranges, plural=plural, prose=prose)
    return env


def render(template: str, *, values: dict[str, object], report: Report) -> bytes:
    """A page as bytes, the same for the same values.

    Parameters
    ----------
    template
        File name below ``templates``. [-]
    values
        What the template shows. [-]
    report
        For the verdict that stands on every page. [-]

    Returns
    -------
    bytes
        UTF-8, lines ended by one line feed.
    """
    from markupsafe import Markup

    env = environment()
    assert env.loader is not None
    style = env.loader.get_source(env, "style.css")[0]
    page = env.get_template(template).render(**values, verdict=verdict(report), style=Markup(style))
    lines = (line.rstrip() for line in page.split("\n"))
    return ("\n".join(line for line in lines if line) + "\n").encode("utf-8", "replace")
