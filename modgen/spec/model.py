"""The spec as frozen values: base SI units, every default resolved.

Each field carries, as dataclass metadata, what the reader and the JSON Schema need, so that there
is one definition of the spec (see :mod:`modgen.spec.keys`, :mod:`modgen.spec.reader`,
:mod:`modgen.spec.schema` and :mod:`modgen.spec.starter`).
"""

from __future__ import annotations

from dataclasses import dataclass, field

from modgen.problems import Place
from modgen.spec.keys import NONE, key


@dataclass(frozen=True)
class Jacks:
    """How many sockets there are on the panel."""

    inputs: int = field(
        metadata=key(
            "whole",
            "input jacks; channels without one share the last one before them",
            required=True,
            example="4",
            least=1,
            most=64,
        )
    )
    outputs: int = field(
        metadata=key(
            "whole",
            "output jacks, at least one for each channel; more go to the channels in turn",
            required=True,
            example="4",
            least=1,
            most=512,
        )
    )

    @property
    def total(self) -> int:
        """All sockets."""
        return self.inputs + self.outputs


@dataclass(frozen=True)
class Rails:
    """Supply at the power header, before the protection diodes [V]; negative is 0.0 on a single supply."""

    positive: float = field(
        metadata=key(
            "quantity",
            "positive supply at the power header",
            required=True,
            example="12 V",
            dimension="voltage",
            least=3.0,
            most=18.0,
        )
    )
    negative: float = field(
        metadata=key(
            "quantity",
            "negative supply with its sign; 0 V on a single supply",
            required=True,
            example="-12 V",
            dimension="voltage",
            least=-18.0,
            most=0.0,
        )
    )
    tolerance: float = field(
        default=0.05,
        metadata=key(
            "quantity",
            "how far each rail can be off, both ways",
            default="5 %",
            dimension="ratio",
            least=0.0,
            most=0.2,
        ),
    )

    @property
    def single(self) -> bool:
        """Whether there is no negative rail."""
        return self.negative == 0.0


@dataclass(frozen=True)
class Glide:
    """The glide range that is asked for [s], and how it is measured.

    measure: ``rise`` (10 % to 90 %), ``time-constant`` or ``settle`` (after ``step`` [V], to within
    ``within`` [V]). cover: ``nominal`` or ``worst-case``. taper: ``linear``, ``log``, ``reverse-log``.
    ranges: 2 has a panel switch that puts a second capacitor beside the first.
    """

    shortest: float = field(
        metadata=key(
            "quantity",
            "the shortest glide that can be set",
            required=True,
            example="5 ms",
            dimension="time",
            least=100e-6,
            most=1000.0,
        )
    )
    longest: float = field(
        metadata=key(
            "quantity",
            "the longest glide that can be set",
            required=True,
            example="2 s",
            dimension="time",
            least=100e-6,
            most=1000.0,
        )
    )
    measure: str = field(
        default="rise",
        metadata=key(
            "choice",
            "what a glide time is: 10 % to 90 % of a step, one time constant, or until it has settled",
            default="rise",
            choices=("rise", "time-constant", "settle"),
        ),
    )
    step: float = field(
        default=1.0,
        metadata=key(
            "level",
            "the step it settles after, in volts or cents",
            default="1 V",
            dimension="voltage",
            least=0.0,
            most=40.0,
            above=True,
            only="measure: settle",
        ),
    )
    within: float = field(
        default=5.0 / 1200.0,
        metadata=key(
            "level",
            "how near to the end counts as settled, in volts or cents; less than the step",
            default="5 cents",
            dimension="voltage",
            least=0.0,
            most=40.0,
            above=True,
            only="measure: settle",
        ),
    )
    cover: str = field(
        default="nominal",
        metadata=key(
            "choice",
            "which parts must reach the whole range: those with nominal values, or all within tolerance",
            default="nominal",
            choices=("nominal", "worst-case"),
        ),
    )
    taper: str = field(
        default="log",
        metadata=key(
            "choice",
            "how the glide time follows the rotation of the control",
            default="log",
            choices=("linear", "log", "reverse-log"),
        ),
    )
    ranges: int = field(
        default=1,
        metadata=key(
            "whole",
            "ranges that a panel switch sets: with 2, a second capacitor is switched in for the slow range",
            default="1",
            least=1,
            most=2,
        ),
    )


