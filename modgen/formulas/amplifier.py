"""Amplifiers as followers: scale errors, what they can swing, and what a short or a clamp draws."""

from __future__ import annotations

import math


def ratio_from_decibels(decibels: float) -> float:
    """Voltage ratio of a level.

    Parameters
    ----------
    decibels : float
        Level, 20 log10 of the ratio. [dB]

    Returns
    -------
    float
        Ratio. [-]

    References
    ----------
    .. [1] IEC 60027-3, Letter symbols: logarithmic quantities and their units.

    Examples
    --------
    >>> ratio_from_decibels(60.0)
    1000.0
    """
    return float(10.0 ** (decibels / 20.0))


def follower_gain_error(gain: float) -> float:
    """Scale error of a unity-gain follower from its finite open-loop gain.

    Parameters
    ----------
    gain : float
        Open-loop gain at d.c., above zero. [-]

    Returns
    -------
    float
        Loss, as a positive fraction. [-]

    Raises
    ------
    ValueError
        When the gain is not above 0.

    Notes
    -----
    The closed-loop gain is A/(1 + A), which falls short of one by 1/(1 + A).

    References
    ----------
    .. [1] P. Horowitz, W. Hill, The Art of Electronics, 3rd ed., 2015, chapter 2, negative feedback.

    Examples
    --------
    >>> round(follower_gain_error(25e3) * 1e6, 2)
    40.0
    """
    if not gain > 0.0:
        raise ValueError(f"open-loop gain {gain:g}: above 0")
    return 0.0 if math.isinf(gain) else 1.0 / (1.0 + gain)


def common_mode_error(rejection: float) -> float:
    """Scale error of a follower from its common-mode rejection, either sign.

    Parameters
    ----------
    rejection : float
        Common-mode rejection ratio, above zero. [-]

    Returns
    -------
    float
        Greatest error, as a fraction. [-]

    Raises
    ------
    ValueError
        When the ratio is not above 0.

    Notes
    -----
    A follower's whole signal is common mode: the input error V/CMRR follows the signal.

    References
    ----------
    .. [1] P. Horowitz, W. Hill, The Art of Electronics, 3rd ed., 2015, chapter 4, common-mode rejection.

    Examples
    --------
    >>> round(common_mode_error(ratio_from_decibels(70.0)) * 5.0 * 1e3, 2)
    1.58
    """
    if not rejection > 0.0:
        raise ValueError(f"common-mode rejection {rejection:g}: above 0")
    return 1.0 / rejection


def reach(negative: float, positive: float, headroom_low: float, headroom_high: float) -> tuple[float, float]:
    """Lowest and highest voltage that stay a headroom away from the rails.

    Parameters
    ----------
    negative : float
        Negative supply pin. [V]
    positive : float
        Positive supply pin. [V]
    headroom_low : float
        Distance kept from the negative rail; negative when the part reaches beyond it. [V]
    headroom_high : float
        Distance kept from the positive rail; negative when the part reaches beyond it. [V]

    Returns
    -------
    tuple of float
        Low and high limit, of common mode or of swing; low above high when nothing is left. [V]

    Raises
    ------
    ValueError
        When the negative rail is above the positive one.

    References
    ----------
    .. [1] Data sheets state common-mode range and output swing at one supply; their distance from the rails
       is taken to move with the rails. Common practice.

    Examples
    --------
    >>> low, high = reach(-11.1, 11.1, 4.0, 4.0)
    >>> round(low, 3), round(high, 3)
    (-7.1, 7.1)
    """
    if negative > positive:
        raise ValueError(f"rails {negative:g} V and {positive:g} V: negative <= positive")
    return negative + headroom_low, positive - headroom_high


def clamp_current(voltage: float, resistance: float, clamp: float = 0.6) -> float:
    """Current through a resistor into an input that is clamped by a junction, the part unpowered.

    Parameters
    ----------
    voltage : float
        Voltage at the far end, either sign. [V]
    resistance : float
        Series resistance, above zero. [ohm]
    clamp : float
        Drop of the junction. [V]

    Returns
    -------
    float
        Magnitude of the current; 0 below the clamp. [A]

    Raises
    ------
    ValueError
        When the resistance is not above 0 ohm.

    Notes
    -----
    (|V| - V_clamp)/R.

    References
    ----------
    .. [1] Ohm's law with a constant junction drop; a silicon junction is about 0.6 V: P. Horowitz, W. Hill,
       The Art of Electronics, 3rd ed., 2015, chapter 1, diodes.

    Examples
    --------
    >>> round(clamp_current(12.6, 1.2e3) * 1e3, 6)
    10.0
    """
    if not resistance > 0.0:
        raise ValueError(f"series resistance {resistance:g} ohm: above 0 ohm")
    return max(0.0, abs(voltage) - clamp) / resistance


def short_power(voltage: float, resistance: float, limit: float) -> float:
    """Power in an output resistor whose far end is shorted.

    Parameters
    ----------
    voltage : float
        Voltage between the amplifier's highest output and the short. [V]
    resistance : float
        Output resistor, above zero. [ohm]
    limit : float
        Current at which the amplifier limits; infinite when it does not. [A]

    Returns
    -------
    float
        Power in the resistor. [W]

    Raises
    ------
    ValueError
        When the resistance is not above 0 ohm, or the limit is below 0 A.

    Notes
    -----
    I^2 R, with I the lower of V/R and the limit.

    References
    ----------
    .. [1] Joule's law; T. R. Kuphaldt, Lessons in Electric Circuits, volume I, chapter 2, calculating
       electric power.

    Examples
    --------
    >>> round(short_power(11.0, 1e3, 0.06), 3)
    0.121
    """
    if not resistance > 0.0 or limit < 0.0:
        raise ValueError(f"{resistance:g} ohm, limit {limit:g} A: resistance above 0 ohm, limit not below 0 A")
    current = min(abs(voltage) / resistance, limit)
    return current * current * resistance
