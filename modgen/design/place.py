"""From values to parts: references, nets, and which package section serves which channel.

References rise channel by channel and, within one, along the signal; shared parts follow. The same values
always give the same references.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass

from modgen.catalogue.records import Amplifier, Capacitor, Control, Header, Jack, Resistor
from modgen.catalogue.records import Part as Record
from modgen.design.model import Placed, Values
from modgen.spec.model import Spec
from modgen.units import value_text

GROUND, POSITIVE, NEGATIVE, BUS_POSITIVE, BUS_NEGATIVE = "0V", "V+", "V-", "BUS+", "BUS-"
OPEN = ""
#: Contacts of the power header: trade practice, negative at the stripe side.
HEADER = {BUS_NEGATIVE: ("1", "2"), GROUND: ("3", "4", "5", "6", "7", "8"), BUS_POSITIVE: ("9", "10")}


@dataclass(frozen=True)
class Section:
    """One amplifier section: which package, which of its sections."""

    package: int
    index: int


def sections(packages: tuple[Amplifier, ...]) -> list[Section]:
    """Every section in order of use: the packages one after the other."""
    return [Section(p, s) for p, record in enumerate(packages) for s in range(record.sections)]


class _References:
    """Hands out R1, R2, ... C1, ... in the order of asking."""

    def __init__(self) -> None:
        self._count: Counter[str] = Counter()

    def next(self, letters: str) -> str:
        self._count[letters] += 1
        return f"{letters}{self._count[letters]}"


def place(spec: Spec, values: Values, jack: Jack, header: Header, reasons: dict[str, str]) -> tuple[Placed, ...]:
    """Every part of the module with its nets; ``reasons`` gives the text for a role."""
    references = _References()
    order = sections(values.packages)
    nets: list[dict[str, str]] = [{} for _ in values.packages]
    users: list[set[int]] = [set() for _ in values.packages]
    parts: list[Placed] = []

    def add(letters: str, record: Record, role: str, pins: dict[str, str], channel: int = 0, serves: str = "") -> None:
        parts.append(
            Placed(
                references.next(letters),
                record,
                role,
                _value(record),
                tuple(pins.items()),
                channel,
                serves,
                reasons.get(role, ""),
            )
        )

    def connect(section: Section, plus: str, minus: str, out: str, channel: int) -> None:
        output, inverting, non_inverting = values.packages[section.package].section_pins[section.index]
        nets[section.package] |= {output: out, inverting: minus, non_inverting: plus}
        users[section.package].add(channel)

    for channel in range(1, spec.channels + 1):
        net = f"CH{channel}_"
        source = spec.input_of(channel)
        if source == channel:
            add("J", jack, "input-jack", {"T": net + "IN", "TN": _normal(spec, channel), "S": GROUND}, channel)
            add("R", values.terminator, "terminator", {"1": net + "IN", "2": GROUND}, channel)
        add("R", values.input_series, "input-series", {"1": f"CH{source}_IN", "2": net + "A"}, channel)
        connect(order[2 * channel - 2], net + "A", net + "BUF", net + "BUF", channel)
        add("R", values.isolating, "isolating", {"1": net + "BUF", "2": net + "CTL"}, channel)
        glide = net + "GLIDE"
        add("R", values.control, "glide-control", {"1": net + "CTL", "2": glide, "3": glide}, channel)
        if values.back_to_back:
            for far in (glide, GROUND):
                add("C", values.glide, "glide-capacitor", {"1": far, "2": net + "MID"}, channel)
        else:
            for capacitor in (values.glide, values.glide_parallel):
                if capacitor is not None:
                    add("C", capacitor, "glide-capacitor", {"1": glide, "2": GROUND}, channel)
        drive = net + "DRIVE"
        if values.range_switch is not None:
            # waiting, the added capacitor is held at the output's voltage: switching in changes nothing but the time
            assert values.range_capacitor is not None
            assert values.range_keeper is not None
            pins = {"1": glide, "2": net + "RANGE", "3": net + "KEEP"}
            add("S", values.range_switch, "range-switch", pins, channel)
            add("C", values.range_capacitor, "range-capacitor", {"1": net + "RANGE", "2": GROUND}, channel)
            add("R", values.range_keeper, "range-keeper", {"1": drive, "2": net + "KEEP"}, channel)
        outs = [net + "OUT" + (str(n) if n > 1 else "") for n in range(1, spec.outputs_of(channel) + 1)]
        for out in outs:
            add("R", values.output_series, "output-series", {"1": drive, "2": out}, channel)
        if values.inside_loop:
            assert values.feedback is not None
            assert values.compensation is not None
            add("R", values.feedback, "feedback", {"1": outs[0], "2": net + "FB"}, channel)
            add("C", values.compensation, "compensation", {"1": drive, "2": net + "FB"}, channel)
        connect(order[2 * channel - 1], glide, net + "FB" if values.inside_loop else drive, drive, channel)
        for out in outs:
            add("J", jack, "output-jack", {"T": out, "TN": OPEN, "S": GROUND}, channel)

    for section in order[2 * spec.channels :]:
        own = f"IDLE{section.package + 1}{'ABCD'[section.index]}"
        plus = GROUND
        if values.idle_tie is not None:
            plus = own + "_IN"
            add("R", values.idle_tie, "idle-tie", {"1": plus, "2": GROUND})
        connect(section, plus, own, own, 0)

    low = GROUND if spec.rails.single else NEGATIVE
    for record, pins, used in zip(values.packages, nets, users, strict=True):
        supply = {record.positive_pin: POSITIVE, record.negative_pin: low}
        channels = used - {0}
        ordered = dict(sorted((pins | supply).items(), key=lambda pin: int(pin[0])))
        add("U", record, "amplifier", ordered, channels.pop() if len(used) == 1 and channels else 0)
    for n in range(1, len(values.packages) + 1):
        for rail in _rails(spec):
            pins = {"1": rail, "2": GROUND} if rail == POSITIVE else {"1": GROUND, "2": rail}
            add("C", values.decoupling, "decoupling", pins, serves=f"U{n}")
    for rail in _rails(spec):
        positive = rail == POSITIVE
        add(
            "D",
            values.diode,
            "reverse-polarity",
            {"1": POSITIVE, "2": BUS_POSITIVE} if positive else {"1": BUS_NEGATIVE, "2": NEGATIVE},
        )
        # on the negative rail the + end of the reservoir stands on 0 V
        add(
            "C",
            values.reservoir,
            "reservoir",
            {"1": POSITIVE, "2": GROUND} if positive else {"1": GROUND, "2": rail},
        )
    wired = {pin: net for net, pins in HEADER.items() for pin in pins}
    if spec.rails.single:
        wired |= dict.fromkeys(HEADER[BUS_NEGATIVE], OPEN)
    add("J", header, "power-header", {pin.number: wired[pin.number] for pin in header.pins})
    return tuple(sorted(parts, key=_reference_order))


def _rails(spec: Spec) -> Iterator[str]:
    yield POSITIVE
    if not spec.rails.single:
        yield NEGATIVE


def _normal(spec: Spec, channel: int) -> str:
    """The net of an input's tip switch: the input before it when chained, else 0 V."""
    return f"CH{channel - 1}_IN" if spec.normalling == "chain" and channel > 1 else GROUND


def _value(record: Record) -> str:
    if isinstance(record, Resistor | Control):
        return value_text(record.resistance)
    if isinstance(record, Capacitor):
        return value_text(record.capacitance)
    return record.order_code or record.key


def _reference_order(part: Placed) -> tuple[str, int]:
    letters = part.ref.rstrip("0123456789")
    return letters, int(part.ref[len(letters) :])
