"""What is printed on parts."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from modgen.units import BANDS, capacitor_code, colour_bands, parse_quantity, rkm_code, tolerance_letter


def test_bands():
    assert colour_bands(4700.0, 0.01) == ("yellow", "violet", "black", "brown", "brown")
    assert colour_bands(4700.0, 0.05, digits=2) == ("yellow", "violet", "red", "gold")


def test_twenty_percent_has_no_band():
    assert colour_bands(4700.0, 0.20, digits=2) == ("yellow", "violet", "red")


def test_a_link_has_one_black_band():
    assert colour_bands(0.0, 0.05) == ("black",)


@given(st.integers(100, 999), st.integers(-3, 9), st.sampled_from([0.01, 0.02, 0.05, 0.10, 0.005]))
def test_bands_by_their_own_table(figures, power, tolerance):
    bands = colour_bands(float(f"{figures}e{power}"), tolerance)
    digits = [BANDS[colour][0] for colour in bands[:3]]
    assert digits == [int(figure) for figure in str(figures)]
    assert BANDS[bands[3]][1] == power
    assert BANDS[bands[4]][2] == tolerance


@pytest.mark.parametrize(
    ("resistance", "tolerance", "digits", "message"),
    [
        (4730.0, 0.05, 2, "4.73 kΩ has more than 2 significant digits, which colour bands cannot show"),
        (47350.0, 0.01, 3, "47.35 kΩ has more than 3 significant digits, which colour bands cannot show"),
        (0.01, 0.01, 3, "10 mΩ has no colour code: there is no colour for a multiplier of 10^-4"),
        (4700.0, 0.03, 3, "a tolerance of 3 % has no colour"),
        (4700.0, 0.01, 4, "4 significant digits: the colour code has two or three"),
        (-1.0, 0.01, 3, "-1 Ω is not the resistance of a part"),
        (float("inf"), 0.01, 3, "∞ Ω is not the resistance of a part"),
    ],
)
def test_no_bands(resistance, tolerance, digits, message):
    with pytest.raises(ValueError) as caught:  # noqa: PT011 - the whole message is compared
        colour_bands(resistance, tolerance, digits)
    assert str(caught.value) == message


@pytest.mark.parametrize(("farads", "code"), [(1e-12, "109"), (10e-12, "100"), (100e-9, "104"), (990e-6, "997")])
def test_three_digits(farads, code):
    assert capacitor_code(farads) == code


@given(st.integers(10, 99), st.integers(-1, 7))
def test_three_digits_say_the_value(figures, zeros):
    code = capacitor_code(float(f"{figures}e{zeros - 12}"))
    assert code == f"{figures}{zeros if zeros >= 0 else 9}"


@pytest.mark.parametrize(
    ("farads", "message"),
    [
        (0.123e-6, "123 nF has more than 2 significant digits, which the three-digit code cannot show"),
        (0.47e-12, "0.47 pF has no three-digit code, which reaches from 1 pF to 990 µF"),
        (1e-3, "1000 µF has no three-digit code, which reaches from 1 pF to 990 µF"),
        (0.0, "0 µF is not the capacitance of a part"),
    ],
)
def test_no_three_digits(farads, message):
    with pytest.raises(ValueError) as caught:  # noqa: PT011 - the whole message is compared
        capacitor_code(farads)
    assert str(caught.value) == message


@pytest.mark.parametrize(
    ("value", "kind", "code"),
    [
        (0.1, "resistance", "R10"),
        (0.332, "resistance", "R332"),
        (1.0, "resistance", "1R0"),
        (10.0, "resistance", "10R"),
        (999.0, "resistance", "999R"),
        (1e3, "resistance", "1K0"),
        (4.99e3, "resistance", "4K99"),
        (1e6, "resistance", "1M0"),
        (0.1e-12, "capacitance", "p10"),
        (1e-9, "capacitance", "1n0"),
        (100e-9, "capacitance", "100n"),
        (2.2e-6, "capacitance", "2u2"),
    ],
)
def test_letter_codes(value, kind, code):
    assert rkm_code(value, kind) == code


@given(st.integers(1, 9999), st.integers(-1, 7))
def test_letter_codes_are_read_back(figures, exponent):
    ohms = float(f"{figures}e{exponent}")
    assert parse_quantity(rkm_code(ohms, "resistance"), "resistance") == ohms
    farads = float(f"{figures}e{exponent - 12}")
    assert parse_quantity(rkm_code(farads, "capacitance"), "capacitance") == farads


def test_no_letter_code():
    with pytest.raises(ValueError, match=r"^0 Ω is not the resistance of a part$"):
        rkm_code(0.0, "resistance")
    with pytest.raises(KeyError):
        rkm_code(1.0, "voltage")


def test_tolerance_letters():
    assert [tolerance_letter(t) for t in (0.01, 0.02, 0.05, 0.1, 0.2)] == ["F", "G", "J", "K", "M"]
    with pytest.raises(ValueError, match=r"^a tolerance of 7 % has no letter$"):
        tolerance_letter(0.07)
