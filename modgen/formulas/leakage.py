"""Leakage: insulation of film capacitors, leakage of electrolytics, input bias, and what each costs."""

from __future__ import annotations

import math

#: a JFET's gate current doubles about every so many kelvin of junction temperature [K]
JFET_DOUBLING = 10.0


def insulation_error(resistance: float, insulation: float) -> float:
    """Share of a voltage that the insulation of a capacitor takes when it is charged through a resistance.

    Parameters
    ----------
    resistance : float
        Resistance between the source and the capacitor, not negative. [ohm]
    insulation : float
        Insulation resistance across the capacitor, above zero. [ohm]

    Returns
    -------
    float
        Loss, as a positive fraction of the voltage. [-]

    Raises
    ------
    ValueError
        When the resistance is below 0 ohm, or the insulation is not above 0 ohm.

    Notes
    -----
    R/(R + R_ins). Multiplied by C above and below, it is tau/(tau + tau_ins): it depends on the time
    constant alone, not on how resistance and capacitance share it. So times [s] may be given for both.

    References
    ----------
    .. [1] A divider of R and R_ins: P. Horowitz, W. Hill, The Art of Electronics, 3rd ed., 2015, chapter 1.

    Examples
    --------
    >>> round(insulation_error(1.0, 1250.0), 7)
    0.0007994
    """
    if resistance < 0.0 or not insulation > 0.0:
        raise ValueError(f"resistance {resistance:g}, insulation {insulation:g}: 0 <= resistance and 0 < insulation")
    return 0.0 if math.isinf(insulation) else resistance / (resistance + insulation)


def insulation_resistance(capacitance: float, resistance: float, time: float) -> float:
    """Least insulation resistance that a maker's two limits leave.

    Parameters
    ----------
    capacitance : float
        Capacitance, above zero. [F]
    resistance : float
        Limit as a resistance, 0 when none is given. [ohm]
    time : float
        Limit as a time constant, 0 when none is given. [s]

    Returns
    -------
    float
        The lower of ``resistance`` and ``time/capacitance``; infinite when neither is given. [ohm]

    Raises
    ------
    ValueError
        When the capacitance is not above 0 F, or a limit is below zero.

    References
    ----------
    .. [1] IEC 60384-1, Fixed capacitors for use in electronic equipment, insulation resistance: stated as a
       resistance for small capacitances and as a time constant for large ones.

    Examples
    --------
    >>> insulation_resistance(1e-6, 0.0, 1250.0)
    1250000000.0
    """
    if not capacitance > 0.0 or resistance < 0.0 or time < 0.0:
        raise ValueError(
            f"{capacitance:g} F with limits of {resistance:g} ohm and {time:g} s: 0 F < capacitance, no limit below 0"
        )
    bounds = ([resistance] if resistance else []) + ([time / capacitance] if time else [])
    return min(bounds, default=math.inf)


def electrolytic_leakage(rate: float, capacitance: float, voltage: float, floor: float, added: bool = False) -> float:
    """Greatest leakage current that a maker allows an electrolytic at its rated voltage.

    Parameters
    ----------
    rate : float
        k of k C V; "0.01 C V in microamperes, C in microfarads" is 0.01. [1/s]
    capacitance : float
        Capacitance. [F]
    voltage : float
        Rated voltage. [V]
    floor : float
        Least limit, or the constant that is added. [A]
    added : bool
        Whether the constant is added (k C V + floor) or the greater counts. [-]

    Returns
    -------
    float
        Leakage current. [A]

    Raises
    ------
    ValueError
        When one of the numbers is below zero.

    References
    ----------
    .. [1] IEC 60384-4, Fixed aluminium electrolytic capacitors, leakage current.
    .. [2] Makers' sheets for radial types, for instance document 28309 (038 RSU series): 0.01 C V or 3 uA,
       the greater, after two minutes; 0.002 C V + 3 uA after five.

    Examples
    --------
    >>> round(electrolytic_leakage(0.01, 22e-6, 25.0, 3e-6) * 1e6, 3)
    5.5
    """
    if min(rate, capacitance, voltage, floor) < 0.0:
        raise ValueError(
            f"rate {rate:g} /s, {capacitance:g} F, {voltage:g} V, floor {floor:g} A: none may be below zero"
        )
    proportional = rate * capacitance * voltage
    return proportional + floor if added else max(proportional, floor)


def current_offset(current: float, resistance: float) -> float:
    """Voltage that a constant current makes across a resistance it must flow through.

    Parameters
    ----------
    current : float
        Leakage or bias current. [A]
    resistance : float
        Resistance to the source. [ohm]

    Returns
    -------
    float
        Voltage. [V]

    References
    ----------
    .. [1] Ohm's law; for input bias: P. Horowitz, W. Hill, The Art of Electronics, 3rd ed., 2015, chapter 4,
       input bias current.

    Examples
    --------
    >>> current_offset(3e-6, 100e3)
    0.3
    """
    return current * resistance


def bias_at(bias: float, temperature: float, doubling: float = JFET_DOUBLING, reference: float = 25.0) -> float:
    """Input bias current at another temperature.

    Parameters
    ----------
    bias : float
        Bias current at the reference temperature. [A]
    temperature : float
        Temperature of the junction. [degC]
    doubling : float
        Rise that doubles the current; 0 when it does not double. [K]
    reference : float
        Temperature that ``bias`` was given at. [degC]

    Returns
    -------
    float
        Bias current. [A]

    Raises
    ------
    ValueError
        When ``doubling`` is below 0 K.

    Notes
    -----
    bias 2^((T - T_ref)/doubling).

    References
    ----------
    .. [1] Data sheets of JFET-input amplifiers, for instance the TL072 (bias currents approximately double for
       every 10 degC increase of junction temperature).

    Examples
    --------
    >>> round(bias_at(200e-12, 65.0) * 1e9, 6)
    3.2
    """
    if doubling < 0.0:
        raise ValueError(f"doubling every {doubling:g} K: not below 0 K")
    return bias if doubling == 0.0 else bias * float(2.0 ** ((temperature - reference) / doubling))
