"""Phase margin of both buffers of every lane: into the glide capacitor, and into a cable.

The amplifier has a dominant pole at its gain-bandwidth over its gain and a second one at three times its
gain-bandwidth (common practice: a unity-gain stable part then keeps 72 degrees without a load, as data sheets
show 60 to 75). Its output resistance is taken from half to double the catalogue's figure, since makers state
a typical one or none. Gain-bandwidth is the typical one: all poles of the amplifier move with it.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from functools import lru_cache, partial

from modgen.analysis.board import Board, Lane
from modgen.analysis.glide import LaneValues
from modgen.analysis.model import Stability
from modgen.analysis.parts import Section
from modgen.formulas.stability import loaded_feedback, overshoot, phase_margin, sensed_feedback
from modgen.spec.model import Signal

#: least phase margin [deg]: at 45 a step overshoots by a quarter. Common practice, no source.
LEAST_MARGIN = 45.0
#: second pole of the amplifier over its gain-bandwidth [-]. Common practice, no source.
SECOND_POLE = 3.0
#: output resistance over the catalogue's figure [-]. Common practice, no source.
SPREAD = (0.5, 1.0, 2.0)
#: capacitance of a cable with what it is plugged into [F]: none to 100 m at 100 pF/m. Common practice, no source.
CABLES = (0.0, 100e-12, 500e-12, 1e-9, 2e-9, 5e-9, 10e-9)
#: capacitance of an amplifier's input and its pad [F]. Common practice, no source.
INPUT_CAPACITANCE = 10e-12
#: stands for a link of no resistance where a resistor is reckoned with [ohm]
LINK = 1e-3

Amp = tuple[float, float, float]  # gain, gain-bandwidth, output resistance
Feedback = Callable[[float], complex]


def stabilities(board: Board, signal: Signal) -> tuple[Stability, ...]:
    """Phase margin of the input buffer, then of the output buffer, of every lane.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    signal
        The load of an output.

    Returns
    -------
    tuple of Stability
        Two of each lane, in the order of the lanes.

    Raises
    ------
    InputError
        When a value in a lane is not a number.

    Notes
    -----
    Resistors stand at the low end of their tolerance where they isolate, since less isolation is worse;
    capacitors at their nominal value, which hardly counts at the crossover. Every output of a lane has the
    same cable.

    With a range switch the glide capacitor is that of the fast range: the larger one of the slow range isolates by the
    same resistor and is as good as a short at the crossover. The resistor that keeps the waiting capacitor, ten
    kilohms or so into what is a short at the crossover too, takes some per cent of the second buffer's gain and turns
    no phase; it is not counted.
    """
    out = []
    for lane in board.channels:
        out += [_first(board, lane), _second(board, lane, signal)]
    return tuple(out)


def _amp(section: Section) -> Amp:
    record = section.record
    return record.gain, record.gain_bandwidth, record.output_resistance


def _first(board: Board, lane: Lane) -> Stability:
    values = LaneValues.of(board, lane)
    capacitance = values.capacitance(0)
    series = values.series(-1)
    # both ends of what is left at the fast end of travel; a control that nobody turns stays as it is
    ends = (0.0, values.residual(1)) if values.adjustable else (values.track(-1),)
    branches = tuple((end, ((series + end, capacitance, math.inf),)) for end in dict.fromkeys(ends))
    return _result(
        "input buffer",
        lane,
        lane.first,
        (*lane.isolating, lane.control, *(ref for branch in lane.branches for ref in branch.refs)),
        _worst_loaded(_amp(lane.first), branches),
    )


def _second(board: Board, lane: Lane, signal: Signal) -> Stability:
    amp = _amp(lane.second)
    series = tuple(board.resistance(feed.resistor).low if feed.resistor else 0.0 for feed in lane.feeds)
    if lane.inside_loop:
        feedback = board.resistance(lane.feedback).nominal if lane.feedback else 0.0
        compensation = board.capacitance(lane.compensation).low if lane.compensation else 0.0
        values = (max(series[0], LINK), max(feedback, LINK), compensation, signal.load)
        others = [ref for ref in (lane.feedback, lane.compensation) if ref]
        return _result(
            "output buffer, resistor inside the loop",
            lane,
            lane.second,
            (*lane.output_series, *others),
            _worst_sensed(amp, values),
        )
    branches = tuple((cable, tuple((r, cable, signal.load) for r in series)) for cable in CABLES)
    return _result(
        "output buffer, resistor outside the loop",
        lane,
        lane.second,
        lane.output_series,
        _worst_loaded(amp, branches),
    )


Case = tuple[float, float, float, float]  # phase margin, crossover, load, output resistance


def _result(stage: str, lane: Lane, section: Section, parts: tuple[str, ...], cases: tuple[Case, ...]) -> Stability:
    margin, crossover, load, output_resistance = min(cases)
    sweep: dict[float, float] = {}
    for found, _, at, _ in cases:
        sweep[at] = min(found, sweep.get(at, math.inf))
    return Stability(
        stage=stage,
        channel=lane.channel,
        section=section.name,
        parts=(section.package, *parts),
        load=load,
        output_resistance=output_resistance,
        crossover=crossover,
        overshoot=overshoot(margin),
        measured=margin,
        limit=LEAST_MARGIN,
        sweep=tuple(sorted(sweep.items())),
    )


# Lanes that are built alike share one answer.
@lru_cache(maxsize=256)
def _worst_loaded(
    amp: Amp, loads: tuple[tuple[float, tuple[tuple[float, float, float], ...]], ...]
) -> tuple[Case, ...]:
    return tuple(
        _case(amp, partial(loaded_feedback, output_resistance=ohm, branches=branches), load, ohm)
        for load, branches in loads
        for ohm in _output_resistances(amp)
    )


@lru_cache(maxsize=256)
def _worst_sensed(amp: Amp, values: tuple[float, float, float, float]) -> tuple[Case, ...]:
    series, feedback, compensation, load = values

    def ratio(frequency: float, ohm: float, cable: float) -> complex:
        return sensed_feedback(frequency, ohm, series, feedback, compensation, cable, load, INPUT_CAPACITANCE)

    return tuple(
        _case(amp, partial(ratio, ohm=ohm, cable=cable), cable, ohm)
        for cable in CABLES
        for ohm in _output_resistances(amp)
    )


def _output_resistances(amp: Amp) -> tuple[float, ...]:
    return tuple(dict.fromkeys(factor * amp[2] for factor in SPREAD))


def _case(amp: Amp, feedback: Feedback, load: float, ohm: float) -> Case:
    gain, bandwidth, _ = amp
    crossover, margin = phase_margin(feedback, gain, bandwidth, SECOND_POLE * bandwidth)
    return margin, crossover, load, ohm
