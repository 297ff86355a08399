"""Stability of followers: loop gain into capacitive loads, phase margin, and the overshoot that goes with it."""

from __future__ import annotations

import cmath
import math
from collections.abc import Callable, Sequence

#: how closely a crossover is looked for before it is refined, in points a decade [-]
POINTS_PER_DECADE = 10


def amplifier_gain(frequency: float, gain: float, gain_bandwidth: float, second_pole: float = math.inf) -> complex:
    """Open-loop gain of an amplifier with one dominant pole, and perhaps a second one.

    Parameters
    ----------
    frequency : float
        Frequency, not negative. [Hz]
    gain : float
        Open-loop gain at d.c., above zero. [-]
    gain_bandwidth : float
        Gain times frequency on the slope of the first pole, above zero. [Hz]
    second_pole : float
        Frequency of the second pole, above zero; infinite for none. [Hz]

    Returns
    -------
    complex
        Gain. [-]

    Raises
    ------
    ValueError
        When the gain, the gain-bandwidth or the second pole is not above 0.

    Notes
    -----
    A/(1 + j f A/GBW)/(1 + j f/f2).

    References
    ----------
    .. [1] P. Horowitz, W. Hill, The Art of Electronics, 3rd ed., 2015, chapter 4, frequency compensation.

    Examples
    --------
    >>> round(abs(amplifier_gain(4e3, 1e6, 4e6)), 1)
    1000.0
    """
    if not gain > 0.0 or not gain_bandwidth > 0.0 or not second_pole > 0.0:
        raise ValueError(
            f"gain {gain:g}, gain-bandwidth {gain_bandwidth:g} Hz, second pole {second_pole:g} Hz: all above 0"
        )
    return gain / (1 + 1j * frequency * gain / gain_bandwidth) / (1 + 1j * frequency / second_pole)


def loaded_feedback(
    frequency: float, output_resistance: float, branches: Sequence[tuple[float, float, float]]
) -> complex:
    """What a follower feeds back of its own drive when its output resistance meets a load.

    Parameters
    ----------
    frequency : float
        Frequency, not negative. [Hz]
    output_resistance : float
        Open-loop output resistance, not negative. [ohm]
    branches : sequence of (float, float, float)
        Each load: a resistance in series with a capacitance that a load resistance stands across.
        [ohm, F, ohm]

    Returns
    -------
    complex
        Feedback ratio, 1 without a load. [-]

    Raises
    ------
    ValueError
        When the output resistance or a value of a branch is below 0.

    Notes
    -----
    1/(1 + Ro sum Y), with Y = 1/(R + 1/(j w C + 1/RL)).

    References
    ----------
    .. [1] P. Horowitz, W. Hill, The Art of Electronics, 3rd ed., 2015, chapter 4, capacitive loads.

    Examples
    --------
    The pole of 200 ohm and 1 nF lies at 796 kHz, where half of the power is left:

    >>> round(abs(loaded_feedback(795774.7, 200.0, [(0.0, 1e-9, math.inf)])) ** 2, 6)
    0.5
    """
    if output_resistance < 0.0 or any(value < 0.0 for branch in branches for value in branch):
        raise ValueError(f"output resistance {output_resistance:g} ohm, branches {list(branches)}: none below 0")
    total = 0j
    for series, capacitance, load in branches:
        shunt = 2j * math.pi * frequency * capacitance + (1.0 / load if load else math.inf)
        if shunt == 0:
            continue
        total += 1.0 / (series + 1.0 / shunt)
    return 1.0 / (1.0 + output_resistance * total)


def sensed_feedback(
    frequency: float,
    output_resistance: float,
    series: float,
    feedback: float,
    compensation: float,
    cable: float,
    load: float = math.inf,
    input_capacitance: float = 0.0,
) -> complex:
    """What a follower feeds back of its own drive when its output resistor stands inside the loop.

    Parameters
    ----------
    frequency : float
        Frequency, above zero. [Hz]
    output_resistance : float
        Open-loop output resistance, not negative. [ohm]
    series : float
        Resistor between the amplifier's output and the socket, above zero. [ohm]
    feedback : float
        Resistor between the socket and the inverting input, above zero. [ohm]
    compensation : float
        Capacitor between the amplifier's output and the inverting input, not negative. [F]
    cable : float
        Capacitance at the socket, not negative. [F]
    load : float
        Resistance at the socket, above zero; infinite for none. [ohm]
    input_capacitance : float
        Capacitance at the inverting input, not negative. [F]

    Returns
    -------
    complex
        Feedback ratio, 1 with neither cable, load nor input capacitance. [-]

    Raises
    ------
    ValueError
        When a value is outside what its line says.

    Notes
    -----
    Nodal equations of the socket and the inverting input, driven from the amplifier's output; its output
    resistance carries the current into both.

    References
    ----------
    .. [1] Driving capacitive loads with the resistor inside the loop and a capacitor round it: P. Horowitz,
       W. Hill, The Art of Electronics, 3rd ed., 2015, chapter 4, capacitive loads.

    Examples
    --------
    >>> abs(sensed_feedback(1e6, 200.0, 1e3, 10e3, 100e-12, 0.0))
    1.0
    """
    if not frequency > 0.0 or not series > 0.0 or not feedback > 0.0 or not load > 0.0:
        raise ValueError(
            f"frequency {frequency:g} Hz, series {series:g} ohm, feedback {feedback:g} ohm, load {load:g} ohm: "
            "all above 0"
        )
    if min(output_resistance, compensation, cable, input_capacitance) < 0.0:
        raise ValueError(
            f"output resistance {output_resistance:g} ohm, compensation {compensation:g} F, cable {cable:g} F, "
            f"input {input_capacitance:g} F: none below 0"
        )
    omega = 2j * math.pi * frequency
    y_series, y_back, y_comp = 1.0 / series, 1.0 / feedback, omega * compensation
    y_socket = y_series + y_back + omega * cable + 1.0 / load
    y_input = y_back + y_comp + omega * input_capacitance
    determinant = y_socket * y_input - y_back * y_back
    socket = (y_series * y_input + y_back * y_comp) / determinant
    sensed = (y_socket * y_comp + y_back * y_series) / determinant
    current = y_series * (1.0 - socket) + y_comp * (1.0 - sensed)
    return complex(sensed / (1.0 + output_resistance * current))


