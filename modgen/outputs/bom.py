"""The parts list: what to buy for one board, counted on the netlist, and what it costs for many.

The workbook computes the same figures with formulas; :func:`cost` is what it is held against.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from itertools import count, takewhile
from typing import Protocol

from modgen.catalogue.records import (
    Amplifier,
    Capacitor,
    Control,
    Diode,
    Header,
    Jack,
    PriceBreak,
    Resistor,
    Switch,
)
from modgen.catalogue.records import Part as Record
from modgen.netlist.model import Netlist, Part
from modgen.outputs.partwords import order_words, package_words, value_words
from modgen.units import QuantityError, format_quantity, read_value

#: Shares of a whole part below this are rounding of the binary numbers, not parts to buy [-]
WHOLE = 6

#: The currency that prices are shown in; a catalogue's and a price file's prices carry none
CURRENCY = "EUR"

#: References in more pieces than this are shown as steps where people read them
MOST_PIECES = 8
#: Fewest references that make a range, and that make steps
LEAST_RANGE, LEAST_STEPS = 3, 4

_UNITS = {"resistor": "resistance", "control": "resistance", "capacitor": "capacitance"}


class Records(Protocol):
    """Anything that finds a catalogue record by its key."""

    def get(self, key: str) -> Record | None:
        """The record, or None."""


@dataclass(frozen=True)
class BomLine:
    """One orderable part, everything a line needs; texts are ready for people.

    ``order_code`` is empty where any maker's part to the rating will do; ``alternates`` then says so. ``invented``
    says that the prices are made up (catalogue evidence), not a seller's.
    """

    key: str
    letters: str
    refs: tuple[str, ...]
    value: str
    amount: float
    kind: str
    description: str
    rating: str
    tolerance: str
    package: str
    mount: str
    order_code: str
    alternates: tuple[str, ...]
    pack: int
    prices: tuple[PriceBreak, ...]
    invented: bool
    known: bool

    @property
    def quantity(self) -> int:
        """Parts on one board."""
        return len(self.refs)

    @property
    def references(self) -> str:
        """References in short ranges: ``R1-R4, R7``."""
        return short_ranges(self.refs)

    def unit_price(self, quantity: int) -> float | None:
        """Price of one when this many are bought; the first price below the first break, None without prices."""
        if not self.prices:
            return None
        reached = [b.price for b in self.prices if b.quantity <= quantity]
        return reached[-1] if reached else self.prices[0].price


@dataclass(frozen=True)
class CostLine:
    """One line for a number of boards."""

    line: BomLine
    needed: int
    spares: int
    stock: int
    to_order: int
    unit_price: float | None
    total: float | None


@dataclass(frozen=True)
class Cost:
    """A whole order. Lines without a price are counted, not priced: ``total`` does not hold them."""

    boards: int
    lines: tuple[CostLine, ...]

    @property
    def total(self) -> float:
        """Price of all lines that have one."""
        return math.fsum(c.total for c in self.lines if c.total is not None)

    @property
    def per_board(self) -> float:
        """The same for one board."""
        return self.total / self.boards

    @property
    def without_price(self) -> int:
        """How many lines have no price."""
        return sum(c.total is None for c in self.lines)


def bom_lines(netlist: Netlist, records: Records) -> tuple[BomLine, ...]:
    """Group a netlist's parts by orderable part.

    Parameters
    ----------
    netlist : Netlist
        What is counted; every part is in exactly one line.
    records : Records
        Where the ``part`` fields are looked up. A part that is not there gets a line from what the
        netlist itself says of it.

    Returns
    -------
    tuple of BomLine
        By reference class, then value, then part.
    """
    groups: dict[tuple[str, str, str, str], list[Part]] = {}
    for part in netlist.parts:
        key = part.field("part")
        known = bool(key) and records.get(key) is not None
        # two parts that nobody knows are the same only when all that the netlist says is
        group = (part.letters, key, "", "") if known else (part.letters, key, part.value, part.land_pattern)
        groups.setdefault(group, []).append(part)
    lines = []
    for (letters, key, _, _), parts in groups.items():
        record = records.get(key) if key else None
        refs = tuple(p.ref for p in sorted(parts, key=lambda p: (p.number, p.ref)))
        lines.append(_line(letters, key, refs, parts[0], record))
    return tuple(sorted(lines, key=lambda line: (line.letters, line.amount, line.key, line.refs)))


def cost(lines: Iterable[BomLine], boards: int, spares: float, stock: Mapping[str, int] | None = None) -> Cost:
    """What a number of boards needs and costs.

    Parameters
    ----------
    lines : iterable of BomLine
        The parts list of one board.
    boards : int
        How many are made.
    spares : float
        Share of what is needed that is bought on top, rounded up to whole parts. [-]
    stock : mapping of str to int, optional
        Parts on hand by catalogue key.

    Raises
    ------
    ValueError
        When ``boards`` is less than 1 or ``spares`` is negative.
    """
    if boards < 1 or spares < 0:
        raise ValueError(f"boards must be 1 or more and spares not negative, not {boards} and {spares}")
    out = []
    for line in lines:
        needed = boards * line.quantity
        extra = math.ceil(round(needed * spares, WHOLE))
        held = (stock or {}).get(line.key, 0)
        to_order = max(0, needed + extra - held)
        price = line.unit_price(to_order)
        total = None if price is None else price * to_order
        out.append(CostLine(line, needed, extra, held, to_order, price, total))
    return Cost(boards, tuple(out))


def short_ranges(refs: Iterable[str]) -> str:
    """References of one class in short ranges; two neighbours stay apart, three become a range.

    Parameters
    ----------
    refs : iterable of str
        ``("R1", "R2", "R3", "R7")`` in any order, of one or several classes.

    Returns
    -------
    str
        ``R1-R3, R7``.
    """
    parts = [Part(ref, "", "") for ref in refs]
    parts.sort(key=lambda p: (p.letters, p.number, p.ref))
    runs: list[list[Part]] = []
    for part in parts:
        last = runs[-1][-1] if runs else None
        # only plain references join: R01 or a bare R is not the neighbour of R2
        plain = part.ref == f"{part.letters}{part.number}" and part.number > 0
        if last is not None and plain and last.ref == f"{part.letters}{part.number - 1}":
            runs[-1].append(part)
        else:
            runs.append([part])
    texts = []
    for run in runs:
        if len(run) >= LEAST_RANGE:
            texts.append(f"{run[0].ref}-{run[-1].ref}")
        else:
            texts.extend(p.ref for p in run)
    return ", ".join(texts)


def brief_references(refs: Iterable[str]) -> str:
    """References as :func:`short_ranges`, those at even steps together once the text gets long.

    On a board of many equal channels the parts of one kind stand at even steps; one by one they would fill a cell
    with lines that nobody reads.

    Parameters
    ----------
    refs : iterable of str
        As for :func:`short_ranges`.

    Returns
    -------
    str
        ``R5 to R383 (every 6th)``; the plain text while it has no more than ``MOST_PIECES`` pieces.

    Examples
    --------
    >>> brief_references(f"R{n}" for n in range(5, 384, 6))
    'R5 to R383 (every 6th)'
    """
    plain = short_ranges(refs)
    pieces = plain.split(", ") if plain else []
    if len(pieces) <= MOST_PIECES:
        return plain
    out: list[str] = []
    numbers: dict[str, list[int]] = {}
    for piece in pieces:
        part = Part(piece, "", "")
        if part.number and piece == f"{part.letters}{part.number}":
            numbers.setdefault(part.letters, []).append(part.number)
        else:
            out.append(piece)  # a range already, or a reference of somebody else's making
    for letters, left in numbers.items():
        out += _in_steps(letters, left)
    firsts = {text: Part(text.partition(" ")[0].partition("-")[0], "", "") for text in out}
    return ", ".join(sorted(out, key=lambda text: (firsts[text].letters, firsts[text].number, text)))


def _in_steps(letters: str, numbers: list[int]) -> list[str]:
    """Numbers in rising order as few progressions: always the longest that begins with the first one left."""
    left, texts = sorted(numbers), list[str]()
    while left:
        first, there, best = left[0], set(left), [left[0]]
        for second in left[1:]:
            step = second - first
            if first + step * len(best) > left[-1]:
                break  # wider steps reach the end in fewer
            chain = list(takewhile(there.__contains__, count(first, step)))
            best = max(best, chain, key=len)
        if len(best) >= LEAST_STEPS:
            texts.append(f"{letters}{best[0]} to {letters}{best[-1]} (every {_ordinal(best[1] - best[0])})")
        else:
            best = [first]
            texts.append(f"{letters}{first}")
        left = [n for n in left if n not in set(best)]
    return texts


def _ordinal(number: int) -> str:
    ending = "th" if number % 100 in (11, 12, 13) else {1: "st", 2: "nd", 3: "rd"}.get(number % 10, "th")
    return f"{number}{ending}"


def _line(letters: str, key: str, refs: tuple[str, ...], part: Part, record: Record | None) -> BomLine:
    kind = record.kind if record else ""
    prices = tuple(sorted(record.prices, key=lambda b: b.quantity)) if record else ()
    evidence = dict(record.evidence) if record else {}
    code, alternates = order_words(record) if record else ("", ())
    invented = any(e.kind == "invented" for name, e in evidence.items() if name.startswith("price"))
    return BomLine(
        key=key,
        letters=letters,
        refs=refs,
        value=_value(part.value, kind, record),
        amount=_amount(part.value),
        kind=kind,
        description=record.description if record else f"not in the catalogue{f': {key}' if key else ''}",
        rating=_rating(record) if record else _stated_rating(part),
        tolerance=_tolerance(record) if record else part.field("tolerance"),
        package=package_words(record) if record else part.land_pattern,
        mount=record.mount if record else "",
        order_code=code,
        alternates=alternates,
        pack=record.pack if record else 1,
        prices=prices,
        invented=invented and bool(prices),
        known=record is not None,
    )


def _amount(value: str) -> float:
    try:
        return read_value(value)
    except QuantityError:
        return 0.0


def _value(value: str, kind: str, record: Record | None) -> str:
    """The value that the netlist has, with its unit for parts that have one; never a catalogue key."""
    unit = _UNITS.get(kind)
    if unit is None:
        return value_words(record, value) if record else value
    try:
        return format_quantity(read_value(value), unit, digits=6)
    except QuantityError:
        return value


def _stated_rating(part: Part) -> str:
    return ", ".join(text for name in ("power", "voltage") if (text := part.field(name)))


def _tolerance(record: Record) -> str:
    if isinstance(record, Resistor | Capacitor | Control):
        return f"{100 * record.tolerance:g} %"
    return ""


def _rating(record: Record) -> str:
    """What the part can stand, in a few words."""
    if isinstance(record, Resistor | Control):
        return f"{format_quantity(record.power, 'power')}, {format_quantity(record.voltage, 'voltage')}"
    if isinstance(record, Capacitor):
        return format_quantity(record.voltage, "voltage")
    if isinstance(record, Diode):
        reverse, forward = record.reverse_voltage, record.forward_current
        return f"{format_quantity(reverse, 'voltage')}, {format_quantity(forward, 'current')}"
    if isinstance(record, Amplifier):
        return f"supply {format_quantity(record.supply_absolute, 'voltage')} in all at most"
    if isinstance(record, Jack | Switch | Header):
        return f"{format_quantity(record.voltage, 'voltage')}, {format_quantity(record.current, 'current')}"
    return ""
