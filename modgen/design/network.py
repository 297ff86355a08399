"""The glide network: which capacitor, control and isolating resistor, by exhaustive search.

Every combination that the catalogue allows is looked at, as numpy arrays with one axis each for
capacitor arrangements, controls and isolating resistors.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, TypeVar

from modgen.catalogue import Catalogue
from modgen.catalogue.records import Control, Resistor
from modgen.design import practice
from modgen.design.capacitors import Arrangement
from modgen.design.supply import price_at
from modgen.formulas.glide import time_factor
from modgen.spec.model import Spec

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Numeric = TypeVar("Numeric", float, Floats)


@dataclass(frozen=True)
class Room:
    """What an amplifier stage leaves to the network: its bias [A], budgets [-, V], least isolating resistor [ohm]."""

    bias: float
    scale: float
    offset: float
    isolating: float


@dataclass(frozen=True)
class Reach:
    """What can be had: whether the range is reached at all when budgets do not count; the longest glide beside the
    asked shortest (0 when none), the shortest beside the asked longest (infinite when none) [s].
    """

    in_range: bool = False
    longest: float = 0.0
    shortest: float = math.inf

    def wider(self, other: Reach) -> Reach:
        """Both together."""
        return Reach(
            self.in_range or other.in_range, max(self.longest, other.longest), min(self.shortest, other.shortest)
        )


@dataclass(frozen=True)
class Network:
    """One feasible combination with its figures [s, -, V, currency, m^2]."""

    capacitor: Arrangement
    control: Control
    isolating: Resistor
    shortest: float  # nominal or worst case, as the spec's cover asks
    longest: float
    scale: float
    offset: float
    cost: float
    area: float
    leaky: bool
    biased: bool
    oversized: bool
    mismatch: float


def controls(spec: Spec, catalogue: Catalogue) -> tuple[list[Control], str]:
    """Controls of the asked taper that stand the signal's greatest step, and why there are none."""
    step = spec.signal.high - spec.signal.low
    fit = [c for c in catalogue.of(Control) if c.taper == spec.glide.taper and c.mount in ("panel", spec.build.mount)]
    rated = [c for c in fit if c.voltage >= step]
    if rated:
        return rated, ""
    if fit:
        best = max(c.voltage for c in fit)
        return (
            [],
            f"a step over the whole span puts {step:.4g} V across the control; the best is rated {best:.4g} V",
        )
    return [], f"the catalogue has no control with {spec.glide.taper} taper"


def isolators(spec: Spec, catalogue: Catalogue) -> list[Resistor]:
    """Isolating resistors: between what keeps the driving buffer stable and what is still a glide resistor.

    Of resistors that differ in nothing the search looks at, only the one it would take is kept.
    """
    best: dict[tuple[float, float], tuple[tuple[float, float, str], Resistor]] = {}
    for r in catalogue.of(Resistor):
        if r.mount != spec.build.mount or not practice.LEAST_ISOLATING <= r.resistance <= practice.MOST_ISOLATING:
            continue
        price, area = price_at(r, spec.channels * spec.order.boards), r.body.area
        key = (area, price, r.key) if spec.build.prefer == "size" else (price, area, r.key)
        like = (r.resistance, r.tolerance)
        if like not in best or key < best[like][0]:
            best[like] = (key, r)
    return [best[like][1] for like in sorted(best)]


