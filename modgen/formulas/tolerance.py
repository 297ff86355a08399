"""Tolerances: worst cases, root sum of squares, and how sure a share from a sample is."""

from __future__ import annotations

import math
from collections.abc import Sequence

#: two-sided 95 % quantile of the standard normal distribution [-]
Z_95 = 1.959964


def wilson_interval(successes: int, trials: int, z: float = Z_95) -> tuple[float, float]:
    """Wilson score interval of a proportion, without continuity correction.

    Parameters
    ----------
    successes : int
        How many came out well. [-]
    trials : int
        Of how many, at least one. [-]
    z : float
        Quantile of the normal distribution; 1.959964 for 95 %. [-]

    Returns
    -------
    tuple of float
        Low and high bound, each 0 to 1. [-]

    Raises
    ------
    ValueError
        When there are no trials, or successes outside 0 to trials.

    Notes
    -----
    Centre (p + z^2/2n)/(1 + z^2/n), half width z sqrt(p (1 - p)/n + z^2/4n^2)/(1 + z^2/n). Unlike p plus or
    minus z standard errors it does not shrink to nothing when all boards pass.

    References
    ----------
    .. [1] E. B. Wilson, J. Am. Stat. Assoc. 22 (1927) 209-212.
    .. [2] R. G. Newcombe, Statistics in Medicine 17 (1998) 857-872, method 3.

    Examples
    --------
    >>> low, high = wilson_interval(81, 263)
    >>> round(low, 4), round(high, 4)
    (0.2553, 0.3662)
    """
    if trials < 1 or not 0 <= successes <= trials:
        raise ValueError(f"{successes} of {trials}: 1 <= trials, 0 <= successes <= trials")
    p = successes / trials
    share = z * z / trials
    centre = (p + share / 2.0) / (1.0 + share)
    half = z * math.sqrt(p * (1.0 - p) / trials + share / (4.0 * trials)) / (1.0 + share)
    # at the ends the bound is exactly 0 or 1; rounding would put it a hair beside
    low = 0.0 if successes == 0 else max(0.0, centre - half)
    high = 1.0 if successes == trials else min(1.0, centre + half)
    return low, high


def worst_case_product(factors: Sequence[tuple[float, float]]) -> tuple[float, float]:
    """Least and greatest product of positive factors that each have a tolerance.

    Parameters
    ----------
    factors : sequence of (float, float)
        Nominal value, above zero in its own unit, and symmetrical tolerance, 0 to below 1. [-]

    Returns
    -------
    tuple of float
        Least and greatest product, in the product of the factors' units. [-]

    Raises
    ------
    ValueError
        When a value is not above zero, or a tolerance outside 0 to 1.

    Notes
    -----
    A product of positive factors rises with each of them, so its extremes are at all-low and all-high.

    References
    ----------
    .. [1] Worst-case (extreme value) analysis: common practice.

    Examples
    --------
    >>> low, high = worst_case_product([(1e6, 0.20), (1e-6, 0.10)])
    >>> round(low, 9), round(high, 9)
    (0.72, 1.32)
    """
    for value, tolerance in factors:
        if not value > 0.0 or not 0.0 <= tolerance < 1.0:
            raise ValueError(f"factor {value:g} at {tolerance:g}: value above 0, 0 <= tolerance < 1")
    low = math.prod(value * (1.0 - tolerance) for value, tolerance in factors)
    high = math.prod(value * (1.0 + tolerance) for value, tolerance in factors)
    return low, high


def root_sum_square(terms: Sequence[float]) -> float:
    """Size of independent errors together.

    Parameters
    ----------
    terms : sequence of float
        Errors, all in one unit. [-]

    Returns
    -------
    float
        Square root of the sum of the squares, in the unit of the terms. [-]

    References
    ----------
    .. [1] JCGM 100:2008, Guide to the expression of uncertainty in measurement, 5.1.2.

    Examples
    --------
    >>> root_sum_square([3.0, 4.0])
    5.0
    """
    return math.hypot(*terms)
