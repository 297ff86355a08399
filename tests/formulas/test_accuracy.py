"""Pitch, loading, leakage and amplifier errors, by hand."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from modgen.formulas.amplifier import (
    clamp_current,
    common_mode_error,
    follower_gain_error,
    ratio_from_decibels,
    reach,
    short_power,
)
from modgen.formulas.leakage import (
    bias_at,
    current_offset,
    electrolytic_leakage,
    insulation_error,
    insulation_resistance,
)
from modgen.formulas.loading import divider, loading_error, parallel
from modgen.formulas.pitch import cents_to_ratio, cents_to_volts, scale_to_cents, volts_to_cents


def test_cents():
    assert cents_to_volts(1200.0) == 1.0
    assert cents_to_volts(5.0) == pytest.approx(4.166667e-3, rel=1e-6)
    assert volts_to_cents(cents_to_volts(7.0)) == pytest.approx(7.0)
    assert scale_to_cents(-0.01) == pytest.approx(-12.0)
    assert cents_to_ratio(1200.0) == 2.0
    assert cents_to_ratio(5.0) == pytest.approx(1.0028923, rel=1e-7)


def test_loading_by_hand():
    assert loading_error(0.0, 1.0) == 0.0
    assert loading_error(1.0, math.inf) == 0.0
    assert loading_error(1e5, 1e5) == 0.5
    assert scale_to_cents(loading_error(1e3, 100e3)) == pytest.approx(11.88, abs=5e-3)
    assert scale_to_cents(loading_error(220.0, 100e3)) == pytest.approx(2.63, abs=5e-3)
    assert scale_to_cents(loading_error(1e3, 1e6)) == pytest.approx(1.20, abs=5e-3)


@given(st.floats(0.0, 1e6), st.floats(1.0, 1e9))
def test_loading_is_what_a_divider_lacks(source, load):
    assert 1.0 - divider(1.0, source, load) == pytest.approx(loading_error(source, load), abs=1e-12)


def test_parallel():
    assert parallel(1e3, 1e3) == 500.0
    assert parallel(1e3, math.inf) == pytest.approx(1e3)
    assert parallel(1e3, 0.0) == 0.0
    assert parallel() == math.inf


@pytest.mark.parametrize(
    ("function", "arguments", "message"),
    [
        (loading_error, (-1.0, 1.0), "source -1 ohm, load 1 ohm: 0 <= source and 0 < load"),
        (loading_error, (1.0, 0.0), "source 1 ohm, load 0 ohm: 0 <= source and 0 < load"),
        (divider, (1.0, 0.0, 0.0), "divider of 0 ohm over 0 ohm: neither below 0, not both 0"),
        (divider, (1.0, -1.0, 2.0), "divider of -1 ohm over 2 ohm: neither below 0, not both 0"),
        (parallel, (1.0, -2.0), "-2 ohm in parallel: not below 0 ohm"),
        (insulation_error, (-1.0, 1.0), "resistance -1, insulation 1: 0 <= resistance and 0 < insulation"),
        (insulation_error, (1.0, 0.0), "resistance 1, insulation 0: 0 <= resistance and 0 < insulation"),
        (
            insulation_resistance,
            (0.0, 1.0, 1.0),
            "0 F with limits of 1 ohm and 1 s: 0 F < capacitance, no limit below 0",
        ),
        (
            electrolytic_leakage,
            (0.01, 1e-6, -25.0, 0.0),
            "rate 0.01 /s, 1e-06 F, -25 V, floor 0 A: none may be below zero",
        ),
        (bias_at, (1e-9, 25.0, -10.0), "doubling every -10 K: not below 0 K"),
        (follower_gain_error, (0.0,), "open-loop gain 0: above 0"),
        (common_mode_error, (0.0,), "common-mode rejection 0: above 0"),
        (reach, (1.0, -1.0, 0.0, 0.0), "rails 1 V and -1 V: negative <= positive"),
        (clamp_current, (12.0, 0.0), "series resistance 0 ohm: above 0 ohm"),
        (short_power, (1.0, 0.0, 1.0), "0 ohm, limit 1 A: resistance above 0 ohm, limit not below 0 A"),
        (short_power, (1.0, 1.0, -1.0), "1 ohm, limit -1 A: resistance above 0 ohm, limit not below 0 A"),
    ],
)
def test_out_of_their_domain(function, arguments, message):
    with pytest.raises(ValueError) as caught:  # noqa: PT011 - the whole message is compared
        function(*arguments)
    assert str(caught.value) == message


def test_insulation():
    # 1 s against 1250 s: 1/1251, 0.96 cents an octave
    assert insulation_error(1.0, 1250.0) == pytest.approx(1.0 / 1251.0)
    assert insulation_error(1e6, math.inf) == 0.0
    assert scale_to_cents(insulation_error(1.0, 30000.0)) == pytest.approx(0.04, abs=5e-5)


@given(st.floats(1e-9, 1e-4), st.floats(1.0, 1e7), st.floats(1e6, 1e12))
def test_insulation_depends_on_time_constants_only(capacitance, resistance, insulation):
    by_times = insulation_error(resistance * capacitance, insulation * capacitance)
    assert by_times == pytest.approx(insulation_error(resistance, insulation), rel=1e-9)


def test_insulation_limits():
    assert insulation_resistance(1e-6, 0.0, 1250.0) == pytest.approx(1.25e9)
    assert insulation_resistance(1e-6, 1e9, 1250.0) == 1e9
    assert insulation_resistance(1e-6, 1e9, 0.0) == 1e9
    assert insulation_resistance(1e-6, 0.0, 0.0) == math.inf


def test_electrolytic():
    assert electrolytic_leakage(0.01, 10e-6, 25.0, 3e-6) == 3e-6
    assert electrolytic_leakage(0.01, 100e-6, 25.0, 3e-6) == pytest.approx(25e-6)
    assert electrolytic_leakage(0.03, 10e-6, 25.0, 3e-6, added=True) == pytest.approx(10.5e-6)
    # through a megohm it costs 3 V: 3600 cents
    assert volts_to_cents(current_offset(3e-6, 1e6)) == pytest.approx(3600.0)


def test_bias():
    assert bias_at(200e-12, 25.0) == 200e-12
    assert bias_at(200e-12, 65.0) == pytest.approx(3.2e-9)
    assert bias_at(200e-12, 15.0) == pytest.approx(100e-12)
    assert bias_at(80e-9, 65.0, doubling=0.0) == 80e-9
    assert bias_at(1e-9, 85.0, doubling=20.0, reference=25.0) == pytest.approx(8e-9)


def test_amplifier():
    assert ratio_from_decibels(0.0) == 1.0
    assert ratio_from_decibels(-20.0) == pytest.approx(0.1)
    assert follower_gain_error(math.inf) == 0.0
    assert follower_gain_error(1.0) == 0.5
    # two buffers at 25 V/mV: 0.10 cents; at 70 dB: 0.76 cents
    assert 2 * scale_to_cents(follower_gain_error(25e3)) == pytest.approx(0.10, abs=5e-3)
    assert 2 * scale_to_cents(common_mode_error(ratio_from_decibels(70.0))) == pytest.approx(0.76, abs=5e-3)


def test_reach():
    assert reach(-11.1, 11.1, 4.0, 3.0) == pytest.approx((-7.1, 8.1))
    assert reach(0.0, 5.0, -0.3, -0.3) == pytest.approx((-0.3, 5.3))
    low, high = reach(0.0, 5.0, 4.0, 4.0)
    assert low > high


def test_clamp():
    assert clamp_current(12.6, 1.2e3) == pytest.approx(10e-3)
    assert clamp_current(-12.6, 1.2e3) == pytest.approx(10e-3)
    assert clamp_current(0.5, 1.0) == 0.0


def test_short():
    # 11 V: 1 kohm takes V^2/R = 0.121 W; below 183 ohm a limit of 60 mA rules
    assert short_power(11.0, 1e3, 0.06) == pytest.approx(0.121)
    assert short_power(-11.0, 330.0, 0.06) == pytest.approx(0.3667, rel=1e-3)
    assert short_power(11.0, 100.0, 0.06) == pytest.approx(0.36)
