"""Scale and offset of a lane, term by term.

Kept apart because a constant shift can be tuned out and a scale error cannot. Every term is the
worst case of its parts; the worst lane of the board is the one that is reported.
"""

from __future__ import annotations

import math
from collections.abc import Iterable

from modgen.analysis.board import Board, Lane
from modgen.analysis.glide import LaneValues
from modgen.analysis.model import AccuracyBudget, Term
from modgen.analysis.parts import Section, reference_order
from modgen.catalogue.records import Capacitor
from modgen.spec.model import Accuracy, Signal

#: inside of a closed case on a warm day [degC]
HOT = 65.0
#: what data sheets state figures at [degC]
ROOM = 25.0


def accuracy_budget(board: Board, signal: Signal, accuracy: Accuracy) -> AccuracyBudget:
    """Scale and offset of the worst lane against the budgets.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    signal
        Source, load and span.
    accuracy
        The budgets.

    Returns
    -------
    AccuracyBudget
        Scale terms of the lane with the greatest scale error, offset terms of the lane with the greatest
        offset (the same lane unless lanes differ). No terms when the board has no lane.

    Raises
    ------
    InputError
        When a value in a lane is not a number.

    Notes
    -----
    ``offset_hot`` is at 65 degC: bias currents doubled as often as the amplifier's record says, offsets
    moved by the drift over 40 K. The leakage of capacitors is taken as it is at room temperature, since
    makers state no other limit.
    """
    scale: tuple[Term, ...] = ()
    offset: tuple[Term, ...] = ()
    hot = 0.0
    for lane in board.channels:
        found = scale_terms(board, lane, signal)
        if _sum(found) > _sum(scale) or not scale:
            scale = found
        found = offset_terms(board, lane, signal)
        if _sum(found) > _sum(offset) or not offset:
            offset = found
        hot = max(hot, _sum(offset_terms(board, lane, signal, HOT)))
    return AccuracyBudget(
        terms=scale + offset,
        scale_worst=_sum(scale),
        scale_rss=_rss(scale),
        scale_budget=accuracy.scale,
        offset_worst=_sum(offset),
        offset_rss=_rss(offset),
        offset_budget=accuracy.offset,
        offset_hot=hot,
        hot=HOT,
    )


def _sum(terms: Iterable[Term]) -> float:
    return math.fsum(term.worst for term in terms)


def _rss(terms: Iterable[Term]) -> float:
    return math.sqrt(math.fsum(term.worst**2 for term in terms))


def terminators_seen(board: Board, net: str) -> tuple[str, ...]:
    """Terminators that a source plugged into a socket drives.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    net
        The tip net of the socket.

    Returns
    -------
    tuple of str
        Resistors to 0 V on that net and on every net that the switched contacts of empty sockets join to
        it. With inputs normalled in a chain these are the terminators of every input down the chain.
    """
    nets, queue = {net}, [net]
    while queue:
        at = queue.pop()
        for jack in board.jacks:
            # the socket's own plug opens its switch, so the signal only runs from switch to tip
            if jack.switch == at and jack.tip and jack.tip not in nets and jack.tip != board.ground:
                nets.add(jack.tip)
                queue.append(jack.tip)
    refs = {ref for name in nets for ref in board.ties(name, board.ground, "resistor")}
    return tuple(sorted(refs, key=reference_order))


def scale_terms(board: Board, lane: Lane, signal: Signal) -> tuple[Term, ...]:
    """Scale errors of one lane, each a fraction of the signal.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    lane
        One of its lanes.
    signal
        Source and load impedance.

    Returns
    -------
    tuple of Term
        Worst case of each, all counted as positive [-].
    """
    out = [_source_loading(board, lane, signal)]
    for stage, section in _buffers(lane):
        record = section.record
        out.append(
            Term(
                "scale",
                f"common-mode rejection, {stage}",
                1 / record.cmrr,
                "1/CMRR",
                f"{section.name}: {20 * math.log10(record.cmrr):.0f} dB",
                "an amplifier with more common-mode rejection",
            )
        )
        out.append(
            Term(
                "scale",
                f"open-loop gain, {stage}",
                1 / (1 + record.gain),
                "1/(1 + A)",
                f"{section.name}: {record.gain / 1e3:g} V/mV",
                "an amplifier with more gain",
            )
        )
    out.append(_output_loading(board, lane, signal))
    insulation = _insulation(board, lane)
    if insulation is not None:
        out.append(insulation)
    return tuple(out)


def _buffers(lane: Lane) -> tuple[tuple[str, Section], tuple[str, Section]]:
    return ("input buffer", lane.first), ("output buffer", lane.second)


def _source_loading(board: Board, lane: Lane, signal: Signal) -> Term:
    # the socket that feeds the lane may itself be fed through the chain: the source then drives more terminators
    nets = _upstream(board, lane.input_net) if lane.input_net else ()
    worst, seen = 0.0, tuple[str, ...]()
    for net in nets:
        refs = terminators_seen(board, net)
        fraction = _loading(signal.source, _parallel(board, refs))
        if fraction > worst:
            worst, seen = fraction, refs
    return Term(
        "scale",
        "source into terminator",
        worst,
        "Rs/(Rs + Rt)",
        f"{signal.source:g} ohm into {', '.join(seen) or 'no terminator'}",
        "larger terminators, or ground normalling instead of a chain",
    )


def _upstream(board: Board, net: str) -> tuple[str, ...]:
    """A socket net and every socket net that reaches it through switched contacts."""
    nets, queue = [net], [net]
    while queue:
        at = queue.pop()
        for jack in board.jacks:
            if jack.tip != at or not jack.switch or jack.switch in nets or jack.switch in board.supply_nets:
                continue
            nets.append(jack.switch)
            queue.append(jack.switch)
    return tuple(nets)