class Grid:
    """Every combination and its figures; made once and asked by every amplifier type in turn.

    Arrays have the axes capacitor arrangement, control, isolating resistor; what is in range is kept as flat
    arrays over ``index``.
    """

    def __init__(
        self, spec: Spec, caps: Sequence[Arrangement], pots: Sequence[Control], resistors: Sequence[Resistor]
    ) -> None:
        import numpy as np

        self.spec = spec
        self.caps, self.pots, self.resistors = list(caps), list(pots), list(resistors)
        factor = time_factor(spec.glide.measure, spec.glide.step, spec.glide.within)

        def axis(values: list[float], place: int) -> Floats:
            shape = [1, 1, 1]
            shape[place] = len(values)
            return np.array(values, dtype=float).reshape(shape)

        c = factor * axis([a.capacitance for a in self.caps], 0)
        c_tol = axis([a.tolerance for a in self.caps], 0)
        fast = factor * axis([a.fast.capacitance for a in self.caps], 0)
        fast_tol = axis([a.fast.tolerance for a in self.caps], 0)
        track = axis([p.resistance for p in self.pots], 1)
        track_tol = axis([p.tolerance for p in self.pots], 1)
        r, r_tol = (
            axis([x.resistance for x in self.resistors], 2),
            axis([x.tolerance for x in self.resistors], 2),
        )
        #: greatest resistance between the driving buffer and the glide node [ohm]
        self.resistance = r * (1 + r_tol) + track * (1 + track_tol)
        if spec.glide.cover == "worst-case":
            end = axis([p.end_high for p in self.pots], 1)
            self.shortest = fast * (1 + fast_tol) * (r * (1 + r_tol) + end)
            self.longest = c * (1 - c_tol) * (r * (1 - r_tol) + track * (1 - track_tol))
            fast_longest = fast * (1 - fast_tol) * (r * (1 - r_tol) + track * (1 - track_tol))
            slow_shortest = c * (1 + c_tol) * (r * (1 + r_tol) + end)
        else:
            end = axis([p.end for p in self.pots], 1)
            self.shortest, self.longest = fast * (r + end), c * (r + track)
            fast_longest, slow_shortest = fast * (r + track), c * (r + end)

        # nothing may be missing between the two ranges of a switch
        self._meets = fast_longest >= slow_shortest
        signal = max(abs(spec.signal.low), abs(spec.signal.high))
        self._insulation = axis([a.insulation(signal) for a in self.caps], 0)
        self._leakage = axis([a.leakage(signal) for a in self.caps], 0)
        # a hair of room, so that a range met exactly is not lost to rounding
        inside = (
            (self.shortest <= spec.glide.shortest * (1 + 1e-9))
            & (self.longest >= spec.glide.longest * (1 - 1e-9))
            & self._meets
        )
        self.index = np.argwhere(inside)
        i, j, k = self.index.T
        channels, boards = spec.channels, spec.order.boards

        def total(caps: list[float], pots: list[float], resistors: list[float]) -> Floats:
            sums: Floats = np.array(caps)[i] + np.array(pots)[j] + np.array(resistors)[k]
            return sums

        self.cost = total(
            [a.cost(channels * boards) for a in self.caps],
            [price_at(p, channels * boards) for p in self.pots],
            [price_at(x, channels * boards) for x in self.resistors],
        )
        self.area = total(
            [a.area for a in self.caps],
            [p.body.area for p in self.pots],
            [x.body.area for x in self.resistors],
        )
        through = self.resistance[0, j, k]
        self.through = through
        self._isolating = r * (1 - r_tol)
        self.isolating = self._isolating[0, 0, k]
        self.scale = through / (through + self._insulation[i, 0, 0])
        self.leak = through * self._leakage[i, 0, 0]
        self.count = np.array([len(a.parts) for a in self.caps])[i]
        self.leaky = np.array([a.leaky for a in self.caps], dtype=bool)[i]
        self.oversized = self.longest[i, j, k] > practice.OVERSIZE * spec.glide.longest
        self.mismatch = self.longest[i, j, k] / spec.glide.longest * spec.glide.shortest / self.shortest[i, j, k]
        self._names = (
            _ranks([a.key for a in self.caps])[i],
            _ranks([p.key for p in self.pots])[j],
            _ranks([x.key for x in self.resistors])[k],
        )

    def ranked(self, room: Room, most: int = 400) -> list[Network]:
        """The best combinations whose errors fit what is left of the budgets, best first.

        Order: insulating dielectrics before leaking ones; little bias through the control before much; one part
        before two; ranges that are not oversized before those that are; then ``prefer``, then how closely the
        range fits, then the parts' names.
        """
        import numpy as np

        offset = self.leak + room.bias * self.through
        fit = np.flatnonzero(
            (self.scale <= room.scale) & (offset <= room.offset) & (self.isolating >= room.isolating * (1 - 1e-9))
        )
        if not len(fit):
            return []
        span = self.spec.signal.high - self.spec.signal.low
        error = (self.scale + offset / span)[fit]
        cost, area = self.cost[fit], self.area[fit]
        steps = in_steps(cost, error, area)
        first = {"cost": (0, 1, 2), "accuracy": (1, 0, 2), "size": (2, 0, 1)}[self.spec.build.prefer]
        wanted, *others = (steps[n] for n in first)
        keys = (
            self.leaky[fit],
            self._biased(room.bias)[fit],
            self.oversized[fit],
            wanted,
            np.log(self.mismatch[fit]),
            *others,
        )
        # rounding keeps sums that differ only in the order of addition from deciding before the names do
        rounded = [np.round(key.astype(float), 6) for key in keys]
        order = np.lexsort((*(name[fit] for name in self._names[::-1]), *rounded[::-1]))
        return [self._network(int(fit[n]), room.bias) for n in order[:most]]

    def _biased(self, bias: float) -> NDArray[np.bool_]:
        """Whether the amplifier's bias through the control takes more of the offset budget than it should."""
        much: NDArray[np.bool_] = bias * self.through > practice.BIAS_SHARE * self.spec.accuracy.offset
        return much

    def _network(self, n: int, bias: float) -> Network:
        i, j, k = (int(x) for x in self.index[n])
        return Network(
            capacitor=self.caps[i],
            control=self.pots[j],
            isolating=self.resistors[k],
            shortest=float(self.shortest[i, j, k]),
            longest=float(self.longest[i, j, k]),
            scale=float(self.scale[n]),
            offset=float(self.leak[n] + bias * self.through[n]),
            cost=float(self.cost[n]),
            area=float(self.area[n]),
            leaky=bool(self.leaky[n]),
            biased=bool(self._biased(bias)[n]),
            oversized=bool(self.oversized[n]),
            mismatch=float(self.mismatch[n]),
        )

    def reach(self, room: Room) -> Reach:
        """What can be had within a room when the asked range cannot."""
        import numpy as np

        scale = self.resistance / (self.resistance + self._insulation)
        offset = self.resistance * (self._leakage + room.bias)
        driven = self._isolating >= room.isolating * (1 - 1e-9)
        within = (scale <= room.scale) & (offset <= room.offset) & driven & self._meets
        quick = within & (self.shortest <= self.spec.glide.shortest)
        slow = within & (self.longest >= self.spec.glide.longest)
        return Reach(
            in_range=bool((self.isolating >= room.isolating * (1 - 1e-9)).any()),
            longest=float(np.max(self.longest[quick])) if quick.any() else 0.0,
            shortest=float(np.min(self.shortest[slow])) if slow.any() else math.inf,
        )


