"""The shipped parts: what there must be, that figures are possible, and the ones that decide designs."""

import dataclasses
import math
import time
from collections import Counter
from importlib.resources import files

import pytest

from modgen.catalogue import (
    Amplifier,
    Capacitor,
    Control,
    Diode,
    Header,
    Jack,
    Resistor,
    Switch,
    load_catalogue,
)
from modgen.catalogue.layers import EVIDENCE_KINDS
from modgen.catalogue.shelf import SHIPPED, _shipped
from modgen.formulas.series import in_series, series_values

CATALOGUE = load_catalogue()
PARTS = list(CATALOGUE.parts.values())
RECORD_FIELDS = {
    "key",
    "family",
    "kind",
    "description",
    "mount",
    "body",
    "land_pattern",
    "pins",
    "order_code",
    "alternates",
    "note",
    "pack",
    "prices",
    "evidence",
}
DERIVED = {"section_pins", "positive_pin", "negative_pin"}
#: what a record leaves at its default when the maker states nothing
OPTIONAL = {
    "insulation_resistance",
    "insulation_time",
    "leakage_rate",
    "leakage_floor",
    "leakage_sum",
    "polarised",
    "ground_input_through_resistor",
    "sink_near_negative",
}


def figures(part):
    """The electrical figures of a record by name."""
    return {
        f.name: getattr(part, f.name)
        for f in dataclasses.fields(part)
        if f.name not in RECORD_FIELDS and f.name not in DERIVED
    }


def test_every_data_file_is_read():
    folder = files("modgen.catalogue") / "data"
    assert sorted(SHIPPED) == sorted(entry.name for entry in folder.iterdir() if entry.name.endswith(".yaml"))


def test_keys_are_sorted_and_name_their_part():
    assert list(CATALOGUE.parts) == sorted(CATALOGUE.parts)
    assert all(part.key == key for key, part in CATALOGUE.parts.items())


def test_get_and_of():
    assert CATALOGUE.get("tl072-dip8") is CATALOGUE.parts["tl072-dip8"]
    assert CATALOGUE.get("no-such-part") is None
    assert {type(part) for part in CATALOGUE.of(Diode)} == {Diode}
    kinds = (Amplifier, Capacitor, Control, Diode, Header, Jack, Resistor, Switch)
    assert sum(len(CATALOGUE.of(kind)) for kind in kinds) == len(PARTS)
    assert CATALOGUE.families == tuple(sorted({part.family for part in PARTS}))


def test_a_switch_of_one_pole_with_its_common_in_the_middle():
    (switch,) = CATALOGUE.of(Switch)
    assert [(pin.number, pin.name) for pin in switch.pins] == [("1", "1"), ("2", "common"), ("3", "3")]
    assert (switch.mount, switch.voltage, switch.current) == ("panel", 28.0, 2.0)


def test_amplifiers_come_in_both_forms_and_both_mounts():
    forms = {(a.type, a.sections, a.mount) for a in CATALOGUE.of(Amplifier)}
    both = {(n, mount) for n in (2, 4) for mount in ("through-hole", "surface")}
    surface = {(2, "surface"), (4, "surface")}
    expected = {
        "TL07x": both,
        "TL07xH": surface,
        "LF35x": both,
        "OPAx134": both - {(4, "through-hole")},
        "OPA164x": surface,
        "OPAx277": both,
        "NE5532": {(2, "through-hole"), (2, "surface")},
        "LM358": both,
        "MCP600x": both,
        "OPAx192": surface,
        "TLV915x": surface,
        "TLC27x": both,
        "OPA2604": {(2, "through-hole"), (2, "surface")},
    }
    found: dict[str, set] = {}
    for kind, sections, mount in forms:
        found.setdefault(kind, set()).add((sections, mount))
    assert found == expected
    assert {a.input for a in CATALOGUE.of(Amplifier)} == {"jfet", "cmos", "bipolar"}


def test_diodes_on_both_mounts():
    assert len(CATALOGUE.of(Diode)) == 8
    assert Counter(d.mount for d in CATALOGUE.of(Diode)) == {"through-hole": 6, "surface": 2}


@pytest.mark.parametrize("family", ["control-9mm", "control-16mm", "control-20mm"])
def test_controls_have_eight_or_more_values_on_any_board(family):
    parts = [c for c in CATALOGUE.of(Control) if c.family == family]
    assert {c.mount for c in parts} == {"panel"}
    assert len({c.resistance for c in parts if c.taper == "linear"}) >= 8
    assert len({c.resistance for c in parts if c.taper == "log"}) >= 7


