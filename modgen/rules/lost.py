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
from modgen.netlist.elements import MECHANICAL
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
        The circuit as it shall be. A value that only one part of that reference class has there names that part;
        where several have it, the part in the same place does.

    Returns
    -------
    Netlist
        The same netlist when nothing was lost. A part that was told has the field ``TOLD``; with ``intended`` the
        field ``channel`` is given back too.
    """
    told = netlist
    if not all(part.field("part") for part in netlist.parts):
        told = _by_value(netlist, catalogue, intended)
    if intended is None:
        return told
    lost = any(not part.field("part") and part.letters not in MECHANICAL for part in told.parts)
    numbered = [sum(bool(part.field("channel")) for part in known.parts) for known in (told, intended)]
    return _by_place(told, catalogue, intended) if lost or numbered[0] < numbered[1] else told


def _by_value(netlist: Netlist, catalogue: Catalogue, intended: Netlist | None) -> Netlist:
    """Parts that only one part of the spec, or only one order code, has the value of."""
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
        keys = meant[part.letters, _value(part)] or coded[part.value]
        if part.value and not part.field("part") and len(keys) == 1:
            part = _told(part, next(iter(keys)))
        parts.append(part)
    return replace(netlist, parts=tuple(parts))


def _by_place(netlist: Netlist, catalogue: Catalogue, intended: Netlist) -> Netlist:
    """Parts whose place in the circuit says which part of the spec they are, when value and class agree."""
    board = Board.of(netlist, catalogue)
    same = compare(elements_of(Board.of(intended, catalogue)), elements_of(board, without_function(board))).parts
    partner = {here: intended.by_ref[there] for there, here in same}
    parts = []
    for part in netlist.parts:
        meant = partner.get(part.ref)
        if meant is not None:
            alike = (part.letters, _value(part)) == (meant.letters, _value(meant))
            if alike and not part.field("part") and meant.field("part"):
                part = _told(part, meant.field("part"))
            if not part.field("channel") and meant.field("channel"):
                part = _with(part, {"channel": meant.field("channel")})
        parts.append(part)
    return replace(netlist, parts=tuple(parts))


def _told(part: Part, key: str) -> Part:
    return _with(part, {"part": key, TOLD: "value"})


def _with(part: Part, fields: dict[str, str]) -> Part:
    return replace(part, fields=tuple(sorted({**dict(part.fields), **fields}.items())))


def _value(part: Part) -> str:
    try:
        return f"{read_value(part.value):.6g}"
    except QuantityError:
        return part.value
