"""Noise: densities of resistors and currents, and what a band with a first-order corner leaves of them."""

from __future__ import annotations

import math

#: Boltzmann constant, exact in the SI since 2019 [J/K]
BOLTZMANN = 1.380649e-23
#: elementary charge, exact in the SI since 2019 [C]
CHARGE = 1.602176634e-19


def johnson_density(resistance: float, temperature: float = 300.0) -> float:
    """Density of the thermal noise voltage of a resistor.

    Parameters
    ----------
    resistance : float
        Resistance, not negative. [ohm]
    temperature : float
        Temperature, not negative. [K]

    Returns
    -------
    float
        Density. [V/rtHz]

    Raises
    ------
    ValueError
        When the resistance is below 0 ohm or the temperature below 0 K.

    Notes
    -----
    sqrt(4 k T R).

    References
    ----------
    .. [1] H. Nyquist, "Thermal agitation of electric charge in conductors", Physical Review 32 (1928) 110-113.

    Examples
    --------
    >>> round(johnson_density(1e3) * 1e9, 3)
    4.07
    """
    if resistance < 0.0 or temperature < 0.0:
        raise ValueError(f"{resistance:g} ohm at {temperature:g} K: neither below 0")
    return math.sqrt(4.0 * BOLTZMANN * temperature * resistance)


def shot_density(current: float) -> float:
    """Density of the shot noise of a current across a junction.

    Parameters
    ----------
    current : float
        Current, not negative. [A]

    Returns
    -------
    float
        Density. [A/rtHz]

    Raises
    ------
    ValueError
        When the current is below 0 A.

    Notes
    -----
    sqrt(2 q I): what a bias current makes at least.

    References
    ----------
    .. [1] W. Schottky, "Ueber spontane Stromschwankungen in verschiedenen Elektrizitaetsleitern", Annalen der
       Physik 362 (1918) 541-567.

    Examples
    --------
    >>> round(shot_density(200e-12) * 1e15, 2)
    8.01
    """
    if current < 0.0:
        raise ValueError(f"current {current:g} A: not below 0 A")
    return math.sqrt(2.0 * CHARGE * current)


def capacitor_noise(capacitance: float, temperature: float = 300.0) -> float:
    """Noise voltage on a capacitor that any resistance charges, over all frequencies.

    Parameters
    ----------
    capacitance : float
        Capacitance, above zero. [F]
    temperature : float
        Temperature of the resistance, not negative. [K]

    Returns
    -------
    float
        Root mean square. [V]

    Raises
    ------
    ValueError
        When the capacitance is not above 0 F or the temperature is below 0 K.

    Notes
    -----
    sqrt(k T/C), whatever the resistance: a larger one is louder in a narrower band.

    References
    ----------
    .. [1] P. Horowitz, W. Hill, The Art of Electronics, 3rd ed., 2015, chapter 8, kT/C noise.

    Examples
    --------
    >>> round(capacitor_noise(1e-6) * 1e9, 2)
    64.36
    """
    if not capacitance > 0.0 or temperature < 0.0:
        raise ValueError(f"{capacitance:g} F at {temperature:g} K: capacitance above 0 F, temperature not below 0 K")
    return math.sqrt(BOLTZMANN * temperature / capacitance)


def band_noise(density: float, low: float, high: float, corner: float = math.inf) -> float:
    """Noise in a band that a white density leaves behind a first-order low pass.

    Parameters
    ----------
    density : float
        White density, in any unit per root hertz, not negative. [V/rtHz]
    low : float
        Lower end of the band, not negative. [Hz]
    high : float
        Upper end of the band, not below the lower one; infinite only with a corner. [Hz]
    corner : float
        Frequency at which the low pass has lost half of the power, above zero; infinite for none. [Hz]

    Returns
    -------
    float
        Root mean square. [V]

    Raises
    ------
    ValueError
        When the density is below 0, the band is upside down, or the corner is not above 0 Hz.

    Notes
    -----
    The square is the density's times the integral of 1/(1 + (f/fc)^2): fc (atan(high/fc) - atan(low/fc)), which is
    pi/2 fc over all frequencies and high - low without a corner.

    References
    ----------
    .. [1] P. Horowitz, W. Hill, The Art of Electronics, 3rd ed., 2015, chapter 8, noise bandwidth.

    Examples
    --------
    >>> round(band_noise(johnson_density(100e3), 0.0, 1e6) * 1e6, 2)
    40.7
    """
    if density < 0.0 or not 0.0 <= low <= high or not corner > 0.0:
        raise ValueError(
            f"density {density:g}, band {low:g} to {high:g} Hz, corner {corner:g} Hz: "
            "0 <= density, 0 <= low <= high, 0 < corner"
        )
    width = high - low
    if math.isfinite(corner):
        # atan(a) - atan(b) in one, exact where both are close to a right angle
        a, b = high / corner, low / corner
        angle = math.atan2(1.0, b) if math.isinf(a) else math.atan2(a - b, 1.0 + a * b)
        width = corner * angle
    return density * math.sqrt(width)