@pytest.mark.parametrize(
    ("family", "power", "voltage"),
    [
        ("metal-film-0204", 0.25, 200.0),
        ("metal-film-0207", 0.6, 350.0),
        ("metal-film-0414", 1.0, 500.0),
        ("chip-0603", 0.1, 50.0),
        ("chip-0805", 0.125, 150.0),
        ("chip-1206", 0.25, 200.0),
        ("chip-2512", 1.0, 200.0),
    ],
)
def test_resistors_are_the_whole_e24_at_one_percent(family, power, voltage):
    parts = [r for r in CATALOGUE.of(Resistor) if r.family == family]
    assert sorted(r.resistance for r in parts) == list(series_values("E24", 1.0, 10e6))
    assert len(parts) == 7 * 24 + 1
    assert {(r.series, r.tolerance, r.power, r.voltage) for r in parts} == {("E24", 0.01, power, voltage)}


def test_dielectrics_per_mount():
    kinds = {(c.dielectric, c.mount) for c in CATALOGUE.of(Capacitor)}
    assert kinds == {
        ("film-pp", "through-hole"),
        ("film-pet", "through-hole"),
        ("film-pet", "surface"),
        ("film-pps", "surface"),
        ("c0g", "through-hole"),
        ("c0g", "surface"),
        ("x7r", "through-hole"),
        ("x7r", "surface"),
        ("electrolytic", "through-hole"),
        ("electrolytic", "surface"),
        ("bipolar-electrolytic", "through-hole"),
    }


def test_every_figure_has_evidence():
    for part in PARTS:
        evidence = dict(part.evidence)
        assert len(evidence) == len(part.evidence)
        needed = {name for name, value in figures(part).items() if not (name in OPTIONAL and not value)}
        needed |= {"body", "prices"}
        assert needed - set(evidence) == set(), part.key
        assert {e.kind for e in evidence.values()} <= set(EVIDENCE_KINDS), part.key
        assert all(e.source for e in evidence.values()), part.key
        assert [name for name, e in evidence.items() if e.kind == "invented"] == ["prices"], part.key


def test_bodies_land_patterns_and_prices():
    for part in PARTS:
        body = part.body
        assert 0.0004 < body.height < 0.031, part.key
        assert 0.001 < body.length < 0.04, part.key
        assert 0.0005 < body.width < 0.021, part.key
        assert part.land_pattern, part.key
        assert part.mount in ("through-hole", "surface", "panel"), part.key
        if part.mount != "surface":
            assert body.pitch > body.lead > 0, part.key
        assert part.pack >= 1, part.key
        quantities = [b.quantity for b in part.prices]
        assert quantities[0] == 1, part.key
        assert quantities == sorted(set(quantities)), part.key
        prices = [b.price for b in part.prices]
        assert prices == sorted(prices, reverse=True), part.key
        assert min(prices) > 0, part.key
        assert part.unit_price == prices[0], part.key


def test_figures_are_possible():
    may_be_zero = {"end_share", "bias_doubling", "leakage_rate", "leakage_floor"}
    may_be_zero |= {"insulation_resistance", "insulation_time", "sink_near_negative"}
    for part in PARTS:
        for name, value in figures(part).items():
            if isinstance(value, float) and not name.startswith("common_mode"):
                assert math.isfinite(value), (part.key, name)
                assert value > 0 or (value == 0 and name in may_be_zero), (part.key, name)


def test_pins_follow_the_netlist_conventions():
    for part in PARTS:
        numbers = tuple(pin.number for pin in part.pins)
        names = tuple(pin.name for pin in part.pins)
        if isinstance(part, Diode):
            assert (numbers, names) == (("1", "2"), ("cathode", "anode"))
        elif isinstance(part, Capacitor):
            assert (numbers, names) == (("1", "2"), ("+", "-") if part.polarised else ("1", "2"))
        elif isinstance(part, Control):
            assert (numbers, names[1]) == (("1", "2", "3"), "wiper")
        elif isinstance(part, Jack):
            assert numbers == ("T", "TN", "S")
        elif isinstance(part, Header):
            assert numbers == tuple(str(n) for n in range(1, 11))
        elif isinstance(part, Resistor):
            assert numbers == ("1", "2")


@pytest.mark.parametrize("amplifier", CATALOGUE.of(Amplifier), ids=lambda a: a.key)
def test_amplifier_pins(amplifier):
    by_number = {pin.number: pin for pin in amplifier.pins}
    assert list(by_number) == [str(n) for n in range(1, amplifier.body.pins + 1)]
    assert len(amplifier.section_pins) == amplifier.sections
    for letter, (output, inverting, non_inverting) in zip("ABCD", amplifier.section_pins, strict=False):
        assert (by_number[output].name, by_number[output].kind) == (f"OUT{letter}", "output")
        assert (by_number[inverting].name, by_number[inverting].kind) == (f"IN{letter}-", "input")
        assert (by_number[non_inverting].name, by_number[non_inverting].kind) == (f"IN{letter}+", "input")
    assert (by_number[amplifier.positive_pin].name, by_number[amplifier.positive_pin].kind) == ("V+", "supply+")
    assert (by_number[amplifier.negative_pin].name, by_number[amplifier.negative_pin].kind) == ("V-", "supply-")


