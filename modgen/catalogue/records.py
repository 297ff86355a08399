"""What can be bought: one frozen record a part, base SI units, each figure with its evidence."""

from __future__ import annotations

from dataclasses import dataclass, field


@dataclass(frozen=True)
class Evidence:
    """Where figures come from.

    kind: ``published document``, ``common practice``, ``memory``, ``invented``; ``own file`` for prices of the
    user's price file, which no catalogue file can state.
    """

    kind: str
    source: str


@dataclass(frozen=True)
class Body:
    """Dimensions [m]; zero where a package does not have that dimension.

    For axial parts length and diameter are the body's, pitch the lead spacing; for chips length and width;
    for dual-in-line and small-outline packages width is the body, span the lead span.
    """

    package: str
    length: float
    width: float
    height: float
    pitch: float = 0.0
    lead: float = 0.0
    span: float = 0.0
    pins: int = 2

    @property
    def area(self) -> float:
        """Board area taken: the larger of body and lead extent, times width [m^2]."""
        return max(self.length, self.pitch) * max(self.width, self.span)


@dataclass(frozen=True)
class PinDef:
    """A pin of a part: number, function name, kind.

    kind: ``passive``, ``input``, ``output``, ``supply+``, ``supply-``.
    """

    number: str
    name: str
    kind: str


@dataclass(frozen=True)
class PriceBreak:
    """Unit price when at least ``quantity`` are bought."""

    quantity: int
    price: float


@dataclass(frozen=True, kw_only=True)
class Part:
    """What every record has."""

    key: str
    family: str
    kind: str  # resistor, capacitor, diode, amplifier, control, jack, switch, header
    description: str
    mount: str  # through-hole, surface, or panel (on any board)
    body: Body
    land_pattern: str
    pins: tuple[PinDef, ...]
    order_code: str = ""
    alternates: tuple[str, ...] = ()
    #: what a designer must know before using it; not for the parts list
    note: str = ""
    pack: int = 1
    prices: tuple[PriceBreak, ...] = ()
    #: (figure, evidence) for every electrical figure, dimension and price of the record
    evidence: tuple[tuple[str, Evidence], ...] = field(default=(), repr=False)

    @property
    def unit_price(self) -> float:
        """Price of one when one is bought; infinity when there is no price."""
        return self.prices[0].price if self.prices else float("inf")


@dataclass(frozen=True, kw_only=True)
class Resistor(Part):
    """A fixed resistor."""

    resistance: float
    tolerance: float
    power: float  # at 70 degC
    voltage: float  # limiting element voltage
    series: str  # IEC 60063 series it is sold in


@dataclass(frozen=True, kw_only=True)
class Capacitor(Part):
    """A fixed capacitor. Insulation or leakage, whichever the maker specifies.

    insulation_resistance [ohm] and insulation_time [s]: the lower of the two resulting resistances holds,
    0.0 means not specified. leakage: I = max(rate * C * V, floor) when ``leakage_sum`` is false,
    rate * C * V + floor when true (rate in 1/s: 0.01 uA per uF and V is 0.01 /s).
    """

    capacitance: float
    tolerance: float
    voltage: float
    dielectric: str  # film-pp, film-pet, film-pps, c0g, x7r, electrolytic, bipolar-electrolytic
    polarised: bool = False
    series: str = "E6"
    insulation_resistance: float = 0.0
    insulation_time: float = 0.0
    leakage_rate: float = 0.0
    leakage_floor: float = 0.0
    leakage_sum: bool = False
    derating: float = 0.8  # share of the rated voltage that design practice uses

    def insulation(self, voltage: float) -> float:
        """Least guaranteed insulation resistance at a voltage, as a resistor across the part [ohm]."""
        bounds = []
        if self.insulation_resistance:
            bounds.append(self.insulation_resistance)
        if self.insulation_time:
            bounds.append(self.insulation_time / self.capacitance)
        if bounds:
            return min(bounds)
        if not (self.leakage_rate or self.leakage_floor):
            return float("inf")  # nothing is specified
        leak = self.leakage(voltage)
        return abs(voltage) / leak if leak > 0 else float("inf")

    def leakage(self, voltage: float) -> float:
        """Greatest specified leakage current at a voltage (electrolytics: at rated voltage) [A]."""
        if self.leakage_rate or self.leakage_floor:
            rated = self.leakage_rate * self.capacitance * self.voltage
            return rated + self.leakage_floor if self.leakage_sum else max(rated, self.leakage_floor)
        resistance = self.insulation(voltage)
        return abs(voltage) / resistance


