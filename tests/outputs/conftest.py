"""A small module built by hand, record by record, so that these tests stand on nothing else's work."""

from __future__ import annotations

from collections import defaultdict

import pytest

from modgen.analysis.model import (
    AccuracyBudget,
    Analyses,
    Backfeed,
    Bound,
    ChannelGlide,
    Dissipation,
    Headroom,
    Interval,
    Matching,
    MissingRail,
    Noise,
    NoiseTerm,
    RailPower,
    ReversedSupply,
    Short,
    Stability,
    Term,
    Travel,
    TravelPoint,
)
from modgen.catalogue.records import (
    Amplifier,
    Body,
    Capacitor,
    Control,
    Diode,
    Evidence,
    Header,
    Jack,
    PinDef,
    PriceBreak,
    Resistor,
)
from modgen.design.model import Choice, Design, Placed, Values
from modgen.netlist.model import Net, Netlist, Part
from modgen.outputs.model import Job
from modgen.problems import Place
from modgen.rules.contract import Checked, Finding, Report
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
    Waiver,
)

INVENTED = Evidence("invented", "a round number for an example")
SHEET = Evidence("published document", "a data sheet, table 1")
TWO = (PinDef("1", "1", "passive"), PinDef("2", "2", "passive"))


def common(key: str, kind: str, prices: tuple[PriceBreak, ...], pins=TWO, **more) -> dict:
    return {
        "key": key,
        "family": kind,
        "kind": kind,
        "description": f"{kind} {key}",
        "mount": "through-hole",
        "body": Body("axial-0207", 6.3e-3, 2.5e-3, 2.5e-3, pitch=10.16e-3),
        "land_pattern": "RESAD1016W60L630D250",
        "pins": pins,
        "prices": prices,
        "evidence": (("prices", INVENTED), ("tolerance", SHEET)),
        **more,
    }


def breaks(*pairs: tuple[int, float]) -> tuple[PriceBreak, ...]:
    return tuple(PriceBreak(q, p) for q, p in pairs)


def resistor(key: str, ohms: float, prices=None) -> Resistor:
    prices = breaks((1, 0.04), (100, 0.02)) if prices is None else prices
    return Resistor(
        resistance=ohms, tolerance=0.01, power=0.25, voltage=200.0, series="E24", **common(key, "resistor", prices)
    )


def capacitor(key: str, farads: float, dielectric: str, volts: float, prices, **more) -> Capacitor:
    return Capacitor(
        capacitance=farads,
        tolerance=0.05,
        voltage=volts,
        dielectric=dielectric,
        **common(key, "capacitor", prices),
        **more,
    )


RECORDS = {
    r.key: r
    for r in (
        resistor("r-1m", 1e6),
        resistor("r-100k", 1e5),
        resistor("r-2k2", 2.2e3),
        resistor("r-330", 330.0, prices=()),
        capacitor("c-1u-pp", 1e-6, "film-pp", 63.0, breaks((1, 0.9), (50, 0.7), (100, 0.5)), insulation_time=3e4),
        capacitor("c-100n", 100e-9, "x7r", 50.0, breaks((10, 0.05))),
        capacitor(
            "c-10u-el", 10e-6, "electrolytic", 25.0, breaks((1, 0.1)), polarised=True,
            leakage_rate=0.01, leakage_floor=3e-6,
        ),
        Diode(
            reverse_voltage=40.0, forward_current=1.0, leakage=1e-3, schottky=True,
            forward=((0.01, 0.2, 0.3), (0.1, 0.3, 0.4), (1.0, 0.45, 0.6)),
            **common("1n5819", "diode", breaks((1, 0.1))),
        ),
        Amplifier(
            type="TL07xC", sections=2, section_pins=(("1", "2", "3"), ("7", "6", "5")),
            positive_pin="8", negative_pin="4", input="jfet", supply_absolute=36.0, supply_least=10.0,
            supply_most=30.0, offset_typical=3e-3, offset_max=10e-3, offset_drift=10e-6, bias_typical=20e-12,
            bias_max=200e-12, bias_doubling=10.0, common_mode_low=4.0, common_mode_high=4.0, swing_low=3.0,
            swing_high=3.0, quiescent_typical=1.4e-3, quiescent_max=2.5e-3, gain_bandwidth=4e6, slew_rate=13e6,
            short_circuit_least=10e-3, short_circuit_typical=40e-3, short_circuit_most=60e-3, cmrr=3162.0,
            gain=25e3, output_resistance=200.0, clamp_current=10e-3, phase_reversal=True,
            capacitive_load=100e-12, noise_density=18e-9, dissipation=0.68,
            **common("tl072c", "amplifier", breaks((1, 0.5), (25, 0.4)), pins=(
                PinDef("1", "OUT1", "output"), PinDef("2", "IN1-", "input"), PinDef("3", "IN1+", "input"),
                PinDef("4", "V-", "supply-"), PinDef("5", "IN2+", "input"), PinDef("6", "IN2-", "input"),
                PinDef("7", "OUT2", "output"), PinDef("8", "V+", "supply+"),
            ), order_code="TL072CP", alternates=("TL072CN",), pack=50),
        ),
        Control(
            resistance=1e6, tolerance=0.2, taper="log", middle=0.15, end_resistance=2.0, end_share=0.0, power=0.1,
            voltage=200.0, travel=300.0, solder_temperature=300.0, solder_time=3.0,
            **common("p-1m-log", "control", breaks((1, 1.5)), pins=tuple(
                PinDef(n, n, "passive") for n in ("1", "2", "3"))),
        ),
        Jack(
            voltage=24.0, current=0.5, panel_hole=6.1e-3,
            **common("jack-3.5", "jack", breaks((1, 0.4)), pins=tuple(
                PinDef(n, n, "passive") for n in ("T", "TN", "S"))),
        ),
        Header(
            current=3.0, voltage=50.0,
            **common("header-2x5", "header", breaks((1, 0.3)), pins=tuple(
                PinDef(str(n), str(n), "passive") for n in range(1, 11))),
        ),
    )
}  # fmt: skip


