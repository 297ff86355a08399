"""Noise densities and the noise of a capacitor against printed values, and a band against numerical integration."""

from __future__ import annotations

import math

import pytest

from modgen.formulas.noise import band_noise, capacitor_noise, johnson_density


@pytest.mark.source(
    "sqrt(4 k T R) at 300 K, by hand: 1 kohm 4.070, 10 kohm 12.87, 100 kohm 40.70, 1 Mohm 128.7 nV/rtHz"
)
@pytest.mark.parametrize(("ohm", "nanovolts"), [(1e3, "4.070"), (10e3, "12.87"), (100e3, "40.70"), (1e6, "128.7")])
def test_density_of_a_resistor(ohm, nanovolts, printed):
    assert johnson_density(ohm, 300.0) * 1e9 == printed(nanovolts)


@pytest.mark.source("secondary: encyclopaedia page on Johnson noise: 100 kohm in 1 MHz at room temperature, 40.7 uV")
def test_noise_of_a_resistor_in_a_band(printed):
    assert band_noise(johnson_density(100e3, 300.0), 0.0, 1e6) * 1e6 == printed("40.7")


@pytest.mark.source("from memory: encyclopaedia table of kT/C noise at 300 K: 1 pF 64 uV, 100 pF 6.4 uV, 1 nF 2 uV")
@pytest.mark.parametrize(("farad", "microvolts"), [(1e-12, "64"), (100e-12, "6.4"), (1e-9, "2")])
def test_noise_of_a_capacitor(farad, microvolts, printed):
    assert capacitor_noise(farad, 300.0) * 1e6 == printed(microvolts)


@pytest.mark.source("secondary: page on kT/C noise: 40 pF at 293 K, 10 uV")
def test_noise_of_40_picofarad(printed):
    assert capacitor_noise(40e-12, 293.0) * 1e6 == printed("10")


@pytest.mark.source("SciPy integrate.quad of 1/(1 + (f/fc)^2)")
@pytest.mark.parametrize("corner", [0.159, 20.0, 723.0, 45e3])
def test_band_behind_a_corner(corner):
    from scipy.integrate import quad

    width, _ = quad(lambda f: 1 / (1 + (f / corner) ** 2), 20.0, 20e3, epsabs=0, epsrel=1e-10, limit=500)
    assert band_noise(1.0, 20.0, 20e3, corner) == pytest.approx(math.sqrt(width), rel=1e-8)
