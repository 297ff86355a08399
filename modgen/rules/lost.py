"""Fields that a netlist lost on its way: told by value and reference class, or by the place in the circuit.

A part that does not say which part it is may be told by its value; the channel that a part belongs to, which only
gives the channels their numbers, by the part of the spec that stands in the same place.
"""

from __future__ import annotations

from collections import defaultdict
from dataclasses import replace

from modgen.analysis.board import Board
from modgen.catalogue import Catalogue
from modgen.netlist.compare import compare
from modgen.netlist.model import Netlist, Part
from modgen.rules.structure import elements_of, without_function
from modgen.units import QuantityError, read_value

#: the field that marks a part whose ``part`` was told by its value
TOLD = "part-told-by"


def restored(netlist: Netlist, catalogue: Catalogue, intended: Netlist | None = None) -> Netlist:
    """The netlist with the field ``part`` where it was lost and can only have been one.

    Parameters
    ----------
    netlist
        The circuit.
    catalogue
        Whose order codes are looked at; a value such as ``TL072CP`` names one part.
    intended
        The circuit as it shall be; a value that only one part of that reference class has there names that part.

    Returns
    -------
    Netlist
        The same netlist when nothing was lost. A part that was told has the field ``TOLD``; with ``intended`` the
        field ``channel`` is given back too.
    """
    if all(part.field("part") for part in netlist.parts):
        return netlist if intended is None else _numbered(netlist, catalogue, intended)
    meant: dict[tuple[str, str], set[str]] = defaultdict(set)
    for part in intended.parts if intended is not None else ():
        if part.field("part"):
            meant[part.letters, _value(part)].add(part.field("part"))
    coded: dict[str, set[str]] = defaultdict(set)
    for record in catalogue.parts.values():
        for code in (record.key, record.order_code, *record.alternates):
            if code:
                coded[code].add(record.key)
    parts = []
    for part in netlist.parts:
        if part.field("part") or not part.value:
            parts.append(part)
            continue
        for keys, how in ((meant[part.letters, _value(part)], "spec"), (coded.get(part.value, set()), "order code")):
            if len(keys) == 1:
                fields = sorted((*part.fields, ("part", next(iter(keys))), (TOLD, how)))
                part = replace(part, fields=tuple(fields))
                break
        parts.append(part)
    told = replace(netlist, parts=tuple(parts))
    return told if intended is None else _numbered(told, catalogue, intended)


def _numbered(netlist: Netlist, catalogue: Catalogue, intended: Netlist) -> Netlist:
    """The netlist with the field ``channel`` where it was lost."""
    before = Board.of(intended, catalogue)
    channel = {part.ref: part.field("channel") for part in intended.parts if part.field("channel")}
    if sum(bool(part.field("channel")) for part in netlist.parts) >= len(channel):
        return netlist
    board = Board.of(netlist, catalogue)
    same = compare(elements_of(before), elements_of(board, without_function(board))).parts
    number = {here: channel[there] for there, here in same if there in channel}
    parts = [
        part
        if part.field("channel") or part.ref not in number
        else replace(part, fields=tuple(sorted((*part.fields, ("channel", number[part.ref])))))
        for part in netlist.parts
    ]
    return replace(netlist, parts=tuple(parts))


def _value(part: Part) -> str:
    try:
        return f"{read_value(part.value):.6g}"
    except QuantityError:
        return part.value
