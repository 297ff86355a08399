"""What is printed on parts, and which way round they go."""

from __future__ import annotations

from dataclasses import replace

import pytest

from modgen.catalogue.records import Body
from modgen.outputs.marking import UNMARKED, chip_code, net_words, orientation, printed


@pytest.fixture
def record(job):
    """A record of the small module by its key."""
    return lambda key: job.catalogue.get(key)


@pytest.mark.parametrize(
    ("resistance", "tolerance", "bands"),
    [
        (4700.0, 0.01, ("yellow", "violet", "black", "brown", "brown")),
        (330.0, 0.01, ("orange", "orange", "black", "black", "brown")),
        (1e6, 0.02, ("brown", "black", "black", "yellow", "red")),
        (4700.0, 0.05, ("yellow", "violet", "red", "gold")),
        (4.7, 0.05, ("yellow", "violet", "gold", "gold")),
        (4990.0, 0.05, ("yellow", "white", "white", "brown", "gold")),  # four bands cannot say it
    ],
)
def test_colour_bands_of_a_resistor_with_leads(record, resistance, tolerance, bands):
    cell = printed(replace(record("r-2k2"), resistance=resistance, tolerance=tolerance))
    assert cell.bands == bands
    assert cell.text == ""


def test_value_without_a_colour_code_is_said_in_words(record):
    cell = printed(replace(record("r-2k2"), resistance=4712.0))
    assert cell.bands == ()
    assert cell.text == "4K712 or the value in figures"
    assert cell.more == ("the colour code cannot say this value and tolerance: measure it",)


@pytest.mark.parametrize(
    ("resistance", "four", "three"),
    [
        (10e3, "1002", "103"),
        (4700.0, "4701", "472"),
        (1e6, "1004", "105"),
        (100.0, "1000", "101"),
        (47.0, "47R0", "470"),
        (4.7, "4R70", "4R7"),
        (0.47, "R470", "R47"),
        (0.047, "R0470", "R047"),
    ],
)
def test_chip_codes(resistance, four, three):
    assert chip_code(resistance) == four
    assert chip_code(resistance, 3) == three


def test_chip_resistor_shows_three_figures_only_when_they_say_the_value(record):
    chip = replace(record("r-2k2"), mount="surface", body=Body("chip-resistor", 1.6e-3, 0.8e-3, 0.55e-3))
    assert printed(chip).text == "2201 or 222"
    assert printed(replace(chip, resistance=4990.0)).text == "4991"
    assert printed(replace(chip, body=Body("chip-resistor", 1.0e-3, 0.5e-3, 0.35e-3))).text == UNMARKED


def test_capacitor_codes(record):
    cell = printed(record("c-100n"))
    assert cell.text == "104J or 100n"
    assert cell.more == ("often with 50 for the voltage",)
    assert printed(record("c-1u-pp")).text == "105J or 1µ0"
    assert printed(replace(record("c-100n"), tolerance=0.15)).text == "100n"
    assert printed(replace(record("c-100n"), mount="surface")).text == UNMARKED


def test_electrolytics(record):
    polar = record("c-10u-el")
    assert printed(polar).text == "10 µF 25 V, and a stripe of minus signs"
    assert printed(replace(polar, mount="surface")).text == "10 µF 25 V, and a dark segment on the top, at minus"
    bipolar = replace(polar, polarised=False, dielectric="bipolar-electrolytic")
    assert printed(bipolar).text == "10 µF 25 V, and BP or NP: no stripe"
    assert orientation(bipolar, {"1": "V+", "2": "0V"}).text == ""


def test_type_numbers_and_controls(record):
    assert printed(record("tl072c")).text == "TL072CP, with the maker's letters and a date code beside it"
    assert printed(record("1n5819")).text == "its type number, and a band at the cathode"
    assert printed(record("p-1m-log")).text == "1M, log taper"


def test_electrolytic_on_the_negative_rail_has_plus_on_0v(record):
    cell = orientation(record("c-10u-el"), {"1": "0V", "2": "V-"})
    assert cell.text == "+ = pin 1, to 0\u00a0V"
    assert cell.more[0] == "\u2212 = pin 2, to V\u2212"
    assert cell.sketch == "electrolytic"


def test_diode_is_told_by_its_band(record):
    cell = orientation(record("1n5819"), {"1": "V+", "2": "BUS+"})
    assert (cell.text, cell.more, cell.sketch) == (
        "band = cathode = pin 1, to V+",
        ("anode = pin 2, to BUS+",),
        "diode",
    )


def test_package_is_told_by_its_notch_and_supply_pins(record):
    cell = orientation(record("tl072c"), {"4": "V-", "8": "V+"})
    assert cell.more == ("pin 8 on V+, pin 4 on V\u2212",)
    assert (cell.sketch, cell.pins) == ("package", 8)


def test_header_stripe_is_the_negative_rail(record):
    pins = {str(n): "BUS-" if n < 3 else "0V" if n < 9 else "BUS+" for n in range(1, 11)}
    cell = orientation(record("header-2x5"), pins)
    assert cell.text == "the cable's coloured stripe goes to pin 1, the negative rail"
    assert cell.more == ("pins 1, 2: BUS\u2212", "pins 3 to 8: 0\u00a0V", "pins 9, 10: BUS+")


def test_header_of_a_single_supply_leaves_the_stripe_open(record):
    pins = {str(n): "" if n < 3 else "0V" if n < 9 else "BUS+" for n in range(1, 11)}
    cell = orientation(record("header-2x5"), pins)
    assert cell.text == "the cable's coloured stripe goes to pin 1, which is not connected here"
    assert cell.more[0] == "pins 1, 2: not connected"


def test_net_words_leave_the_channel_open():
    assert net_words("CH12_GLIDE") == "CHk_GLIDE"
    assert net_words("IDLE1A") == "IDLE1A"
    assert net_words("") == "nothing"
