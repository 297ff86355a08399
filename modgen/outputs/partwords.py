"""A part as somebody who orders or solders it names it: its package, its value, what to ask a seller for.

A catalogue's keys are names for programs; nothing here shows one.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from types import MappingProxyType

from modgen.catalogue.records import Amplifier, Capacitor, Diode, Header, Jack, Switch
from modgen.catalogue.records import Part as Record
from modgen.units import format_quantity

#: What stands beside an empty order code: the part is sold by its rating.
ANY_MAKER = "any maker to this rating"

#: How far a body may be from a size to be called by its name, as a share of it [-].
SIZE_TOLERANCE = 0.1

# trade names of sizes: greatest length and width of the body [mm]
_CHIPS = {
    "0402": (1.0, 0.5),
    "0603": (1.6, 0.8),
    "0805": (2.0, 1.25),
    "1206": (3.2, 1.6),
    "1210": (3.2, 2.5),
    "1812": (4.5, 3.2),
    "2010": (5.0, 2.5),
    "2220": (5.7, 5.0),
    "2512": (6.3, 3.2),
}
_AXIAL = {"0204": (3.7, 1.8), "0207": (6.3, 2.5), "0414": (11.9, 4.0)}
_AXIAL_DIODES = {"DO-35": (4.2, 2.0), "DO-41": (5.2, 2.7)}
_MOLDED = {"SMA": (5.2, 2.6), "SMB": (5.4, 3.6), "SMC": (7.9, 5.9)}
_SMALL_DIODES = {"SOD-123": (3.7, 1.6), "SOD-323": (2.5, 1.25)}


def _millimetres(*lengths: float) -> str:
    return " x ".join(f"{round(length * 1e3, 2):g}" for length in lengths) + " mm"


def _named(sizes: Mapping[str, tuple[float, float]], other: str) -> Callable[[Record], str]:
    """The size's trade name where the body is near enough to one, else its kind and its size."""

    def words(record: Record) -> str:
        body = record.body

        def off(size: tuple[float, float]) -> float:
            found = (body.length * 1e3, body.width * 1e3)
            return max(abs(f / s - 1) for f, s in zip(found, size, strict=True))

        name = min(sizes, key=lambda name: (off(sizes[name]), name))
        if off(sizes[name]) <= SIZE_TOLERANCE:
            return name
        return f"{other} {_millimetres(body.length, body.width)}"

    return words


#: Package word of the catalogue to the words for a part in it
_PACKAGES: Mapping[str, Callable[[Record], str]] = MappingProxyType(
    {
        "axial": _named(_AXIAL, "axial"),
        "axial-diode": _named(_AXIAL_DIODES, "axial"),
        "chip-resistor": _named(_CHIPS, "chip"),
        "chip-capacitor": _named(_CHIPS, "chip"),
        "molded-diode": _named(_MOLDED, "chip"),
        "sod": _named(_SMALL_DIODES, "chip"),
        "dip": lambda part: f"DIP-{len(part.pins)}",
        "soic": lambda part: f"SOIC-{len(part.pins)}",
        "box": lambda part: f"box {_millimetres(part.body.pitch)}",
        "can": lambda part: f"can {_millimetres(part.body.length, part.body.height)}",
        "smd-can": lambda part: f"chip can {_millimetres(part.body.length, part.body.height)}",
        # the trade's sizes are whole millimetres, and cases a little larger
        "control": lambda part: f"panel, {int(round(part.body.length * 1e3, 2))} mm",
        "jack": lambda part: f"panel, {_millimetres(part.body.length, part.body.width)}",
        "toggle": lambda part: f"panel, {_millimetres(part.body.length, part.body.width)}",
        "header": lambda part: f"2 x {len(part.pins) // 2}, {_millimetres(part.body.pitch)}",
    }
)


def package_words(record: Record) -> str:
    """What a part's package is called where it is sold.

    Parameters
    ----------
    record
        From the catalogue. [-]

    Returns
    -------
    str
        ``DIP-14``, ``0207``, ``DO-41``, ``box 5 mm``; a package that only its owner's catalogue knows as it is
        written there.

    Notes
    -----
    Boxes and radial parts are told apart by their lead spacing, cans by diameter and height. Common practice.
    """
    package = record.body.package
    if package == "box" and isinstance(record, Capacitor) and not record.dielectric.startswith("film"):
        return f"radial {_millimetres(record.body.pitch)}"
    words = _PACKAGES.get(package)
    return words(record) if words else package


def value_words(record: Record, value: str, digits: int = 6) -> str:
    """What a part's value is for people.

    Parameters
    ----------
    record
        From the catalogue. [-]
    value
        As the netlist has it. [-]
    digits
        Most significant digits of a resistance or capacitance. [-]

    Returns
    -------
    str
        ``4.7 kΩ``, ``TL074CN``, ``2 x 5 header``, ``3.5 mm socket``, ``toggle switch, on-on``.
    """
    for name in ("resistance", "capacitance"):
        size = getattr(record, name, None)
        if size is not None:
            return format_quantity(size, name, digits)
    if isinstance(record, Header):
        return f"2 x {len(record.pins) // 2} header"
    if isinstance(record, Jack):
        return "3.5 mm socket"
    if isinstance(record, Switch):
        return "toggle switch, on-on"
    if value and value != record.key:
        return value
    if isinstance(record, Amplifier):
        return record.type
    if isinstance(record, Diode):
        return "Schottky diode" if record.schottky else "silicon diode"
    return record.kind


def order_words(record: Record) -> tuple[str, tuple[str, ...]]:
    """The order code of a part and what may be bought in its place.

    Parameters
    ----------
    record
        From the catalogue. [-]

    Returns
    -------
    tuple
        Code and alternates. A part that has no code of its own, only its key, has an empty one and
        :data:`ANY_MAKER` in place of alternates, unless the catalogue names some.
    """
    if record.order_code and record.order_code != record.key:
        return record.order_code, record.alternates
    return "", record.alternates or (ANY_MAKER,)


def not_listed(records: Sequence[Record]) -> tuple[tuple[str, int, str], ...]:
    """What a finished module needs and its parts list does not have.

    Parameters
    ----------
    records
        The record of every part of one board. [-]

    Returns
    -------
    tuple
        What, how many for one board, and a remark.
    """
    controls = sum(record.kind == "control" for record in records)
    sockets: dict[int, int] = {}
    for record in records:
        if record.kind == "amplifier" and record.mount == "through-hole":
            sockets[len(record.pins)] = sockets.get(len(record.pins), 0) + 1
    found = [("Bare board", 1, "made from the layout of netlist.net")]
    panel = sum(record.mount == "panel" for record in records)
    if panel:
        found.append(("Front panel with its screws", 1, f"holes for {panel} panel parts; their nuts come with them"))
    if controls:
        found.append(("Knobs", controls, "one a control, to fit its shaft"))
    remark = "if the packages are to be socketed"
    found += [(f"Sockets, DIP-{pins}", number, remark) for pins, number in sorted(sockets.items())]
    headers = sum(record.kind == "header" for record in records)
    if headers:
        found.append(("Power cables", headers, "ribbon, to the supply in use; check its stripe"))
    return tuple(found)
