"""IEC 60062: colour bands, letter codes and the three-digit code of capacitors."""

import pytest

from modgen.units import (
    BANDS,
    capacitor_code,
    colour_bands,
    parse_quantity,
    read_value,
    rkm_code,
    tolerance_letter,
)


@pytest.mark.source("IEC 60062:2016, table of colours: digits and multipliers, as reprinted in makers' catalogues")
def test_digits_and_multipliers():
    colours = ["black", "brown", "red", "orange", "yellow", "green", "blue", "violet", "grey", "white"]
    for figure, colour in enumerate(colours):
        assert BANDS[colour][:2] == (figure, figure)
    assert BANDS["gold"][:2] == (None, -1)
    assert BANDS["silver"][:2] == (None, -2)


@pytest.mark.source("from memory: IEC 60062:2016, tolerance colours of 0.05 %, 0.02 % and 0.01 %, and pink for 10^-3")
def test_colours_of_the_2016_edition():
    assert [BANDS[c][2] for c in ("orange", "yellow", "grey")] == [0.0005, 0.0002, 0.0001]
    assert BANDS["pink"] == (None, -3, None)


@pytest.mark.source(
    "PyPI PyResistorColorCode 1.0.0, TOLERANCES (its grey and yellow are of earlier editions: left out)"
)
@pytest.mark.parametrize(
    ("colour", "percent"),
    [
        ("silver", "10"),
        ("gold", "5"),
        ("red", "2"),
        ("brown", "1"),
        ("green", "0.5"),
        ("blue", "0.25"),
        ("violet", "0.1"),
    ],
)
def test_tolerance_colours_of_another_program(colour, percent):
    assert BANDS[colour][2] == pytest.approx(float(percent) / 100, rel=1e-12)
    assert BANDS["black"][2] is None
    assert BANDS["white"][2] is None


@pytest.mark.source("PyPI PyResistorColorCode 1.0.0, Resistor(digit1=..., multiplier=..., tolerance=...).value")
@pytest.mark.parametrize(
    ("bands", "ohms", "percent"),
    [
        ("yellow violet black brown brown", "4700", "1"),
        ("red red black black brown", "220", "1"),
        ("brown black black yellow brown", "1000000", "1"),
        ("yellow violet orange red brown", "47300", "1"),
        ("yellow white white silver green", "4.99", "0.5"),
        ("brown black black gold brown", "10", "1"),
        ("white violet blue orange violet", "976000", "0.1"),
        ("yellow violet red gold", "4700", "5"),
        ("yellow violet silver gold", "0.47", "5"),
        ("brown black green gold", "1000000", "5"),
        ("orange orange black silver", "33", "10"),
        ("grey red red red", "8200", "2"),
    ],
)
def test_bands_that_another_program_decodes(bands, ohms, percent):
    colours = tuple(bands.split())
    assert colour_bands(float(ohms), float(percent) / 100, digits=len(colours) - 2) == colours


@pytest.mark.source("IEC 60062, examples of the letter and digit code for resistors, as given in an encyclopaedia")
@pytest.mark.parametrize(
    ("code", "ohms"),
    [
        ("R47", 0.47),
        ("4R7", 4.7),
        ("470R", 470.0),
        ("4K7", 4.7e3),
        ("47K", 47e3),
        ("47K3", 47.3e3),
        ("470K", 470e3),
        ("4M7", 4.7e6),
    ],
)
def test_letter_codes_of_resistors(code, ohms):
    assert rkm_code(ohms, "resistance") == code
    assert parse_quantity(code, "resistance") == ohms
    assert read_value(code) == ohms


@pytest.mark.source(
    "from memory: IEC 60062:2016, letters p, n, u and m for capacitors; the value by its own arithmetic"
)
@pytest.mark.parametrize("code", ["p47", "4p7", "47p", "470p", "4n7", "47n", "100n", "2u2", "22u", "1m0"])
def test_letter_codes_of_capacitors(code):
    letter = next(c for c in code if c.isalpha())
    pico = {"p": 1, "n": 10**3, "u": 10**6, "m": 10**9}[letter]
    farads = float(code.replace(letter, ".")) * pico * 1e-12
    assert rkm_code(farads, "capacitance") == code
    assert parse_quantity(code, "capacitance") == pytest.approx(farads, rel=1e-12)


@pytest.mark.source("PyPI si-cli 0.0.1, command 'si-cli to'")
@pytest.mark.parametrize(
    ("text", "code"),
    [
        ("47 pF", "470"),
        ("220 pF", "221"),
        ("1 nF", "102"),
        ("4.7 nF", "472"),
        ("10 nF", "103"),
        ("47 nF", "473"),
        ("100 nF", "104"),
        ("220 nF", "224"),
        ("470 nF", "474"),
        ("1 uF", "105"),
        ("2.2 uF", "225"),
        ("10 uF", "106"),
        ("100 uF", "107"),
    ],
)
def test_three_digit_codes_of_another_program(text, code):
    assert capacitor_code(parse_quantity(text, "capacitance")) == code


@pytest.mark.source("KEMET, capacitance code of ceramic capacitors: picofarads, third digit 9 for a tenth")
@pytest.mark.parametrize(("picofarads", "code"), [("1.0", "109"), ("4.7", "479"), ("8.2", "829")])
def test_three_digit_codes_below_ten_picofarads(picofarads, code):
    assert capacitor_code(float(f"{picofarads}e-12")) == code


@pytest.mark.source("KEMET R82 data sheet, ordering code: J, K, M are 5 %, 10 %, 20 %")
@pytest.mark.parametrize(("letter", "percent"), [("J", 5), ("K", 10), ("M", 20)])
def test_tolerance_letters_of_a_maker(letter, percent):
    assert tolerance_letter(percent / 100) == letter


@pytest.mark.source("from memory: IEC 60062:2016, table of tolerance letters")
@pytest.mark.parametrize(
    ("letter", "percent"),
    [("B", 0.1), ("C", 0.25), ("D", 0.5), ("F", 1), ("G", 2), ("J", 5), ("K", 10), ("M", 20), ("N", 30)],
)
def test_tolerance_letters(letter, percent):
    assert tolerance_letter(percent / 100) == letter
