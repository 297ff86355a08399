"""What a package needs to be described, which land pattern it gets and which pins it has.

Land patterns of chips, outlines, axial, radial and dual-in-line parts follow the published conventions
(:mod:`modgen.formulas.land_pattern`). Panel parts and headers have none; theirs are built the same way,
dimensions in hundredths of a millimetre:

- control: ``POT`` + pitch + ``W`` lead + ``L`` length + ``D`` depth + ``Q`` pins: ``POT250W100L950D1100Q3``
- toggle switch: ``SW`` and the same figures as a jack
- jack: ``JACK`` + pitch + ``W`` lead + ``L`` length + ``D`` depth + ``Q`` pins: ``JACK310W120L900D1050Q3``
- header: ``HDRS`` (shrouded) + pins + ``W`` lead + ``P`` pitch + ``_2X5`` rows and columns + ``L`` length
  + ``D`` depth + ``H`` height: ``HDRS10W64P254_2X5L2030D890H910``
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from types import MappingProxyType

from modgen.catalogue.records import Body, PinDef
from modgen.formulas import land_pattern


@dataclass(frozen=True)
class Package:
    """A kind of package: the kinds of parts that come in it and the dimensions it has besides the size."""

    holds: tuple[str, ...]
    needs: tuple[str, ...]
    name: Callable[[Body, bool], str]  # (body, polarised)
    mount: str  # where it can be mounted; every other mount is refused
    #: size is diameter x height
    round: bool = False
    pins: int = 2


def _hundredths(length: float) -> str:
    return f"{length * 1e5:.0f}"


def _chip(family: str) -> Callable[[Body, bool], str]:
    return lambda b, _: land_pattern.chip(family, b.length, b.width, b.height)


def _axial(family: str) -> Callable[[Body, bool], str]:
    return lambda b, _: land_pattern.axial(family, b.pitch, b.lead, b.length, b.width)


def _panel(family: str) -> Callable[[Body, bool], str]:
    def name(b: Body, _: bool) -> str:
        return (
            f"{family}{_hundredths(b.pitch)}W{_hundredths(b.lead)}L{_hundredths(b.length)}"
            f"D{_hundredths(b.width)}Q{b.pins}"
        )

    return name


def _header(b: Body, _: bool) -> str:
    return (
        f"HDRS{b.pins}W{_hundredths(b.lead)}P{_hundredths(b.pitch)}_2X{b.pins // 2}L{_hundredths(b.length)}"
        f"D{_hundredths(b.width)}H{_hundredths(b.height)}"
    )


#: package word to what it is
PACKAGES: Mapping[str, Package] = MappingProxyType(
    {
        "axial": Package(("resistor",), ("pitch", "lead"), _axial("RESAD"), "through-hole"),
        "axial-diode": Package(("diode",), ("pitch", "lead"), _axial("DIOAD"), "through-hole"),
        "box": Package(
            ("capacitor",),
            ("pitch", "lead"),
            lambda b, _: land_pattern.radial_box(b.pitch, b.lead, b.length, b.width, b.height),
            "through-hole",
        ),
        "can": Package(
            ("capacitor",),
            ("pitch", "lead"),
            lambda b, polarised: land_pattern.radial_round(b.pitch, b.lead, b.length, b.height, polarised),
            "through-hole",
            round=True,
        ),
        "dip": Package(
            ("amplifier",),
            ("pitch", "lead", "span", "pin_count"),
            lambda b, _: land_pattern.dual_in_line(b.span, b.lead, b.pitch, b.length, b.height, b.pins),
            "through-hole",
        ),
        "soic": Package(
            ("amplifier",),
            ("pitch", "lead", "span", "pin_count"),
            lambda b, _: land_pattern.small_outline("SOIC", b.pitch, b.span, b.height, b.pins),
            "surface",
        ),
        "chip-resistor": Package(("resistor",), (), _chip("RESC"), "surface"),
        "chip-capacitor": Package(("capacitor",), (), _chip("CAPC"), "surface"),
        "molded-diode": Package(("diode",), (), _chip("DIOM"), "surface"),
        "sod": Package(("diode",), (), _chip("SOD"), "surface"),
        "smd-can": Package(("capacitor",), (), lambda b, _: land_pattern.aluminium(b.length, b.height), "surface"),
        "control": Package(("control",), ("pitch", "lead"), _panel("POT"), "panel", pins=3),
        "jack": Package(("jack",), ("pitch", "lead"), _panel("JACK"), "panel", pins=3),
        "toggle": Package(("switch",), ("pitch", "lead"), _panel("SW"), "panel", pins=3),
        "header": Package(("header",), ("pitch", "lead"), _header, "through-hole", pins=10),
    }
)

_PASSIVE = (PinDef("1", "1", "passive"), PinDef("2", "2", "passive"))
_PINS: Mapping[str, tuple[PinDef, ...]] = MappingProxyType(
    {
        "resistor": _PASSIVE,
        "capacitor": _PASSIVE,
        "polarised": (PinDef("1", "+", "passive"), PinDef("2", "-", "passive")),
        "diode": (PinDef("1", "cathode", "passive"), PinDef("2", "anode", "passive")),
        "control": (
            PinDef("1", "1", "passive"),
            PinDef("2", "wiper", "passive"),
            PinDef("3", "3", "passive"),
        ),
        "jack": (
            PinDef("T", "tip", "passive"),
            PinDef("TN", "tip switch", "passive"),
            PinDef("S", "sleeve", "passive"),
        ),
        "switch": (
            PinDef("1", "1", "passive"),
            PinDef("2", "common", "passive"),
            PinDef("3", "3", "passive"),
        ),
        "header": tuple(PinDef(str(n), str(n), "passive") for n in range(1, 11)),
    }
)

#: (sections, pins) to ((output, inverting, non-inverting) per section, V+, V-): the standard pin numbers
AMPLIFIER_PINS: Mapping[tuple[int, int], tuple[tuple[tuple[str, str, str], ...], str, str]] = MappingProxyType(
    {
        (2, 8): ((("1", "2", "3"), ("7", "6", "5")), "8", "4"),
        (4, 14): ((("1", "2", "3"), ("7", "6", "5"), ("8", "9", "10"), ("14", "13", "12")), "4", "11"),
    }
)


def pins_of(kind: str, *, polarised: bool = False, sections: int = 0, pins: int = 0) -> tuple[PinDef, ...]:
    """The pins of a part, by the netlist conventions; amplifiers by their standard numbers, rising.

    Raises
    ------
    KeyError
        When an amplifier with so many sections has no standard package with so many pins.
    """
    if kind != "amplifier":
        return _PINS["polarised" if polarised else kind]
    by_section, positive, negative = AMPLIFIER_PINS[sections, pins]
    out = [PinDef(positive, "V+", "supply+"), PinDef(negative, "V-", "supply-")]
    for letter, (output, inverting, non_inverting) in zip("ABCD", by_section, strict=False):
        out += [
            PinDef(output, f"OUT{letter}", "output"),
            PinDef(inverting, f"IN{letter}-", "input"),
            PinDef(non_inverting, f"IN{letter}+", "input"),
        ]
    return tuple(sorted(out, key=lambda pin: int(pin.number)))
