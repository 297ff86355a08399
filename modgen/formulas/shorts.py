"""Shorted outputs: the current, and what the amplifier that drives them turns into heat."""

from __future__ import annotations

import math


def shorted_current(voltage: float, resistance: float, limit: float) -> float:
    """Current of an output into a short.

    Parameters
    ----------
    voltage : float
        Voltage between what the amplifier drives to and the far end of the short. [V]
    resistance : float
        Resistance between the two, not negative. [ohm]
    limit : float
        Current at which the amplifier limits, not negative; infinite when it does not. [A]

    Returns
    -------
    float
        Magnitude of the current. [A]

    Raises
    ------
    ValueError
        When the resistance is below 0 ohm or the limit below 0 A.

    Notes
    -----
    V/R, or the limit when that is lower.

    References
    ----------
    .. [1] Ohm's law; output current limiting: P. Horowitz, W. Hill, The Art of Electronics, 3rd ed., 2015, chapter 4.

    Examples
    --------
    >>> round(shorted_current(12.6, 1e3, 60e-3) * 1e3, 6)
    12.6
    """
    if resistance < 0.0 or limit < 0.0:
        raise ValueError(f"{resistance:g} ohm, limit {limit:g} A: neither below 0")
    return min(abs(voltage) / resistance, limit) if resistance else limit


def section_power(voltage: float, resistance: float, limit: float) -> float:
    """Greatest heat in an output stage that feeds a resistance from its rail, whatever level it drives.

    Parameters
    ----------
    voltage : float
        Voltage between the rail that the current comes from and the far end of the resistance. [V]
    resistance : float
        Resistance, not negative. [ohm]
    limit : float
        Current at which the amplifier limits, not negative. [A]

    Returns
    -------
    float
        Heat in the output stage, without the quiescent current. [W]

    Raises
    ------
    ValueError
        When the resistance is below 0 ohm or the limit below 0 A.

    Notes
    -----
    The stage keeps V - I R at a current I: the product is greatest, V^2/(4 R), at I = V/(2 R); at the limit,
    when that comes first.

    References
    ----------
    .. [1] Class B output stage: P. Horowitz, W. Hill, The Art of Electronics, 3rd ed., 2015, chapter 2,
       push-pull output stages.

    Examples
    --------
    >>> round(section_power(12.6, 1e3, 60e-3) * 1e3, 2), round(section_power(12.0, 0.0, 60e-3), 2)
    (39.69, 0.72)
    """
    if resistance < 0.0 or limit < 0.0 or math.isinf(limit):
        raise ValueError(f"{resistance:g} ohm, limit {limit:g} A: neither below 0, the limit finite")
    current = min(abs(voltage) / (2.0 * resistance), limit) if resistance else limit
    return current * (abs(voltage) - current * resistance)
