"""A bench: netlists built by hand after the channel circuit, and a catalogue of round figures."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass, field, replace
from typing import Any

import pytest

from modgen.analysis.board import Board
from modgen.catalogue.records import (
    Amplifier,
    Body,
    Capacitor,
    Control,
    Diode,
    Header,
    Jack,
    PinDef,
    Resistor,
    Switch,
)
from modgen.catalogue.records import Part as Record
from modgen.netlist.model import Net, Netlist, Part
from modgen.spec.model import (
    Accuracy,
    Build,
    Glide,
    Jacks,
    Order,
    Output,
    Rails,
    Signal,
    Spec,
)

BODY = Body("test", 1e-3, 1e-3, 1e-3)
COMMON: dict[str, Any] = {"mount": "through-hole", "body": BODY, "land_pattern": "TEST", "description": ""}


def _pins(*numbers: str) -> tuple[PinDef, ...]:
    return tuple(PinDef(number, number, "passive") for number in numbers)


DUAL = (("1", "2", "3"), ("7", "6", "5"))
QUAD = (("1", "2", "3"), ("7", "6", "5"), ("8", "9", "10"), ("14", "13", "12"))


def amplifier(key: str, sections: tuple[tuple[str, str, str], ...], **changes: Any) -> Amplifier:
    """TL072C figures, or others."""
    figures: dict[str, Any] = {
        "key": key,
        "family": "TL07x",
        "kind": "amplifier",
        "pins": _pins(*(str(n) for n in range(1, 9 if len(sections) == 2 else 15))),
        "type": "TL07x",
        "sections": len(sections),
        "section_pins": sections,
        "positive_pin": "8" if len(sections) == 2 else "4",
        "negative_pin": "4" if len(sections) == 2 else "11",
        "input": "jfet",
        "supply_absolute": 36.0,
        "supply_least": 10.0,
        "supply_most": 30.0,
        "offset_typical": 3e-3,
        "offset_max": 10e-3,
        "offset_drift": 10e-6,
        "bias_typical": 20e-12,
        "bias_max": 200e-12,
        "bias_doubling": 10.0,
        "common_mode_low": 4.0,
        "common_mode_high": 4.0,
        "swing_low": 3.0,
        "swing_high": 3.0,
        "quiescent_typical": 1.4e-3,
        "quiescent_max": 2.5e-3,
        "gain_bandwidth": 4e6,
        "slew_rate": 13e6,
        "short_circuit_least": 10e-3,
        "short_circuit_typical": 40e-3,
        "short_circuit_most": 60e-3,
        "cmrr": 10 ** (70 / 20),
        "gain": 25e3,
        "output_resistance": 200.0,
        "clamp_current": 10e-3,
        "phase_reversal": True,
        "capacitive_load": 100e-12,
        "noise_density": 18e-9,
        "dissipation": 0.68,
    }
    return Amplifier(**{**COMMON, **figures, **changes})


def capacitor(key: str, farad: float, **figures: Any) -> Capacitor:
    base: dict[str, Any] = {"family": "c", "kind": "capacitor", "pins": _pins("1", "2"), "tolerance": 0.05}
    return Capacitor(**{**COMMON, **base, "key": key, "capacitance": farad, **figures})


RECORDS: tuple[Record, ...] = (
    amplifier("tl072", DUAL),
    amplifier("tl074", QUAD),
    amplifier(
        "lm358",
        DUAL,
        type="LM358",
        input="bipolar",
        bias_max=250e-9,
        bias_doubling=0.0,
        common_mode_low=0.0,
        common_mode_high=1.5,
        swing_low=0.02,
        swing_high=1.5,
        offset_max=7e-3,
    ),
    Resistor(
        **COMMON,
        key="r",
        family="r",
        kind="resistor",
        pins=_pins("1", "2"),
        resistance=1e3,
        tolerance=0.01,
        power=0.25,
        voltage=200.0,
        series="E24",
    ),
    capacitor("c-pp", 1e-6, voltage=63.0, dielectric="film-pp", insulation_time=30_000.0),
    capacitor("c-x7r", 100e-9, voltage=50.0, dielectric="x7r", tolerance=0.1, insulation_time=1000.0),
    capacitor(
        "c-el",
        10e-6,
        voltage=25.0,
        dielectric="electrolytic",
        tolerance=0.2,
        polarised=True,
        leakage_rate=0.01,
        leakage_floor=3e-6,
    ),
    Control(
        **COMMON,
        key="pot",
        family="pot",
        kind="control",
        pins=_pins("1", "2", "3"),
        resistance=1e6,
        tolerance=0.2,
        taper="log",
        middle=0.15,
        end_resistance=2.0,
        end_share=0.0,
        power=0.05,
        voltage=20.0,
        travel=280.0,
        solder_temperature=300.0,
        solder_time=3.0,
    ),
    Diode(
        **COMMON,
        key="schottky",
        family="d",
        kind="diode",
        pins=_pins("1", "2"),
        reverse_voltage=40.0,
        forward_current=1.0,
        forward=((1e-3, 0.2, 0.3), (1.0, 0.2, 0.3)),
        leakage=1e-3,
        schottky=True,
    ),
    Jack(
        **COMMON,
        key="jack",
        family="j",
        kind="jack",
        pins=_pins("T", "TN", "S"),
        voltage=24.0,
        current=0.5,
        panel_hole=6e-3,
    ),
    Switch(
        **COMMON,
        key="toggle",
        family="s",
        kind="switch",
        pins=_pins("1", "2", "3"),
        voltage=28.0,
        current=2.0,
        panel_hole=6e-3,
    ),
    Header(
        **COMMON,
        key="header",
        family="h",
        kind="header",
        pins=_pins(*(str(n) for n in range(1, 11))),
        current=3.0,
        voltage=500.0,
    ),
)


class Shelf:
    """A catalogue of these records."""

    def __init__(self, records: Iterable[Record] = RECORDS) -> None:
        self.records = {record.key: record for record in records}

    def get(self, key: str) -> Record | None:
        return self.records.get(key)

    def changed(self, key: str, **figures: Any) -> Shelf:
        return Shelf(replace(r, **figures) if r.key == key else r for r in self.records.values())


@dataclass
class Bench:
    """Parts with the net on each pin; what a test changes it changes here."""

    parts: dict[str, tuple[str, str, dict[str, str], dict[str, str]]] = field(default_factory=dict)
    shelf: Shelf = field(default_factory=Shelf)

    def add(self, ref: str, value: str, key: str, pins: dict[str, str], **fields: str) -> None:
        self.parts[ref] = (value, key, pins, fields)

    def value(self, ref: str, value: str) -> Bench:
        _, key, pins, fields = self.parts[ref]
        self.parts[ref] = (value, key, pins, fields)
        return self

    def move(self, ref: str, pin: str, net: str) -> Bench:
        self.parts[ref][2][pin] = net
        return self

    def exact(self) -> Bench:
        """All lane values without tolerance, for sums by hand."""
        for value, key, pins, fields in list(self.parts.values()):
            del value, pins
            if key in ("r", "pot", "c-pp", "c-x7r", "c-el"):
                fields["tolerance"] = "0%"
        return self

    def netlist(self) -> Netlist:
        nets: dict[str, list[tuple[str, str]]] = {}
        parts = []
        for ref, (value, key, pins, fields) in self.parts.items():
            held = {"part": key, **fields}
            parts.append(Part(ref, value, "TEST", tuple(sorted(held.items()))))
            for pin, net in pins.items():
                if net:
                    nets.setdefault(net, []).append((ref, pin))
        parts.sort(key=lambda p: (p.letters, p.number))
        return Netlist("bench", tuple(parts), tuple(Net(name, tuple(sorted(nets[name]))) for name in sorted(nets)))

    def board(self) -> Board:
        return Board.of(self.netlist(), self.shelf)


def make_lanes(
    channels: int = 1,
    *,
    inputs: int | None = None,
    chain: bool = False,
    inside: bool = False,
    back_to_back: bool = False,
    single: bool = False,
    outputs: int = 1,
    ranged: bool = False,
    amplifier_key: str = "tl072",
) -> Bench:
    """The channel circuit of design section 4 with the values of section 11."""
    bench = Bench()
    inputs = channels if inputs is None else inputs
    lower = "0V" if single else "V-"
    for k in range(1, channels + 1):
        n = str(k)
        fed = min(k, inputs)
        ch = f"CH{k}"
        base = 10 * k
        if k <= inputs:
            normal = f"CH{k - 1}_IN" if chain and k > 1 else "0V"
            bench.add(f"J{base}", "jack", "jack", {"T": f"{ch}_IN", "TN": normal, "S": "0V"}, channel=n)
            bench.add(f"R{base}", "1M", "r", {"1": f"{ch}_IN", "2": "0V"}, channel=n)
        bench.add(f"R{base + 1}", "10k", "r", {"1": f"CH{fed}_IN", "2": f"{ch}_A"}, channel=n)
        bench.add(f"R{base + 2}", "2.2k", "r", {"1": f"{ch}_BUF", "2": f"{ch}_CTL"}, channel=n)
        glide = f"{ch}_GLIDE"
        bench.add(f"R{base + 3}", "1M", "pot", {"1": f"{ch}_CTL", "2": glide, "3": glide}, channel=n)
        if back_to_back:
            bench.add(f"C{base}", "10u", "c-el", {"1": glide, "2": f"{ch}_MID"}, channel=n)
            bench.add(f"C{base + 1}", "10u", "c-el", {"1": "0V", "2": f"{ch}_MID"}, channel=n)
        else:
            bench.add(f"C{base}", "1u", "c-pp", {"1": glide, "2": "0V"}, channel=n)
        if ranged:
            bench.add(f"S{k}", "S", "toggle", {"1": glide, "2": f"{ch}_RANGE", "3": f"{ch}_KEEP"}, channel=n)
            bench.add(f"C{base + 5}", "9u", "c-pp", {"1": f"{ch}_RANGE", "2": "0V"}, channel=n)
            bench.add(f"R{base + 8}", "10k", "r", {"1": f"{ch}_DRIVE", "2": f"{ch}_KEEP"}, channel=n)
        back = f"{ch}_FB" if inside else f"{ch}_DRIVE"
        pins = {"1": f"{ch}_BUF", "2": f"{ch}_BUF", "3": f"{ch}_A", "4": lower}
        pins |= {"5": glide, "6": back, "7": f"{ch}_DRIVE", "8": "V+"}
        bench.add(f"U{k}", "TL072", amplifier_key, pins, channel=n)
        for out in range(outputs):
            net = f"{ch}_OUT" + (str(out + 1) if out else "")
            bench.add(f"R{base + 4 + out}", "1k", "r", {"1": f"{ch}_DRIVE", "2": net}, channel=n)
            bench.add(f"J{base + 1 + out}", "jack", "jack", {"T": net, "TN": "", "S": "0V"}, channel=n)
        if inside:
            bench.add(f"R{base + 9}", "10k", "r", {"1": f"{ch}_OUT", "2": back}, channel=n)
            bench.add(f"C{base + 9}", "100p", "c-x7r", {"1": f"{ch}_DRIVE", "2": back}, channel=n)
        bench.add(f"C{100 + base}", "100n", "c-x7r", {"1": "V+", "2": "0V"}, serves=f"U{k}")
        if not single:
            bench.add(f"C{101 + base}", "100n", "c-x7r", {"1": "0V", "2": "V-"}, serves=f"U{k}")
    bench.add("D1", "D", "schottky", {"1": "V+", "2": "BUS+"})
    bench.add("C1", "10u", "c-el", {"1": "V+", "2": "0V"})
    header = {str(p): "0V" for p in range(3, 9)} | {"9": "BUS+", "10": "BUS+"}
    if not single:
        bench.add("D2", "D", "schottky", {"1": "BUS-", "2": "V-"})
        bench.add("C2", "10u", "c-el", {"1": "0V", "2": "V-"})
        header |= {"1": "BUS-", "2": "BUS-"}
    bench.add("J1", "header", "header", header)
    return bench


@pytest.fixture
def lanes() -> Callable[..., Bench]:
    return make_lanes


@pytest.fixture
def empty_bench() -> Callable[[], Bench]:
    return Bench


@pytest.fixture
def spec() -> Spec:
    """Section 11: ±12 V at 5 %, pitch signals of ±5 V."""
    return Spec(
        module="bench",
        channels=1,
        jacks=Jacks(1, 1),
        rails=Rails(12.0, -12.0, 0.05),
        glide=Glide(5e-3, 2.0),
        normalling="ground",
        signal=Signal(-5.0, 5.0, 1e3, 100e3, pitch=True),
        accuracy=Accuracy(5 / 1200, 30e-3),
        output=Output(),
        build=Build(),
        order=Order(),
    )