def test_the_two_standard_pinouts():
    dual, quad = CATALOGUE.parts["tl072-dip8"], CATALOGUE.parts["tl074-soic14"]
    assert " ".join(p.name for p in dual.pins) == "OUTA INA- INA+ V- INB+ INB- OUTB V+"
    assert " ".join(p.name for p in quad.pins) == "OUTA INA- INA+ V+ INB+ INB- OUTB OUTC INC- INC+ V- IND+ IND- OUTD"


@pytest.mark.parametrize("amplifier", CATALOGUE.of(Amplifier), ids=lambda a: a.key)
def test_amplifier_bounds_are_in_order(amplifier):
    a = amplifier
    assert a.supply_least < a.supply_most <= a.supply_absolute
    assert a.offset_typical < a.offset_max
    assert a.bias_typical < a.bias_max
    assert a.quiescent_typical < a.quiescent_max
    assert a.short_circuit_least < a.short_circuit_typical < a.short_circuit_most
    assert a.common_mode_low + a.common_mode_high <= a.supply_least
    assert (a.bias_doubling == 10.0) is (a.input != "bipolar")


def test_tl07x_headroom_and_currents():
    a = CATALOGUE.parts["tl074-dip14"]
    assert isinstance(a, Amplifier)
    assert (a.common_mode_low, a.common_mode_high, a.swing_low, a.swing_high) == (4.0, 4.0, 3.0, 3.0)
    assert (a.supply_least, a.supply_most, a.supply_absolute) == (10.0, 30.0, 36.0)
    assert (a.offset_max, a.bias_max, a.quiescent_max) == (0.010, 200e-12, 2.5e-3)
    assert a.cmrr == pytest.approx(3162.28, abs=0.01)
    assert (a.gain, a.slew_rate, a.noise_density) == (25e3, 16e6, 18e-9)
    assert a.phase_reversal
    assert dict(a.evidence)["common_mode_low"].kind == "published document"
    assert dict(a.evidence)["output_resistance"].kind == "memory"


def test_tlv915x_and_mcp600x_are_refused_on_twelve_volts():
    for key, limit in (("tlv9152-soic8", 20.0), ("mcp6002-dip8", 7.0)):
        assert CATALOGUE.parts[key].supply_absolute == limit < 24.0


def test_lm358_is_kept_off_ground_and_says_so():
    a = CATALOGUE.parts["lm358-dip8"]
    assert a.ground_input_through_resistor
    assert (a.common_mode_low, a.common_mode_high, a.swing_low, a.swing_high) == (0.0, 2.0, 0.02, 2.0)
    assert (a.quiescent_typical, a.quiescent_max) == (0.5e-3, 1e-3)
    assert "only when the load returns to V-" in a.note


def test_end_resistance_of_the_controls():
    nine = CATALOGUE.parts["control-9mm-log-1m0"]
    assert nine.end == pytest.approx(10e3)
    assert nine.end_high == pytest.approx(12e3)
    assert CATALOGUE.parts["control-9mm-log-10k"].end == 500.0
    assert CATALOGUE.parts["control-16mm-log-1m0"].end_high == 2.0
    assert (nine.power, nine.voltage, nine.travel) == (0.05, 20.0, 280.0)
    assert (nine.solder_temperature, nine.solder_time) == (300.0, 3.0)
    assert nine.middle == 0.15


def test_tapers():
    middles = {(c.taper, c.middle) for c in CATALOGUE.of(Control)}
    assert middles == {("linear", 0.5), ("log", 0.15), ("reverse-log", 0.85)}


def test_insulation_of_films():
    pet = CATALOGUE.parts["film-pet-5mm-63v-1u0"]
    assert pet.insulation(5.0) == pytest.approx(1250.0 / 1e-6)
    small = CATALOGUE.parts["film-pet-5mm-63v-100n"]
    assert small.insulation(5.0) == 10e9
    box = CATALOGUE.parts["film-pet-box-63v-4u7"]
    assert box.insulation(5.0) == pytest.approx(3000.0 / 4.7e-6)
    pp = CATALOGUE.parts["film-pp-box-250v-1u0"]
    assert pp.insulation(5.0) == pytest.approx(30_000.0 / 1e-6)
    assert CATALOGUE.parts["film-pp-box-100v-1n0"].insulation(5.0) == 100e9


