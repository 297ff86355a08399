"""Quantities as text: what is read, what is refused and in which words, and the way back."""

import contextlib
import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from modgen.units import (
    UNITS,
    QuantityError,
    format_quantity,
    parse_quantity,
    parse_span,
    read_value,
    value_text,
)


@pytest.mark.parametrize(
    ("text", "kind", "value"),
    [
        ("250 kΩ", "resistance", 250e3),
        ("250k", "resistance", 250e3),
        ("250 K", "resistance", 250e3),
        ("250 Kohm", "resistance", 250e3),
        ("4k7", "resistance", 4700.0),
        ("4K7", "resistance", 4700.0),
        ("4.7k", "resistance", 4700.0),
        ("4k7 ohm", "resistance", 4700.0),
        ("4R7", "resistance", 4.7),
        ("R47", "resistance", 0.47),
        ("100R", "resistance", 100.0),
        ("100 ohms", "resistance", 100.0),
        ("100 \u2126", "resistance", 100.0),
        ("1M", "resistance", 1e6),
        ("1M5", "resistance", 1.5e6),
        ("1 mΩ", "resistance", 1e-3),
        ("10 GΩ", "resistance", 1e10),
        ("1e3 Ω", "resistance", 1000.0),
        ("100 nF", "capacitance", 100e-9),
        ("100n", "capacitance", 100e-9),
        ("2u2", "capacitance", 2.2e-6),
        ("2µ2", "capacitance", 2.2e-6),
        ("2.2 \u03bcF", "capacitance", 2.2e-6),
        ("n47", "capacitance", 0.47e-9),
        ("470 pF", "capacitance", 470e-12),
        ("1 F", "capacitance", 1.0),
        ("-12 V", "voltage", -12.0),
        ("\u221212 V", "voltage", -12.0),
        ("+12V", "voltage", 12.0),
        ("3V3", "voltage", 3.3),
        ("-2V5", "voltage", -2.5),
        ("0 V", "voltage", 0.0),
        ("-0 V", "voltage", 0.0),
        ("30 mV", "voltage", 0.03),
        (".5 V", "voltage", 0.5),
        ("12\u00a0V", "voltage", 12.0),
        ("12\u2009V", "voltage", 12.0),
        ("12\u202fV", "voltage", 12.0),
        ("  12 V ", "voltage", 12.0),
        ("200 pA", "current", 200e-12),
        ("-3 mA", "current", -3e-3),
        ("5 ms", "time", 5e-3),
        ("2 s", "time", 2.0),
        ("1e-3 s", "time", 1e-3),
        ("1E+1 s", "time", 10.0),
        ("5 %", "ratio", 0.05),
        ("0.1%", "ratio", 0.001),
        ("-20 %", "ratio", -0.2),
        ("3 cents", "pitch", 3.0 / 1200.0),
        ("1 cent", "pitch", 1.0 / 1200.0),
        ("2.54 mm", "length", 2.54e-3),
        ("0.25 W", "power", 0.25),
        ("125 mW", "power", 0.125),
        ("3 MHz", "frequency", 3e6),
        ("65 °C", "temperature", 65.0),
        ("-10degC", "temperature", -10.0),
    ],
)
def test_what_is_read(text, kind, value):
    assert parse_quantity(text, kind) == value


def test_minus_zero_has_no_sign():
    assert math.copysign(1.0, parse_quantity("-0 V", "voltage")) == 1.0


NO_UNIT = "what is not said is not guessed"
CAPITALS = "capitals count: m is a thousandth and M a million, s is a second and S a siemens"
NUMBER = "it is not a decimal number followed by a unit"
COMMA = "a comma is a decimal sign to some and a separator of thousands to others"


