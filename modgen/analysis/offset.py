"""Offset errors of a lane: what the output shows when it should show 0 V."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass

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
SHARED = "bias current, inputs that share the source"
SHARED_REMEDY = "an amplifier with less bias current, or more inputs of their own"
#: what data sheets state figures at [degC]
ROOM = 25.0


@dataclass(frozen=True)
class _BiasWay:
    """A resistance that the bias current of an amplifier input flows through."""

    place: str
    section: Section
    resistance: float  # greatest [ohm]
    symbol: str
    smaller: str

    def formula(self, current: str) -> str:
        """The drop with a symbol for the current."""
        return f"{current} ({self.symbol})" if "+" in self.symbol else f"{current} {self.symbol}"

    @property
    def remedy(self) -> str:
        """What would reduce it."""
        return f"an amplifier with less bias current, or {self.smaller}"


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
    # an offset may drift either way, so that warmer and colder cost alike
    away = abs(temperature - ROOM)
    for stage, section in lane.buffers:
        record = section.record
        out.append(
            Term(
                "offset",
                f"offset voltage, {stage}",
                record.offset_max + record.offset_drift * away,
                "Vos + drift dT" if away else "Vos",
                f"{section.name}: {volts(record.offset_max)}, {record.offset_drift * 1e6:g} µV/K",
                "an amplifier with less offset",
            )
        )
    for way in _bias_ways(board, lane, signal):
        current = section_bias(way.section, temperature)
        out.append(
            Term(
                "offset",
                f"bias current, {way.place}",
                current_offset(current, way.resistance),
                way.formula("Ib"),
                f"{way.section.name}: {amps(current)} through {ohms(way.resistance)}",
                way.remedy,
            )
        )
    others = _others(board, lane)
    if others:
        current, source = others * section_bias(lane.first, temperature), _source(board, lane, signal)
        out.append(
            Term(
                "offset",
                SHARED,
                current_offset(current, source),
                "n Ib Rs||Rt",
                f"{amps(current)} of {others} more through {ohms(source)}",
                SHARED_REMEDY,
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
                f"{', '.join(lane.slow_capacitors)}: {amps(leakage)} through {ohms(resistance)}",
                "a film capacitor",
            )
        )
    return tuple(out)


def drift_terms(board: Board, lane: Lane, signal: Signal, cold: float, hot: float) -> tuple[Term, ...]:
    """What the offset of one lane moves by between two temperatures.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    lane
        One of its lanes.
    signal
        Source impedance.
    cold, hot
        Ends of the span, of the amplifiers. [degC]

    Returns
    -------
    tuple of Term
        Worst case of each, all counted as positive [V]: once the offset has been tuned out at one temperature of the
        span, it is at most their sum at any other. Without what does not move.

    Raises
    ------
    ValueError
        When the span is upside down.

    Notes
    -----
    Only what the catalogue knows moves: the offset of the amplifiers and bias currents that double. Left out are the
    temperature coefficients of resistors (they cancel in the followers, and what they add to loading errors is some
    hundredths of a cent), the leakage and insulation of capacitors, for which makers state one temperature, and
    the slow rise of a bipolar input's bias current in the cold. Drift of offset is a typical figure on most sheets.
    """
    if cold > hot:
        raise ValueError(f"from {cold:g} degC to {hot:g} degC: the colder end comes first")
    out = []
    for stage, section in lane.buffers:
        drift = section.record.offset_drift
        out.append(
            Term(
                "drift",
                f"offset voltage, {stage}",
                drift * (hot - cold),
                "drift (Thot - Tcold)",
                f"{section.name}: {drift * 1e6:g} µV/K over {hot - cold:g} K",
                "an amplifier with less drift",
            )
        )
    for way in _bias_ways(board, lane, signal):
        low, high = _bias(way.section, cold), _bias(way.section, hot)
        out.append(
            Term(
                "drift",
                f"bias current, {way.place}",
                current_offset(high - low, way.resistance),
                way.formula("dIb"),
                f"{way.section.name}: {amps(low)} at {cold:g} °C, {amps(high)} at {hot:g} °C, "
                f"through {ohms(way.resistance)}",
                way.remedy,
            )
        )
    others = _others(board, lane)
    if others:
        change = others * (_bias(lane.first, hot) - _bias(lane.first, cold))
        source = _source(board, lane, signal)
        out.append(
            Term(
                "drift",
                SHARED,
                current_offset(change, source),
                "n dIb Rs||Rt",
                f"{amps(change)} of {others} more through {ohms(source)}",
                SHARED_REMEDY,
            )
        )
    return tuple(term for term in out if term.worst)


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


def _bias(section: Section, temperature: float) -> float:
    """Greatest bias current at a temperature, in the cold as far below that at 25 degC as it doubles [A]."""
    return bias_at(section.record.bias_max, temperature, section.record.bias_doubling, ROOM)


def _source(board: Board, lane: Lane, signal: Signal) -> float:
    """What the inputs on a socket see: the source beside the terminators [ohm]."""
    return parallel(signal.source, board.least_parallel(lane.terminators))


def _others(board: Board, lane: Lane) -> int:
    """How many more inputs the source of a lane can feed at once."""
    return max(0, lanes_sharing(board, lane.input_net) - 1) if lane.input_net else 0


def _bias_ways(board: Board, lane: Lane, signal: Signal) -> Iterator[_BiasWay]:
    """Every resistance that bias current flows through, at its high end."""
    source = _source(board, lane, signal) + _sum_high(board, lane.input_series)
    yield _BiasWay("input buffer", lane.first, source, "Rs||Rt + Rin", "a smaller resistor before its input")
    control = longest_resistance(board, lane)
    smaller = "a smaller control with a larger capacitor"
    yield _BiasWay("output buffer", lane.second, control, "Rcontrol + Riso", smaller)
    if lane.feedback is not None:
        highest = board.resistance(lane.feedback).high
        yield _BiasWay("feedback resistor", lane.second, highest, "Rfb", "a smaller feedback resistor")


def _floor(board: Board, lane: Lane, signal: Signal) -> float:
    """How far above the low end of the span an output on a single supply begins [V]; elsewhere 0."""
    if not board.single:
        return 0.0
    return max(0.0, max(section.record.swing_low for _, section in lane.buffers) - signal.low)


def _leakage_current(board: Board, lane: Lane) -> float:
    """Greatest specified leakage of the glide capacitors to 0 V [A]; makers state it at rated voltage."""
    total = 0.0
    for branch in lane.slow_branches:
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
