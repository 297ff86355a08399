"""Catalogue files of one's own: what they add and replace, and every way they can be wrong."""

import pytest

from modgen.catalogue import Evidence, load_catalogue
from modgen.problems import InputError
from modgen.units import QuantityError, parse_quantity

RESISTOR = """\
families:
  my-film:
    kind: resistor
    description: Resistor, metal film
    body: axial-0207
    tolerance: 0.1 %
    power: 0.25 W
    voltage: 250 V
    series: E96
    source: memory
    values: [4.99 kΩ]
"""


def unit_error(text, kind):
    """What the reader of quantities says, which has tests of its own."""
    with pytest.raises(QuantityError) as caught:
        parse_quantity(text, kind)
    return str(caught.value)


@pytest.fixture
def load(tmp_path):
    def run(text, name="mine.yaml"):
        path = tmp_path / name
        path.write_text(text, encoding="utf-8")
        return load_catalogue([path])

    return run


@pytest.fixture
def messages(load, tmp_path):
    """The whole text of what is wrong, with the bare file name."""

    def run(text):
        with pytest.raises(InputError) as caught:
            load(text)
        return str(caught.value).replace(f"{tmp_path}/", "")

    return run


def test_a_file_adds(load, tmp_path):
    shipped = load_catalogue()
    own = load(RESISTOR)
    assert own.added == (("my-film-4k99", str(tmp_path / "mine.yaml")),)
    assert own.replaced == ()
    assert set(own.parts) - set(shipped.parts) == {"my-film-4k99"}
    part = own.get("my-film-4k99")
    assert (part.resistance, part.tolerance, part.prices, part.unit_price) == (4990.0, 0.001, (), float("inf"))
    assert list(own.parts) == sorted(own.parts)
    assert load_catalogue() is shipped
    assert shipped.get("my-film-4k99") is None


def test_a_file_replaces_a_part_whole(load, tmp_path):
    own = load(
        """\
sources:
  shop: {document: quotation 12, evidence: published document}
families:
  metal-film-0207:
    like: metal-film-0207
    source: shop
    values: [4.7 kΩ]
    prices: {1: 0.03, 200: 0.01}
"""
    )
    assert own.replaced == (("metal-film-0207-4k7", str(tmp_path / "mine.yaml")),)
    assert own.added == ()
    part = own.get("metal-film-0207-4k7")
    assert [(b.quantity, b.price) for b in part.prices] == [(1, 0.03), (200, 0.01)]
    # a price of one's own is never marked with the source of the one it replaces, nor the other way round
    assert dict(part.evidence)["prices"] == Evidence("published document", "quotation 12")
    assert dict(part.evidence)["power"].source.startswith("Vishay Beyschlag")
    assert dict(part.evidence)["tolerance"].kind == "common practice"
    assert own.get("metal-film-0207-4k3") == load_catalogue().get("metal-film-0207-4k3")


def test_the_last_of_two_files_holds(tmp_path):
    one, two = tmp_path / "one.yaml", tmp_path / "two.yaml"
    one.write_text(RESISTOR)
    two.write_text(RESISTOR.replace("0.25 W", "0.5 W"))
    own = load_catalogue([one, two])
    assert own.get("my-film-4k99").power == 0.5
    assert own.added == (("my-film-4k99", str(one)),)
    assert own.replaced == (("my-film-4k99", str(two)),)


def test_a_family_like_another(load):
    own = load(
        """\
families:
  conductive-9mm:
    like: control-9mm
    source: memory
    description: Control, 9 mm, conductive plastic
    end_resistance: 20 Ω
    end_share: 0 %
    parts:
      - {taper: log, middle: 15 %, values: [100 kΩ, 1 MΩ]}
"""
    )
    part = own.get("conductive-9mm-log-1m0")
    assert (part.end, part.power, part.travel) == (20.0, 0.05, 280.0)
    assert part.description == "Control, 9 mm, conductive plastic, log"
    evidence = dict(part.evidence)
    assert (evidence["end_resistance"].kind, evidence["power"].source) == ("memory", "Bourns PTV09 data sheet")
    assert evidence["prices"].kind == "invented"


def test_a_body_of_ones_own(load):
    own = load(
        RESISTOR.replace("body: axial-0207", "body: small")
        + "bodies:\n  small: {package: axial, size: 3.4 x 1.6 x 1.6 mm, pitch: 5.08 mm, lead: 0.5 mm, source: memory}\n"
    )
    assert own.get("my-film-4k99").land_pattern == "RESAD508W50L340D160"


