"""How long each lane takes, at its ends and in the middle of the control, and over tolerance.

The lane is one resistance (isolating resistors and control in series) into one capacitance, or with a range
switch into one of two; the time by the spec's measure is the time constant times a factor of
:mod:`modgen.formulas.glide`. The resistor that keeps the waiting capacitor of a range switch at the output's voltage
hangs on the second buffer's output and has no part in the time. Insulation of the
capacitor shortens the time by less than it costs in scale and is counted there (:mod:`modgen.analysis.accuracy`).
"""

from __future__ import annotations

from dataclasses import dataclass

from modgen.analysis.board import Board, Lane
from modgen.analysis.model import ChannelGlide, Interval, Matching, RangeGlide
from modgen.analysis.montecarlo import BoardDraws, draw_boards
from modgen.catalogue.records import Control
from modgen.formulas.glide import taper_resistance, time_factor
from modgen.formulas.tolerance import wilson_interval
from modgen.spec.model import Glide

#: where channels of one board are compared: both ends and the middle of the travel [-]
COMPARED = (0.0, 0.5, 1.0)

Tolerant = tuple[float, float]  # value, tolerance as a fraction


@dataclass(frozen=True)
class LaneValues:
    """The values that decide a lane's time; equal for lanes that are built alike.

    ``end`` is the greatest resistance left at the end of travel, given as (ohm, share of the total). ``branches``
    are those of the fast range, or of the only one; in the slow one the last ``dropped`` of them give way to ``added``.
    """

    isolating: tuple[Tolerant, ...]
    control: Tolerant
    end: tuple[float, float]
    taper: str
    middle: float
    rising: bool
    adjustable: bool
    branches: tuple[tuple[Tolerant, ...], ...]
    added: tuple[tuple[Tolerant, ...], ...] = ()
    dropped: int = 0

    @classmethod
    def of(cls, board: Board, lane: Lane) -> LaneValues:
        """Read a lane's values from the netlist, the control's end resistance and law from its record."""
        record = board.record(lane.control)
        added = [branch for branch in lane.slow_branches if branch not in lane.branches]
        return cls(
            isolating=tuple(_tolerant(board, ref) for ref in lane.isolating),
            control=_tolerant(board, lane.control),
            end=(record.end_resistance, record.end_share) if isinstance(record, Control) else (0.0, 0.0),
            taper=record.taper if isinstance(record, Control) else "linear",
            middle=record.middle if isinstance(record, Control) else 0.5,
            rising=lane.wiring.rising,
            adjustable=lane.wiring.adjustable,
            branches=tuple(tuple(_tolerant(board, ref) for ref in b.refs) for b in lane.branches),
            added=tuple(tuple(_tolerant(board, ref) for ref in b.refs) for b in added),
            dropped=sum(branch not in lane.slow_branches for branch in lane.branches),
        )

    @property
    def ranged(self) -> bool:
        """Whether a switch gives it two ranges."""
        return bool(self.added)

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

    def capacitance(self, sign: int, slow: bool = False) -> float:
        """Parallel branches of capacitors in series, in the fast or the slow range [F]."""
        total = 0.0
        for branch in (*self.branches[: len(self.branches) - self.dropped], *self.added) if slow else self.branches:
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
        return self.series(sign) + max(self.residual(sign), self.track_share(rotation) * self.track(sign))

    def track_share(self, rotation: float) -> float:
        """Share of the control's track that is in the way at a rotation, end resistance apart [-]."""
        share = float(taper_resistance(self.taper, self.middle, rotation))
        return share if self.rising else 1.0 - share

    def time_constant(self, rotation: float, sign: int = 0, slow: bool = False) -> float:
        """Time constant at a rotation, in the fast or the slow range; corners take every part to the same side [s]."""
        return self.resistance(rotation, sign) * self.capacitance(sign, slow)

    def interval(self, rotation: float, factor: float, slow: bool = False) -> Interval:
        """Time at a rotation, in the fast or the slow range, with its worst-case corners [s]."""
        low, nominal, high = (factor * self.time_constant(rotation, sign, slow) for sign in (-1, 0, 1))
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