def meeting(spec: Spec, capacitor: Arrangement, control: Control, isolating: Resistor) -> tuple[float, float]:
    """Where the ranges of a switch meet: the longest glide of the fast one, the shortest of the slow one.

    Parameters
    ----------
    spec
        How a glide is measured and whether tolerances count.
    capacitor, control, isolating
        The network, its capacitor a switched one.

    Returns
    -------
    tuple of float
        Nominal, or each at its worst [s]; there is no gap as long as the first is not below the second.
    """
    factor = float(time_factor(spec.glide.measure, spec.glide.step, spec.glide.within))
    sign = 1.0 if spec.glide.cover == "worst-case" else 0.0
    end = control.end_high if sign else control.end
    low = isolating.resistance * (1 - sign * isolating.tolerance)
    low += control.resistance * (1 - sign * control.tolerance)
    high = isolating.resistance * (1 + sign * isolating.tolerance) + end
    fast = capacitor.fast
    return (
        factor * fast.capacitance * (1 - sign * fast.tolerance) * low,
        factor * capacitor.capacitance * (1 + sign * capacitor.tolerance) * high,
    )


def in_steps(cost: Numeric, error: Numeric, area: Numeric) -> tuple[Numeric, Numeric, Numeric]:
    """Cost, error [-] and area [m^2] counted in the steps that are told apart."""
    return (
        _whole(cost / practice.COST_STEP),
        _whole(1200 * error / practice.ERROR_STEP),
        _whole(area * 1e6 / practice.AREA_STEP),
    )


def _whole(value: Numeric) -> Numeric:
    # a hair up, so that halves fall the same way however the sum was added
    return (value + 0.5 + 1e-6) // 1


def _ranks(names: Sequence[str | tuple[str, ...]]) -> NDArray[np.int64]:
    import numpy as np

    ordered = {name: n for n, name in enumerate(sorted(set(names)))}
    return np.array([ordered[name] for name in names], dtype=np.int64)
