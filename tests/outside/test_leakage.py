"""Leakage formulas and limits as makers print them."""

import pytest

from modgen.formulas.amplifier import common_mode_error, ratio_from_decibels
from modgen.formulas.leakage import bias_at, electrolytic_leakage, insulation_resistance


@pytest.mark.source("Vishay document 28309 (038 RSU): I = 0.01 C V or 3 uA, whichever is greater, after 2 minutes")
@pytest.mark.parametrize(
    ("microfarads", "volts", "microamperes"),
    # by hand, in the sheet's own units: 0.01 x uF x V, and 3 where that is less
    [(10, 25, "3"), (22, 25, "5.5"), (47, 25, "11.75"), (100, 25, "25")],
)
def test_the_greater_of_two(printed, microfarads, volts, microamperes):
    assert 1e6 * electrolytic_leakage(0.01, microfarads * 1e-6, volts, 3e-6) == printed(microamperes)


@pytest.mark.source("Vishay document 28309 (038 RSU): I <= 0.002 C V + 3 uA after 5 minutes")
def test_sum_of_two(printed):
    assert 1e6 * electrolytic_leakage(0.002, 100e-6, 25.0, 3e-6, added=True) == printed("8")


@pytest.mark.source("Teapo SN (bipolar): I = 0.03 C V + 3 uA after 5 minutes")
def test_bipolar(printed):
    assert 1e6 * electrolytic_leakage(0.03, 10e-6, 25.0, 3e-6, added=True) == printed("10.5")


@pytest.mark.source("Chemi-Con, questions on aluminium electrolytics: 770 uA is 0.01 C V for 2200 uF, 35 V")
def test_worked_example_of_a_maker(printed):
    assert 1e6 * electrolytic_leakage(0.01, 2200e-6, 35.0, 3e-6) == printed("770")


@pytest.mark.source("WIMA MKS 2, insulation resistance at 63 V: 10^4 Mohm up to 0.33 uF, 1250 s (Mohm x uF) above")
@pytest.mark.parametrize(("farads", "megohms"), [(0.33e-6, "3788"), (1.0e-6, "1250"), (10e-6, "125")])
def test_time_constant_of_film(printed, farads, megohms):
    assert 1e-6 * insulation_resistance(farads, 1e10, 1250.0) == printed(megohms)


@pytest.mark.source("WIMA MKS 2, insulation resistance at 63 V: 10^4 Mohm up to 0.33 uF")
def test_small_film_is_bound_by_its_resistance(printed):
    assert 1e-6 * insulation_resistance(0.1e-6, 1e10, 1250.0) == printed("1e4")


@pytest.mark.source("ST TL072 data sheet, footnote: input bias doubles for every 10 degC of junction temperature")
def test_bias_of_a_jfet():
    # 200 pA at 25 degC; by the rule 400, 800, 1600, 3200 pA
    assert [round(1e12 * bias_at(200e-12, t)) for t in (25, 35, 45, 55, 65)] == [200, 400, 800, 1600, 3200]


@pytest.mark.source("Definition of the decibel (IEC 60027-3): 70 dB is 3162, and over 5 V an error of 1.6 mV")
def test_common_mode_of_seventy_decibels(printed):
    assert ratio_from_decibels(70.0) == printed("3162")
    assert 5e3 * common_mode_error(ratio_from_decibels(70.0)) == printed("1.6")