@dataclass(frozen=True)
class Signal:
    """What goes through a channel: span [V, V], source and load impedance [ohm]."""

    low: float = field(
        default=-5.0,
        metadata=key(
            "span",
            "lowest and highest voltage of the signal",
            default="±5 V",
            example="0 V to 5 V",
            dimension="voltage",
            least=-20.0,
            most=20.0,
            page="span",
        ),
    )
    high: float = 5.0  # the other end of span
    source: float = field(
        default=1e3,
        metadata=key(
            "quantity",
            "output impedance of what drives an input",
            default="1 kΩ",
            dimension="resistance",
            least=0.0,
            most=10e6,
        ),
    )
    load: float = field(
        default=100e3,
        metadata=key(
            "quantity",
            "input impedance of what an output drives",
            default="100 kΩ",
            dimension="resistance",
            # the output swing of every amplifier in the catalogue is the one into 10 kohm
            least=10e3,
            most=1e12,
        ),
    )
    pitch: bool = field(
        default=False,
        metadata=key("flag", "whether 1 V per octave accuracy matters", default="false"),
    )


@dataclass(frozen=True)
class Accuracy:
    """Budgets, worst case at 25 degC: scale as a fraction [-], offset [V]. Span of temperatures: ends [degC]."""

    scale: float = field(
        metadata=key(
            "scale",
            "greatest error of the gain: a share, or cents per octave",
            default="2 %",
            pitch_default="5 cents",
            dimension="ratio",
            least=0.0,
            most=0.5,
            above=True,
        )
    )
    offset: float = field(
        metadata=key(
            "offset",
            "greatest constant error: volts, or a share of the span",
            default="2 %",
            pitch_default="30 mV",
            dimension="voltage",
            least=0.0,
            most=20.0,
            above=True,
        )
    )
    temperature: tuple[float, float] = field(
        default=(15.0, 65.0),
        metadata=key(
            "range",
            "coldest and warmest inside the case; what the offset drifts by between them is reported, not judged",
            default="15 °C to 65 °C",
            example="5 °C to 50 °C",
            dimension="temperature",
            least=-40.0,
            most=125.0,
        ),
    )


@dataclass(frozen=True)
class Output:
    """Where the output resistor stands: ``auto``, ``inside`` or ``outside`` the feedback loop."""

    protection: str = field(
        default="auto",
        metadata=key(
            "choice",
            "where the output resistor stands; inside the feedback loop needs one output jack a channel",
            default="auto",
            choices=("auto", "inside", "outside"),
        ),
    )


@dataclass(frozen=True)
class Build:
    """How it is made. ``catalogue`` and ``land_patterns`` are paths as written, relative to the spec."""

    mount: str = field(
        default="through-hole",
        metadata=key("choice", "how parts are mounted", default="through-hole", choices=("through-hole", "surface")),
    )
    amplifier: str = field(
        default="auto",
        metadata=key("name", "type of the amplifiers, as the catalogue names it, or auto", default="auto"),
    )
    capacitor: str = field(
        default="auto",
        metadata=key("name", "family of the glide capacitor, as the catalogue names it, or auto", default="auto"),
    )
    prefer: str = field(
        default="cost",
        metadata=key(
            "choice",
            "what decides between values that all fit",
            default="cost",
            choices=("cost", "accuracy", "size"),
        ),
    )
    catalogue: tuple[str, ...] = field(
        default=(),
        metadata=key(
            "paths",
            "catalogue files of your own, relative to this page",
            default="[]",
            example="[my-parts.yaml]",
        ),
    )
    land_patterns: str = field(
        default="",
        metadata=key(
            "path",
            "file with the names of your own land patterns, relative to this page",
            default=NONE,
            example="my-names.yaml",
        ),
    )