def test_units_of_their_own(load):
    own = load(
        """\
families:
  mine:
    like: tl07x
    source: memory
    slew_rate: 8 V/us
    cmrr: 100 dB
    gain: 200 V/mV
    offset_drift: 3 uV/K
    noise_density: 5 nV/rtHz
    parts:
      - {key: my-dual, sections: 2, body: dip8, dissipation: 0.5 W}
"""
    )
    part = own.get("my-dual")
    assert (part.slew_rate, part.cmrr, part.gain) == (8e6, pytest.approx(1e5), 200e3)
    assert (part.offset_drift, part.noise_density) == (3e-6, 5e-9)
    assert part.description == "Operational amplifier, JFET input, dual, DIP-8"


def test_every_error_at_once(messages):
    text = """\
sources:
  sheet: {document: a sheet, evidence: guess}
families:
  bad:
    kind: resistor
    description: Resistor
    body: axial-207
    tolerence: 1 %
    power: -0.25 W
    voltage: 5 ms
    series: E24
    source: memroy
    values: [5 kΩ]
    figures_from: {practice: [powr]}
"""
    assert messages(text) == (
        "mine.yaml:2:40: error: unknown kind of evidence 'guess'\n"
        "    why: known here: published document, common practice, memory, invented\n"
        "    fix: use one of the known names\n"
        "mine.yaml:4:3: error: the family 'bad' has no tolerance\n"
        "    why: what is not stated is not guessed\n"
        "    fix: add what the maker says\n"
        "mine.yaml:7:11: error: unknown body 'axial-207'\n"
        f"    why: known here: {BODIES}\n"
        "    fix: did you mean 'axial-0207'?\n"
        "mine.yaml:8:5: error: unknown key 'tolerence' in families.bad\n"
        f"    why: known here: {RESISTOR_KEYS}\n"
        "    fix: did you mean 'tolerance'?\n"
        f"mine.yaml:9:12: error: power: {unit_error('-0.25 W', 'power')}\n"
        f"mine.yaml:10:14: error: voltage: {unit_error('5 ms', 'voltage')}\n"
        "mine.yaml:12:13: error: unknown source 'memroy'\n"
        "    why: every figure names where it comes from, by an entry under 'sources'\n"
        "    fix: did you mean 'memory'? Otherwise add it under 'sources' with its document and evidence, "
        "or write memory or practice\n"
        "mine.yaml:13:14: error: 5 kΩ is not in E24, the series this family is sold in\n"
        "    why: a value outside its series cannot be ordered\n"
        "    fix: correct the value or the series\n"
        "mine.yaml:14:31: error: unknown figure of a resistor 'powr'\n"
        "    why: known here: resistance, tolerance, power, voltage, series, body, pins, prices, order_code\n"
        "    fix: did you mean 'power'?"
    )


BODIES = (
    "axial-0204, axial-0207, axial-0414, can-10x12, can-10x20, can-12x20, can-5x11, can-6x11, can-8x11, "
    "ceramic-0805, ceramic-1206, ceramic-radial, chip-0603, chip-0805, chip-1206, chip-2512, dip14, dip8, do-35, "
    "do-41, sma, smd-can-4, smd-can-5, smd-can-6, smd-can-6-tall, smd-can-8, sod-123, soic14, soic8"
)
RESISTOR_KEYS = (
    "kind, like, resistance, tolerance, power, voltage, series, body, package, size, pitch, lead, span, pin_count, "
    "source, description, note, order_code, prices, pack, alternates, figures_from, parts, values"
)

