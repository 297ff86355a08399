"""A part that says one thing and is ordered as another."""

from __future__ import annotations

import re
from collections.abc import Iterator

from modgen.analysis.board import Board
from modgen.analysis.parts import field_number
from modgen.catalogue.records import Amplifier, Capacitor, Control, Diode, Resistor
from modgen.catalogue.records import Part as Record
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.units import format_quantity

#: values nearer to each other than this are the same [-]. Source: value text is written with ten digits.
SAME = 1e-6

#: field, attribute of the record, what kind of quantity it is
FIELDS = (
    ("tolerance", "tolerance", "ratio"),
    ("voltage", "voltage", "voltage"),
    ("voltage", "reverse_voltage", "voltage"),
    ("power", "power", "power"),
)


class ValueDiffersFromPart(Rule):
    """What the netlist says of each part is what the catalogue says of it.

    Checks:
        For each part that names a catalogue part: its value, and its fields tolerance, voltage, power and
        dielectric where it has them, against the record.
    Matters:
        The parts list orders by the field ``part``, and every analysis computes with the value: when they
        contradict each other, what was checked is not what is bought.
    Fails:
        start from: lane
        R2 value=1k
    Passes:
        start from: lane
    Limits:
        Of amplifiers and diodes only a value that names another type counts. Cannot say which of the two
        is right.
    References:
        Common practice: value and part number of a schematic are compared before ordering.
    """

    name = "value-differs-from-part"
    subject = "ordering"
    needs_rails = False

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every part with a record."""
        board = context.board
        for ref in board.refs:
            record = board.record(ref)
            if record is None:
                continue
            wrong = list(_contradictions(board, ref, record))
            fault = None
            if wrong:
                fault = Fault(
                    f"{ref} says {'; '.join(wrong)} (part {record.key})",
                    "the value is what was checked, and the part is what is ordered",
                    f"name another part for {ref}, or give it the figures of {record.key}",
                )
            yield Measurement(parts=(ref,), what=f"{ref} ({board.part(ref).value}) is {record.key}", fault=fault)


def _contradictions(board: Board, ref: str, record: Record) -> Iterator[str]:
    """What a part says otherwise than its record, in words."""
    part = board.part(ref)
    kind, held = _value_of(record)
    if kind:
        said = board.value(ref)
        if said is not None and not _same(said, held):
            yield f"{format_quantity(said, kind)} and is ordered as {format_quantity(held, kind)}"
    elif isinstance(record, Amplifier | Diode) and part.value and not _names(part.value, record):
        yield f"{part.value!r} and is ordered as {record.order_code or record.key}"
    for name, attribute, unit in FIELDS:
        text, limit = part.field(name), getattr(record, attribute, None)
        if not text or not isinstance(limit, float) or isinstance(record, Amplifier):
            continue
        number = field_number(text)
        if number is None:
            yield f"{name} {text!r}, which is not a number, and is ordered with {format_quantity(limit, unit)}"
        elif not _same(number, limit):
            yield f"{name} {text} and is ordered with {format_quantity(limit, unit)}"
    dielectric = part.field("dielectric")
    if isinstance(record, Capacitor) and dielectric and dielectric != record.dielectric:
        yield f"dielectric {dielectric} and is ordered as {record.dielectric}"


def _value_of(record: Record) -> tuple[str, float]:
    if isinstance(record, Resistor | Control):
        return "resistance", record.resistance
    if isinstance(record, Capacitor):
        return "capacitance", record.capacitance
    return "", 0.0


def _same(one: float, two: float) -> bool:
    return abs(one - two) <= SAME * max(abs(one), abs(two))


def _names(value: str, record: Amplifier | Diode) -> bool:
    """Whether a value names this type: its key, an order code, the type, or the beginning of one of them.

    A type is written with an ``x`` for what differs between its forms: ``TL07x`` is TL072 and TL074.
    """
    said = _plain(value)
    names = [record.key, record.order_code, *record.alternates]
    types = [record.type] if isinstance(record, Amplifier) else []
    if any(_plain(name).startswith(said) or said.startswith(_plain(name)) for name in names if name):
        return True
    patterns = [re.escape(_plain(name)).replace("X", "[0-9X]") for name in types]
    return any(re.match(pattern, said) for pattern in patterns)


def _plain(text: str) -> str:
    return re.sub(r"[^A-Z0-9]", "", text.upper())
