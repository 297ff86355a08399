"""A package without a decoupling capacitor of its own."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board
from modgen.catalogue.records import Amplifier
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import above, ground_nets, left
from modgen.units import format_quantity

#: What counts as decoupling [F]: below, too little charge for an output step; above, too much inductance in
#: the bodies that such values come in. Common practice, no source.
LEAST = 47e-9
MOST = 1e-6
#: Below this a capacitor counts for nothing [F]: 10 mA into a cable for a microsecond take half a volt from 20 nF.
#: Worked out; what a rail may dip by is common practice, no source.
USELESS = 20e-9

Pin = tuple[str, str, str]  # package, pin, net


class DecouplingPerPackage(Rule):
    """Every supply pin of every package has a decoupling capacitor of its own.

    Checks:
        For each supply pin that is not on 0 V: one capacitor from its net to 0 V, between 47 nF and 1
        uF; below 20 nF it is an error, otherwise a warning. A capacitor that names its package in the
        field ``serves`` counts for that package; the others are given to the pins that have none, on the
        same net; none counts twice.
    Matters:
        A rail is no short circuit at a megahertz: without a capacitor beside it a package rings or
        oscillates, and two packages on one capacitor work only if it happens to stand beside both.
    Fails:
        start from: lane
        without C3
    Passes:
        start from: lane
    Limits:
        Knows the netlist and not the distance on the board. A capacitor from rail to rail does not
        count.
    References:
        ST TL072 datasheet rev 4, layout guidelines; common practice: 100 nF a package and rail (from
        memory).
    """

    name = "decoupling-per-package"
    subject = "supply"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every supply pin of every package."""
        board = context.board
        grounds = set(ground_nets(board))
        pins: list[Pin] = []
        for ref in board.parts_of("amplifier"):
            record = board.record(ref)
            if isinstance(record, Amplifier):
                for pin in (record.positive_pin, record.negative_pin):
                    net = board.net(ref, pin)
                    if net is not None and net not in grounds:
                        pins.append((ref, pin, net))
        given = assign(board, pins, _candidates(board, grounds))
        for supplied in pins:
            yield self._measurement(board, supplied, given.get(supplied))

    def _measurement(self, board: Board, pin: Pin, capacitor: str | None) -> Measurement:
        package, number, net = pin
        if capacitor is None:
            return Measurement(
                parts=(package,),
                what=f"{package} pin {number} on {net}: no capacitor of its own",
                nets=(net,),
                fault=Fault(
                    f"pin {number} of {package} (net {net}) has no decoupling capacitor of its own",
                    "without one beside it a package rings or oscillates on the inductance of the rail",
                    f"add 100 nF from {net} to 0 V beside {package}, and name {package} in its field 'serves'",
                ),
            )
        value = board.value(capacitor) or 0.0
        text = format_quantity(value, "capacitance")
        sides = ((above(value, LEAST), LEAST), (left(value, MOST), MOST))
        margin, limit = min(sides)
        fault = None
        if margin < 0:
            fault = Fault(
                f"{capacitor} decouples {package} with {text}, outside "
                f"{format_quantity(LEAST, 'capacitance')} to {format_quantity(MOST, 'capacitance')}",
                "too little charge for an output step" if limit == LEAST else "a body that large is too slow",
                "fit 100 nF",
                level="error" if value < USELESS else "warning",
            )
        return Measurement(
            parts=(package, capacitor),
            what=f"{package} pin {number} on {net}: {capacitor} {text}",
            measured=value,
            limit=limit,
            unit="F",
            margin=margin,
            nets=(net,),
            fault=fault,
        )


def _candidates(board: Board, grounds: set[str]) -> list[tuple[str, str]]:
    """``(capacitor, net)`` of every capacitor between a net and 0 V that may be meant for decoupling, best first."""
    found = []
    for ref in board.parts_of("capacitor"):
        ends = [board.net(ref, pin) for pin in ("1", "2")]
        live = [net for net in ends if net is not None and net not in grounds]
        value = board.value(ref)
        if len(live) != 1 or not any(net in grounds for net in ends) or value is None:
            continue
        inside = above(value, LEAST) >= 0 and left(value, MOST) >= 0
        # a reservoir is not a decoupling capacitor of the wrong value, unless it says that it serves a package
        if inside or board.part(ref).field("serves") or (value < MOST and not board.polarised(ref)):
            found.append((not inside, ref, live[0]))
    return [(ref, net) for _, ref, net in sorted(found, key=lambda entry: entry[0])]


def assign(board: Board, pins: list[Pin], candidates: list[tuple[str, str]]) -> dict[Pin, str]:
    """Give each supply pin at most one capacitor, and each capacitor at most one pin.

    Those that name a package go there first. Every other capacitor on a net can stand for any pin on that
    net, so the pins of one net and its capacitors form a complete bipartite graph, and handing them
    out in turn is already a greatest matching.
    """
    given: dict[Pin, str] = {}
    taken: set[str] = set()
    for ref, net in candidates:
        serves = board.part(ref).field("serves")
        for pin in pins:
            if pin[0] == serves and pin[2] == net and pin not in given:
                given[pin] = ref
                taken.add(ref)
                break
    packages = {pin[0] for pin in pins}
    for ref, net in candidates:
        if ref in taken or board.part(ref).field("serves") in packages:
            continue
        for pin in pins:
            if pin[2] == net and pin not in given:
                given[pin] = ref
                break
    return given