def phase_margin(
    feedback: Callable[[float], complex], gain: float, gain_bandwidth: float, second_pole: float = math.inf
) -> tuple[float, float]:
    """Crossover frequency and phase margin of a loop; of several crossovers the one with the least margin.

    Parameters
    ----------
    feedback : callable
        Feedback ratio at a frequency, of magnitude 1 at most. [-]
    gain : float
        Open-loop gain at d.c., above 1. [-]
    gain_bandwidth : float
        Gain-bandwidth product, above zero. [Hz]
    second_pole : float
        Frequency of the amplifier's second pole, above zero; infinite for none. [Hz]

    Returns
    -------
    tuple of float
        Crossover frequency and phase margin; (0, 180) when the loop gain never reaches 1. [Hz] or [deg]

    Raises
    ------
    ValueError
        When the gain, the gain-bandwidth or the second pole is not above 0.

    Notes
    -----
    180 degrees and the phases of amplifier and feedback, taken apart so that neither wraps round. The loop
    gain is at most the amplifier's, so that nothing is to be looked for above the gain-bandwidth.

    References
    ----------
    .. [1] H. W. Bode, Network Analysis and Feedback Amplifier Design, 1945, chapter 8, stability and phase margin.

    Examples
    --------
    One pole alone leaves 90 degrees:

    >>> f, margin = phase_margin(lambda f: 1.0, 1e6, 4e6)
    >>> round(f), round(margin, 3)
    (4000000, 90.0)
    """

    def level(frequency: float) -> float:
        return abs(amplifier_gain(frequency, gain, gain_bandwidth, second_pole) * feedback(frequency)) - 1.0

    start, stop = gain_bandwidth / gain / 10.0, gain_bandwidth * 1.01
    count = math.ceil(POINTS_PER_DECADE * math.log10(stop / start))
    worst = (0.0, 180.0)
    low = start
    before = level(low)
    for n in range(1, count + 1):
        high = start * (stop / start) ** (n / count)
        after = level(high)
        if (before > 0.0) != (after > 0.0):
            found = _cross(level, low, high, before > 0.0)
            phases = (amplifier_gain(found, gain, gain_bandwidth, second_pole), feedback(found))
            margin = 180.0 + math.degrees(sum(cmath.phase(p) for p in phases))
            if margin < worst[1]:
                worst = (found, margin)
        low, before = high, after
    return worst


def _cross(level: Callable[[float], float], low: float, high: float, falling: bool) -> float:
    """Where a level crosses 0 between two frequencies, by bisection in the logarithm."""
    for _ in range(30):
        middle = math.sqrt(low * high)
        if (level(middle) > 0.0) == falling:
            low = middle
        else:
            high = middle
    return math.sqrt(low * high)


def damping(margin: float) -> float:
    """Damping ratio of the second-order loop that has a phase margin.

    Parameters
    ----------
    margin : float
        Phase margin. [deg]

    Returns
    -------
    float
        Damping ratio: 0 at no margin or less, infinite from 90 degrees on. [-]

    Notes
    -----
    For the loop gain wn^2/(s (s + 2 zeta wn)), |T| = 1 where tan(margin) = 2 zeta wn/w; so
    zeta = sin(margin)/(2 sqrt(cos(margin))).

    References
    ----------
    .. [1] G. F. Franklin, J. D. Powell, A. Emami-Naeini, Feedback Control of Dynamic Systems, chapter 6,
       damping ratio versus phase margin.

    Examples
    --------
    >>> round(damping(45.0), 4)
    0.4204
    """
    if margin <= 0.0:
        return 0.0
    if margin >= 90.0:
        return math.inf
    angle = math.radians(margin)
    return math.sin(angle) / (2.0 * math.sqrt(math.cos(angle)))


def overshoot(margin: float) -> float:
    """Estimated overshoot of a step, from the phase margin.

    Parameters
    ----------
    margin : float
        Phase margin. [deg]

    Returns
    -------
    float
        Share of the step: 1 at no margin or less (it oscillates), 0 from a damping ratio of 1 on. [-]

    Notes
    -----
    exp(-pi zeta/sqrt(1 - zeta^2)), exact for the second-order loop of :func:`damping` and an estimate for others.

    References
    ----------
    .. [1] G. F. Franklin, J. D. Powell, A. Emami-Naeini, Feedback Control of Dynamic Systems, chapter 3,
       overshoot and peak time.

    Examples
    --------
    >>> round(overshoot(45.0), 3)
    0.233
    """
    zeta = damping(margin)
    if zeta >= 1.0:
        return 0.0
    return math.exp(-math.pi * zeta / math.sqrt(1.0 - zeta * zeta))
