"""An amplifier that a capacitor makes ring."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board, Lane
from modgen.analysis.model import Stability
from modgen.analysis.parts import Section
from modgen.analysis.stability import stabilities
from modgen.design.practice import CABLE_CAPACITANCE, JUNCTION
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import above, is_input, left, listed
from modgen.spec.model import Spec
from modgen.units import format_quantity

#: Feedback time constant over that of output resistor and cable, at most [-]: beyond, the output settles long
#: after the signal. Common practice, no source.
MOST_COMPENSATION = 100.0
#: Phase margin below which a buffer is as good as oscillating [deg]: a step overshoots by half. Common practice,
#: no source.
LEAST_PHASE = 20.0


class CapacitiveLoad(Rule):
    """No amplifier sees a capacitor that it is not made to drive.

    Checks:
        Capacitors from an output to 0 V or a rail against the load that the maker characterises. A socket
        on an output without a resistor, against the same and 2 nF of cable. A resistor inside the loop
        has a capacitor from the output to the inverting input, whose time constant with the feedback
        resistor lies between that of output resistor and cable and a hundred times that. In each lane
        the isolating resistor keeps a step over the whole span within the current that the buffer
        guarantees, with the control at nothing. With a spec: the phase margin of both buffers of each
        lane, with the control at its fast end and with cables up to 10 nF, the amplifier's output
        resistance from half to double its record: under 45 degrees a warning, under 20 an error.
    Matters:
        Output resistance and a capacitor turn the phase inside the loop: the amplifier rings at some
        hundred kilohertz, which is heard as wrong pitch or as hum, and only with the long cable.
    Fails:
        start from: pair
        without C6
    Passes:
        start from: pair
    Limits:
        A buffer with a fault of the other kinds is not judged by its phase margin as well. The second
        pole of an amplifier, which no data sheet states, is taken at three times its gain-bandwidth;
        capacitance of the board is not counted.
    References:
        Largest direct load: ST TL072 datasheet rev 4. Compensation inside the loop: Texas Instruments
        SBOA015 (from memory). 2 nF, as of 20 m of cable; 45 and 20 degrees, a step that overshoots by
        a quarter and by half: common practice, no source.
    """

    name = "capacitive-load"
    subject = "signal"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every output, every loop with a resistor inside, every lane."""
        board = context.board
        found = [(section.name, measured) for section, measured in _direct(board)]
        for lane in board.channels:
            if lane.inside_loop:
                found.append((lane.second.name, _compensation(board, lane)))
            found.append((lane.first.name, _isolation(board, context.spec, lane)))
        yield from (measured for _, measured in found)
        if context.spec is not None:
            faulty = {name for name, measured in found if measured.fault is not None}
            for stage in stabilities(board, context.spec.signal):
                if stage.section not in faulty:
                    yield _phase(stage)


def _direct(board: Board) -> Iterator[tuple[Section, Measurement]]:
    """What hangs on each output with no resistor between."""
    for section in board.sections:
        output = section.output
        if output is None or output in board.supply_nets:
            continue
        limit = section.record.capacitive_load
        hung = [n.ref for n in board.between(output, "capacitor") if n.net in board.supply_nets]
        total = sum(board.value(ref) or 0.0 for ref in hung)
        jacks = [jack.ref for jack in board.jacks if jack.tip == output and not is_input(board, jack.ref)]
        total += CABLE_CAPACITANCE if jacks else 0.0
        if not total:
            nothing = f"{section.name}: no capacitor straight on {output}"
            yield section, Measurement(parts=(section.package,), what=nothing)
            continue
        load, most = format_quantity(total, "capacitance"), format_quantity(limit, "capacitance")
        by = listed([*hung, *(f"a cable in {jack}" for jack in jacks)])
        margin = left(total, limit)
        fault = None
        if margin < 0:
            fault = Fault(
                f"{section.name} drives {load} straight ({by}); its maker characterises {most}",
                "the load turns the phase inside its loop, and it rings",
                f"put a resistor between {section.name} and {listed([*hung, *jacks])}",
            )
        yield (
            section,
            Measurement(
                parts=(section.package, *hung, *jacks),
                what=f"{section.name}: {load} of {most}",
                measured=total,
                limit=limit,
                unit="F",
                margin=margin,
                nets=(output,),
                fault=fault,
            ),
        )