@pytest.mark.parametrize(
    ("text", "kind", "what", "why", "fix"),
    [
        ("12", "voltage", "'12' has no unit", f"a voltage needs one: {NO_UNIT}", "write 12 V"),
        ("0", "voltage", "'0' has no unit", f"a voltage needs one: {NO_UNIT}", "write 0 V"),
        ("100", "resistance", "'100' has no unit", f"a resistance needs one: {NO_UNIT}", "write 100 Ω or 100R"),
        ("5", "ratio", "'5' has no unit", f"a ratio needs one: {NO_UNIT}", "write 5 %"),
        (
            "4,7 kΩ",
            "resistance",
            "'4,7 kΩ' has a comma",
            COMMA,
            "write 4.7 kΩ",
        ),
        (
            "10,000 V",
            "voltage",
            "'10,000 V' has a comma",
            COMMA,
            "write 10.000 V or 10000 V, whichever is meant",
        ),
        ("0,5 ms", "time", "'0,5 ms' has a comma", COMMA, "write 0.5 ms"),
        (",25 s", "time", "',25 s' has a comma", COMMA, "write .25 s"),
        ("4,7k", "resistance", "'4,7k' has a comma", COMMA, "write 4.7k"),
        (
            "1,000,000 V",
            "voltage",
            "'1,000,000 V' has a comma",
            COMMA,
            "use a decimal point and no separators, for instance 12 V",
        ),
        ("5 V", "time", "'5 V' is a voltage, not a time", "a time is measured in s", "write it like 5 ms"),
        ("5 mm", "time", "'5 mm' is a length, not a time", "a time is measured in s", "write it like 5 ms"),
        (
            "5 MS",
            "time",
            "'5 MS' has the unit 'MS', which differs from 'ms' by capitals",
            CAPITALS,
            "write 5 ms if that is what is meant",
        ),
        (
            "5 Ms",
            "time",
            "'5 Ms' has the unit 'Ms', which differs from 'ms' by capitals",
            CAPITALS,
            "write 5 ms if that is what is meant",
        ),
        (
            "12 v",
            "voltage",
            "'12 v' has the unit 'v', which differs from 'V' by capitals",
            CAPITALS,
            "write 12 V if that is what is meant",
        ),
        (
            "1m",
            "resistance",
            "'1m' has the unit 'm', which differs from 'M' by capitals",
            CAPITALS,
            "write 1M if that is what is meant",
        ),
        (
            "100N",
            "capacitance",
            "'100N' has the unit 'N', which differs from 'n' by capitals",
            CAPITALS,
            "write 100n if that is what is meant",
        ),
        (
            "12 KV",
            "voltage",
            "'12 KV' has the unit 'KV', which differs from 'kV' by capitals",
            CAPITALS,
            "write 12 kV if that is what is meant",
        ),
        (
            "5 min",
            "time",
            "'5 min' has the unit 'min', which is not one of a time",
            "a time is measured in s, with a prefix of p, n, µ, m or none",
            "write 300 s",
        ),
        (
            "5 fortnights",
            "time",
            "'5 fortnights' has the unit 'fortnights', which is not one of a time",
            "a time is measured in s, with a prefix of p, n, µ, m or none",
            "write it like 5 ms",
        ),
        ("5 volts", "time", "'5 volts' is a voltage, not a time", "a time is measured in s", "write it like 5 ms"),
        (
            "20 Msec",
            "time",
            "'20 Msec' has the unit 'Msec', which is not one of a time",
            "a time is measured in s, with a prefix of p, n, µ, m or none",
            "write it like 5 ms",
        ),
        (
            "1e3 sec",
            "time",
            "'1e3 sec' has the unit 'sec', which is not one of a time",
            "a time is measured in s, with a prefix of p, n, µ, m or none",
            "write it like 5 ms",
        ),
        (
            "5 ppm",
            "ratio",
            "'5 ppm' has the unit 'ppm', which is not one of a ratio",
            "a ratio is measured in %, with no prefix",
            "write 0.0005 %",
        ),
        (
            "0.02",
            "ratio",
            "'0.02' has no unit",
            f"a ratio needs one: {NO_UNIT}",
            "write 2 % or 0.02 %, whichever is meant",
        ),
        (
            "-.5",
            "ratio",
            "'-.5' has no unit",
            f"a ratio needs one: {NO_UNIT}",
            "write -50 % or -.5 %, whichever is meant",
        ),
        ("0", "ratio", "'0' has no unit", f"a ratio needs one: {NO_UNIT}", "write 0 %"),
        ("1", "ratio", "'1' has no unit", f"a ratio needs one: {NO_UNIT}", "write 1 %"),
        (
            "5 per cent",
            "ratio",
            "'5 per cent' is not a ratio",
            NUMBER,
            "write 5 %",
        ),
        (
            "4r7",
            "resistance",
            "'4r7' has the letter 'r' for a decimal point, which is not one of a resistance",
            "the letters are R, k, M, G, T, and capitals count",
            "write it like 4.7 kΩ, 4k7 or 100R",
        ),
        (
            "1e3k",
            "resistance",
            "'1e3k' mixes an exponent with a code letter",
            "the two are different notations, and together they are easily misread",
            "write it with a unit, for instance 4.7 kΩ, 4k7 or 100R",
        ),
        ("-5 ms", "time", "'-5 ms' is negative", "a time has no sign", "write it like 5 ms"),
        ("-4k7", "resistance", "'-4k7' is negative", "a resistance has no sign", "write it like 4.7 kΩ, 4k7 or 100R"),
        ("1e999 s", "time", "'1e999 s' is out of range", "no time is that large", "write it like 5 ms"),
        ("1e-999 s", "time", "'1e-999 s' is out of range", "no time is that small", "write it like 5 ms"),
        ("", "time", "'' is empty", "a time is needed here", "write it like 5 ms"),
        ("\u2009 ", "voltage", "'\\u2009 ' is empty", "a voltage is needed here", "write it like 12 V"),
        ("nan s", "time", "'nan s' is not a time", NUMBER, "write it like 5 ms"),
        ("inf V", "voltage", "'inf V' is not a voltage", NUMBER, "write it like 12 V"),
        ("0x10 V", "voltage", "'0x10 V' is not a voltage", NUMBER, "write it like 12 V"),
        ("1_000 V", "voltage", "'1_000 V' is not a voltage", NUMBER, "write it like 12 V"),
        ("1 000 V", "voltage", "'1 000 V' is not a voltage", NUMBER, "write it like 12 V"),
        ("5. V", "voltage", "'5. V' is not a voltage", NUMBER, "write it like 12 V"),
        ("\u0663 V", "voltage", "'\u0663 V' is not a voltage", NUMBER, "write it like 12 V"),
        ("12\nV", "voltage", "'12\\nV' is not a voltage", NUMBER, "write it like 12 V"),
        (
            "big",
            "resistance",
            "'big' is not a resistance",
            f"{NUMBER}, nor a code of IEC 60062",
            "write it like 4.7 kΩ, 4k7 or 100R",
        ),
        (
            "9" * 65 + " V",
            "voltage",
            "'" + "9" * 40 + "'... is too long for a voltage",
            "nothing longer than 64 characters is read as a quantity",
            "write it like 12 V",
        ),
    ],
)
def test_what_is_refused(text, kind, what, why, fix):
    with pytest.raises(QuantityError) as caught:
        parse_quantity(text, kind)
    assert (caught.value.what, caught.value.why, caught.value.fix) == (what, why, fix)
    assert str(caught.value) == f"{what}\n    why: {why}\n    fix: {fix}"


