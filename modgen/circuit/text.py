"""The text of a part's fields, as the netlist conventions have it (design conventions, section 8)."""

from __future__ import annotations

from modgen.catalogue.records import Capacitor, Control, Diode, Resistor
from modgen.design.model import Placed

#: every field name that is written; the library takes other names for attributes of its own
FIELDS = ("channel", "dielectric", "part", "power", "role", "serves", "tolerance", "voltage")


def number(value: float) -> str:
    """A plain decimal without trailing zeros: ``1``, ``0.25``, ``63``.

    Parameters
    ----------
    value
        What to write. [-]
    """
    text = f"{value:.9f}".rstrip("0").rstrip(".")
    return text if text not in ("-0", "") else "0"


def fields_of(placed: Placed) -> tuple[tuple[str, str], ...]:
    """The fields of one part, sorted by name; only those that apply to it.

    Parameters
    ----------
    placed
        A part of the design.

    Returns
    -------
    tuple of (str, str)
        Name and text. Tolerances in per cent, voltages in volts, powers in watts, each with its unit.
    """
    record = placed.record
    out = {"part": record.key, "role": placed.role}
    if isinstance(record, Resistor | Capacitor | Control):
        out["tolerance"] = f"{number(record.tolerance * 100)}%"
        out["voltage"] = f"{number(record.voltage)}V"
    if isinstance(record, Resistor | Control):
        out["power"] = f"{number(record.power)}W"
    if isinstance(record, Capacitor):
        out["dielectric"] = record.dielectric
    if isinstance(record, Diode):
        out["voltage"] = f"{number(record.reverse_voltage)}V"
    if placed.channel:
        out["channel"] = str(placed.channel)
    if placed.serves:
        out["serves"] = placed.serves
    return tuple(sorted(out.items()))
