"""How long each lane takes, at its ends and in the middle of the control, and over tolerance.

The lane is one resistance (isolating resistors and control in series) into one capacitance; the time by
the spec's measure is the time constant times a factor of :mod:`modgen.formulas.glide`. Insulation of the
capacitor shortens the time by less than it costs in scale and is counted there (:mod:`modgen.analysis.accuracy`).
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING

from modgen.analysis.board import Board, Lane
from modgen.analysis.model import ChannelGlide, Interval
from modgen.catalogue.records import Control
from modgen.formulas.glide import taper_resistance, time_factor
from modgen.formulas.tolerance import wilson_interval
from modgen.spec.model import Glide

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

#: boards drawn per distinct set of values; a share near 95 % is then known to 0.1 %
BOARDS = 200_000
#: fixed, so that the same netlist gives the same share on every run
SEED = 20_240_229

Tolerant = tuple[float, float]  # value, tolerance as a fraction


@dataclass(frozen=True)
class LaneValues:
    """The values that decide a lane's time; equal for lanes that are built alike.

    ``end`` is the greatest resistance left at the end of travel, given as (ohm, share of the total).
    """

    isolating: tuple[Tolerant, ...]
    control: Tolerant
    end: tuple[float, float]
    taper: str
    middle: float
    rising: bool
    adjustable: bool
    branches: tuple[tuple[Tolerant, ...], ...]

    @classmethod
    def of(cls, board: Board, lane: Lane) -> LaneValues:
        """Read a lane's values from the netlist, the control's end resistance and law from its record."""
        record = board.record(lane.control)
        return cls(
            isolating=tuple(_tolerant(board, ref) for ref in lane.isolating),
            control=_tolerant(board, lane.control),
            end=(record.end_resistance, record.end_share) if isinstance(record, Control) else (0.0, 0.0),
            taper=record.taper if isinstance(record, Control) else "linear",
            middle=record.middle if isinstance(record, Control) else 0.5,
            rising=lane.wiring.rising,
            adjustable=lane.wiring.adjustable,
            branches=tuple(tuple(_tolerant(board, ref) for ref in b.refs) for b in lane.branches),
        )

    def series(self, sign: int) -> float:
        """Isolating resistance: nominal (0), at its low (-1) or high (1) end [ohm]."""
        return sum(value * (1 + sign * tolerance) for value, tolerance in self.isolating)

    def track(self, sign: int) -> float:
        """Whole resistance of the control [ohm]."""
        return self.control[0] * (1 + sign * self.control[1])

    def residual(self, sign: int) -> float:
        """What the control leaves at its end of travel; nothing on the low side, where it is not guaranteed [ohm]."""
        if sign < 0:
            return 0.0
        return max(self.end[0], self.end[1] * self.track(sign))

    def capacitance(self, sign: int) -> float:
        """Parallel branches of capacitors in series [F]."""
        total = 0.0
        for branch in self.branches:
            total += 1 / sum(1 / (value * (1 + sign * tolerance)) for value, tolerance in branch)
        return total

    def resistance(self, rotation: float, sign: int = 0) -> float:
        """Resistance of the lane at a rotation of the control.

        Parameters
        ----------
        rotation
            Share of the travel, 0 counter-clockwise to 1 clockwise. [-]
        sign
            0 nominal, -1 and 1 the ends of the tolerance. [-]

        Returns
        -------
        float
            Isolating resistance plus control [ohm].
        """
        if not self.adjustable:
            return self.series(sign) + self.track(sign)
        share = float(taper_resistance(self.taper, self.middle, rotation))
        if not self.rising:
            share = 1 - share
        return self.series(sign) + max(self.residual(sign), share * self.track(sign))

    def time_constant(self, rotation: float, sign: int = 0) -> float:
        """Time constant at a rotation; the corners take every part to the same side [s]."""
        return self.resistance(rotation, sign) * self.capacitance(sign)

    def interval(self, rotation: float, factor: float) -> Interval:
        """Time at a rotation with its worst-case corners [s]."""
        low, nominal, high = (factor * self.time_constant(rotation, sign) for sign in (-1, 0, 1))
        return Interval(nominal, low, high)

    @property
    def fastest(self) -> float:
        """The rotation that gives the shortest time [-]."""
        return 0.0 if self.rising else 1.0


def _tolerant(board: Board, ref: str) -> Tolerant:
    found = board.capacitance(ref) if board.kind(ref) == "capacitor" else board.resistance(ref)
    return found.nominal, board.rating(ref, "tolerance") or 0.0


def factor_of(glide: Glide) -> float:
    """Time by the spec's measure over the time constant [-]."""
    return float(time_factor(glide.measure, glide.step, glide.within))


