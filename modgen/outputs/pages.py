"""What the HTML pages share: tables as data, text for people, and the template environment.

A page is one file that needs nothing else: no script, no picture from elsewhere, no network. All text that
comes from a spec or a catalogue is escaped by the templates; only this package's own drawings are markup.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from functools import cache
from typing import TYPE_CHECKING

from modgen.units import format_quantity

if TYPE_CHECKING:
    from jinja2 import Environment

    from modgen.netlist.model import Netlist
    from modgen.rules.contract import Report

#: A table with no more rows than this is kept on one page when there is room.
ROWS_KEPT_TOGETHER = 14

#: What stands in a table where there is nothing to say.
NOTHING = "–"

_NO_BREAK = "\u00a0"


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
    """A table with its caption; every row has as many cells as there are columns."""

    caption: str
    columns: tuple[Column, ...]
    rows: tuple[tuple[str | Cell, ...], ...]
    note: str = ""

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


def quantity(value: float, kind: str, digits: int = 3) -> str:
    """A quantity as it stands on a page: a true minus sign, and no line break before the unit.

    Parameters
    ----------
    value
        In base SI units; a ratio as a fraction, an interval of pitch in volts. [SI]
    kind
        One of :data:`modgen.units.UNITS`. [-]
    digits
        Most significant digits. [-]

    Returns
    -------
    str
        ``−12 V``, ``4.7 kΩ``.
    """
    return format_quantity(value, kind, digits).replace("-", "\u2212").replace(" ", _NO_BREAK)


def signed(value: float, kind: str, digits: int = 3) -> str:
    """The same with a plus sign when positive.

    Parameters
    ----------
    value
        In base SI units. [SI]
    kind
        One of :data:`modgen.units.UNITS`. [-]
    digits
        Most significant digits. [-]

    Returns
    -------
    str
        ``+12 V``, ``0 V``, ``−12 V``.
    """
    return ("+" if value > 0 else "") + quantity(value, kind, digits)


def percent(share: float, digits: int = 3) -> str:
    """A share of one as per cent.

    Parameters
    ----------
    share
        1.0 is the whole. [-]
    digits
        Most significant digits. [-]

    Returns
    -------
    str
        ``63.2 %``.
    """
    return quantity(share, "ratio", digits)


def natural(text: str) -> tuple[tuple[int, int, str], ...]:
    """A sort key that puts R2 before R10.

    Parameters
    ----------
    text
        A reference or a name. [-]

    Returns
    -------
    tuple
        Comparable with that of any other text.
    """
    return tuple(
        (1, int(piece), "") if piece.isdecimal() else (0, 0, piece) for piece in re.findall(r"\d+|\D+", text)
    )


def short_ranges(refs: Iterable[str]) -> str:
    """References in as few words as possible, three or more in a row as a range.

    Parameters
    ----------
    refs
        References, in any order. [-]

    Returns
    -------
    str
        ``R1–R4, R7``.

    Examples
    --------
    >>> short_ranges(["R7", "R2", "R1", "R3"])
    'R1–R3, R7'
    """
    runs: list[list[str]] = []
    for ref in sorted(set(refs), key=natural):
        head, number = _split(ref)
        if runs and number is not None:
            last_head, last = _split(runs[-1][-1])
            if last_head == head and last is not None and number == last + 1:
                runs[-1].append(ref)
                continue
        runs.append([ref])
    pieces: list[str] = []
    for run in runs:
        pieces.extend([f"{run[0]}–{run[-1]}"] if len(run) > 2 else run)
    return ", ".join(pieces)


def _split(ref: str) -> tuple[str, int | None]:
    match = re.fullmatch(r"(.*?)([1-9]\d*)", ref)
    return (match[1], int(match[2])) if match else (ref, None)


def by_role(netlist: Netlist) -> dict[str, tuple[str, ...]]:
    """References by the role their parts say they have.

    Parameters
    ----------
    netlist
        The module. [-]

    Returns
    -------
    dict
        Role to references in the order of the netlist; parts without a role under the empty text.
    """
    roles: dict[str, list[str]] = {}
    for part in netlist.parts:
        roles.setdefault(part.field("role"), []).append(part.ref)
    return {role: tuple(refs) for role, refs in roles.items()}


@dataclass(frozen=True)
class Verdict:
    """Whether the module may be ordered, and why."""

    cleared: bool
    headline: str
    reason: str
    #: the errors that stand, one line each
    standing: tuple[str, ...]


def plural(count: int, word: str) -> str:
    """A count with its word.

    Parameters
    ----------
    count
        How many. [-]
    word
        In the singular. [-]

    Returns
    -------
    str
        ``no errors``, ``1 error``, ``2 errors``.
    """
    return f"{count or 'no'} {word}" + ("" if count == 1 else "s")


def verdict(report: Report) -> Verdict:
    """The verdict on a module in words.

    Parameters
    ----------
    report
        What the rules found. [-]

    Returns
    -------
    Verdict
        With the count of every level and of what was looked at.
    """
    counts = {
        level: sum(1 for f in report.findings if f.level == level and not f.waived)
        for level in ("error", "warning", "note")
    }
    waived = sum(1 for f in report.findings if f.waived)
    instances = sum(c.instances for c in report.checked if c.judged)
    judged = sum(1 for c in report.checked if c.judged)
    skipped = len(report.checked) - judged
    reason = ", ".join(plural(counts[level], level) for level in counts)
    reason += f" and {plural(waived, 'waived finding')}; {plural(judged, 'rule')} looked at {plural(instances, 'instance')}"
    if skipped:
        reason += f", {plural(skipped, 'rule')} could not be judged"
    standing = tuple(
        f"{short_ranges(f.parts)}: {f.message}" if f.parts else f.message
        for f in report.findings
        if f.level == "error" and not f.waived
    )
    headline = "Cleared for ordering" if report.cleared else "Not cleared for ordering"
    return Verdict(report.cleared, headline, reason[0].upper() + reason[1:] + ".", standing)


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
    env.filters.update(q=quantity, signed=signed, percent=percent, refs=short_ranges, plural=plural)
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
    return ("\n".join(line for line in lines if line) + "\n").encode()


def chosen(items: Sequence[str], last: str = "and") -> str:
    """A list in words.

    Parameters
    ----------
    items
        What is listed. [-]
    last
        The word before the last item. [-]

    Returns
    -------
    str
        ``a, b and c``.
    """
    if len(items) < 2:
        return "".join(items)
    return f"{', '.join(items[:-1])} {last} {items[-1]}"
