"""Noise at limits that are known: no resistance, all frequencies, far above and far below a corner."""

from __future__ import annotations

import math

import pytest

from modgen.formulas.noise import band_noise, capacitor_noise, johnson_density, shot_density


def test_density_goes_with_the_root():
    assert johnson_density(0.0) == 0.0
    assert johnson_density(400.0) == pytest.approx(2 * johnson_density(100.0))
    assert johnson_density(1e3, 75.0) == pytest.approx(johnson_density(1e3, 300.0) / 2)
    assert shot_density(4e-12) == pytest.approx(2 * shot_density(1e-12))
    assert shot_density(1.0) == pytest.approx(5.6607e-10, rel=1e-4)


def test_over_all_frequencies_a_resistor_leaves_kt_over_c_whatever_it_is():
    for ohm in (1e3, 1e6):
        corner = 1 / (2 * math.pi * ohm * 1e-9)
        whole = band_noise(johnson_density(ohm), 0.0, math.inf, corner)
        assert whole == pytest.approx(capacitor_noise(1e-9), rel=1e-12)


def test_far_below_and_far_above_the_corner():
    assert band_noise(1.0, 20.0, 20e3, 1e12) == pytest.approx(math.sqrt(19_980), rel=1e-9)
    assert band_noise(1.0, 20.0, 20e3) == math.sqrt(19_980)
    # fc^2 (1/20 - 1/20000) under the square root
    assert band_noise(1.0, 20.0, 20e3, 1e-3) == pytest.approx(1e-3 * math.sqrt(1 / 20 - 1 / 20e3), rel=1e-6)
    assert band_noise(1.0, 5.0, 5.0) == 0.0


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: johnson_density(-1.0), "-1 ohm at 300 K: neither below 0"),
        (lambda: shot_density(-1.0), "current -1 A: not below 0 A"),
        (lambda: capacitor_noise(0.0), "0 F at 300 K: capacitance above 0 F, temperature not below 0 K"),
        (
            lambda: band_noise(1.0, 2.0, 1.0),
            "density 1, band 2 to 1 Hz, corner inf Hz: 0 <= density, 0 <= low <= high, 0 < corner",
        ),
    ],
)
def test_values_outside_the_domain(call, message):
    with pytest.raises(ValueError, match="0") as caught:
        call()
    assert str(caught.value) == message
