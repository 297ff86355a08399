"""Pitch: cents, volts at 1 V per octave, and what a scale error does to an octave."""

from __future__ import annotations

CENTS_PER_OCTAVE = 1200.0
VOLTS_PER_OCTAVE = 1.0


def cents_to_volts(cents: float) -> float:
    """Control voltage of an interval at 1 V per octave.

    Parameters
    ----------
    cents : float
        Interval. [cents]

    Returns
    -------
    float
        Voltage. [V]

    References
    ----------
    .. [1] H. Helmholtz, On the Sensations of Tone, transl. A. J. Ellis, 2nd ed., 1885, appendix XX: 1200 cents
       to the octave.
    .. [2] 1 V per octave: common practice, no standard.

    Examples
    --------
    >>> round(cents_to_volts(5.0), 8)
    0.00416667
    """
    return cents / CENTS_PER_OCTAVE * VOLTS_PER_OCTAVE


def volts_to_cents(volts: float) -> float:
    """Interval of a control voltage at 1 V per octave.

    Parameters
    ----------
    volts : float
        Voltage. [V]

    Returns
    -------
    float
        Interval. [cents]

    References
    ----------
    .. [1] As :func:`cents_to_volts`.

    Examples
    --------
    >>> volts_to_cents(1.0)
    1200.0
    """
    return volts / VOLTS_PER_OCTAVE * CENTS_PER_OCTAVE


def scale_to_cents(fraction: float) -> float:
    """Cents by which each octave is out when the gain is out by a fraction.

    Parameters
    ----------
    fraction : float
        Error of the gain, for instance 0.01 for 1 %. [-]

    Returns
    -------
    float
        Error of each octave; over n octaves it is n times that. [cents]

    References
    ----------
    .. [1] Definition: an octave is 1 V and 1200 cents, so a gain of 1 + e makes it 1200 (1 + e) cents.

    Examples
    --------
    >>> scale_to_cents(0.01)
    12.0
    """
    return CENTS_PER_OCTAVE * fraction


def cents_to_ratio(cents: float) -> float:
    """Frequency ratio of an interval.

    Parameters
    ----------
    cents : float
        Interval. [cents]

    Returns
    -------
    float
        Upper frequency over lower. [-]

    References
    ----------
    .. [1] H. Helmholtz, On the Sensations of Tone, transl. A. J. Ellis, 2nd ed., 1885, appendix XX.

    Examples
    --------
    >>> round(cents_to_ratio(700.0), 6)
    1.498307
    """
    return float(2.0 ** (cents / CENTS_PER_OCTAVE))
