"""The spec as frozen values: base SI units, every default resolved.

Each field carries, as dataclass metadata, what the reader and the JSON Schema need, so that there
is one definition of the spec (see :mod:`modgen.spec.reader` and :mod:`modgen.spec.schema`).
"""

from __future__ import annotations

from dataclasses import dataclass, field

from modgen.problems import Place


@dataclass(frozen=True)
class Jacks:
    """How many sockets there are on the panel."""

    inputs: int
    outputs: int

    @property
    def total(self) -> int:
        """All sockets."""
        return self.inputs + self.outputs


@dataclass(frozen=True)
class Rails:
    """Supply at the power header, before the protection diodes [V]; negative is 0.0 on a single supply."""

    positive: float
    negative: float
    tolerance: float = 0.05

    @property
    def single(self) -> bool:
        """Whether there is no negative rail."""
        return self.negative == 0.0


@dataclass(frozen=True)
class Glide:
    """The glide range that is asked for [s], and how it is measured.

    measure: ``rise`` (10 % to 90 %), ``time-constant`` or ``settle`` (after ``step`` [V], to within
    ``within`` [V]). cover: ``nominal`` or ``worst-case``. taper: ``linear``, ``log``, ``reverse-log``.
    """

    shortest: float
    longest: float
    measure: str = "rise"
    step: float = 1.0
    within: float = 5.0 / 1200.0
    cover: str = "nominal"
    taper: str = "log"


@dataclass(frozen=True)
class Signal:
    """What goes through a channel: span [V, V], source and load impedance [ohm]."""

    low: float = -5.0
    high: float = 5.0
    source: float = 1e3
    load: float = 100e3
    pitch: bool = False


@dataclass(frozen=True)
class Accuracy:
    """Budgets, worst case at 25 degC: scale as a fraction [-], offset [V]."""

    scale: float
    offset: float


@dataclass(frozen=True)
class Output:
    """Where the output resistor stands: ``auto``, ``inside`` or ``outside`` the feedback loop."""

    protection: str = "auto"


@dataclass(frozen=True)
class Build:
    """How it is made. ``catalogue`` and ``land_patterns`` are paths as written, relative to the spec."""

    mount: str = "through-hole"
    amplifier: str = "auto"
    capacitor: str = "auto"
    prefer: str = "cost"
    catalogue: tuple[str, ...] = ()
    land_patterns: str = ""


@dataclass(frozen=True)
class Order:
    """Boards to order for, spares as a fraction of what is needed [-], CSV files as written."""

    boards: int = 1
    spares: float = 0.05
    stock: str = ""
    prices: str = ""


@dataclass(frozen=True)
class Waiver:
    """A finding that somebody answers for; empty ``parts`` waives the rule on every part."""

    rule: str
    parts: tuple[str, ...]
    reason: str
    place: Place


@dataclass(frozen=True)
class Spec:
    """One module, whole: what the YAML page says and every default it leaves."""

    module: str
    channels: int
    jacks: Jacks
    rails: Rails
    glide: Glide
    normalling: str
    signal: Signal
    accuracy: Accuracy
    output: Output
    build: Build
    order: Order
    waive: tuple[Waiver, ...] = ()
    file: str = field(default="spec.yaml", compare=False)
    #: ("glide.longest", place) for every key that the page states
    places: tuple[tuple[str, Place], ...] = field(default=(), compare=False, repr=False)

    @property
    def slug(self) -> str:
        """The module's name as a folder name: lower case ASCII letters, digits and single hyphens."""
        from modgen.spec.names import slug

        return slug(self.module)

    def place(self, key: str) -> Place:
        """Where a key stands, or the nearest key above it that the page states."""
        known = dict(self.places)
        while key:
            if key in known:
                return known[key]
            key = key.rpartition(".")[0]
        return Place(self.file, 1, 1)

    def input_of(self, channel: int) -> int:
        """The channel whose input jack feeds this one (channels count from 1).

        The first ``jacks.inputs`` channels have a socket of their own; the rest share the last of them.
        """
        return min(channel, self.jacks.inputs)

    def outputs_of(self, channel: int) -> int:
        """How many output sockets a channel has; extra ones go to the channels in turn."""
        extra = self.jacks.outputs - self.channels
        return 1 + extra // self.channels + (1 if channel <= extra % self.channels else 0)