def time_at(board: Board, lane: Lane, glide: Glide, rotation: float) -> Interval:
    """Time of a lane at a rotation of its control.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    lane
        One of its lanes.
    glide
        How the time is measured.
    rotation
        Share of the travel, 0 counter-clockwise to 1 clockwise. [-]

    Returns
    -------
    Interval
        Nominal and worst-case corners [s].
    """
    return LaneValues.of(board, lane).interval(rotation, factor_of(glide))


def longest_resistance(board: Board, lane: Lane) -> float:
    """Greatest resistance between the first buffer and the glide capacitor, control at its slow end [ohm]."""
    values = LaneValues.of(board, lane)
    return values.resistance(1 - values.fastest, 1)


def channel_glides(board: Board, glide: Glide) -> tuple[ChannelGlide, ...]:
    """Shortest, middle and longest time of every lane, with the share of boards that cover the range.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    glide
        The range that is asked for, and how it is measured.

    Returns
    -------
    tuple of ChannelGlide
        By channel. Lanes of equal values are drawn once.

    Raises
    ------
    InputError
        When a value in a lane is not a number above zero.
    """
    factor = factor_of(glide)
    out = []
    for lane in board.channels:
        values = LaneValues.of(board, lane)
        inside = covering(values, factor, glide.shortest, glide.longest)
        low, high = wilson_interval(inside, BOARDS)
        out.append(
            ChannelGlide(
                channel=lane.channel,
                isolating="+".join(lane.isolating),
                control=lane.control,
                capacitors=lane.capacitors,
                shortest=values.interval(values.fastest, factor),
                middle=values.interval(0.5, factor),
                longest=values.interval(1 - values.fastest, factor),
                time_constant_longest=values.time_constant(1 - values.fastest),
                inside=inside / BOARDS,
                inside_low=float(low),
                inside_high=float(high),
                boards=BOARDS,
            )
        )
    return tuple(out)


def boards_inside(glides: Sequence[ChannelGlide]) -> tuple[float, float, float]:
    """Share of boards on which every channel covers the asked range.

    Parameters
    ----------
    glides
        The channels of one board. None makes a share of nothing.

    Returns
    -------
    tuple of float
        Share, and the bounds of its 95 % interval. [-]

    Notes
    -----
    The product over the channels: their parts are drawn independently. Real parts of one lot are alike, so the
    true share lies between this and the share of the worst channel. The bounds are the products of the
    channels' Wilson bounds.

    Examples
    --------
    Four channels of which 43.7 % each cover it: 3.6 % of boards.

    >>> round(100 * 0.437**4, 1)
    3.6
    """
    if not glides:
        return 0.0, 0.0, 0.0
    return (
        math.prod(glide.inside for glide in glides),
        math.prod(glide.inside_low for glide in glides),
        math.prod(glide.inside_high for glide in glides),
    )


@lru_cache(maxsize=256)
def covering(values: LaneValues, factor: float, shortest: float, longest: float, boards: int = BOARDS) -> int:
    """Boards out of ``boards`` on which the control covers a whole range.

    Parameters
    ----------
    values
        The lane.
    factor
        Time over time constant. [-]
    shortest, longest
        The range that is asked for. [s]
    boards
        How many are drawn. [-]

    Returns
    -------
    int
        Boards whose shortest time is at most ``shortest`` and whose longest is at least ``longest``.

    Notes
    -----
    Resistances and capacitances are drawn uniformly within tolerance, the resistance left at the end of
    travel uniformly from nothing to its guaranteed greatest. Real lots are narrower and off centre: the
    share is for comparing designs, the corners are for promising. Numbers come from the raw stream of
    PCG64, which NumPy keeps the same over its versions; its distributions may change.
    """
    import numpy as np

    generator = np.random.PCG64(SEED)

    def uniform() -> NDArray[np.float64]:
        return (generator.random_raw(boards) >> np.uint64(11)).astype(np.float64) * 2.0**-53

    def spread(part: Tolerant) -> NDArray[np.float64] | float:
        value, tolerance = part
        return value * (1 + tolerance * (2 * uniform() - 1)) if tolerance else value

    series = _total([spread(part) for part in values.isolating])
    track = spread(values.control)
    capacitance = _total([1 / _total([1 / spread(part) for part in branch]) for branch in values.branches])
    least: NDArray[np.float64] | float
    if values.adjustable:
        least = uniform() * np.maximum(values.end[0], values.end[1] * track)
        # a control without end resistance still cannot leave more than all of it
        least = np.minimum(least, track)
    else:
        least = track
    covers = (factor * capacitance * (series + least) <= shortest) & (
        factor * capacitance * (series + track) >= longest
    )
    return int(np.count_nonzero(np.broadcast_to(covers, (boards,))))


def _total(
    parts: Sequence[NDArray[np.float64] | float],
) -> NDArray[np.float64] | float:
    out: NDArray[np.float64] | float = 0.0
    for part in parts:
        out = out + part
    return out