@dataclass(frozen=True)
class Order:
    """Boards to order for, spares as a fraction of what is needed [-], CSV files as written."""

    boards: int = field(
        default=1, metadata=key("whole", "boards to order parts for", default="1", least=1, most=1_000_000)
    )
    spares: float = field(
        default=0.05,
        metadata=key(
            "quantity",
            "parts to order beyond what the boards need",
            default="5 %",
            dimension="ratio",
            least=0.0,
            most=1.0,
        ),
    )
    stock: str = field(
        default="",
        metadata=key("path", "CSV of the parts on hand, relative to this page", default=NONE, example="stock.csv"),
    )
    prices: str = field(
        default="",
        metadata=key("path", "CSV of prices, relative to this page", default=NONE, example="prices.csv"),
    )


@dataclass(frozen=True)
class Waiver:
    """A finding that somebody answers for; empty ``parts`` waives the rule on every part."""

    rule: str = field(metadata=key("rule", "name of the rule", required=True, example="glide-range"))
    parts: tuple[str, ...] = field(
        metadata=key("parts", "references it is waived on; all parts when left out", default="", example="[C3, C7]")
    )
    reason: str = field(metadata=key("reason", "why that is right", required=True, example="measured on the prototype"))
    place: Place = field(compare=False)


@dataclass(frozen=True)
class Spec:
    """One module, whole: what the YAML page says and every default it leaves."""

    module: str = field(
        metadata=key("title", "name of the module, 1 to 60 characters", required=True, example="My first lag")
    )
    channels: int = field(metadata=key("whole", "number of channels", required=True, example="4", least=1, most=64))
    jacks: Jacks = field(
        metadata=key(
            "jacks",
            "jacks on the panel: the total, or {inputs: 4, outputs: 4}",
            required=True,
            example="8",
            least=2,
            most=576,
            section=Jacks,
        )
    )
    rails: Rails = field(
        metadata=key(
            "section",
            "supply at the power header",
            required=True,
            example="{positive: 12 V, negative: -12 V}",
            section=Rails,
        )
    )
    glide: Glide = field(
        metadata=key(
            "section",
            "the range of the glide time",
            required=True,
            example="{shortest: 5 ms, longest: 2 s}",
            section=Glide,
        )
    )
    normalling: str = field(
        metadata=key(
            "choice",
            "what an unplugged input gets: 0 V, or the input before it",
            default="ground",
            choices=("ground", "chain"),
        )
    )
    signal: Signal = field(
        metadata=key("section", "what goes through a channel", example="{span: 0 V to 5 V}", section=Signal)
    )
    accuracy: Accuracy = field(
        metadata=key(
            "section",
            "error budgets, worst case at 25 °C",
            example="{scale: 2 %, offset: 30 mV}",
            section=Accuracy,
        )
    )
    output: Output = field(metadata=key("section", "the output stage", example="{protection: inside}", section=Output))
    build: Build = field(metadata=key("section", "how it is made", example="{mount: surface}", section=Build))
    order: Order = field(metadata=key("section", "what is bought", example="{boards: 10}", section=Order))
    waive: tuple[Waiver, ...] = field(
        default=(),
        metadata=key(
            "waivers",
            "findings that somebody answers for, each with its reason",
            default="[]",
            example="[{rule: glide-range, parts: [C3], reason: measured on the prototype}]",
            section=Waiver,
        ),
    )
    file: str = field(default="spec.yaml", compare=False)
    #: ("glide.longest", place) for every key that the page states, and ("build.catalogue[1]", place) for items
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