def _compensation(board: Board, lane: Lane) -> Measurement:
    name, resistor = lane.second.name, listed(lane.output_series)
    why = "with a cable on the output the loop turns its phase too far, and the amplifier rings"
    if lane.feedback is None or lane.compensation is None:
        lacks = "feedback resistor" if lane.feedback is None else "capacitor"
        where = (
            f"between {lane.feeds[0].net} and pin {lane.second.pins[1]}"
            if lane.feedback is None
            else f"from {lane.second.output} to {lane.second.inverting}"
        )
        return Measurement(
            parts=(lane.second.package, *lane.output_series),
            what=f"{name}: no {lacks}",
            fault=Fault(
                f"{resistor} is inside the loop of {name}, and there is no {lacks} {where}",
                why,
                f"add a {lacks} {where}",
            ),
        )
    least = max(board.resistance(ref).high for ref in lane.output_series) * CABLE_CAPACITANCE
    resistance, capacitance = board.resistance(lane.feedback), board.capacitance(lane.compensation)
    low, high = resistance.low * capacitance.low, resistance.high * capacitance.high
    most = MOST_COMPENSATION * least
    margin, measured, limit = min((above(low, least), low, least), (left(high, most), high, most))
    pair, seen = f"{lane.feedback} and {lane.compensation}", format_quantity(measured, "time")
    fault = None
    if margin < 0 and limit == least:
        fault = Fault(
            f"{pair} make {seen}; {resistor} with {format_quantity(CABLE_CAPACITANCE, 'capacitance')} of cable makes "
            f"{format_quantity(least, 'time')}",
            why,
            f"fit {format_quantity(2 * least / resistance.nominal, 'capacitance')} or more as {lane.compensation}",
        )
    elif margin < 0:
        fault = Fault(
            f"{pair} make {seen}, more than {MOST_COMPENSATION:.0f} times the {format_quantity(least, 'time')} of "
            f"{resistor} with cable",
            "the voltage behind the output resistor settles long after the signal",
            f"fit {format_quantity(2 * least / resistance.nominal, 'capacitance')} as {lane.compensation}",
            level="warning",
        )
    return Measurement(
        parts=(lane.second.package, *lane.output_series, lane.feedback, lane.compensation),
        what=f"{name}: {pair} make {seen}, limit {format_quantity(limit, 'time')}",
        measured=measured,
        limit=limit,
        unit="s",
        margin=margin,
        fault=fault,
    )


def _isolation(board: Board, spec: Spec | None, lane: Lane) -> Measurement:
    name = lane.first.name
    ohms = sum(board.resistance(ref).low for ref in lane.isolating)
    seen = format_quantity(ohms, "resistance")
    parts = (lane.first.package, *lane.isolating, lane.control, *lane.capacitors)
    why = "with the control at nothing the amplifier drives the glide capacitor: it rings, or stands at its limit"
    if ohms <= 0:
        return Measurement(
            parts=parts,
            what=f"{name}: no isolating resistor",
            fault=Fault(
                f"nothing but {lane.control} stands between {name} and {listed(lane.capacitors)}",
                why,
                f"put a resistor between {name} and {lane.control}",
            ),
        )
    if spec is None:
        return Measurement(parts=parts, what=f"{name}: {seen} before {lane.control}")
    record = lane.first.record
    drive = record.short_circuit_least
    if record.sink_near_negative and spec.rails.single and spec.signal.low < JUNCTION:
        # near 0 V this type sinks less than it drives elsewhere
        drive = record.sink_near_negative
    span = spec.signal.high - spec.signal.low
    least = span / drive
    margin = above(ohms, least)
    fault = None
    if margin < 0:
        fault = Fault(
            f"{listed(lane.isolating)} ({seen} at least) lets {name} be asked for "
            f"{format_quantity(span / ohms, 'current')}; it guarantees {format_quantity(drive, 'current')}",
            why,
            f"fit {format_quantity(least, 'resistance')} or more",
        )
    return Measurement(
        parts=parts,
        what=f"{name}: {seen} where {format_quantity(least, 'resistance')} is needed",
        measured=ohms,
        limit=least,
        unit="ohm",
        margin=margin,
        fault=fault,
        key="signal.span",
    )


def _phase(stage: Stability) -> Measurement:
    """The phase margin of one buffer of a lane."""
    package, *around = stage.parts
    if stage.stage.startswith("input"):
        load = f"{format_quantity(stage.load, 'resistance')} left in the control"
        fix = f"fit a larger isolating resistor (of {listed(around)})"
    else:
        load = f"{format_quantity(stage.load, 'capacitance')} of cable" if stage.load else "no cable"
        fix = (
            f"fit a larger compensation capacitor (of {listed(around)})"
            if stage.stage.endswith("inside the loop")
            else f"fit a larger resistor in place of {listed(around)}, or put it inside the loop"
        )
    fault = None
    margin = above(stage.measured, stage.limit)
    if margin < 0:
        fault = Fault(
            f"{stage.section} keeps {stage.measured:.3g} degrees of phase margin with {load} if its output resistance "
            f"is {format_quantity(stage.output_resistance, 'resistance')}; {stage.limit:.3g} are wanted",
            f"a step overshoots by {format_quantity(stage.overshoot, 'ratio')} and rings at about "
            f"{format_quantity(stage.crossover, 'frequency')}",
            f"{fix}, or an amplifier with a lower output resistance",
            level="error" if stage.measured < LEAST_PHASE else "warning",
        )
    return Measurement(
        parts=(package, *around),
        what=f"{stage.section}: {stage.measured:.3g} degrees with {load}",
        measured=stage.measured,
        limit=stage.limit,
        unit="deg",
        margin=margin,
        fault=fault,
        key="signal.load",
    )
