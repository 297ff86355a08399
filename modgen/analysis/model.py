"""What the analyses return: frozen values in base SI units."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass


@dataclass(frozen=True)
class Interval:
    """A value with its worst-case bounds."""

    nominal: float
    low: float
    high: float


@dataclass(frozen=True)
class RangeGlide:
    """Glide of one channel in one position of its range switch [s]; ``position`` is ``1-2`` or ``2-3``."""

    name: str  # fast, slow
    position: str
    shortest: Interval
    middle: Interval
    longest: Interval


@dataclass(frozen=True)
class ChannelGlide:
    """Glide of one channel, by the measure the spec asks for [s], read from the netlist.

    ``middle`` is at half travel. ``inside`` is the Monte Carlo share of such channels whose control covers the
    whole asked range, with its 95 % Wilson interval; ``boards`` is how many boards were drawn. With a range switch
    ``shortest`` is of the fast range, ``middle`` and ``longest`` are of the slow one; ``ranges`` has all of both.
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
    #: fast, then slow; empty without a range switch
    ranges: tuple[RangeGlide, ...] = ()


@dataclass(frozen=True)
class Matching:
    """How far apart the channels of one board are at one rotation: slowest over fastest, less one [-].

    Half of the boards are within ``half``, 95 % within ``most``, all within ``worst``.
    """

    rotation: float
    nominal: float
    half: float
    most: float
    worst: float
    boards: int


@dataclass(frozen=True)
class TravelPoint:
    """The time [s] at a rotation, 0 counter-clockwise to 1 clockwise."""

    rotation: float
    time: Interval


@dataclass(frozen=True)
class Travel:
    """Time against rotation, and what shares of the rotation are spent where, with nominal values [-].

    ``asked`` lies in the asked range, ``lowest_decade`` from its shortest time to ten times that (or to its longest),
    ``faster`` below the range and ``slower`` above it; asked, faster and slower are the whole travel. ``range`` is
    ``fast`` or ``slow`` with a range switch, whose positions have a travel each.
    """

    channel: int
    control: str
    taper: str
    points: tuple[TravelPoint, ...]
    asked: float
    lowest_decade: float
    faster: float
    slower: float
    range: str = ""


@dataclass(frozen=True)
class Term:
    """One term of the accuracy budget. ``worst`` is a fraction [-] for scale, volts for offset and drift."""

    kind: str  # scale, offset or drift
    name: str
    worst: float
    formula: str
    source: str
    remedy: str


@dataclass(frozen=True)
class AccuracyBudget:
    """Scale [-] and offset [V] at 25 degC, worst case and root sum of squares; and the offset over temperature.

    ``offset_cold`` and ``offset_hot`` are the worst cases at both ends of the stated span of temperatures. ``drift``
    is what the offset can move by between these ends, which is what remains of it when it has been tuned out.
    """

    terms: tuple[Term, ...]
    scale_worst: float
    scale_rss: float
    scale_budget: float
    offset_worst: float
    offset_rss: float
    offset_budget: float
    offset_hot: float
    hot: float  # degC
    offset_cold: float = 0.0
    cold: float = 25.0  # degC
    drift: tuple[Term, ...] = ()
    drift_worst: float = 0.0
    drift_rss: float = 0.0

    @property
    def largest_scale(self) -> Term | None:
        """The scale term that costs most; it says what would reduce it. None without terms."""
        return _largest(term for term in self.terms if term.kind == "scale")

    @property
    def largest_offset(self) -> Term | None:
        """The offset term that costs most at 25 degC. None without terms."""
        return _largest(term for term in self.terms if term.kind == "offset")

    @property
    def largest_drift(self) -> Term | None:
        """The term that moves most between the ends of the span of temperatures. None without terms."""
        return _largest(self.drift)


def _largest(terms: Iterable[Term]) -> Term | None:
    """The first of the greatest, which is the one nearest to the input."""
    return max(terms, key=lambda term: term.worst, default=None)


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


def _left(measured: float, limit: float) -> float:
    """Share of an upper limit that is left [-]; negative beyond it, -1 for anything above a limit of 0."""
    if limit <= 0.0:
        return 0.0 if measured <= limit else -1.0
    return 1.0 - measured / limit


@dataclass(frozen=True)
class Stability:
    """Phase margin of one buffer of a lane [deg], the worst over its loads and output resistances.

    ``load`` is what it is worst into: the resistance the control leaves at its fast end [ohm] for the input
    buffer, the capacitance of a cable [F] for the output buffer. ``crossover`` [Hz] and ``overshoot`` [-] (an
    estimate from the margin) are those of that case; ``sweep`` holds (load, phase margin) for every load.
    """

    stage: str  # input buffer; output buffer, resistor outside the loop; output buffer, resistor inside the loop
    channel: int
    section: str
    parts: tuple[str, ...]
    load: float
    output_resistance: float
    crossover: float
    overshoot: float
    measured: float
    limit: float
    sweep: tuple[tuple[float, float], ...]

    @property
    def margin(self) -> float:
        """How far the phase margin stands above its limit, as a share of the limit [-]."""
        return self.measured / self.limit - 1.0


