"""The supply: rails at the ends of their tolerance, and behind a protection diode."""

from __future__ import annotations

import math
from collections.abc import Sequence
from itertools import pairwise


def interpolate_drop(points: Sequence[tuple[float, float]], current: float) -> float:
    """Forward drop of a diode at a current, from a few points of its curve.

    Parameters
    ----------
    points : sequence of (float, float)
        Current and drop, currents above zero and rising. [A, V]
    current : float
        Forward current, not negative. [A]

    Returns
    -------
    float
        Drop. Below the first point, the first drop: an upper bound, since a drop never falls with current.
        Above the last, a straight line through the last two points in current, since there the diode's
        resistance rules; with one point, its drop. [V]

    Raises
    ------
    ValueError
        When there are no points, their currents do not rise from above 0 A, or the current is below 0 A.

    Notes
    -----
    Between points the drop is linear in the logarithm of the current, as the diode law V = n V_T ln(I/I_S)
    is where resistance does not matter.

    References
    ----------
    .. [1] P. Horowitz, W. Hill, The Art of Electronics, 3rd ed., 2015, chapter 1, diodes; chapter 2,
       Ebers-Moll model.

    Examples
    --------
    >>> round(interpolate_drop([(0.001, 0.32), (0.1, 0.5)], 0.01), 3)
    0.41
    """
    if not points or points[0][0] <= 0.0 or any(a[0] >= b[0] for a, b in pairwise(points)):
        raise ValueError(f"points {list(points)}: at least one, currents above 0 A and rising")
    if current < 0.0:
        raise ValueError(f"forward current {current:g} A: not below 0 A")
    if current <= points[0][0]:
        return points[0][1]
    for (i_low, v_low), (i_high, v_high) in pairwise(points):
        if current <= i_high:
            return v_low + (v_high - v_low) * math.log(current / i_low) / math.log(i_high / i_low)
    if len(points) == 1:
        return points[0][1]
    (i_low, v_low), (i_high, v_high) = points[-2:]
    return v_high + (current - i_high) * (v_high - v_low) / (i_high - i_low)


def rail_ends(nominal: float, tolerance: float) -> tuple[float, float]:
    """A rail at its least and at its greatest magnitude.

    Parameters
    ----------
    nominal : float
        Nominal voltage, either sign. [V]
    tolerance : float
        Tolerance both ways, 0 to below 1. [-]

    Returns
    -------
    tuple of float
        Least and greatest magnitude, with the sign of the rail. [V]

    Raises
    ------
    ValueError
        When the tolerance is outside 0 to 1.

    References
    ----------
    .. [1] Definition of a tolerance.

    Examples
    --------
    >>> low, high = rail_ends(-12.0, 0.05)
    >>> round(low, 9), round(high, 9)
    (-11.4, -12.6)
    """
    if not 0.0 <= tolerance < 1.0:
        raise ValueError(f"tolerance {tolerance:g}: 0 <= tolerance < 1")
    return nominal * (1.0 - tolerance), nominal * (1.0 + tolerance)


def behind_diode(rail: float, drop: float) -> float:
    """A rail behind its series diode.

    Parameters
    ----------
    rail : float
        Voltage before the diode, either sign. [V]
    drop : float
        Drop of the diode, not negative. [V]

    Returns
    -------
    float
        Voltage behind the diode: nearer to zero by the drop, and never past zero. [V]

    Raises
    ------
    ValueError
        When the drop is below 0 V.

    References
    ----------
    .. [1] Kirchhoff's voltage law.

    Examples
    --------
    >>> round(behind_diode(-11.4, 0.3), 9)
    -11.1
    """
    if drop < 0.0:
        raise ValueError(f"drop {drop:g} V: not below 0 V")
    return math.copysign(max(0.0, abs(rail) - drop), rail)