@pytest.mark.parametrize(
    ("text", "kind", "instead"),
    [
        ("2 sec", "time", "2 s"),
        ("2 seconds", "time", "2 s"),
        ("2.50 Sec", "time", "2.50 s"),
        ("20 msec", "time", "20 ms"),
        ("20 milliseconds", "time", "20 ms"),
        ("20 usec", "time", "20 µs"),
        ("5 micro seconds", "time", "5 µs"),
        ("1.5 min", "time", "90 s"),
        ("5 volts", "voltage", "5 V"),
        ("-5 millivolts", "voltage", "-5 mV"),
        ("12 V DC", "voltage", "12 V"),
        ("10 kilohms", "resistance", "10 kΩ"),
        ("10 k ohm", "resistance", "10 kΩ"),
        ("1 megohm", "resistance", "1 MΩ"),
        ("1 meg", "resistance", "1 MΩ"),
        ("2 nanofarads", "capacitance", "2 nF"),
        ("5 percent", "ratio", "5 %"),
        ("1 semitone", "pitch", "100 cents"),
        ("20 milliamps", "current", "20 mA"),
    ],
)
def test_a_unit_in_words_is_answered_with_the_same_number(text, kind, instead):
    with pytest.raises(QuantityError) as caught:
        parse_quantity(text, kind)
    assert caught.value.fix == f"write {instead}"
    assert parse_quantity(instead, kind) != 0.0


