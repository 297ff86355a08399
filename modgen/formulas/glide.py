"""The glide: how long a first-order lag takes, and what a control's taper makes of its rotation."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, overload

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    Array = NDArray[np.float64]
    Numeric = float | NDArray[np.float64]

#: ln 0.9 - ln 0.1: time from 10 % to 90 % of a step over the time constant [-]
RISE_FACTOR = math.log(9.0)


def time_factor(measure: str, step: float = 1.0, within: float = 5.0 / 1200.0) -> float:
    """Glide time over the time constant, by a measure.

    Parameters
    ----------
    measure : str
        ``rise`` (10 % to 90 %), ``time-constant`` or ``settle``. [-]
    step : float
        Height of the step that settles. [V]
    within : float
        Distance to the final value at which it counts as settled. [V]

    Returns
    -------
    float
        Time divided by the time constant. [-]

    Raises
    ------
    ValueError
        When the measure is unknown, or ``step > within > 0`` does not hold for ``settle``.

    Notes
    -----
    From v(t) = V (1 - exp(-t/tau)): the level x V is crossed at -tau ln(1 - x), so 10 % to 90 % takes
    tau ln 9, and the distance that is left falls to ``within`` after tau ln(step/within).

    References
    ----------
    .. [1] IEEE Std 181-2011, Transitions, Pulses, and Related Waveforms: transition duration between the
       10 % and 90 % reference levels.
    .. [2] P. Horowitz, W. Hill, The Art of Electronics, 3rd ed., 2015, chapter 1, RC circuits.

    Examples
    --------
    >>> round(time_factor("rise"), 6)
    2.197225
    >>> round(time_factor("settle", 1.0, 5 / 1200), 4)
    5.4806
    """
    if measure == "rise":
        return RISE_FACTOR
    if measure == "time-constant":
        return 1.0
    if measure != "settle":
        raise ValueError(f"unknown measure {measure!r}: it is rise, time-constant or settle")
    if not step > within > 0.0:
        raise ValueError(f"a step of {step:g} V cannot settle to within {within:g} V: 0 V < within < step")
    return math.log(step / within)


@overload
def step_response(time: float, tau: float, start: float, end: float) -> float: ...
@overload
def step_response(time: Array, tau: Numeric, start: Numeric, end: Numeric) -> Array: ...


def step_response(time: Numeric, tau: Numeric, start: Numeric, end: Numeric) -> Numeric:
    """Output of a first-order lag after its input has stepped.

    Parameters
    ----------
    time : numeric
        Time since the step, not negative. [s]
    tau : numeric
        Time constant, above zero. [s]
    start : numeric
        Output before the step. [V]
    end : numeric
        Input after the step. [V]

    Returns
    -------
    numeric
        Output voltage. [V]

    Raises
    ------
    ValueError
        When a time is negative or a time constant is not above zero.

    Notes
    -----
    v(t) = end + (start - end) exp(-t/tau).

    References
    ----------
    .. [1] T. R. Kuphaldt, Lessons in Electric Circuits, volume I, chapter 16, RC and L/R time constants.

    Examples
    --------
    >>> round(step_response(1.0, 1.0, 0.0, 15.0), 3)
    9.482
    """
    if isinstance(time, float | int) and isinstance(tau, float | int):
        if not time >= 0.0 or not tau > 0.0:
            raise ValueError(f"time {time:g} s and time constant {tau:g} s: 0 <= time and 0 < time constant")
        return end + (start - end) * math.exp(-time / tau)
    import numpy as np

    if not np.all(np.asarray(time) >= 0.0) or not np.all(np.asarray(tau) > 0.0):
        raise ValueError("a time below 0 s or a time constant not above 0 s: 0 <= time and 0 < time constant")
    decayed: Array = np.exp(-(np.asarray(time) / tau))
    return end + (start - end) * decayed


@overload
def taper_resistance(taper: str, middle: float, rotation: float) -> float: ...
@overload
def taper_resistance(taper: str, middle: float, rotation: Array) -> Array: ...


def taper_resistance(taper: str, middle: float, rotation: Numeric) -> Numeric:
    """Share of a control's track between its counter-clockwise end and the wiper.

    Parameters
    ----------
    taper : str
        ``linear``, ``log`` or ``reverse-log``. [-]
    middle : float
        Share at half travel: below 0.5 for ``log``, above 0.5 for ``reverse-log``; ``linear`` does not use
        it. [-]
    rotation : numeric
        Rotation over the electrical travel, 0 to 1. [-]

    Returns
    -------
    numeric
        Share of the track's resistance, 0 to 1. [-]

    Raises
    ------
    ValueError
        When the taper is unknown, ``middle`` is not on its side of 0.5, or a rotation is outside 0 to 1.

    Notes
    -----
    The exponential law (b^x - 1)/(b - 1) through (0, 0), (1/2, middle) and (1, 1), which asks for
    sqrt(b) = 1/middle - 1. A reverse-log law is the log law mirrored in both axes, which is the same
    expression with 1 - middle. Real tracks follow it in two or three straight pieces, within some 20 %.

    References
    ----------
    .. [1] IEC 60393-1, Potentiometers for use in electronic equipment: resistance laws A (linear),
       B (logarithmic) and C (inverse logarithmic). Makers' letters differ, so words are used here.

    Examples
    --------
    >>> round(taper_resistance("log", 0.15, 0.5), 9)
    0.15
    >>> taper_resistance("linear", 0.5, 0.25)
    0.25
    """
    # written so that what is not a number is outside
    if isinstance(rotation, float | int):
        inside = 0.0 <= rotation <= 1.0
    else:
        inside = bool(((rotation >= 0.0) & (rotation <= 1.0)).all())
    if not inside:
        raise ValueError(f"rotation {rotation}: it goes from 0 to 1")
    if taper == "linear":
        return rotation
    if taper not in ("log", "reverse-log"):
        raise ValueError(f"unknown taper {taper!r}: it is linear, log or reverse-log")
    if not (0.0 < middle < 0.5 if taper == "log" else 0.5 < middle < 1.0):
        bound = "above 0 and below 0.5" if taper == "log" else "above 0.5 and below 1"
        raise ValueError(f"a {taper} taper has {middle:g} at half travel: it must be {bound}")
    base = (1.0 / middle - 1.0) ** 2
    return (base**rotation - 1.0) / (base - 1.0)