def test_insulation_of_ceramics():
    assert CATALOGUE.parts["c0g-0805-50v-10n"].insulation(5.0) == 100e9
    assert CATALOGUE.parts["c0g-1206-50v-100n"].insulation(5.0) == pytest.approx(1000.0 / 100e-9)
    assert CATALOGUE.parts["x7r-0805-50v-1u0"].insulation(5.0) == pytest.approx(500.0 / 1e-6)


def test_leakage_of_electrolytics():
    assert CATALOGUE.parts["electrolytic-radial-25v-10u"].leakage(5.0) == 3e-6  # 2.5 uA is below the floor
    assert CATALOGUE.parts["electrolytic-radial-25v-47u"].leakage(5.0) == pytest.approx(11.75e-6)
    assert CATALOGUE.parts["bipolar-radial-25v-10u"].leakage(5.0) == pytest.approx(10.5e-6)


def test_only_electrolytics_are_polarised():
    assert {c.dielectric for c in CATALOGUE.of(Capacitor) if c.polarised} == {"electrolytic"}
    assert not any(c.dielectric == "electrolytic" for c in CATALOGUE.of(Capacitor) if not c.polarised)


def test_capacitors_are_in_their_series():
    for capacitor in CATALOGUE.of(Capacitor):
        assert in_series(capacitor.capacitance, capacitor.series), capacitor.key
        assert 0 < capacitor.derating <= 1, capacitor.key
        assert 0 < capacitor.insulation(5.0) < math.inf, capacitor.key


@pytest.mark.parametrize("diode", CATALOGUE.of(Diode), ids=lambda d: d.key)
def test_forward_curves_rise(diode):
    assert len(diode.forward) >= 3
    for low, high in zip(diode.forward, diode.forward[1:], strict=False):
        assert all(a < b for a, b in zip(low, high, strict=True))
    assert all(typical < most for _, typical, most in diode.forward)
    assert diode.forward[0][0] == pytest.approx(1e-3)
    assert diode.forward[-1][0] <= diode.forward_current


@pytest.mark.parametrize(
    ("key", "volts", "drop"),
    [("1n5817", 20.0, 0.45), ("1n5818", 30.0, 0.55), ("1n5819", 40.0, 0.60), ("ss14", 40.0, 0.50)],
)
def test_schottky_limits(key, volts, drop):
    diode = CATALOGUE.parts[key]
    assert diode.schottky
    assert diode.reverse_voltage == volts
    assert diode.forward[-1] == (1.0, diode.forward[-1][1], drop)


@pytest.mark.parametrize(
    ("key", "name"),
    [
        ("tl072-dip8", "DIP762W53P254L959H508Q8"),
        ("tl072-soic8", "SOIC127P600X175-8N"),
        ("tl074-soic14", "SOIC127P600X175-14N"),
        ("metal-film-0207-4k7", "RESAD1016W60L630D250"),
        ("chip-0603-4k7", "RESC1608X55N"),
        ("chip-0805-4k7", "RESC2012X60N"),
        ("chip-1206-4k7", "RESC3216X70N"),
        ("1n5819", "DIOAD1016W79L521D272"),
        ("ss14", "DIOM5226X244N"),
        ("1n5819-sod123", "SOD3716X135N"),
        ("film-pet-5mm-63v-470n", "CAPRR500W50L720T350H850"),
        ("electrolytic-radial-25v-100u", "CAPPRD250W50D630H1100"),
        ("bipolar-radial-25v-22u", "CAPRD250W50D630H1100"),
        ("x7r-0805-50v-100n", "CAPC2012X125N"),
        ("electrolytic-surface-25v-47u", "CAPAE660X540N"),
        ("control-9mm-log-1m0", "POT250W100L950D1100Q3"),
        ("jack-35-switched", "JACK310W120L900D1050Q3"),
        ("switch-toggle-spdt", "SW470W120L1270D690Q3"),
        ("header-2x5", "HDRS10W64P254_2X5L2030D890H910"),
    ],
)
def test_land_patterns(key, name):
    assert CATALOGUE.parts[key].land_pattern == name


def test_one_land_pattern_is_one_body_of_one_kind():
    seen: dict[str, tuple] = {}
    for part in PARTS:
        body = part.body
        # a small outline is named by its span, not by the length of its body
        shape = (body.pitch, body.lead, body.span, body.height, body.pins)
        assert seen.setdefault(part.land_pattern, shape) == shape


def test_every_source_is_used():
    used = {evidence for part in PARTS for _, evidence in part.evidence}
    assert set(_shipped()[1].sources.values()) - used == set()


def test_loading_is_quick():
    best = math.inf
    for _ in range(5):
        _shipped.cache_clear()
        start = time.process_time()
        load_catalogue()
        best = min(best, time.process_time() - start)
    # 60 ms on an idle machine; the bound leaves room for a slow and busy one
    assert best < 0.3
