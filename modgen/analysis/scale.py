"""Scale errors of a lane: what a volt at the input loses on its way to the output."""

from __future__ import annotations

import math

from modgen.analysis.board import Board, Lane
from modgen.analysis.feeding import heads, terminators_seen
from modgen.analysis.glide import longest_resistance
from modgen.analysis.model import Term
from modgen.analysis.words import ohms
from modgen.catalogue.records import Capacitor
from modgen.formulas.amplifier import common_mode_error, follower_gain_error
from modgen.formulas.leakage import insulation_error, insulation_resistance
from modgen.formulas.loading import loading_error
from modgen.spec.model import Signal


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
    for stage, section in lane.buffers:
        record = section.record
        out.append(
            Term(
                "scale",
                f"common-mode rejection, {stage}",
                common_mode_error(record.cmrr),
                "1/CMRR",
                f"{section.name}: {20 * math.log10(record.cmrr):.0f} dB",
                "an amplifier with more common-mode rejection",
            )
        )
        out.append(
            Term(
                "scale",
                f"open-loop gain, {stage}",
                follower_gain_error(record.gain),
                "1/(1 + A)",
                f"{section.name}: {record.gain / 1e3:.3g} V/mV",
                "an amplifier with more gain",
            )
        )
    out.append(_output_loading(board, lane, signal))
    insulation = _insulation(board, lane)
    if insulation is not None:
        out.append(insulation)
    return tuple(out)


def _source_loading(board: Board, lane: Lane, signal: Signal) -> Term:
    # the socket that feeds the lane may itself be fed through the chain: the source then drives more terminators
    nets = heads(board, lane.input_net) if lane.input_net else ()
    worst, seen = 0.0, tuple[str, ...]()
    for net in nets:
        refs = terminators_seen(board, net)
        fraction = _loading(signal.source, board.least_parallel(refs))
        if fraction > worst:
            worst, seen = fraction, refs
    return Term(
        "scale",
        "source into terminator",
        worst,
        "Rs/(Rs + Rt)",
        f"{ohms(signal.source)} into {', '.join(seen) or 'no terminator'}",
        "larger terminators, or ground normalling instead of a chain",
    )


def _loading(source: float, load: float) -> float:
    # a source into a short loses all of it, which the formula leaves out
    return 1.0 if load == 0.0 else loading_error(source, load)


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
            f"{', '.join(lane.output_series)} inside the loop of {lane.second.name}, into {ohms(signal.load)}",
            "an amplifier with more gain",
        )
    return Term(
        "scale",
        "output resistor into load",
        _loading(highest, signal.load),
        "R/(R + RL)",
        f"{', '.join(lane.output_series) or 'no resistor'} into {ohms(signal.load)}",
        "the output resistor inside the feedback loop, or a smaller one",
    )


def _insulation(board: Board, lane: Lane) -> Term | None:
    """The glide resistance into the insulation of the capacitor; None where makers state leakage instead."""
    # the slow range has the most capacitance, and so the least insulation
    conductance = 0.0
    for branch in lane.slow_branches:
        resistances = [_insulation_resistance(board, ref) for ref in branch.refs]
        if all(r is not None for r in resistances):
            conductance += 1 / sum(r for r in resistances if r is not None)
    if not conductance:
        return None
    resistance = longest_resistance(board, lane)
    return Term(
        "scale",
        "insulation of the glide capacitor",
        insulation_error(resistance, 1 / conductance),
        "R/(R + Rins)",
        f"{', '.join(lane.slow_capacitors)}: {ohms(1 / conductance)} behind {ohms(resistance)}",
        "a dielectric with a longer insulation time constant, or a shorter longest glide",
    )


def _insulation_resistance(board: Board, ref: str) -> float | None:
    record = board.record(ref)
    if not isinstance(record, Capacitor):
        return None
    # by the value that the netlist gives, which need not be the record's
    found = insulation_resistance(board.capacitance(ref).nominal, record.insulation_resistance, record.insulation_time)
    return None if math.isinf(found) else found