class Records(dict):
    """Stands in for the catalogue: finds a record by its key."""


def placed_parts(channels: int) -> list[Placed]:
    """Every part of a two-rail module: one dual package a channel, output resistor outside the loop."""
    out: list[Placed] = []
    count: dict[str, int] = defaultdict(int)

    def add(letter, key, role, value, channel=0, serves="", **nets) -> str:
        count[letter] += 1
        ref = f"{letter}{count[letter]}"
        pins = tuple((pin.lstrip("_"), net) for pin, net in nets.items())
        out.append(Placed(ref, RECORDS[key], role, value, pins, channel, serves, f"reason of {role}"))
        return ref

    for k in range(1, channels + 1):
        n = f"CH{k}_"
        before = f"CH{k - 1}_IN" if k > 1 else "0V"
        add("J", "jack-3.5", "input-jack", "jack", k, T=n + "IN", TN=before, S="0V")
        add("R", "r-1m", "terminator", "1M", k, _1=n + "IN", _2="0V")
        add("R", "r-100k", "input-series", "100k", k, _1=n + "IN", _2=n + "A")
        add("R", "r-2k2", "isolating", "2.2k", k, _1=n + "BUF", _2=n + "CTL")
        add("R", "p-1m-log", "glide-control", "1M", k, _1=n + "CTL", _2=n + "GLIDE", _3=n + "GLIDE")
        add("C", "c-1u-pp", "glide-capacitor", "1u", k, _1=n + "GLIDE", _2="0V")
        add("R", "r-330", "output-series", "330", k, _1=n + "DRIVE", _2=n + "OUT")
        add("J", "jack-3.5", "output-jack", "jack", k, T=n + "OUT", TN="", S="0V")
        package = add(
            "U", "tl072c", "amplifier", "TL072C", k,
            _1=n + "BUF", _2=n + "BUF", _3=n + "A", _4="V-", _5=n + "GLIDE", _6=n + "DRIVE", _7=n + "DRIVE", _8="V+",
        )  # fmt: skip
        add("C", "c-100n", "decoupling", "100n", 0, package, _1="V+", _2="0V")
        add("C", "c-100n", "decoupling", "100n", 0, package, _1="V-", _2="0V")
    add("D", "1n5819", "reverse-polarity", "1N5819", _1="V+", _2="BUS+")
    add("D", "1n5819", "reverse-polarity", "1N5819", _1="BUS-", _2="V-")
    add("C", "c-10u-el", "reservoir", "10u", _1="V+", _2="0V")
    add("C", "c-10u-el", "reservoir", "10u", _1="0V", _2="V-")
    nets = {f"_{i}": "BUS-" if i < 3 else "0V" if i < 9 else "BUS+" for i in range(1, 11)}
    add("J", "header-2x5", "power-header", "2x5", **nets)
    return out