CASES = {
    "duplicate key": (
        RESISTOR.replace("[4.99 kΩ]", "[4.99 kΩ, 4k99]"),
        "mine.yaml:11:23: error: the part 'my-film-4k99' is there twice\n"
        "    why: it is already at line 11, column 14; a key stands for one part\n"
        "    fix: remove one of them or give it another key",
    ),
    "zero": (
        RESISTOR.replace("0.25 W", "0 W"),
        "mine.yaml:7:12: error: power: '0 W' is too small\n"
        "    why: no real part has 0 or less here\n"
        "    fix: check the sign and the unit",
    ),
    "too much": (
        RESISTOR.replace("0.1 %", "200 %"),
        "mine.yaml:6:16: error: tolerance: '200 %' is too large\n"
        "    why: no real part has more than 90 % here\n"
        "    fix: check the unit",
    ),
    "no source": (
        RESISTOR.replace("    source: memory\n", ""),
        "mine.yaml:2:3: error: no source is given for resistance, tolerance, power, voltage, series of 'my-film'\n"
        "    why: every figure names where it comes from\n"
        "    fix: add source: memory, or name a document under 'sources'",
    ),
    "no kind": (
        RESISTOR.replace("    kind: resistor\n", ""),
        "mine.yaml:2:3: error: the family 'my-film' has no kind\n"
        "    why: the kind decides which figures it has: resistor, capacitor, control, diode, amplifier, jack, switch, "
        "header\n"
        "    fix: add kind: resistor, for example, or like: and the name of a family whose figures it shares",
    ),
    "no kind, and the name of a shipped family": (
        RESISTOR.replace("    kind: resistor\n", "").replace("my-film", "film-pp-box"),
        "mine.yaml:2:3: error: the family 'film-pp-box' has no kind\n"
        "    why: the kind decides which figures it has: resistor, capacitor, control, diode, amplifier, jack, switch, "
        "header\n"
        "    fix: add like: film-pp-box to take over the figures of the family that is known by this name, "
        "or kind: capacitor to state all of its own",
    ),
    "a decimal comma in a price": (
        RESISTOR + "    prices: {1: 0,40, 100: 0.25}\n",
        "mine.yaml:12:17: error: the price is '0,40'\n"
        "    why: a price is a number, without a currency\n"
        "    fix: write it like {1: 0.40, 100: 0.25}",
    ),
    "wrong package": (
        RESISTOR.replace("axial-0207", "dip8"),
        "mine.yaml:5:5: error: a resistor does not come in the package 'dip'\n"
        "    why: packages of a resistor: axial, chip-resistor\n"
        "    fix: use one of these",
    ),
    "bad size": (
        RESISTOR.replace("body: axial-0207", "package: axial\n    size: 6.3 by 2.5\n    pitch: 1 cm\n    lead: 0.6 mm"),
        "mine.yaml:6:11: error: size is '6.3 by 2.5', not dimensions\n"
        "    why: a size is length x width x height, or diameter x height of a round can\n"
        "    fix: write it like 7.2 x 2.5 x 6.5 mm\n"
        f"mine.yaml:7:12: error: pitch: {unit_error('1 cm', 'length')}",
    ),
    "two-dimensional box": (
        RESISTOR.replace("body: axial-0207", "package: axial\n    size: 6 x 2 mm\n    pitch: 9 mm\n    lead: 0.6 mm"),
        "mine.yaml:5:5: error: the size of the package 'axial' has 2 dimensions\n"
        "    why: it is length x width x height\n"
        "    fix: write it like 7.2 x 2.5 x 6.5 mm",
    ),
    "no key": (
        RESISTOR.replace("values: [4.99 kΩ]", "resistance: 4.99 kΩ"),
        "mine.yaml:2:3: error: this part of 'my-film' has no key\n"
        "    why: a part is known by its key\n"
        "    fix: add key: my-part, or values: to name the parts of a family by their value",
    ),
    "price": (
        RESISTOR + "    prices: {1: free, few: 0.10}\n",
        "mine.yaml:12:17: error: the price is 'free'\n"
        "    why: a price is a number, without a currency\n"
        "    fix: write it like {1: 0.40, 100: 0.25}\n"
        "mine.yaml:12:23: error: 'few' is not a quantity\n"
        "    why: prices hold from a quantity on\n"
        "    fix: write it like {1: 0.40, 100: 0.25}",
    ),
    "known source": (
        RESISTOR + "sources:\n  memory: {document: mine, evidence: memory}\n",
        "mine.yaml:13:3: error: the source 'memory' is already known\n"
        "    why: a name stands for one document\n"
        "    fix: give it another name",
    ),
    "series upside down": (
        RESISTOR.replace("[4.99 kΩ]", "{series: E96, from: 10 kΩ, to: 1 kΩ}"),
        "mine.yaml:11:33: error: values from 10 kΩ to 1 kΩ: the first is above the last\n"
        "    why: none is between\n"
        "    fix: exchange from and to",
    ),
    "backslash": (
        RESISTOR.replace("Resistor, metal film", "Resistor \\ film"),
        "mine.yaml:4:18: error: description holds a backslash: 'Resistor \\ film'\n"
        "    why: it is written to netlists, which hold none\n"
        "    fix: leave it out",
    ),
    "unknown section": (
        RESISTOR + "famlies: {}\n",
        "mine.yaml:12:1: error: unknown key 'famlies'\n"
        "    why: known here: sources, bodies, families\n"
        "    fix: did you mean 'families'?",
    ),
    "a list": (
        "- 1\n",
        "mine.yaml:1:1: error: the page is a list, not a mapping\n"
        "    why: the page is made of keys and values\n"
        "    fix: write it like this: families: {my-family: {kind: resistor}}",
    ),
}


@pytest.mark.parametrize("case", CASES)
def test_one_error(messages, case):
    text, expected = CASES[case]
    assert messages(text) == expected


AMPLIFIER = """\
families:
  mine:
    like: tl07x
    source: memory
    parts:
      - {key: my-dual, sections: 2, body: dip8, dissipation: 0.5 W}
"""