@dataclass(frozen=True)
class NoiseTerm:
    """One source of noise and what of it stands at the output, root mean square [V]."""

    name: str
    rms: float
    source: str


@dataclass(frozen=True)
class Noise:
    """Noise at the output of one lane in a band [Hz], root mean square [V], at one end of its control.

    ``capacitor`` is the kT/C noise of the glide node over all frequencies, a floor that no resistance changes.
    """

    channel: int
    end: str  # fast, slow
    terms: tuple[NoiseTerm, ...]
    low: float
    high: float
    capacitor: float
    measured: float
    limit: float

    @property
    def cents(self) -> float:
        """The root mean square at 1 V per octave [cents]."""
        return self.measured * 1200.0

    @property
    def margin(self) -> float:
        """Share of the limit that is left [-]."""
        return _left(self.measured, self.limit)


@dataclass(frozen=True)
class Short:
    """One output shorted, its amplifier driving to a rail at the high end of its tolerance.

    ``current_least`` and ``current_most`` [A] are with the amplifier's limit at the ends of its range.
    ``measured`` is the power in the output resistor [W] at the latter, 0 without a resistor; ``limit`` its rating,
    infinite when nobody states one. ``package`` [W] is the greatest power of the section, whatever it drives.
    """

    channel: int
    section: str
    net: str
    resistor: str
    against: str  # 0 V, another output
    voltage: float
    current_least: float
    current_most: float
    package: float
    measured: float
    limit: float

    @property
    def margin(self) -> float:
        """Share of the resistor's rating that is left [-]."""
        return _left(self.measured, self.limit)


@dataclass(frozen=True)
class Dissipation:
    """One package with its sections at rest and the worst single short at its outputs [W]."""

    package: str
    quiescent: float
    short: float
    against: str  # what the output is shorted to; empty when no output of it leads to a socket
    measured: float
    limit: float

    @property
    def margin(self) -> float:
        """Share of what the package may dissipate that is left [-]."""
        return _left(self.measured, self.limit)


@dataclass(frozen=True)
class ReversedSupply:
    """One rail with the power header plugged in the wrong way round.

    ``bus`` [V] is what the board's bus net then gets. ``blocked`` says whether a diode keeps it from the rail.
    ``settled`` and ``measured`` [V] stand across that diode, with the reservoirs empty and still charged;
    ``limit`` is its reverse voltage. ``leakage`` [A] passes through it. ``amplifiers`` [V] is the least that can
    stand across the supply pins, negative for a reversed supply.
    """

    rail: str
    diode: str
    bus: float
    blocked: bool
    settled: float
    leakage: float
    amplifiers: float
    measured: float
    limit: float

    @property
    def margin(self) -> float:
        """Share of the diode's reverse voltage that is left [-]; -1 when nothing blocks."""
        return _left(self.measured, self.limit) if self.blocked else -1.0


@dataclass(frozen=True)
class MissingRail:
    """One bus rail at 0 V while the other stands at the high end of its tolerance.

    ``low`` and ``high`` [V] are what the supply pins of the amplifiers see. ``input_current`` [A] is the most that a
    powered neighbour at the missing side drives into an amplifier's input. ``measured`` [V] is the
    greatest reverse voltage on a polarised capacitor between a rail and 0 V, ``capacitor`` that one ("" for
    none), ``limit`` what it bears. ``broken`` [V] is the same with the bus contact open, so that nothing holds
    the rail: at most that, and it is not judged.
    """

    rail: str
    low: float
    high: float
    input_current: float
    capacitor: str
    broken: float
    measured: float
    limit: float

    @property
    def margin(self) -> float:
        """Share of the reverse voltage a polarised capacitor bears that is left [-]."""
        return _left(self.measured, self.limit)


@dataclass(frozen=True)
class Backfeed:
    """Current [A] that powered neighbours drive into the unpowered module.

    subject: ``input`` (one amplifier input), ``output`` (one output from outside), ``jack`` (all that one socket
    takes), ``rail`` (all that every socket puts into one rail). ``voltage`` [V] is what the neighbour drives,
    either sign.
    """

    subject: str
    name: str  # section, socket or rail
    parts: tuple[str, ...]
    voltage: float
    measured: float
    limit: float

    @property
    def margin(self) -> float:
        """Share of the limit that is left [-]."""
        return _left(self.measured, self.limit)


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
    #: how alike the channels of one board are; empty with one channel
    matching: tuple[Matching, ...] = ()
    #: time against rotation of every channel
    travel: tuple[Travel, ...] = ()
    #: the same of the first channel with a control of each taper, the customary middle where it is another one
    tapers: tuple[Travel, ...] = ()
    #: phase margin of both buffers of every lane
    stability: tuple[Stability, ...] = ()
    #: at both ends of the control of every lane
    noise: tuple[Noise, ...] = ()
    #: every output against 0 V and against another output
    shorts: tuple[Short, ...] = ()
    dissipation: tuple[Dissipation, ...] = ()
    #: supply states that are no fault of the board, and that it must survive
    reversed_supply: tuple[ReversedSupply, ...] = ()
    missing_rails: tuple[MissingRail, ...] = ()
    powered_off: tuple[Backfeed, ...] = ()