def test_unknown_kind_is_a_fault_of_the_caller():
    with pytest.raises(KeyError):
        parse_quantity("5 V", "colour")


@given(st.text(max_size=80), st.sampled_from(sorted(UNITS)))
def test_any_text_is_read_or_refused(text, kind):
    error = None
    value = 0.0
    try:
        value = parse_quantity(text, kind)
    except QuantityError as caught:
        error = caught
    assert math.isfinite(value)
    assert error is None or (error.what and error.why and error.fix)


@given(st.text(alphabet="0123456789.eE+-kKmMunpRF ΩµsV%", max_size=12), st.sampled_from(sorted(UNITS)))
def test_nearly_right_text_is_read_or_refused(text, kind):
    with contextlib.suppress(QuantityError):
        assert math.isfinite(parse_quantity(text, kind))


@pytest.mark.parametrize(
    ("text", "span"),
    [
        ("±5 V", (-5.0, 5.0)),
        ("+/-5 V", (-5.0, 5.0)),
        ("± 2.5 V", (-2.5, 2.5)),
        ("±2V5", (-2.5, 2.5)),
        ("0 V to 5 V", (0.0, 5.0)),
        ("-2 V to 8 V", (-2.0, 8.0)),
        ("-8 V  to  -500 mV", (-8.0, -0.5)),
    ],
)
def test_spans(text, span):
    assert parse_span(text) == span


@pytest.mark.parametrize(
    ("text", "what", "why", "fix"),
    [
        (
            "5 V",
            "'5 V' is not a range of voltages",
            "a signal has a lowest and a highest voltage",
            "write ±5 V, or 0 V to 5 V",
        ),
        (
            "0 V - 5 V",
            "'0 V - 5 V' is not a range of voltages",
            "a signal has a lowest and a highest voltage",
            "write ±5 V, or 0 V to 5 V",
        ),
        ("0 to 5 V", "'0' has no unit", f"a voltage needs one: {NO_UNIT}", "write 0 V"),
        ("±5", "'5' has no unit", f"a voltage needs one: {NO_UNIT}", "write 5 V"),
        ("±-5 V", "'±-5 V' has two signs", "± already says both ways", "write one sign, for instance ±5 V"),
        (
            "±0 V",
            "the range '±0 V' is empty",
            "a signal that never leaves 0 V has no span",
            "write the largest voltage of the signal, for instance ±5 V",
        ),
        (
            "5 V to 0 V",
            "the range '5 V to 0 V' is upside down",
            "the first voltage must be below the second",
            "write 0 V to 5 V",
        ),
        ("1 V to 1 V", "the range '1 V to 1 V' is empty", "the first voltage must be below the second", "write ±5 V"),
    ],
)
def test_refused_spans(text, what, why, fix):
    with pytest.raises(QuantityError) as caught:
        parse_span(text)
    assert (caught.value.what, caught.value.why, caught.value.fix) == (what, why, fix)


@given(st.text(alphabet="0123456789.+-/±to Vm", max_size=20))
def test_any_span_is_in_order_or_refused(text):
    try:
        low, high = parse_span(text)
    except QuantityError:
        return
    assert low < high


@pytest.mark.parametrize(
    ("value", "kind", "text"),
    [
        (4700.0, "resistance", "4.7 kΩ"),
        (250e3, "resistance", "250 kΩ"),
        (999.6, "resistance", "1 kΩ"),
        (0.47, "resistance", "470 mΩ"),
        (2.2e-6, "capacitance", "2.2 µF"),
        (100e-9, "capacitance", "100 nF"),
        (2.2e-3, "capacitance", "2200 µF"),
        (0.0, "capacitance", "0 µF"),
        (-12.0, "voltage", "-12 V"),
        (12.6, "voltage", "12.6 V"),
        (12.649, "voltage", "12.6 V"),
        (-0.0, "voltage", "0 V"),
        (0.0202, "voltage", "20.2 mV"),
        (200e-12, "current", "200 pA"),
        (5e-3, "time", "5 ms"),
        (30000.0, "time", "30000 s"),
        (12345.0, "time", "12300 s"),
        (0.05, "ratio", "5 %"),
        (0.0099, "ratio", "0.99 %"),
        (1.5, "ratio", "150 %"),
        (5.0 / 1200.0, "pitch", "5 cents"),
        (1.0 / 1200.0, "pitch", "1 cent"),
        (0.1, "length", "100 mm"),
        (0.25, "power", "250 mW"),
        (3e6, "frequency", "3 MHz"),
        (-40.0, "temperature", "-40 °C"),
        (math.inf, "resistance", "∞ Ω"),
        (-math.inf, "voltage", "-∞ V"),
    ],
)
def test_written_for_people(value, kind, text):
    assert format_quantity(value, kind) == text


