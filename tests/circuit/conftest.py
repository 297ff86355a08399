"""Small designs made by hand, for holding the circuit against."""

from __future__ import annotations

import dataclasses
from collections.abc import Callable

import pytest

from modgen.catalogue.records import (
    Amplifier,
    Body,
    Capacitor,
    Control,
    Diode,
    Header,
    Jack,
    Part,
    PinDef,
    Resistor,
)
from modgen.design.model import Design, Placed, Values

TWO = (PinDef("1", "1", "passive"), PinDef("2", "2", "passive"))
POLAR = (PinDef("1", "+", "passive"), PinDef("2", "-", "passive"))
BODY = Body("any", 6e-3, 2e-3, 3e-3)


def common(key: str, kind: str, pins: tuple[PinDef, ...]) -> dict[str, object]:
    """What every record of these tests shares."""
    return {
        "key": key,
        "family": kind,
        "kind": kind,
        "description": f"{kind} {key}",
        "mount": "through-hole",
        "body": BODY,
        "land_pattern": f"LP-{key}",
        "pins": pins,
    }


def resistor(key: str, resistance: float) -> Resistor:
    return Resistor(
        **common(key, "resistor", TWO),
        resistance=resistance,
        tolerance=0.01,
        power=0.25,
        voltage=250.0,
        series="E24",
    )


def capacitor(key: str, capacitance: float, dielectric: str, polarised: bool = False) -> Capacitor:
    return Capacitor(
        **common(key, "capacitor", POLAR if polarised else TWO),
        capacitance=capacitance,
        tolerance=0.2 if polarised else 0.05,
        voltage=25.0 if polarised else 63.0,
        dielectric=dielectric,
        polarised=polarised,
    )


def amplifier(key: str, sections: int) -> Amplifier:
    """A dual (8 pins) or quad (14 pins) package with the standard pin numbers."""
    if sections == 2:
        order, positive, negative = (("1", "2", "3"), ("7", "6", "5")), "8", "4"
    else:
        order = (("1", "2", "3"), ("7", "6", "5"), ("8", "9", "10"), ("14", "13", "12"))
        positive, negative = "4", "11"
    pins = {positive: PinDef(positive, "V+", "supply+"), negative: PinDef(negative, "V-", "supply-")}
    for letter, (out, inverting, straight) in zip("ABCD", order, strict=False):
        pins[out] = PinDef(out, f"{letter} out", "output")
        pins[inverting] = PinDef(inverting, f"{letter} -", "input")
        pins[straight] = PinDef(straight, f"{letter} +", "input")
    numbers = {
        field.name: 1.0
        for field in dataclasses.fields(Amplifier)
        if field.type == "float" and field.default is dataclasses.MISSING
    }
    return Amplifier(
        **common(key, "amplifier", tuple(pins[n] for n in sorted(pins, key=int))),
        **numbers,
        type="TL07x",
        sections=sections,
        section_pins=order,
        positive_pin=positive,
        negative_pin=negative,
        input="jfet",
        phase_reversal=True,
    )


RECORDS: dict[str, Part] = {
    "jack": Jack(
        **common(
            "jack", "jack", tuple(PinDef(n, w, "passive") for n, w in (("T", "tip"), ("TN", "switch"), ("S", "sleeve")))
        ),
        voltage=50.0,
        current=0.5,
        panel_hole=6e-3,
    ),
    "header": Header(
        **common("header", "header", tuple(PinDef(str(n), str(n), "passive") for n in range(1, 11))),
        current=1.0,
        voltage=250.0,
    ),
    "control": Control(
        **common("control", "control", tuple(PinDef(n, n, "passive") for n in "123")),
        resistance=1e6,
        tolerance=0.2,
        taper="log",
        middle=0.15,
        end_resistance=2.0,
        end_share=0.0,
        power=0.05,
        voltage=200.0,
        travel=280.0,
        solder_temperature=260.0,
        solder_time=3.0,
    ),
    "diode": Diode(
        **common("diode", "diode", (PinDef("1", "cathode", "passive"), PinDef("2", "anode", "passive"))),
        reverse_voltage=40.0,
        forward_current=1.0,
        forward=((0.1, 0.3, 0.4),),
        leakage=1e-3,
        schottky=True,
    ),
    "1M": resistor("1M", 1e6),
    "100k": resistor("100k", 1e5),
    "2.2k": resistor("2.2k", 2200.0),
    "1k": resistor("1k", 1000.0),
    "1u film": capacitor("1u film", 1e-6, "film-pp"),
    "100n": capacitor("100n", 100e-9, "x7r"),
    "47p": capacitor("47p", 47e-12, "c0g"),
    "10u": capacitor("10u", 10e-6, "electrolytic", polarised=True),
    "dual": amplifier("dual", 2),
    "quad": amplifier("quad", 4),
}


