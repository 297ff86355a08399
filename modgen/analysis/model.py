"""What the analyses return: frozen values in base SI units."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Interval:
    """A value with its worst-case bounds."""

    nominal: float
    low: float
    high: float


@dataclass(frozen=True)
class ChannelGlide:
    """Glide of one channel, by the measure the spec asks for [s], read from the netlist.

    ``middle`` is at half travel. ``inside`` is the Monte Carlo share of such channels whose control covers the
    whole asked range, with its 95 % Wilson interval; ``boards`` is how many were drawn.
    """

    channel: int
    isolating: str
    control: str
    capacitors: tuple[str, ...]
    shortest: Interval
    middle: Interval
    longest: Interval
    time_constant_longest: float
    inside: float
    inside_low: float
    inside_high: float
    boards: int


@dataclass(frozen=True)
class Term:
    """One term of the accuracy budget. ``worst`` is a fraction [-] for scale, volts for offset."""

    kind: str  # scale or offset
    name: str
    worst: float
    formula: str
    source: str
    remedy: str


@dataclass(frozen=True)
class AccuracyBudget:
    """Scale [-] and offset [V] at 25 degC, worst case and root sum of squares; and the offset when hot."""

    terms: tuple[Term, ...]
    scale_worst: float
    scale_rss: float
    scale_budget: float
    offset_worst: float
    offset_rss: float
    offset_budget: float
    offset_hot: float
    hot: float  # degC


@dataclass(frozen=True)
class Headroom:
    """What one kind of amplifier stage can do against what the signal needs [V], rails at their low end."""

    stage: str  # input buffer, output buffer
    subject: str  # common mode, swing
    parts: tuple[str, ...]
    needed_low: float
    needed_high: float
    can_low: float
    can_high: float
    #: what the low end of a swing may miss on a single supply, because there it is an offset [V]
    allowance: float = 0.0

    @property
    def shortfall(self) -> float:
        """How far the low end is missed, whether or not the allowance covers it [V]."""
        return max(0.0, self.can_low - self.needed_low)

    @property
    def margin(self) -> float:
        """The smaller distance from the need to the limit [V]; negative when it does not fit."""
        return min(self.can_high - self.needed_high, self.needed_low + self.allowance - self.can_low)


@dataclass(frozen=True)
class RailPower:
    """One rail [V, A]: at the bus, behind its diode, and what it draws."""

    name: str  # V+ or V-
    diode: str
    bus_nominal: float
    bus_low: float  # least magnitude, signed
    bus_high: float  # greatest magnitude, signed
    protected_nominal: float
    protected_low: float
    protected_high: float
    current_typical: float
    current_max: float
    current_peak: float


@dataclass(frozen=True)
class Bound:
    """Greatest excursion of a net over every supply and jack state [V]."""

    net: str
    low: float
    high: float


@dataclass(frozen=True)
class Analyses:
    """Everything that was computed on one netlist against one spec."""

    glide: tuple[ChannelGlide, ...]
    accuracy: AccuracyBudget
    headroom: tuple[Headroom, ...]
    rails: tuple[RailPower, ...]
    bounds: tuple[Bound, ...]
    #: share of boards on which every channel covers the asked range, with its 95 % interval
    boards_inside: float = 0.0
    boards_inside_low: float = 0.0
    boards_inside_high: float = 0.0
