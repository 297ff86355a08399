"""Parts that came back without saying which part they are: told by value and reference class where that is enough."""

from __future__ import annotations

from collections import defaultdict
from dataclasses import replace

from modgen.catalogue import Catalogue
from modgen.netlist.model import Netlist, Part
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
        The same netlist when nothing was lost. A part that was told has the field ``TOLD``.
    """
    if all(part.field("part") for part in netlist.parts):
        return netlist
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
                fields = (*part.fields, ("part", *keys), (TOLD, how))
                part = replace(part, fields=tuple(sorted(fields)))
                break
        parts.append(part)
    return replace(netlist, parts=tuple(parts))


def _value(part: Part) -> str:
    try:
        return f"{read_value(part.value):.6g}"
    except QuantityError:
        return part.value