def netlist_of(placed: list[Placed], title: str) -> Netlist:
    nets: dict[str, list[tuple[str, str]]] = defaultdict(list)
    parts = []
    for p in placed:
        fields = {"part": p.record.key, "role": p.role}
        if p.channel:
            fields["channel"] = str(p.channel)
        if p.serves:
            fields["serves"] = p.serves
        parts.append(Part(p.ref, p.value, p.record.land_pattern, tuple(sorted(fields.items()))))
        for pin, net in p.pins:
            if net:
                nets[net].append((p.ref, pin))
    parts.sort(key=lambda p: (p.letters, p.number))
    return Netlist(title, tuple(parts), tuple(Net(n, tuple(sorted(pins))) for n, pins in sorted(nets.items())))


def more_analyses(channels: int) -> dict:
    """What the newer analyses say of such a board; every channel the same."""
    every = range(1, channels + 1)
    points = (TravelPoint(0.0, Interval(5e-3, 4e-3, 6e-3)), TravelPoint(1.0, Interval(2.2, 1.7, 2.8)))
    straight = tuple(TravelPoint(p.rotation, Interval(9 * p.time.nominal, 0.0, 0.0)) for p in points)
    terms = (NoiseTerm("glide resistance", 60e-9, "2.2 kΩ"), NoiseTerm("voltage noise, output buffer", 2.5e-6, "U1B"))
    volts = (12.6, 25.2)
    return {
        "matching": (Matching(0.5, 0.0, 0.1, 0.2, 0.5, 10000),) if channels > 1 else (),
        "travel": tuple(Travel(k, f"R{5 * k - 1}", "log", points, 0.9, 0.25, 0.01, 0.09) for k in every),
        "tapers": (
            Travel(1, "R4", "linear", straight, 0.7, 0.04, 0.1, 0.2),
            Travel(1, "R4", "log", points, 0.9, 0.25, 0.01, 0.09),
        ),
        "stability": tuple(
            s
            for k in every
            for s in (
                Stability(
                    "input buffer", k, f"U{k}A", (f"U{k}", f"R{5 * k - 2}"), 2.0, 100.0, 3.7e6, 0.0032, 72.8, 45.0,
                    ((0.0, 73.0), (2.0, 72.8)),
                ),
                Stability(
                    "output buffer, resistor outside the loop", k, f"U{k}B", (f"U{k}", f"R{5 * k}"), 1e-10, 400.0,
                    2.4e6, 0.25, 40.5, 45.0, ((0.0, 72.4), (1e-10, 40.5)),
                ),
            )
        ),
        "noise": tuple(
            Noise(k, end, terms, 20.0, 20e3, 64e-9, 2.6e-6, 631e-6) for k in every for end in ("fast", "slow")
        ),
        "shorts": tuple(
            Short(k, f"U{k}B", f"CH{k}_OUT", f"R{5 * k}", against, volt, 10e-3, 60e-3, 0.4, power, 0.5)
            for k in every
            for against, volt, power in zip(("0 V", "another output"), volts, (0.2, 0.6), strict=True)
        ),
        "dissipation": tuple(Dissipation(f"U{k}", 0.12, 0.4, "0 V", 0.52, 0.68) for k in every),
        "reversed_supply": tuple(
            ReversedSupply(rail, ref, bus, True, 12.6, 1e-3, -0.6, 25.2, 40.0)
            for rail, ref, bus in (("V+", "D1", -12.6), ("V-", "D2", 12.6))
        ),
        "missing_rails": (
            MissingRail("V+", -12.6, -0.4, 1.2e-3, "C7", 12.6, 0.4, 1.0),
            MissingRail("V-", 0.4, 12.6, 1.2e-3, "", 0.0, 0.0, 1.0),
        ),
        "powered_off": (
            *(Backfeed("input", f"U{k}A", (f"U{k}", f"R{5 * k - 3}"), 12.6, 1.2e-3, 5e-3) for k in every),
            Backfeed("output", "U1B", ("U1",), 12.6, float("inf"), 60e-3),
            *(Backfeed("rail", rail, ("U1",), 12.6, 3e-3, 2e-3) for rail in ("V+", "V-")),
        ),
    }  # fmt: skip