def time_at(board: Board, lane: Lane, glide: Glide, rotation: float, slow: bool = False) -> Interval:
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
    slow
        Whether a range switch stands at its slow range; without one there is but one range. [-]

    Returns
    -------
    Interval
        Nominal and worst-case corners [s].
    """
    return LaneValues.of(board, lane).interval(rotation, factor_of(glide), slow)


def range_glides(lane: Lane, values: LaneValues, factor: float) -> tuple[RangeGlide, ...]:
    """Shortest, middle and longest time in each range of a lane.

    Parameters
    ----------
    lane
        One of a board's lanes.
    values
        Its values.
    factor
        Time over time constant. [-]

    Returns
    -------
    tuple of RangeGlide
        Fast, then slow; none without a range switch.
    """
    if lane.switch is None:
        return ()
    return tuple(
        RangeGlide(
            name=name,
            position=position,
            shortest=values.interval(values.fastest, factor, slow),
            middle=values.interval(0.5, factor, slow),
            longest=values.interval(1 - values.fastest, factor, slow),
        )
        for name, position, slow in (("fast", lane.switch.fast, False), ("slow", lane.switch.slow, True))
    )


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
        By channel. Lanes of equal values are counted together. With a range switch the shortest time is that of the
        fast range, middle and longest are those of the slow one.

    Raises
    ------
    InputError
        When a value in a lane is not a number above zero.
    """
    factor = factor_of(glide)
    draws = board_draws(board, glide)
    out = []
    for lane, (inside, drawn) in zip(board.channels, draws.channels_inside if draws else (), strict=True):
        values = LaneValues.of(board, lane)
        low, high = wilson_interval(inside, drawn)
        out.append(
            ChannelGlide(
                channel=lane.channel,
                isolating="+".join(lane.isolating),
                control=lane.control,
                capacitors=lane.capacitors,
                shortest=values.interval(values.fastest, factor),
                middle=values.interval(0.5, factor, slow=True),
                longest=values.interval(1 - values.fastest, factor, slow=True),
                time_constant_longest=values.time_constant(1 - values.fastest, slow=True),
                inside=inside / drawn,
                inside_low=float(low),
                inside_high=float(high),
                boards=draws.boards if draws else 0,
                ranges=range_glides(lane, values, factor),
            )
        )
    return tuple(out)


def boards_inside(board: Board, glide: Glide) -> tuple[float, float, float]:
    """Share of boards on which every channel covers the asked range.

    Parameters
    ----------
    board
        The netlist seen as electronics. Without a lane it has a share of nothing.
    glide
        The range that is asked for, and how it is measured.

    Returns
    -------
    tuple of float
        Share of the boards that were drawn, and its 95 % Wilson interval. [-]

    Raises
    ------
    InputError
        When a value in a lane is not a number above zero.

    Notes
    -----
    The parts of a board are drawn independently. Real parts of one lot are alike, so the true share lies between
    this and the share of the worst channel.
    """
    draws = board_draws(board, glide)
    if draws is None:
        return 0.0, 0.0, 0.0
    low, high = wilson_interval(draws.inside, draws.boards)
    return draws.inside / draws.boards, float(low), float(high)


def matchings(board: Board, glide: Glide) -> tuple[Matching, ...]:
    """How far apart the channels of one board are with their controls at the same rotation.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    glide
        How the time is measured; every measure gives the same ratios.

    Returns
    -------
    tuple of Matching
        At both ends and the middle of the travel, by rotation. None for a board of one channel, nor at a rotation
        at which a channel may take no time at all.

    Raises
    ------
    InputError
        When a value in a lane is not a number above zero.

    Notes
    -----
    From the tolerances of resistors, capacitors and controls and from the resistance left at the end of travel. With
    range switches the counter-clockwise end is compared in the fast range and all else in the slow one.
    How far a control's law is off from its neighbour's is not in the catalogue, since makers do not state it for
    single controls; in the middle of the travel it comes on top.
    """
    draws = board_draws(board, glide)
    if draws is None:
        return ()
    lanes = [LaneValues.of(board, lane) for lane in board.channels]
    out = []
    for spread in draws.spreads:
        times = [lane.interval(spread.rotation, 1.0, slow=spread.rotation > 0.0) for lane in lanes]
        nominal = [time.nominal for time in times]
        out.append(
            Matching(
                rotation=spread.rotation,
                nominal=max(nominal) / min(nominal) - 1,
                half=spread.half,
                most=spread.most,
                worst=max(a.high / b.low for i, a in enumerate(times) for j, b in enumerate(times) if i != j) - 1,
                boards=draws.boards,
            )
        )
    return tuple(out)


def board_draws(board: Board, glide: Glide) -> BoardDraws | None:
    """The boards that shares and matching are counted on; None when there is no lane.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    glide
        The range that is asked for, and how it is measured.

    Returns
    -------
    BoardDraws or None
        Boards of equal values and range are drawn once.

    Raises
    ------
    InputError
        When a value in a lane is not a number above zero.
    """
    lanes = tuple(LaneValues.of(board, lane) for lane in board.channels)
    if not lanes:
        return None
    return draw_boards(lanes, factor_of(glide), glide.shortest, glide.longest, COMPARED)