class Maker:
    """Numbers references and collects parts; sections are handed out in the order of the packages."""

    def __init__(self, packages: list[Amplifier], single: bool, inside: bool) -> None:
        self.parts: list[Placed] = []
        self.count: dict[str, int] = {}
        self.single, self.inside = single, inside
        self.sections = [(k, s) for k, p in enumerate(packages) for s in range(p.sections)]
        self.packages = packages
        self.pins: list[dict[str, str]] = [
            {p.positive_pin: "V+", p.negative_pin: "0V" if single else "V-"} for p in packages
        ]

    def put(
        self, letters: str, key: str, role: str, value: str, channel: int = 0, serves: str = "", **pins: str
    ) -> str:
        self.count[letters] = self.count.get(letters, 0) + 1
        ref = f"{letters}{self.count[letters]}"
        pairs = tuple((name.removeprefix("p"), net) for name, net in pins.items())
        self.parts.append(Placed(ref, RECORDS[key], role, value, pairs, channel, serves))
        return ref

    def section(self, out: str, inverting: str, straight: str) -> None:
        package, section = self.sections.pop(0)
        names = self.packages[package].section_pins[section]
        self.pins[package].update(zip(names, (out, inverting, straight), strict=True))

    def channel(self, k: int) -> None:
        n = f"CH{k}_"
        before = f"CH{k - 1}_IN" if k > 1 else "0V"
        self.put("J", "jack", "input-jack", "input", k, T=n + "IN", TN=before, S="0V")
        self.put("R", "1M", "terminator", "1M", k, p1=n + "IN", p2="0V")
        self.put("R", "100k", "input-series", "100k", k, p1=n + "IN", p2=n + "A")
        self.section(n + "BUF", n + "BUF", n + "A")
        self.put("R", "2.2k", "isolating", "2.2k", k, p1=n + "BUF", p2=n + "CTL")
        self.put("R", "control", "glide-control", "1M", k, p1=n + "CTL", p2=n + "GLIDE", p3=n + "GLIDE")
        self.put("C", "1u film", "glide-capacitor", "1u", k, p1=n + "GLIDE", p2="0V")
        self.put("R", "1k", "output-series", "1k", k, p1=n + "DRIVE", p2=n + "OUT")
        if self.inside:
            self.section(n + "DRIVE", n + "FB", n + "GLIDE")
            self.put("R", "100k", "feedback", "100k", k, p1=n + "OUT", p2=n + "FB")
            self.put("C", "47p", "compensation", "47p", k, p1=n + "DRIVE", p2=n + "FB")
        else:
            self.section(n + "DRIVE", n + "DRIVE", n + "GLIDE")
        self.put("J", "jack", "output-jack", "output", k, T=n + "OUT", TN="", S="0V")

    def shared(self) -> None:
        rails = ["V+"] if self.single else ["V+", "V-"]
        for package, section in self.sections:
            name = f"IDLE{package + 1}{'ABCD'[section]}"
            names = self.packages[package].section_pins[section]
            self.pins[package].update(zip(names, (name, name, "0V"), strict=True))
        for record, pins in zip(self.packages, self.pins, strict=True):
            in_order = {f"p{pin.number}": pins[pin.number] for pin in record.pins}
            ref = self.put("U", record.key, "amplifier", "TL07x", **in_order)
            for rail in rails:
                self.put("C", "100n", "decoupling", "100n", serves=ref, p1=rail, p2="0V")
        self.put("D", "diode", "reverse-polarity", "diode", p1="V+", p2="BUS+")
        self.put("C", "10u", "reservoir", "10u", p1="V+", p2="0V")
        if not self.single:
            self.put("D", "diode", "reverse-polarity", "diode", p1="BUS-", p2="V-")
            self.put("C", "10u", "reservoir", "10u", p1="0V", p2="V-")
        negative = "" if self.single else "BUS-"
        nets = [negative] * 2 + ["0V"] * 6 + ["BUS+"] * 2
        self.put("J", "header", "power-header", "2x5", **{f"p{k}": net for k, net in enumerate(nets, start=1)})


def make_design(
    channels: int = 2,
    kind: str = "dual",
    single: bool = False,
    inside: bool = False,
    title: str = "Two-lane test lag",
) -> Design:
    """A whole module by the circuit conventions."""
    record = RECORDS[kind]
    assert isinstance(record, Amplifier)
    count = -(-2 * channels // record.sections)
    maker = Maker([record] * count, single, inside)
    for k in range(1, channels + 1):
        maker.channel(k)
    maker.shared()
    r, c = RECORDS, RECORDS
    values = Values(
        amplifier="TL07x",
        packages=(record,) * count,
        terminator=r["1M"],
        input_series=r["100k"],
        isolating=r["2.2k"],
        control=r["control"],
        glide=c["1u film"],
        back_to_back=False,
        output_series=r["1k"],
        inside_loop=inside,
        feedback=r["100k"] if inside else None,
        compensation=c["47p"] if inside else None,
        diode=r["diode"],
        reservoir=c["10u"],
        decoupling=c["100n"],
    )
    return Design(title, channels, values, tuple(maker.parts))


@pytest.fixture(scope="session")
def design_of() -> Callable[..., Design]:
    """Makes designs: channels, kind of package, single supply, output resistor inside the loop."""
    return make_design


@pytest.fixture(
    scope="session",
    params=[
        {},
        {"channels": 1, "single": True},
        {"channels": 3, "kind": "quad"},
        {"channels": 1, "kind": "quad", "single": True},
        {"inside": True},
    ],
    ids=["two", "single-supply", "idle-sections", "single-supply-idle", "inside-loop"],
)
def design(request: pytest.FixtureRequest) -> Design:
    """Each of the designs in turn."""
    return make_design(**request.param)


@pytest.fixture(scope="session")
def two() -> Design:
    """Two channels on +-12 V with dual packages."""
    return make_design()
