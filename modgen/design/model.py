"""A design: every part of the module by reference, what it connects to, and why it is there."""

from __future__ import annotations

from dataclasses import dataclass, field

from modgen.catalogue.records import Amplifier, Capacitor, Control, Diode, Resistor, Switch
from modgen.catalogue.records import Part as Record


@dataclass(frozen=True)
class Placed:
    """One part of the module and the net on each of its pins.

    ``pins`` pairs pin numbers with net names; a pin that is meant to stay open is paired with ``""``.
    ``channel`` is 0 on shared parts. ``serves`` names the package a decoupling capacitor belongs to.
    """

    ref: str
    record: Record
    role: str
    value: str
    pins: tuple[tuple[str, str], ...]
    channel: int = 0
    serves: str = ""
    reason: str = ""


@dataclass(frozen=True)
class Choice:
    """One decision: what was chosen, why, how much margin is left, and what lost."""

    subject: str
    chosen: str
    reason: str
    #: the limit that binds and the share of it that is left [-]; None when nothing binds
    binding: str = ""
    margin: float | None = None
    #: (what, why it lost)
    runners_up: tuple[tuple[str, str], ...] = ()


@dataclass(frozen=True)
class Values:
    """The values that every channel shares."""

    amplifier: str  # type name
    packages: tuple[Amplifier, ...]  # in the order U1, U2, ...
    terminator: Resistor
    input_series: Resistor
    isolating: Resistor
    control: Control
    glide: Capacitor
    back_to_back: bool
    output_series: Resistor
    inside_loop: bool
    feedback: Resistor | None
    compensation: Capacitor | None
    diode: Diode
    reservoir: Capacitor
    decoupling: Capacitor
    idle_tie: Resistor | None = None
    glide_parallel: Capacitor | None = None  # a second glide capacitor beside the first
    #: with a range switch: what it adds for the slow range, the switch, and the resistor that keeps the added
    #: capacitor at the output's voltage while it waits
    range_capacitor: Capacitor | None = None
    range_switch: Switch | None = None
    range_keeper: Resistor | None = None


@dataclass(frozen=True)
class Design:
    """The whole module, before it is a circuit. ``parts`` in the order of their references."""

    title: str
    channels: int
    values: Values
    parts: tuple[Placed, ...]
    choices: tuple[Choice, ...] = field(default=())
