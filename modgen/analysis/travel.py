"""Glide time against the rotation of a control, for its own taper and for others, and how finely it can be set.

A range of several decades on one control stands or falls with the taper: on a linear one the fast decade is a
sliver at the end of the travel.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from modgen.analysis.board import Board, Lane
from modgen.analysis.glide import LaneValues, factor_of
from modgen.analysis.model import Travel, TravelPoint
from modgen.spec.model import Glide

#: where a control's scale is usually marked: 0 to 10
POSITIONS = 11
TAPERS = ("linear", "log", "reverse-log")
#: what a log control has at half travel, where nothing else is known (common practice, "15A") [-]
CUSTOMARY_MIDDLE = 0.15
#: halvings that find a rotation to within the last digit of a float
_HALVINGS = 60


def travel(
    board: Board, lane: Lane, glide: Glide, positions: int = POSITIONS, taper: str = "", slow: bool = False
) -> Travel:
    """Time of a lane at evenly spaced rotations, with its tolerance band, and how finely it can be set.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    lane
        One of its lanes.
    glide
        The range that is asked for, and how the time is measured.
    positions
        How many rotations, both ends among them; at least two. [-]
    taper
        ``linear``, ``log`` or ``reverse-log`` to see what another control of the same resistance would do; the
        control's own when empty. [-]
    slow
        Whether a range switch stands at its slow range; without one there is but one range. [-]

    Returns
    -------
    Travel
        From counter-clockwise to clockwise.

    Raises
    ------
    ValueError
        When there are fewer than two positions, or no such taper.
    InputError
        When a value in the lane is not a number above zero.

    Notes
    -----
    The band is that of the worst-case corners: resistors, control, capacitors and end resistance, every part to the
    same side. How closely a control follows its law is not in it; makers state it for half travel at best, and real
    tracks are made of two or three straight pieces that stray from the law by some 20 %.

    Examples
    --------
    From 5 ms to 2 s on 1 Mohm and 1 uF a linear control has 2 % of its travel for 5 ms to 50 ms: the time rises
    by 2.2 s over the whole of it, and 45 ms of 2.2 s is 2 %.

    >>> round(100 * 45e-3 / 2.2)
    2
    """
    if positions < 2:
        raise ValueError(f"{positions} positions: a travel has two ends")
    values = LaneValues.of(board, lane)
    if taper:
        values = _with_taper(values, taper)
    factor = factor_of(glide)

    def time(rotation: float) -> float:
        # from the fast end, whichever way the control is wired
        return factor * values.time_constant(rotation if values.rising else 1.0 - rotation, slow=slow)

    decade = min(10 * glide.shortest, glide.longest)
    below, past = _share_under(time, glide.shortest, reached=False), _share_under(time, glide.longest, reached=True)
    return Travel(
        channel=lane.channel,
        control=lane.control,
        taper=values.taper,
        points=tuple(
            TravelPoint(at, values.interval(at, factor, slow)) for at in (n / (positions - 1) for n in range(positions))
        ),
        asked=max(0.0, past - below),
        lowest_decade=max(0.0, _share_under(time, decade, reached=True) - below),
        faster=below,
        slower=1.0 - past,
        range=("slow" if slow else "fast") if values.ranged else "",
    )


def _of_ranges(board: Board, lane: Lane, glide: Glide, taper: str = "") -> tuple[Travel, ...]:
    """The travel in the fast range, and with a range switch in the slow one."""
    return tuple(
        travel(board, lane, glide, taper=taper, slow=slow) for slow in ((False, True) if lane.switch else (False,))
    )


def travels(board: Board, glide: Glide) -> tuple[Travel, ...]:
    """Time against rotation of every channel, at the positions of a scale from 0 to 10.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    glide
        The range that is asked for, and how the time is measured.

    Returns
    -------
    tuple of Travel
        By channel; with a range switch the fast range of each, then its slow one.

    Raises
    ------
    InputError
        When a value in a lane is not a number above zero.
    """
    return tuple(found for lane in board.channels for found in _of_ranges(board, lane, glide))


def tapers(board: Board, glide: Glide) -> tuple[Travel, ...]:
    """What the first channel would do with a control of each taper.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    glide
        The range that is asked for, and how the time is measured.

    Returns
    -------
    tuple of Travel
        Linear, log and reverse-log, each in every range; none when there is no lane, or when its control is not wired
        to be turned.

    Raises
    ------
    InputError
        When a value in the lane is not a number above zero.
    """
    lane = next(iter(board.channels), None)
    if lane is None or not lane.wiring.adjustable:
        return ()
    return tuple(found for taper in TAPERS for found in _of_ranges(board, lane, glide, taper))


def _with_taper(values: LaneValues, taper: str) -> LaneValues:
    """The same lane with another control; a log law and its mirror image share their middle."""
    if taper not in TAPERS:
        raise ValueError(f"unknown taper {taper!r}: it is linear, log or reverse-log")
    if taper == values.taper:
        return values
    log = {"log": values.middle, "reverse-log": 1.0 - values.middle}.get(values.taper, CUSTOMARY_MIDDLE)
    return replace(values, taper=taper, middle={"linear": 0.5, "log": log, "reverse-log": 1.0 - log}[taper])


def _share_under(time: Callable[[float], float], limit: float, *, reached: bool) -> float:
    """Share of the travel, from the fast end, with times below a limit; with ``reached`` also those equal to it [-].

    ``time`` never falls. It may stand still: over the rotation that end resistance hides, and over all of it when
    the control is not wired to be turned.
    """

    def under(rotation: float) -> bool:
        # rounding must not decide whether an end of the range that is met exactly belongs to it
        margin = limit * (1 + 1e-12 if reached else 1 - 1e-12)
        return time(rotation) <= margin if reached else time(rotation) < margin

    if not under(0.0):
        return 0.0
    if under(1.0):
        return 1.0
    low, high = 0.0, 1.0
    for _ in range(_HALVINGS):
        middle = (low + high) / 2
        low, high = (middle, high) if under(middle) else (low, middle)
    return high