@pytest.mark.parametrize(
    ("line", "expected"),
    [
        (
            "bias_max: 1 pA",
            "mine.yaml:{}: error: bias_typical 20 pA is above bias_max 1 pA\n"
            "    why: bias_typical <= bias_max holds for every part\n"
            "    fix: exchange them or check the units",
        ),
        (
            "swing_high: 28 V",
            "mine.yaml:{}: error: swing_low and swing_high leave nothing of supply_most 30 V\n"
            "    why: both are headrooms from the rails\n"
            "    fix: write how far from each rail, not how far from 0 V",
        ),
        (
            "slew_rate: 13",
            "mine.yaml:5:16: error: slew_rate: '13' is not a slew rate\n"
            "    why: a slew rate is a number and one of V/s, V/ms, V/µs\n"
            "    fix: write it like 13 V/µs",
        ),
        (
            "input: fet",
            "mine.yaml:5:12: error: input: 'fet' is not known here\n"
            "    why: known here: jfet, cmos, bipolar\n"
            "    fix: use one of the known words",
        ),
        (
            "phase_reversal: maybe",
            "mine.yaml:5:21: error: phase_reversal: 'maybe' is neither yes nor no\n"
            "    why: this says whether something is so\n"
            "    fix: write yes or no",
        ),
    ],
)
def test_amplifier_errors(messages, line, expected):
    found = messages(AMPLIFIER.replace("    source: memory\n", f"    source: memory\n    {line}\n"))
    first = found.splitlines()[0].removeprefix("mine.yaml:").partition(": error")[0]
    assert found == expected.format(first)


def test_an_amplifier_in_no_standard_package(messages):
    assert messages(AMPLIFIER.replace("sections: 2", "sections: 4")) == (
        "mine.yaml:6:37: error: 4 sections in 8 pins have no standard pin numbers\n"
        "    why: two sections come in 8 pins, four in 14\n"
        "    fix: check sections and pin_count"
    )


def test_a_row_lacks_what_others_have(messages):
    text = AMPLIFIER + "      - {key: my-quad, sections: 4, body: dip14}\n"
    assert messages(text) == (
        "mine.yaml:7:9: error: this row of 'mine' has no dissipation\n"
        "    why: what is not stated is not guessed\n"
        "    fix: add what the maker says"
    )


def test_a_control_with_the_wrong_taper(messages):
    text = """\
families:
  mine:
    like: control-9mm
    source: memory
    parts:
      - {taper: log, middle: 85 %, values: [1 MΩ]}
"""
    assert messages(text) == (
        "mine.yaml:6:22: error: middle is 85 % on a log taper\n"
        "    why: half way a linear control stands at 50 %, a log one below, a reverse-log one above\n"
        "    fix: check taper and middle"
    )


def test_a_capacitor_says_how_it_leaks(messages):
    text = """\
families:
  mine:
    kind: capacitor
    description: Capacitor
    dielectric: film-pp
    body: ceramic-radial
    tolerance: 5 %
    series: E6
    voltage: 63 V
    derating: 80 %
    source: memory
    values: [1 µF]
"""
    assert messages(text) == (
        "mine.yaml:2:3: error: the family 'mine' has no insulation_resistance, insulation_time, leakage_rate "
        "or leakage_floor\n"
        "    why: what is not stated is not guessed\n"
        "    fix: add what the maker says"
    )
    polar = text.replace("film-pp", "electrolytic").replace("    source", "    leakage_floor: 3 µA\n    source")
    assert messages(polar) == (
        "mine.yaml:5:5: error: the dielectric electrolytic is not stated to be polarised\n"
        "    why: an electrolytic is polarised, every other kind is not\n"
        "    fix: correct polarised, or write bipolar-electrolytic"
    )


def test_a_diode_curve_must_rise(messages):
    text = """\
families:
  mine:
    like: schottky-do41
    source: memory
    parts:
      - {key: my-diode, reverse_voltage: 40 V, forward: {1 A: [0.5 V, 0.6 V], 1 mA: [0.2 V, 0.3 V]}}
      - {key: other, reverse_voltage: 40 V, forward: {1 A: [0.7 V, 0.6 V]}}
"""
    assert messages(text) == (
        "mine.yaml:6:57: error: forward does not rise from point to point\n"
        "    why: drops between the points are interpolated over the current\n"
        "    fix: write it like {1 mA: [0.2 V, 0.3 V], 1 A: [0.5 V, 0.6 V]}, by rising current\n"
        "mine.yaml:7:61: error: forward at 1 A: the typical drop 0.7 V is above the greatest, 0.6 V\n"
        "    why: the greatest is what the maker promises of every part\n"
        "    fix: write the typical drop first"
    )


def test_a_missing_file_and_a_bad_one_are_both_reported(tmp_path):
    bad = tmp_path / "bad.yaml"
    bad.write_text("families: 3\n")
    with pytest.raises(InputError) as caught:
        load_catalogue([tmp_path / "absent.yaml", bad])
    whats = [problem.what for problem in caught.value.problems]
    assert whats == ["this catalogue file cannot be found", "families is '3', not a mapping"]
