"""Preferred numbers for resistors and capacitors: the E series of IEC 60063."""

from __future__ import annotations

import math
from collections.abc import Mapping
from types import MappingProxyType

_E24 = (10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30, 33, 36, 39, 43, 47, 51, 56, 62, 68, 75, 82, 91)

#: E192 rounds 10^(i/192) to three figures, with this one exception that the standard itself makes
_EXCEPTION = {919: 920}


def _computed(steps: int) -> tuple[int, ...]:
    """The series of three figures with so many steps to the decade."""
    rounded = (round(100.0 * 10.0 ** (i / steps)) for i in range(steps))
    return tuple(_EXCEPTION.get(value, value) for value in rounded)


#: Series name to its values in one decade, as whole numbers of two or three figures.
SERIES: Mapping[str, tuple[int, ...]] = MappingProxyType(
    {
        "E3": _E24[::8],
        "E6": _E24[::4],
        "E12": _E24[::2],
        "E24": _E24,
        "E48": _computed(48),
        "E96": _computed(96),
        "E192": _computed(192),
    }
)

_CLOSE = 1e-6  # a value this near, relatively, is the number itself: far below a part's tolerance


def series_values(series: str, low: float, high: float) -> tuple[float, ...]:
    """All preferred values between two bounds.

    Parameters
    ----------
    series : str
        ``E3`` to ``E192``. [-]
    low : float
        Lower bound, above zero, in any unit. [-]
    high : float
        Upper bound, in the same unit. [-]

    Returns
    -------
    tuple of float
        Values in rising order, bounds included. [-]

    Raises
    ------
    ValueError
        When there is no such series, the lower bound is not above zero, or the upper is infinite.

    Notes
    -----
    E3 to E24 are the table of the standard, with its historical departures from the power law (27, 30, 33, 36,
    39, 43, 47 and 82); E48 to E192 are 10^(i/n) rounded to three figures, with 920 in E192.

    References
    ----------
    .. [1] IEC 60063:2015, Preferred number series for resistors and capacitors.

    Examples
    --------
    >>> series_values("E6", 1e3, 10e3)
    (1000.0, 1500.0, 2200.0, 3300.0, 4700.0, 6800.0, 10000.0)
    """
    figures = _figures(series)
    if not low > 0.0 or math.isinf(high):
        raise ValueError(f"values from {low:g} to {high:g}: above 0, and not infinite")
    if high < low:
        return ()
    first = math.floor(math.log10(low)) - 1
    last = math.floor(math.log10(high)) + 1
    places = len(str(figures[0])) - 1
    values = (float(f"{figure}e{decade - places}") for decade in range(first, last + 1) for figure in figures)
    return tuple(v for v in values if low * (1.0 - _CLOSE) <= v <= high * (1.0 + _CLOSE))


def in_series(value: float, series: str) -> bool:
    """Whether a value is one of a series.

    Parameters
    ----------
    value : float
        Value, in any unit. [-]
    series : str
        ``E3`` to ``E192``. [-]

    Returns
    -------
    bool
        Whether it is, to within a millionth. [-]

    Raises
    ------
    ValueError
        When there is no such series.

    References
    ----------
    .. [1] IEC 60063:2015, Preferred number series for resistors and capacitors.

    Examples
    --------
    >>> in_series(4700.0, "E12"), in_series(5000.0, "E24")
    (True, False)
    """
    _figures(series)
    return 0.0 < value < math.inf and bool(series_values(series, value, value))


def nearest(value: float, series: str) -> float:
    """The value of a series that is nearest by ratio; of two as near, the lower.

    Parameters
    ----------
    value : float
        Value, above zero, in any unit. [-]
    series : str
        ``E3`` to ``E192``. [-]

    Returns
    -------
    float
        Value of the series, in the same unit. [-]

    Raises
    ------
    ValueError
        When there is no such series, or the value is not above zero and finite.

    References
    ----------
    .. [1] IEC 60063:2015, Preferred number series for resistors and capacitors. The series are geometric, so
       the nearest is meant by ratio.

    Examples
    --------
    >>> nearest(5000.0, "E12")
    4700.0
    """
    _figures(series)
    if not 0.0 < value < math.inf:
        raise ValueError(f"value {value:g}: above 0, and not infinite")
    around = series_values(series, value / 10.0, value * 10.0)
    return min(around, key=lambda candidate: (abs(math.log(candidate / value)), candidate))


def _figures(series: str) -> tuple[int, ...]:
    """The figures of a series, or an error that lists the series."""
    if series not in SERIES:
        raise ValueError(f"unknown series {series!r}: it is one of {', '.join(SERIES)}")
    return SERIES[series]