def make_job(
    channels: int = 2,
    *,
    module: str = "Two-lane test lag",
    report: Report | None = None,
    glide: Glide | None = None,
    waive: tuple[Waiver, ...] = (),
    boards: int = 1,
) -> Job:
    spec = Spec(
        module=module,
        channels=channels,
        jacks=Jacks(channels, channels),
        rails=Rails(12.0, -12.0),
        glide=glide or Glide(5e-3, 2.0),
        normalling="chain",
        signal=Signal(),
        accuracy=Accuracy(0.02, 0.2),
        output=Output(),
        build=Build(),
        order=Order(boards=boards),
        waive=waive,
    )
    placed = placed_parts(channels)
    values = Values(
        amplifier="TL07xC",
        packages=(RECORDS["tl072c"],) * channels,
        terminator=RECORDS["r-1m"],
        input_series=RECORDS["r-100k"],
        isolating=RECORDS["r-2k2"],
        control=RECORDS["p-1m-log"],
        glide=RECORDS["c-1u-pp"],
        back_to_back=False,
        output_series=RECORDS["r-330"],
        inside_loop=False,
        feedback=None,
        compensation=None,
        diode=RECORDS["1n5819"],
        reservoir=RECORDS["c-10u-el"],
        decoupling=RECORDS["c-100n"],
    )
    choice = Choice(
        "glide capacitor", "1u film", "cheapest that keeps the range", "longest glide", 0.1, (("2u2", "dearer"),)
    )
    glides = tuple(
        ChannelGlide(
            k, f"R{5 * k - 2}", f"R{5 * k - 1}", (f"C{3 * k - 2}",),
            Interval(4.84e-3, 4.5e-3, 5.2e-3), Interval(0.334, 0.25, 0.42), Interval(2.2, 1.67, 2.77),
            1.0022, 0.98, 0.97, 0.99, 10000,
        )
        for k in range(1, channels + 1)
    )  # fmt: skip
    term = Term("scale", "output resistor into load", 0.0033, "R/(R+load)", "divider", "a smaller resistor")
    drift = Term("drift", "bias current, output buffer", 3e-3, "dIb (Rcontrol + Riso)", "U1B", "a smaller control")
    analyses = Analyses(
        glides,
        AccuracyBudget(
            (term,), 0.0033, 0.0033, 0.02, 0.02, 0.014, 0.2, 0.03, 65.0, 0.021, 15.0, (drift,), 4e-3, 3.5e-3
        ),
        (Headroom("input buffer", "common mode", ("U1",), -5.0, 5.0, -7.1, 7.1),),
        (
            RailPower("V+", "D1", 12.0, 11.4, 12.6, 11.75, 11.1, 12.4, 5.6e-3, 10e-3, 20e-3),
            RailPower("V-", "D2", -12.0, -11.4, -12.6, -11.75, -11.1, -12.4, 5.6e-3, 10e-3, 20e-3),
        ),
        (Bound("CH1_GLIDE", -12.6, 12.6), Bound("FLOATING", float("-inf"), float("inf"))),
        boards_inside=0.9604,
        boards_inside_low=0.9409,
        boards_inside_high=0.9801,
        **more_analyses(channels),
    )
    if report is None:
        report = Report((), (Checked("capacitor-voltage", 8, 0.37, "C1 at 63 %"),))
    return Job(
        spec=spec,
        catalogue=Records(RECORDS),
        design=Design(module, channels, values, tuple(placed), (choice,)),
        netlist=netlist_of(placed, module),
        netlist_text="(export)\n",
        analyses=analyses,
        report=report,
    )


FAULT = Finding(
    "capacitor-voltage", "error", ("C7",), "C7 is rated 10 V and can see 12.6 V", "it will short", "take 25 V",
    12.6, 10.0, "V",
)  # fmt: skip
WAIVED = Finding(
    "idle-amplifier", "error", ("U2",), "U2B is not tied off", "it oscillates", "tie it", waived="bench tested",
)  # fmt: skip


@pytest.fixture
def job() -> Job:
    return make_job()


@pytest.fixture
def make():
    """The builder itself, for other sizes and verdicts."""
    return make_job


@pytest.fixture
def faulty() -> Job:
    """Not cleared: one error stands, another is waived."""
    report = Report(
        (FAULT, WAIVED),
        (Checked("capacitor-voltage", 8, -0.26, "C7"), Checked("idle-amplifier", 1, None, "U2B", True)),
    )
    return make_job(report=report, waive=(Waiver("idle-amplifier", ("U2",), "bench tested", Place("s.yaml", 3, 1)),))
