"""Noise of the bench's lanes by hand."""

from __future__ import annotations

import math

import pytest

from modgen.analysis.noise import LIMIT, noises
from modgen.spec.model import Signal

SIGNAL = Signal(-5.0, 5.0, 1e3, 100e3)
BAND = math.sqrt(20e3 - 20)


def found(bench):
    return {(n.channel, n.end): n for n in noises(bench.board(), SIGNAL)}


def terms(noise):
    return {term.name: term.rms for term in noise.terms}


def test_both_ends_of_each_lane(lanes):
    assert list(found(lanes(2))) == [(1, "fast"), (1, "slow"), (2, "fast"), (2, "slow")]


def test_slow_end_is_the_second_buffer_and_the_output_resistor(lanes):
    slow = found(lanes())[1, "slow"]
    seen = terms(slow)
    assert seen["voltage noise, output buffer"] == pytest.approx(18e-9 * BAND)
    assert seen["output resistor"] == pytest.approx(4.070e-9 * BAND, rel=1e-3)
    # sqrt(18^2 + 4.07^2) nV/rtHz over the band: 2.61 uV; the rest is a thousandth of it
    assert slow.measured == pytest.approx(math.hypot(18, 4.07) * 1e-9 * BAND, rel=1e-4)
    assert slow.measured == pytest.approx(2.61e-6, rel=2e-3)
    assert slow.cents == pytest.approx(2.61e-6 * 1200, rel=2e-3)
    # 1 Mohm into 1 uF, far above its corner of 0.159 Hz: sqrt(4kTR fc^2 (1/20 - 1/20000))
    assert seen["glide resistance"] == pytest.approx(128.8e-9 * 0.1588 * math.sqrt(1 / 20), rel=5e-3)


def test_fast_end_lets_the_first_buffer_through_up_to_its_corner(lanes):
    fast, slow = found(lanes())[1, "fast"], found(lanes())[1, "slow"]
    seen = terms(fast)
    # 2.2 kohm and 2 ohm into 1 uF: 72.3 Hz, of which pi/2 - atan(20/72.3) is in the band
    corner = 1 / (2 * math.pi * 2202e-6)
    width = corner * (math.pi / 2 - math.atan(20 / corner))
    assert seen["voltage noise, input buffer"] == pytest.approx(18e-9 * math.sqrt(width), rel=2e-3)
    # 1 kohm in parallel with 1 Mohm, and 10 kohm: 10.999 kohm
    assert seen["resistors at the input"] == pytest.approx(13.50e-9 * math.sqrt(width), rel=2e-3)
    assert fast.measured > slow.measured


def test_floor_of_the_capacitor(lanes):
    assert found(lanes())[1, "fast"].capacitor == pytest.approx(64.36e-9, rel=1e-4)
    # two of 10 uF in series
    assert found(lanes(back_to_back=True))[1, "fast"].capacitor == pytest.approx(64.36e-9 / math.sqrt(5), rel=1e-4)


def test_bias_current_is_loud_through_a_megohm_only_in_a_bipolar_part(lanes):
    bench = lanes(amplifier_key="lm358").value("C10", "1n")
    # sqrt(2 q 250 nA) = 0.283 pA/rtHz through 2.2 kohm: 0.62 nV/rtHz
    fast = terms(found(bench)[1, "fast"])["bias current, output buffer"]
    assert fast == pytest.approx(0.283e-12 * 2202 * BAND, rel=0.05)
    jfet = terms(found(lanes().value("C10", "1n"))[1, "fast"])["bias current, output buffer"]
    assert jfet == pytest.approx(fast * math.sqrt(200e-12 / 250e-9), rel=1e-6)


def test_inside_the_loop_the_feedback_resistor_counts_until_the_capacitor_takes_over(lanes):
    seen = terms(found(lanes(inside=True))[1, "slow"])
    assert "output resistor" not in seen
    # 10 kohm and 100 pF: 159 kHz, above the band
    assert seen["feedback resistor"] == pytest.approx(12.87e-9 * BAND, rel=5e-3)
    slow = terms(found(lanes(inside=True).value("C19", "100n"))[1, "slow"])["feedback resistor"]
    assert slow < seen["feedback resistor"] / 8


def test_a_control_the_other_way_round_is_fast_when_clockwise(lanes):
    bench = lanes()
    bench.move("R13", "2", "CH1_CTL")
    assert found(bench)[1, "fast"].measured == pytest.approx(found(lanes())[1, "fast"].measured, rel=1e-6)


def test_limit_is_five_cents_from_peak_to_peak(lanes):
    cents = LIMIT * 6.6 * 1200
    assert cents == pytest.approx(5.0)
    noise = found(lanes())[1, "fast"]
    assert noise.margin == pytest.approx(1 - noise.measured / LIMIT)
    assert noise.margin > 0.99
