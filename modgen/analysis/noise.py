"""Noise at the output of every lane, with its control at both ends.

What comes before the glide capacitor is filtered by it; what comes behind it is not. Densities are white:
the 1/f noise below some hundred hertz is not in the catalogue. The source is taken as quiet.
"""

from __future__ import annotations

import math
from functools import lru_cache

from modgen.analysis.board import Board, Lane
from modgen.analysis.glide import LaneValues
from modgen.analysis.model import Noise, NoiseTerm
from modgen.analysis.words import ohms
from modgen.formulas.loading import parallel
from modgen.formulas.noise import band_noise, capacitor_noise, johnson_density, shot_density
from modgen.spec.model import Signal

#: what is heard [Hz]
LOW, HIGH = 20.0, 20e3
#: a closed case at rest [K]; 300 K as textbooks reckon
TEMPERATURE = 300.0
#: Five cents from peak to peak are a difference in pitch that is just heard (convention); noise reaches 6.6 times
#: its root mean square from peak to peak, but for a thousandth of the time (common practice).
LIMIT = 5.0 / 1200.0 / 6.6


def noises(board: Board, signal: Signal) -> tuple[Noise, ...]:
    """Noise of every lane at the fast and at the slow end of its control.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    signal
        Source impedance.

    Returns
    -------
    tuple of Noise
        Two of each lane, fast end first.

    Raises
    ------
    InputError
        When a value in a lane is not a number.

    Notes
    -----
    With a range switch the fast end is of the fast range and the slow end of the slow one, the extremes of what is
    filtered; the resistor that keeps the waiting capacitor hangs on the second buffer's output and adds nothing.

    Terms add as squares. Before the glide node: voltage noise of the first buffer, Johnson noise of source,
    terminator and series resistor, and the shot noise of its bias current in them. On it: Johnson noise of
    isolating resistor and control, shot noise of the second buffer's bias current. All of it through the low
    pass of glide resistance and capacitor. Behind it: voltage noise of the second buffer; Johnson noise of the
    output resistor, unless it stands inside the loop, where that of the feedback resistor counts, up to where
    the compensation capacitor takes over.
    """
    return tuple(_noise(board, lane, signal, end) for lane in board.channels for end in ("fast", "slow"))


def _noise(board: Board, lane: Lane, signal: Signal, end: str) -> Noise:
    values = LaneValues.of(board, lane)
    rotation = 0.0 if (end == "fast") == values.rising else 1.0
    glide = values.resistance(rotation)
    capacitance = values.capacitance(0, slow=end == "slow")
    corner = _corner(glide, capacitance)
    source = parallel(signal.source, *(board.resistance(ref).nominal for ref in lane.terminators))
    source += sum(board.resistance(ref).nominal for ref in lane.input_series)
    first, second = lane.first.record, lane.second.record
    rows = [
        ("voltage noise, input buffer", first.noise_density, corner, lane.first.name),
        ("resistors at the input", johnson_density(source, TEMPERATURE), corner, ohms(source)),
        ("bias current, input buffer", shot_density(first.bias_max) * source, corner, lane.first.name),
        ("glide resistance", johnson_density(glide, TEMPERATURE), corner, ohms(glide)),
        ("bias current, output buffer", shot_density(second.bias_max) * glide, corner, lane.second.name),
        ("voltage noise, output buffer", second.noise_density, math.inf, lane.second.name),
    ]
    if lane.inside_loop:
        back = board.resistance(lane.feedback).nominal if lane.feedback else 0.0
        round_it = board.capacitance(lane.compensation).nominal if lane.compensation else 0.0
        rows.append(("feedback resistor", johnson_density(back, TEMPERATURE), _corner(back, round_it), ohms(back)))
    elif lane.output_series:
        most = max(board.resistance(ref).nominal for ref in lane.output_series)
        rows.append(("output resistor", johnson_density(most, TEMPERATURE), math.inf, ohms(most)))
    terms = tuple(NoiseTerm(name, _band(density, edge), source) for name, density, edge, source in rows)
    return Noise(
        channel=lane.channel,
        end=end,
        terms=terms,
        low=LOW,
        high=HIGH,
        capacitor=capacitor_noise(capacitance, TEMPERATURE),
        measured=math.sqrt(math.fsum(term.rms**2 for term in terms)),
        limit=LIMIT,
    )


def _corner(resistance: float, capacitance: float) -> float:
    """Where a resistance and a capacitance have lost half of the power [Hz]."""
    tau = resistance * capacitance
    return 1.0 / (2.0 * math.pi * tau) if tau > 0.0 else math.inf


# Lanes that are built alike share one answer.
@lru_cache(maxsize=256)
def _band(density: float, corner: float) -> float:
    return band_noise(density, LOW, HIGH, corner)