def _parallel(board: Board, refs: Iterable[str]) -> float:
    """Least resistance of resistors in parallel [ohm]; infinite for none."""
    lows = [board.resistance(ref).low for ref in refs]
    if any(low <= 0 for low in lows):
        return 0.0
    return 1 / sum(1 / low for low in lows) if lows else math.inf


def _loading(source: float, load: float) -> float:
    if math.isinf(load) or source == 0:
        return 0.0
    return source / (source + load)


def _output_loading(board: Board, lane: Lane, signal: Signal) -> Term:
    highest = max((board.resistance(ref).high for ref in lane.output_series), default=0.0)
    if lane.inside_loop:
        record = lane.second.record
        inside = (highest + record.output_resistance) / signal.load / record.gain
        return Term(
            "scale",
            "output resistor into load",
            inside,
            "(R + Ro)/(RL A)",
            f"{', '.join(lane.output_series)} inside the loop of {lane.second.name}, into {signal.load:g} ohm",
            "an amplifier with more gain",
        )
    return Term(
        "scale",
        "output resistor into load",
        _loading(highest, signal.load),
        "R/(R + RL)",
        f"{', '.join(lane.output_series) or 'no resistor'} into {signal.load:g} ohm",
        "the output resistor inside the feedback loop, or a smaller one",
    )


def _insulation(board: Board, lane: Lane) -> Term | None:
    """The glide resistance into the insulation of the capacitor; None where makers state leakage instead."""
    conductance = 0.0
    for branch in lane.branches:
        resistances = [_insulation_resistance(board, ref) for ref in branch.refs]
        if all(r is not None for r in resistances):
            conductance += 1 / sum(r for r in resistances if r is not None)
    if not conductance:
        return None
    resistance = _longest_resistance(board, lane)
    return Term(
        "scale",
        "insulation of the glide capacitor",
        _loading(resistance, 1 / conductance),
        "R/(R + Rins)",
        f"{', '.join(lane.capacitors)}: {1 / conductance / 1e9:.3g} Gohm behind {resistance / 1e6:.3g} Mohm",
        "a dielectric with a longer insulation time constant, or a shorter longest glide",
    )


def _insulation_resistance(board: Board, ref: str) -> float | None:
    record = board.record(ref)
    if not isinstance(record, Capacitor):
        return None
    bounds = []
    if record.insulation_resistance:
        bounds.append(record.insulation_resistance)
    if record.insulation_time:
        # by the value that the netlist gives, which need not be the record's
        bounds.append(record.insulation_time / board.capacitance(ref).nominal)
    return min(bounds) if bounds else None


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
            charge = record.leakage_rate * board.capacitance(ref).nominal * rated
            currents.append(
                charge + record.leakage_floor if record.leakage_sum else max(charge, record.leakage_floor)
            )
        if any(board.partner(ref) for ref in branch.refs):
            # the one that is the wrong way round conducts: only the other one holds the current down
            total += max(currents)
        else:
            total += min(currents)
    return total


def _longest_resistance(board: Board, lane: Lane) -> float:
    values = LaneValues.of(board, lane)
    return values.resistance(1 - values.fastest, 1)


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
    for stage, section in _buffers(lane):
        record = section.record
        out.append(
            Term(
                "offset",
                f"offset voltage, {stage}",
                record.offset_max + record.offset_drift * rise,
                "Vos + drift dT" if rise else "Vos",
                f"{section.name}: {record.offset_max * 1e3:g} mV, {record.offset_drift * 1e6:g} uV/K",
                "an amplifier with less offset",
            )
        )
    source = _parallel(board, lane.terminators)
    source = signal.source if math.isinf(source) else _both(signal.source, source)
    resistances = [
        ("input buffer", lane.first, source + _sum_high(board, lane.input_series), "Rs||Rt + Rin"),
        ("output buffer", lane.second, _longest_resistance(board, lane), "Rcontrol + Riso"),
    ]
    if lane.feedback is not None:
        highest = board.resistance(lane.feedback).high
        resistances.append(("feedback resistor", lane.second, highest, "Rfb"))
    for place, section, resistance, symbol in resistances:
        current = bias_at(section, temperature)
        out.append(
            Term(
                "offset",
                f"bias current, {place}",
                current * resistance,
                f"Ib ({symbol})" if "+" in symbol else f"Ib {symbol}",
                f"{section.name}: {current * 1e9:.3g} nA through {resistance:.4g} ohm",
                "an amplifier with less bias current, or a smaller control with a larger capacitor",
            )
        )
    leakage = _leakage_current(board, lane)
    if leakage:
        resistance = _longest_resistance(board, lane)
        out.append(
            Term(
                "offset",
                "leakage of the glide capacitor",
                leakage * resistance,
                "Ileak (Rcontrol + Riso)",
                f"{', '.join(lane.capacitors)}: {leakage * 1e6:.3g} uA through {resistance:.4g} ohm",
                "a film capacitor",
            )
        )
    return tuple(out)


def bias_at(section: Section, temperature: float) -> float:
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
    if not record.bias_doubling:
        return record.bias_max
    return record.bias_max * 2.0 ** (max(0.0, temperature - ROOM) / record.bias_doubling)


def _both(one: float, two: float) -> float:
    return one * two / (one + two) if one + two else 0.0


def _sum_high(board: Board, refs: Iterable[str]) -> float:
    return sum(board.resistance(ref).high for ref in refs)
