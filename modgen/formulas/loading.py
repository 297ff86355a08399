"""Loading: what a resistance in series with a load costs in scale."""

from __future__ import annotations

import math


def loading_error(source: float, load: float) -> float:
    """Share of a signal that is lost in its source resistance.

    Parameters
    ----------
    source : float
        Source or series resistance, not negative. [ohm]
    load : float
        Load resistance, above zero; infinite when there is none. [ohm]

    Returns
    -------
    float
        Loss, as a positive fraction of the signal. [-]

    Raises
    ------
    ValueError
        When the source is below 0 ohm, or the load is not above 0 ohm.

    Notes
    -----
    1 - R_load/(R_source + R_load) = R_source/(R_source + R_load).

    References
    ----------
    .. [1] P. Horowitz, W. Hill, The Art of Electronics, 3rd ed., 2015, chapter 1, voltage dividers and
       circuit loading.

    Examples
    --------
    >>> round(loading_error(1e3, 100e3), 6)
    0.009901
    """
    if source < 0.0 or not load > 0.0:
        raise ValueError(f"source {source:g} ohm, load {load:g} ohm: 0 <= source and 0 < load")
    return 0.0 if math.isinf(load) else source / (source + load)


def divider(voltage: float, upper: float, lower: float) -> float:
    """Voltage at the middle of two resistors in series.

    Parameters
    ----------
    voltage : float
        Voltage across both. [V]
    upper : float
        Resistance between the voltage and the middle, not negative. [ohm]
    lower : float
        Resistance between the middle and 0 V, not negative. [ohm]

    Returns
    -------
    float
        Voltage across the lower one. [V]

    Raises
    ------
    ValueError
        When a resistance is below 0 ohm, or both are 0 ohm.

    Notes
    -----
    V R_lower/(R_upper + R_lower).

    References
    ----------
    .. [1] T. R. Kuphaldt, Lessons in Electric Circuits, volume I, chapter 6, voltage divider circuits.

    Examples
    --------
    >>> divider(45.0, 15e3, 7.5e3)
    15.0
    """
    if upper < 0.0 or lower < 0.0 or upper + lower == 0.0:
        raise ValueError(f"divider of {upper:g} ohm over {lower:g} ohm: neither below 0, not both 0")
    return voltage * lower / (upper + lower)


def parallel(*resistances: float) -> float:
    """Resistance of resistors in parallel.

    Parameters
    ----------
    *resistances : float
        Each resistance, not negative; infinite ones do not count. [ohm]

    Returns
    -------
    float
        Resistance of all together; infinite when there is none. [ohm]

    Raises
    ------
    ValueError
        When one is below 0 ohm.

    Notes
    -----
    1/R is the sum of all 1/R_i.

    References
    ----------
    .. [1] T. R. Kuphaldt, Lessons in Electric Circuits, volume I, chapter 5, parallel circuits.

    Examples
    --------
    >>> round(parallel(100e3, 100e3, 50e3))
    25000
    """
    if any(r < 0.0 for r in resistances):
        raise ValueError(f"{min(resistances):g} ohm in parallel: not below 0 ohm")
    if any(r == 0.0 for r in resistances):
        return 0.0
    conductance = math.fsum(1.0 / r for r in resistances)
    return 1.0 / conductance if conductance else math.inf
