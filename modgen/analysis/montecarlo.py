"""A million boards drawn at random: on how many every channel covers the range, and how alike its channels are.

Every channel of every board is drawn for itself, part by part, so that shares of channels, shares of boards
and differences between the channels of one board all come from the same boards.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterator

    import numpy as np
    from numpy.typing import NDArray

    from modgen.analysis.glide import LaneValues, Tolerant

    Array = NDArray[np.float64]

#: boards that are drawn; a share near 95 % is then known to 0.05 %
BOARDS = 1_000_000
#: channels that are drawn at most, which bounds the time: boards of more than 32 channels are fewer
MOST_CHANNELS = 32_000_000
#: fixed, so that the same netlist gives the same share on every run
SEED = 20_240_229
#: boards that are held at a time: small enough for the processor's cache, and a few megabytes in all
CHUNK = 1 << 14
#: what the numbers are drawn from, for whoever reads the result
DISTRIBUTIONS = (
    "resistances and capacitances uniform within tolerance, the resistance left at the end of travel uniform from "
    "nothing to its greatest, every part on its own"
)
#: the share of boards that a spread is stated for [-]
MOST = 0.95


@dataclass(frozen=True)
class Spread:
    """How far apart the channels of a board are at a rotation: slowest over fastest less one [-].

    Half of the boards are within ``half``, 95 % within ``most``.
    """

    rotation: float
    half: float
    most: float


@dataclass(frozen=True)
class BoardDraws:
    """What came of the boards: how many were drawn, ``inside`` of them cover the range on every channel.

    ``channels_inside`` is (how many covered it, how many were drawn) for each channel; channels of equal values
    are counted together, since nothing tells them apart.
    """

    boards: int
    inside: int
    channels_inside: tuple[tuple[int, int], ...]
    spreads: tuple[Spread, ...]


@lru_cache(maxsize=64)
def draw_boards(
    lanes: tuple[LaneValues, ...],
    factor: float,
    shortest: float,
    longest: float,
    rotations: tuple[float, ...] = (),
    boards: int = BOARDS,
) -> BoardDraws:
    """Draw boards at random and count.

    Parameters
    ----------
    lanes
        The channels of one board, at least one.
    factor
        Time over time constant. [-]
    shortest, longest
        The range that is asked for. [s]
    rotations
        Where the channels are compared, 0 counter-clockwise to 1 clockwise. A rotation at which a channel may take
        no time at all is left out, and so are all on a board of one channel. [-]
    boards
        How many are drawn, unless that is more than :data:`MOST_CHANNELS` allow. [-]

    Returns
    -------
    BoardDraws
        A channel covers the range when its shortest time is at most ``shortest`` and its longest at least
        ``longest``; with a range switch these are of the fast and of the slow range, and the longest time of the
        fast range must not be below the shortest of the slow one.

    Notes
    -----
    Distributions are those of :data:`DISTRIBUTIONS`. Real lots are narrower and off centre, and the parts of one
    lot are alike: shares are for comparing designs, the corners are for promising, and channels built from one
    lot match better than this says. Numbers come from the raw stream of PCG64, which NumPy keeps the same over its
    versions; its distributions may change.
    """
    import numpy as np

    boards = min(boards, max(1, MOST_CHANNELS // len(lanes)))
    compared = tuple(
        at for at in rotations if len(lanes) > 1 and all(lane.time_constant(at, -1) > 0.0 for lane in lanes)
    )
    generator = np.random.PCG64(SEED)
    spreads = [np.empty(boards) for _ in compared]
    inside, covering = 0, [0] * len(lanes)
    for start in range(0, boards, CHUNK):
        size = min(CHUNK, boards - start)
        every = np.ones(size, dtype=np.bool_)
        fastest: list[Array] = []
        slowest: list[Array] = []
        for index, lane in enumerate(lanes):
            drawn = _draw(generator, lane, size)
            covers = factor * drawn.time_constant(0.0) <= shortest
            covers &= factor * drawn.time_constant(1.0, slow=True) >= longest
            if lane.ranged:
                covers &= drawn.time_constant(1.0) >= drawn.time_constant(0.0, slow=True)
            covering[index] += int(np.count_nonzero(covers))
            every &= covers
            times = [drawn.time_constant(lane.track_share(at), slow=at > 0.0) for at in compared]
            fastest = [np.minimum(a, b) for a, b in zip(fastest, times, strict=True)] if fastest else times
            slowest = [np.maximum(a, b) for a, b in zip(slowest, times, strict=True)] if slowest else times
        inside += int(np.count_nonzero(every))
        for held, slow, fast in zip(spreads, slowest, fastest, strict=True):
            held[start : start + size] = slow / fast - 1.0
    return BoardDraws(
        boards=boards,
        inside=inside,
        channels_inside=tuple(_pooled(lanes, covering, boards)),
        spreads=tuple(
            Spread(at, _quantile(held, 0.5), _quantile(held, MOST)) for at, held in zip(compared, spreads, strict=True)
        ),
    )


@dataclass(frozen=True)
class _Drawn:
    """One channel of some boards; figures that have no tolerance are the same on all of them."""

    series: Array  # ohm
    track: Array  # ohm
    residual: Array  # ohm
    capacitance: Array  # F
    slow_capacitance: Array  # F
    adjustable: bool

    def time_constant(self, share: float, slow: bool = False) -> Array:
        """With a share of the track in the way, in the fast or the slow range [s]."""
        capacitance = self.slow_capacitance if slow else self.capacitance
        if not self.adjustable:
            return capacitance * (self.series + self.track)
        turned: Array = self.track * share
        # the end of the track is as far as the wiper gets
        return capacitance * (self.series + _greater(self.residual, turned))


def _draw(generator: np.random.PCG64, lane: LaneValues, size: int) -> _Drawn:
    """Draw one channel, its parts always in the same order."""
    import numpy as np

    def uniform() -> Array:
        raw = generator.random_raw(size)
        raw >>= np.uint64(11)
        return np.multiply(raw, 2.0**-53, dtype=np.float64)

    def part(found: Tolerant) -> Array:
        value, tolerance = found
        if not tolerance:
            return np.full(size, value)
        drawn = uniform()
        drawn *= 2.0 * tolerance * value
        drawn += value * (1.0 - tolerance)
        return drawn

    series = np.zeros(size)
    for resistor in lane.isolating:
        series += part(resistor)
    track = part(lane.control)
    capacitance, slow = np.zeros(size), np.zeros(size)
    stays = len(lane.branches) - lane.dropped
    for index, branch in enumerate((*lane.branches, *lane.added)):
        elastance = np.zeros(size)
        for capacitor in branch:
            elastance += 1.0 / part(capacitor)
        if index < len(lane.branches):
            capacitance += 1.0 / elastance
        if lane.ranged and (index < stays or index >= len(lane.branches)):
            slow += 1.0 / elastance
    residual = np.zeros(size)
    if lane.adjustable:
        # an end resistance stated in ohms can be more than a small control has in all
        residual = uniform() * np.minimum(_greater(np.full(size, lane.end[0]), lane.end[1] * track), track)
    return _Drawn(series, track, residual, capacitance, slow if lane.ranged else capacitance, lane.adjustable)


def _greater(one: Array, other: Array) -> Array:
    import numpy as np

    return np.maximum(one, other)


def _pooled(lanes: tuple[LaneValues, ...], covering: list[int], boards: int) -> Iterator[tuple[int, int]]:
    for lane in lanes:
        alike = [index for index, other in enumerate(lanes) if other == lane]
        yield sum(covering[index] for index in alike), boards * len(alike)


def _quantile(values: Array, share: float) -> float:
    """The least value that a share of all do not exceed; the array is reordered."""
    index = max(0, -int(-share * len(values) // 1) - 1)
    values.partition(index)
    return float(values[index])