@dataclass(frozen=True, kw_only=True)
class Diode(Part):
    """A rectifier. ``forward``: (current [A], typical drop [V], greatest drop [V]) points, rising."""

    reverse_voltage: float
    forward_current: float
    forward: tuple[tuple[float, float, float], ...]
    leakage: float
    schottky: bool


@dataclass(frozen=True, kw_only=True)
class Amplifier(Part):
    """An operational amplifier package. Currents per section; headrooms measured from the rails [V]."""

    type: str  # the type name both forms share, e.g. TL07x
    sections: int
    #: per section: (output pin, inverting pin, non-inverting pin)
    section_pins: tuple[tuple[str, str, str], ...]
    positive_pin: str
    negative_pin: str
    input: str  # jfet, cmos, bipolar
    supply_absolute: float  # across both rails
    supply_least: float
    supply_most: float
    offset_typical: float
    offset_max: float
    offset_drift: float  # V/K
    bias_typical: float
    bias_max: float  # at 25 degC
    bias_doubling: float  # K per doubling, 0.0 when it does not double
    common_mode_low: float  # guaranteed, above the negative rail; negative when it reaches below
    common_mode_high: float  # guaranteed, below the positive rail
    swing_low: float  # guaranteed into 10 kohm, above the negative rail
    swing_high: float  # guaranteed into 10 kohm, below the positive rail
    quiescent_typical: float
    quiescent_max: float
    gain_bandwidth: float
    slew_rate: float
    short_circuit_least: float
    short_circuit_typical: float
    short_circuit_most: float
    cmrr: float  # least, as a ratio (70 dB is 3162)
    gain: float  # least open-loop gain, V/V
    output_resistance: float  # open loop
    clamp_current: float  # greatest current into an input beyond a rail
    phase_reversal: bool
    capacitive_load: float  # greatest direct load the maker characterises
    noise_density: float  # V/sqrt(Hz)
    dissipation: float  # package, W
    ground_input_through_resistor: bool = False
    #: greatest guaranteed current into the output while it is within a junction drop of the negative rail; 0.0 when
    #: short_circuit_least holds there too
    sink_near_negative: float = 0.0


@dataclass(frozen=True, kw_only=True)
class Control(Part):
    """A panel potentiometer used as a rheostat."""

    resistance: float
    tolerance: float
    taper: str  # linear, log, reverse-log
    middle: float  # share of the resistance at half travel
    end_resistance: float  # greatest, ohm
    end_share: float  # greatest, share of the total; the larger of the two holds
    power: float
    voltage: float
    travel: float  # degrees
    solder_temperature: float  # degC
    solder_time: float  # s

    @property
    def end(self) -> float:
        """Greatest resistance left at the end of travel on a nominal part [ohm]."""
        return max(self.end_resistance, self.end_share * self.resistance)

    @property
    def end_high(self) -> float:
        """The same on a part at the top of its tolerance [ohm]."""
        return max(self.end_resistance, self.end_share * self.resistance * (1 + self.tolerance))


@dataclass(frozen=True, kw_only=True)
class Jack(Part):
    """A 3.5 mm socket with tip switch: pins T, TN, S."""

    voltage: float
    current: float
    panel_hole: float


@dataclass(frozen=True, kw_only=True)
class Switch(Part):
    """A panel toggle switch, one pole, two positions: pin 2 is common."""

    voltage: float
    current: float
    panel_hole: float


@dataclass(frozen=True, kw_only=True)
class Header(Part):
    """A shrouded power header."""

    current: float  # per contact
    voltage: float
