"""What is on hand and what parts cost, from tables of one's own.

A stock file has the columns ``part`` and ``quantity``; a price file ``part``, ``quantity`` (from which the price
holds) and ``price`` (of one part), one row a break. Other columns are left aside. Nothing is guessed and no row
dropped: whatever cannot be used is a problem at its line and column, and all problems come at once.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Collection, Mapping
from pathlib import Path
from types import MappingProxyType

from modgen.catalogue.delimited import SEPARATORS, Cell, Collected, open_table
from modgen.catalogue.records import PriceBreak
from modgen.documents import nearest
from modgen.problems import InputError, Place, Problem

#: greatest number of parts on hand or of a price break, as the workbook's cells have it
MOST_PARTS = 10_000_000
#: greatest price of one part, as the workbook's cells have it [currency]
MOST_PRICE = 1_000_000.0
#: unknown keys for which the nearest known one is looked up; the search is slow beside the reading
NEAREST_SOUGHT = 100

_QUANTITY = re.compile(r"[0-9]{1,8}")
_PRICE = re.compile(r"[0-9]{1,8}(?:([.,])[0-9]{1,9})?")
# left aside, these would change what the prices mean
_REFUSED = {
    "pack": (
        "pack sizes come from the catalogue",
        "remove the column; a catalogue file of your own can state pack",
    ),
    "currency": (
        "prices are numbers without a currency",
        "bring all prices into one currency and remove the column",
    ),
}


def read_stock(path: Path, known: Collection[str] | None = None) -> Mapping[str, int]:
    """Parts on hand.

    Parameters
    ----------
    path : Path
        A table with the columns ``part`` (catalogue key) and ``quantity`` (whole parts, 0 or more). [-]
    known : collection of str, optional
        The catalogue's keys; without them no key is unknown. [-]

    Returns
    -------
    mapping of str to int
        Quantity by key, sorted by key. [-]

    Raises
    ------
    InputError
        With every problem of the file.
    """
    problems = Collected()
    table = open_table(path, "stock file", ("part", "quantity"))
    part_of = _parts(known, problems)
    stock: dict[str, int] = {}
    first: dict[str, Place] = {}
    for part, quantity in table.rows(problems):
        key, held = part_of(part), _quantity(quantity, 0, problems)
        if not key:
            continue
        if key in first:
            problems.add(_twice(part, f"the part '{key}'", first[key], "write one row with the sum of both"))
        first.setdefault(key, part.place)
        stock[key] = held
    if problems:
        raise InputError(problems.all())
    return MappingProxyType({key: stock[key] for key in sorted(stock)})


def read_prices(path: Path, known: Collection[str] | None = None) -> Mapping[str, tuple[PriceBreak, ...]]:
    """Prices of parts.

    Parameters
    ----------
    path : Path
        A table with the columns ``part`` (catalogue key), ``quantity`` (from which the price holds, 1 or more) and
        ``price`` (of one part, above 0). A decimal comma is understood where a comma does not separate the cells. [-]
    known : collection of str, optional
        The catalogue's keys; without them no key is unknown. [-]

    Returns
    -------
    mapping of str to tuple of PriceBreak
        Breaks by rising quantity, by key, sorted by key. [-]

    Raises
    ------
    InputError
        With every problem of the file.
    """
    problems = Collected()
    table = open_table(path, "price file", ("part", "quantity", "price"), _REFUSED)
    part_of, price_of = _parts(known, problems), _prices(table.separator, problems)
    breaks: dict[str, dict[int, float]] = {}
    first: dict[tuple[str, int], Place] = {}
    for part, quantity, price in table.rows(problems):
        key, least, cost = part_of(part), _quantity(quantity, 1, problems), price_of(price)
        if not key or not least:
            continue
        if (key, least) in first:
            what = f"the price of '{key}' from {least} on"
            problems.add(_twice(part, what, first[key, least], "leave one of the two rows"))
        first.setdefault((key, least), part.place)
        breaks.setdefault(key, {})[least] = cost
    if problems:
        raise InputError(problems.all())
    return MappingProxyType(
        {key: tuple(PriceBreak(n, breaks[key][n]) for n in sorted(breaks[key])) for key in sorted(breaks)}
    )


def _parts(known: Collection[str] | None, problems: Collected) -> Callable[[Cell], str]:
    """A reader of keys, which remembers the unknown ones."""
    fixes: dict[str, str] = {}

    def read(cell: Cell) -> str:
        if not cell.text:
            problems.add(cell.problem("the part is empty", "a row is about one part", "write its catalogue key"))
            return ""
        if known is None or cell.text in known:
            return cell.text
        if cell.text not in fixes:
            near = nearest(cell.text, known) if len(fixes) < NEAREST_SOUGHT else ""
            fixes[cell.text] = f"did you mean '{near}'?" if near else "`modgen catalogue` lists the keys"
        why = "rows are matched by the catalogue's keys; one of your own goes in a catalogue file under build.catalogue"
        problems.add(cell.problem(f"unknown part {cell}", why, fixes[cell.text]))
        # still a key: a second row for it is a problem too
        return cell.text

    return read


def _quantity(cell: Cell, least: int, problems: Collected) -> int:
    """A whole number of parts; 0 and a problem when there is none."""
    number = int(cell.text) if _QUANTITY.fullmatch(cell.text) else -1
    if least <= number <= MOST_PARTS:
        return number
    why = f"it is a whole number from {least} to {MOST_PARTS}, in digits alone"
    problems.add(cell.problem(f"the quantity is {cell}", why, "write it like 250"))
    return 0


def _prices(separator: str, problems: Collected) -> Callable[[Cell], float]:
    """A reader of prices, which holds the file to one decimal mark."""
    marks: dict[str, Place] = {}

    def read(cell: Cell) -> float:
        match = _PRICE.fullmatch(cell.text)
        if match is None:
            why = "it is a number without currency, sign or thousands"
            problems.add(cell.problem(f"the price is {cell}", why, "write the price of one part, like 0.40"))
            return 0.0
        mark = match[1]
        if mark == "," == separator:
            why = f"{SEPARATORS[separator]} separates the cells of this file, so it is no decimal comma"
            fix = f"write {cell.text.replace(',', '.')}, or separate the cells with semicolons"
            problems.add(cell.problem(f"the price is {cell}", why, fix))
            return 0.0
        if mark and mark not in marks and marks:
            other = next(iter(marks.values()))
            why = f"the price at line {other.line} has the other one, so one of the two may set off thousands"
            fix = "write all prices of a file with the same decimal mark"
            named = "comma" if mark == "," else "point"
            problems.add(cell.problem(f"the price {cell} has a decimal {named}", why, fix))
            return 0.0
        if mark:
            marks.setdefault(mark, cell.place)
        price = float(cell.text.replace(",", "."))
        if not 0.0 < price <= MOST_PRICE:
            why = f"a price is above 0 and at most {MOST_PRICE:.0f}; a part at 0 would count as free"
            problems.add(cell.problem(f"the price is {cell}", why, "leave the row out when there is no price"))
        return price

    return read


def _twice(cell: Cell, what: str, first: Place, fix: str) -> Problem:
    return cell.problem(f"{what} stands twice", f"it stands at line {first.line} already", fix)