def test_digits():
    assert format_quantity(1.23456, "voltage", digits=1) == "1 V"
    assert format_quantity(1.23456, "voltage", digits=5) == "1.2346 V"


def test_what_cannot_be_written():
    with pytest.raises(ValueError, match=r"^not a number, so it cannot be written as a voltage$"):
        format_quantity(math.nan, "voltage")
    with pytest.raises(ValueError, match=r"^0 significant digits: at least one is needed$"):
        format_quantity(1.0, "voltage", digits=0)


SIZES = {
    "resistance": (1e-3, 1e13),
    "capacitance": (1e-13, 1e-1),
    "voltage": (1e-9, 1e4),
    "current": (1e-14, 1e2),
    "time": (1e-11, 1e5),
    "ratio": (1e-7, 1e2),
    "pitch": (1e-6, 1e2),
    "length": (1e-6, 1e1),
    "power": (1e-9, 1e4),
    "frequency": (1e-2, 1e10),
    "temperature": (1.0, 150.0),
}


@given(st.data())
def test_text_and_back(data):
    kind = data.draw(st.sampled_from(sorted(UNITS)))
    value = data.draw(st.floats(*SIZES[kind]))
    assert parse_quantity(format_quantity(value, kind, 15), kind) == pytest.approx(value, rel=1e-13)
    # rounded once, the text stands for itself
    short = format_quantity(value, kind)
    assert format_quantity(parse_quantity(short, kind), kind) == short


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (4700.0, "4.7k"),
        (220.0, "220"),
        (1e6, "1M"),
        (100e-9, "100n"),
        (2.2e-6, "2.2u"),
        (4.7e-6 * 10, "47u"),
        (0.1 + 0.2, "300m"),
        (47.3e3, "47.3k"),
        (0.47, "470m"),
        (10e-12, "10p"),
        (0.0, "0"),
        (-12.0, "-12"),
        (123456789.012, "123.456789012M"),
    ],
)
def test_part_values(value, text):
    assert value_text(value) == text
    assert read_value(text) == pytest.approx(value, rel=1e-12)


@pytest.mark.parametrize(
    ("text", "value"),
    [("4k7", 4700.0), ("R47", 0.47), ("100R", 100.0), ("2u2", 2.2e-6), ("2.2µ", 2.2e-6), ("10K", 1e4), ("47p", 47e-12)],
)
def test_part_values_of_other_hands(text, value):
    assert read_value(text) == value


@pytest.mark.parametrize("text", ["", "4.7 k", "100nF", "4,7k", "k", "1e3", "nan", "4k7k", "4.7k\n5", "1" * 65])
def test_part_values_that_are_refused(text):
    shown = repr(text) if len(text) < 65 else "'" + "1" * 40 + "'..."
    with pytest.raises(QuantityError) as caught:
        read_value(text)
    assert caught.value.what == f"the value {shown} is not understood"
    assert caught.value.why == "a value is a number with at most one SI prefix, and no unit"
    assert caught.value.fix == "write it like 4.7k, 220, 1M, 100n or 2.2u"


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf])
def test_no_part_value(value):
    with pytest.raises(ValueError, match=f"^{value} is not a part value$"):
        value_text(value)


@given(st.integers(1, 10**12 - 1), st.integers(-20, 6))
def test_part_values_and_back(figures, exponent):
    value = float(f"{figures}e{exponent}")
    assert read_value(value_text(value)) == value


def test_units_are_named():
    assert dict(UNITS) == {
        "resistance": "Ω",
        "capacitance": "F",
        "voltage": "V",
        "current": "A",
        "time": "s",
        "ratio": "%",
        "pitch": "cents",
        "length": "m",
        "power": "W",
        "frequency": "Hz",
        "temperature": "°C",
    }
