"""The catalogue as plain text: one row a family, or one row a part when something is looked for."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from itertools import groupby

from modgen.catalogue.records import (
    Amplifier,
    Capacitor,
    Control,
    Diode,
    Header,
    Jack,
    Part,
    Resistor,
)
from modgen.catalogue.shelf import Catalogue
from modgen.units import format_quantity

#: evidence kind to its letter in the listing; invented figures are marked where they stand
_LETTERS = {"published document": "D", "common practice": "P", "memory": "M"}
_LEGEND = (
    "evidence: figures from D a published document, P common practice, M memory; * invented price, not a quotation"
)


def describe(catalogue: Catalogue, pattern: str = "") -> str:
    """A table of what there is.

    Parameters
    ----------
    catalogue : Catalogue
        What is listed.
    pattern : str
        Words that must all be in a part's key, kind, family, mount, type or description, in any case.
        Empty: one row a family.

    Returns
    -------
    str
        Lines of text, without a line break at the end.
    """
    parts = sorted(catalogue.parts.values(), key=_order)
    if not pattern.split():
        return _families(parts)
    words = pattern.casefold().split()
    found = [part for part in parts if all(word in _searched(part) for word in words)]
    if not found:
        return f"no part has '{pattern}' in its key, kind, family, mount, type or description"
    head = ("key", "value", "ratings", "height", "price", "evidence", "description")
    rows = [
        (part.key, _value(part), _ratings(part), _mm(part.body.height), _price(part), _evidence(part), part.description)
        for part in found
    ]
    lines = [*_table(head, rows), "", f"{len(found)} {'part' if len(found) == 1 else 'parts'}"]
    noted: dict[str, list[Part]] = {}
    for part in found:
        if part.note:
            noted.setdefault(part.note, []).append(part)
    for note, members in noted.items():
        lines.append(f"note on {members[0].key if len(members) == 1 else members[0].family}: {note}")
    return "\n".join([*lines, _LEGEND])


def _families(parts: Sequence[Part]) -> str:
    head = ("family", "kind", "parts", "mount", "from", "to", "description")
    rows = []
    for (_, family), group in groupby(parts, key=lambda part: (part.kind, part.family)):
        members = list(group)
        rows.append(
            (
                family,
                members[0].kind,
                str(len(members)),
                "/".join(sorted({part.mount for part in members})),
                _value(members[0]),
                _value(members[-1]),
                members[0].description,
            )
        )
    lines = _table(head, rows)
    return "\n".join([*lines, "", f"{len(parts)} parts; name a key, kind, family or word to see them"])


def _table(head: Sequence[str], rows: Sequence[Sequence[str]]) -> list[str]:
    """Columns as wide as they must be, two spaces apart."""
    widths = [max(len(row[i]) for row in (head, *rows)) for i in range(len(head))]
    return [
        "  ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)).rstrip() for row in (head, *rows)
    ]


def _order(part: Part) -> tuple[str, str, float, str]:
    if isinstance(part, Capacitor):
        return part.kind, part.family, part.capacitance, part.key
    if isinstance(part, Resistor | Control):
        return part.kind, part.family, part.resistance, part.key
    return part.kind, part.family, 0.0, part.key


def _searched(part: Part) -> str:
    kind = part.type if isinstance(part, Amplifier) else ""
    return " ".join((part.key, part.kind, part.family, part.mount, kind, part.description)).casefold()


def _value(part: Part) -> str:
    if isinstance(part, Resistor | Control):
        return f"{format_quantity(part.resistance, 'resistance')} {_percent(part.tolerance)}"
    if isinstance(part, Capacitor):
        return f"{format_quantity(part.capacitance, 'capacitance')} {_percent(part.tolerance)}"
    return part.type if isinstance(part, Amplifier) else part.order_code or "-"


def _ratings(part: Part) -> str:
    """What it may be exposed to, and what tells it from its like."""
    if isinstance(part, Resistor):
        return f"{_power(part.power)}, {_volt(part.voltage)}"
    if isinstance(part, Control):
        end = format_quantity(part.end, "resistance")
        return f"{_power(part.power)}, {_volt(part.voltage)}, {part.taper}, end {end}"
    if isinstance(part, Capacitor):
        return f"{_volt(part.voltage)}, {part.dielectric}"
    if isinstance(part, Diode):
        return f"{_volt(part.reverse_voltage)}, {_amp(part.forward_current)}"
    if isinstance(part, Amplifier):
        supply = f"{_volt(part.supply_least)} to {_volt(part.supply_most)}"
        return f"{supply}, {part.input}, {_amp(part.quiescent_max)} each, offset {_volt(part.offset_max)}"
    if isinstance(part, Jack | Header):
        return f"{_volt(part.voltage)}, {_amp(part.current)}"
    return "-"


def _price(part: Part) -> str:
    """The price of one, marked when it is invented."""
    if not part.prices:
        return "-"
    invented = any(figure == "prices" and evidence.kind == "invented" for figure, evidence in part.evidence)
    return f"{part.unit_price:.2f}{'*' if invented else ''}"


def _evidence(part: Part) -> str:
    """How many figures stand on what."""
    counts = Counter(evidence.kind for _, evidence in part.evidence)
    return " ".join(f"{letter}{counts[kind]}" for kind, letter in _LETTERS.items() if counts[kind])


def _percent(value: float) -> str:
    return format_quantity(value, "ratio")


def _volt(value: float) -> str:
    return format_quantity(value, "voltage")


def _amp(value: float) -> str:
    return format_quantity(value, "current")


def _power(value: float) -> str:
    return format_quantity(value, "power")


def _mm(value: float) -> str:
    return f"{value * 1e3:.1f} mm"
