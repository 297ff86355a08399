"""Loops that can be worked by hand: one pole, two poles on top of each other, and loads that are none."""

from __future__ import annotations

import math

import pytest

from modgen.formulas.stability import (
    amplifier_gain,
    damping,
    loaded_feedback,
    overshoot,
    phase_margin,
    sensed_feedback,
)

GBW = 4e6


def bare(_):
    return 1.0


def test_gain_at_dc_at_the_pole_and_on_the_slope():
    assert amplifier_gain(0.0, 1e5, GBW) == 1e5
    assert abs(amplifier_gain(GBW / 1e5, 1e5, GBW)) == pytest.approx(1e5 / math.sqrt(2))
    assert abs(amplifier_gain(GBW / 10, 1e9, GBW)) == pytest.approx(10.0)
    # the second pole takes 45 degrees and half of the power at its frequency
    ratio = amplifier_gain(1e6, 1e5, GBW, 1e6) / amplifier_gain(1e6, 1e5, GBW)
    assert ratio == pytest.approx(1 / (1 + 1j))


def test_one_pole_leaves_90_degrees_at_the_gain_bandwidth():
    crossover, margin = phase_margin(bare, 1e9, GBW)
    assert (crossover, margin) == pytest.approx((GBW, 90.0), rel=1e-6)


def test_a_second_pole_where_the_loop_crosses_leaves_45_degrees():
    # |T| = 1 at f2 = GBW/sqrt(2): there the pole has taken 1/sqrt(2) and 45 degrees
    crossover, margin = phase_margin(bare, 1e9, GBW, GBW / math.sqrt(2))
    assert crossover == pytest.approx(GBW / math.sqrt(2), rel=1e-6)
    assert margin == pytest.approx(45.0, abs=1e-4)


def test_a_capacitor_on_the_output_resistance_is_such_a_pole():
    farad = 1 / (2 * math.pi * 200.0 * GBW / math.sqrt(2))
    _, margin = phase_margin(lambda f: loaded_feedback(f, 200.0, [(0.0, farad, math.inf)]), 1e9, GBW)
    assert margin == pytest.approx(45.0, abs=1e-4)


def test_a_microfarad_straight_on_the_output_leaves_next_to_nothing_and_1_kohm_gives_it_back():
    def margin(series):
        return phase_margin(lambda f: loaded_feedback(f, 200.0, [(series, 1e-6, math.inf)]), 1e9, GBW)[1]

    # crossover sqrt(GBW fp) = 56.4 kHz, fp = 796 Hz: atan(fp/f) = 0.81 degrees
    assert margin(0.0) == pytest.approx(math.degrees(math.atan(796 / 56.4e3)), rel=0.01)
    # the load is a resistor at the crossover, and the divider only slows the loop
    assert margin(1e3) == pytest.approx(90.0, abs=0.1)
    assert margin(10.0) < margin(100.0) < margin(1e3)


def test_a_load_of_resistors_is_a_divider_and_no_load_is_1():
    assert loaded_feedback(1e6, 200.0, []) == 1.0
    assert loaded_feedback(1e6, 200.0, [(1e3, 0.0, math.inf)]) == 1.0
    assert loaded_feedback(1e6, 200.0, [(0.0, 0.0, 800.0)]) == pytest.approx(0.8)
    assert loaded_feedback(1e6, 200.0, [(800.0, 0.0, 800.0)] * 2) == pytest.approx(0.8)
    assert loaded_feedback(1e6, 200.0, [(800.0, 1e-6, 0.0)]) == pytest.approx(0.8)


def test_inside_the_loop_the_ends_are_known():
    # no compensation: the cable is seen through series and output resistance alone
    found = sensed_feedback(1e6, 200.0, 1e3, 1e12, 0.0, 1e-9)
    assert found == pytest.approx(1 / (1 + 2j * math.pi * 1e6 * 1e-9 * 1.2e3), rel=1e-6)
    # much compensation: the amplifier is seen through its output resistance, as a follower would be
    found = sensed_feedback(1e6, 200.0, 1e3, 1e12, 1.0, 1e-9)
    assert found == pytest.approx(loaded_feedback(1e6, 200.0, [(1e3, 1e-9, math.inf)]), rel=1e-6)
    # at d.c. a load divides after the series resistor
    found = sensed_feedback(1e-3, 200.0, 1e3, 1e12, 1e-15, 0.0, 1.2e3)
    assert abs(found) == pytest.approx(0.5, rel=1e-6)
    # an input capacitance makes a divider with the compensation
    found = sensed_feedback(1e6, 0.0, 1e-6, 1e12, 30e-12, 0.0, math.inf, 10e-12)
    assert found == pytest.approx(0.75, rel=1e-4)


def test_compensation_is_what_keeps_a_cable_stable():
    def margin(compensation):
        return phase_margin(lambda f: sensed_feedback(f, 200.0, 1e3, 10e3, compensation, 10e-9), 25e3, GBW)[1]

    assert margin(0.0) < 10.0
    assert margin(100e-12) > 80.0


def test_of_several_crossovers_the_one_with_the_least_margin_counts():
    # a dip that lifts the loop gain above 1 again: crossings at 1e5, then up, then down at the gain-bandwidth
    def notch(f):
        return 1e-3 if 1e5 < f < 1e6 else 1.0

    crossover, margin = phase_margin(notch, 1e9, GBW, 3 * GBW)
    assert crossover > 1e6
    assert margin == pytest.approx(90 - math.degrees(math.atan(crossover / (3 * GBW))), abs=0.01)


def test_a_loop_that_never_reaches_1_is_stable():
    assert phase_margin(lambda f: 1e-9, 1e5, GBW) == (0.0, 180.0)


def test_damping_and_overshoot_at_their_ends():
    assert damping(-5.0) == 0.0
    assert damping(90.0) == math.inf
    assert overshoot(0.0) == 1.0
    assert overshoot(90.0) == 0.0
    # 1/sqrt(2) of damping: 65.53 degrees, exp(-pi)
    margin = math.degrees(math.atan2(math.sqrt(2), math.sqrt(math.sqrt(2) - 1)))
    assert damping(margin) == pytest.approx(math.sqrt(0.5))
    assert overshoot(margin) == pytest.approx(math.exp(-math.pi))


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (
            lambda: amplifier_gain(1.0, 0.0, 1.0),
            "gain 0, gain-bandwidth 1 Hz, second pole inf Hz: all above 0",
        ),
        (
            lambda: loaded_feedback(1.0, -1.0, []),
            "output resistance -1 ohm, branches []: none below 0",
        ),
        (
            lambda: sensed_feedback(1.0, 1.0, 0.0, 1.0, 0.0, 0.0),
            "frequency 1 Hz, series 0 ohm, feedback 1 ohm, load inf ohm: all above 0",
        ),
        (
            lambda: sensed_feedback(1.0, 1.0, 1.0, 1.0, 0.0, -1.0),
            "output resistance 1 ohm, compensation 0 F, cable -1 F, input 0 F: none below 0",
        ),
    ],
)
def test_values_outside_the_domain(call, message):
    with pytest.raises(ValueError, match=r"all above 0|none below 0") as caught:
        call()
    assert str(caught.value) == message
