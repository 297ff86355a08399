"""Offset errors of a lane: what the output shows when it should show 0 V."""

from __future__ import annotations

from collections.abc import Iterable

from modgen.analysis.board import Board, Lane
from modgen.analysis.feeding import lanes_sharing
from modgen.analysis.glide import longest_resistance
from modgen.analysis.model import Term
from modgen.analysis.parts import Section
from modgen.analysis.words import amps, ohms, volts
from modgen.catalogue.records import Capacitor
from modgen.formulas.leakage import bias_at, current_offset, electrolytic_leakage
from modgen.formulas.loading import parallel
from modgen.spec.model import Signal

#: name of the term that stands at the low end of the span only
FLOOR = "output floor"
#: what data sheets state figures at [degC]
ROOM = 25.0


def offset_terms(board: Board, lane: Lane, signal: Signal, temperature: float = ROOM) -> tuple[Term, ...]:
    """Offset errors of one lane.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    lane
        One of its lanes.
    signal
        Source impedance.
    temperature
        Of the amplifiers. [degC]

    Returns
    -------
    tuple of Term
        Worst case of each, all counted as positive [V].
    """
    out = []
    rise = max(0.0, temperature - ROOM)
    for stage, section in lane.buffers:
        record = section.record
        out.append(
            Term(
                "offset",
                f"offset voltage, {stage}",
                record.offset_max + record.offset_drift * rise,
                "Vos + drift dT" if rise else "Vos",
                f"{section.name}: {volts(record.offset_max)}, {record.offset_drift * 1e6:g} µV/K",
                "an amplifier with less offset",
            )
        )
    source = parallel(signal.source, board.least_parallel(lane.terminators))
    resistances = [
        ("input buffer", lane.first, source + _sum_high(board, lane.input_series), "Rs||Rt + Rin"),
        ("output buffer", lane.second, longest_resistance(board, lane), "Rcontrol + Riso"),
    ]
    if lane.feedback is not None:
        highest = board.resistance(lane.feedback).high
        resistances.append(("feedback resistor", lane.second, highest, "Rfb"))
    for place, section, resistance, symbol in resistances:
        current = section_bias(section, temperature)
        out.append(
            Term(
                "offset",
                f"bias current, {place}",
                current_offset(current, resistance),
                f"Ib ({symbol})" if "+" in symbol else f"Ib {symbol}",
                f"{section.name}: {amps(current)} through {ohms(resistance)}",
                "an amplifier with less bias current, or a smaller control with a larger capacitor",
            )
        )
    others = lanes_sharing(board, lane.input_net) - 1 if lane.input_net else 0
    if others > 0:
        current = others * section_bias(lane.first, temperature)
        out.append(
            Term(
                "offset",
                "bias current, inputs that share the source",
                current_offset(current, source),
                "n Ib Rs||Rt",
                f"{amps(current)} of {others} more through {ohms(source)}",
                "an amplifier with less bias current, or more inputs of their own",
            )
        )
    floor = _floor(board, lane, signal)
    if floor > 0.0:
        out.append(
            Term(
                "offset",
                FLOOR,
                floor,
                "swing limit above 0 V - low end of the span",
                f"{lane.second.name}: the swing begins {volts(floor + signal.low)} above 0 V",
                "an amplifier whose output comes nearer to its negative rail, or a span that begins higher",
            )
        )
    leakage = _leakage_current(board, lane)
    if leakage:
        resistance = longest_resistance(board, lane)
        out.append(
            Term(
                "offset",
                "leakage of the glide capacitor",
                current_offset(leakage, resistance),
                "Ileak (Rcontrol + Riso)",
                f"{', '.join(lane.capacitors)}: {amps(leakage)} through {ohms(resistance)}",
                "a film capacitor",
            )
        )
    return tuple(out)


def section_bias(section: Section, temperature: float) -> float:
    """Greatest bias current of a section at a temperature.

    Parameters
    ----------
    section
        An amplifier section.
    temperature
        Of the amplifier. [degC]

    Returns
    -------
    float
        The greatest current at 25 degC, doubled as often as the record says; never less than at 25 degC [A].
    """
    record = section.record
    return bias_at(record.bias_max, max(ROOM, temperature), record.bias_doubling, ROOM)


def _floor(board: Board, lane: Lane, signal: Signal) -> float:
    """How far above the low end of the span an output on a single supply begins [V]; elsewhere 0."""
    if not board.single:
        return 0.0
    return max(0.0, max(section.record.swing_low for _, section in lane.buffers) - signal.low)


def _leakage_current(board: Board, lane: Lane) -> float:
    """Greatest specified leakage of the glide capacitors to 0 V [A]; makers state it at rated voltage."""
    total = 0.0
    for branch in lane.branches:
        currents = []
        for ref in branch.refs:
            record = board.record(ref)
            if not isinstance(record, Capacitor) or not (record.leakage_rate or record.leakage_floor):
                currents.append(0.0)
                continue
            rated = board.rating(ref, "voltage") or record.voltage
            currents.append(
                electrolytic_leakage(
                    record.leakage_rate,
                    board.capacitance(ref).nominal,
                    rated,
                    record.leakage_floor,
                    record.leakage_sum,
                )
            )
        if any(board.partner(ref) for ref in branch.refs):
            # the one that is the wrong way round conducts: only the other one holds the current down
            total += max(currents)
        else:
            total += min(currents)
    return total


def _sum_high(board: Board, refs: Iterable[str]) -> float:
    return sum(board.resistance(ref).high for ref in refs)
