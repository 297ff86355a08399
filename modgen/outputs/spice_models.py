"""Simulation models from catalogue figures: amplifier types and diodes."""

from __future__ import annotations

import math
from dataclasses import dataclass

from modgen.catalogue.records import Amplifier, Diode

#: Thermal voltage kT/q at 300.15 K, the temperature that ngspice takes by default [V]
THERMAL_VOLTAGE = 0.025865
#: Emission coefficient where the catalogue has one point of the curve only (common practice): Schottky or not
EMISSION = {True: 1.05, False: 1.8}
#: How far an output may pass its limit when the whole slewing current pushes it there [V]
CLAMP_SOFTNESS = 1e-3
#: Load resistance of the gain stage [ohm]: any value serves, the capacitor and transconductance follow it
POLE_RESISTANCE = 1e6
#: Stand in for what the catalogue does not know of an output stage: good ones that do not decide anything
LEAST_OUTPUT_RESISTANCE = 1.0
UNKNOWN_SHORT_CIRCUIT = 1.0


@dataclass(frozen=True)
class AmplifierModel:
    """The figures of one amplifier type as its subcircuit wants them, base SI units.

    ``bias`` and ``offset`` are (typical, greatest).
    """

    name: str
    type: str
    bias: tuple[float, float]
    offset: tuple[float, float]
    cmrr: float
    pole_resistance: float
    pole_capacitance: float
    transconductance: float
    slew_current: float
    clamp: float
    swing_low: float
    swing_high: float
    output_resistance: float
    short_circuit: float
    quiescent: float


def amplifier_model(record: Amplifier, name: str) -> AmplifierModel:
    """A single-pole model with slewing, output limits and current limit.

    The pole lies at gain-bandwidth over open-loop gain, so that the unity-gain frequency is the catalogue's;
    the gain stage's current is limited to slew rate times the pole's capacitance.

    Parameters
    ----------
    record : Amplifier
        The catalogue's figures.
    name : str
        What the subcircuit is called.

    References
    ----------
    G. R. Boyle, B. M. Cohn, D. O. Pederson, J. E. Solomon, "Macromodeling of integrated circuit operational
    amplifiers", IEEE J. Solid-State Circuits 9 (1974) 353-364.
    """
    pole = record.gain_bandwidth / record.gain
    capacitance = 1 / (2 * math.pi * POLE_RESISTANCE * pole)
    slew_current = record.slew_rate * capacitance
    return AmplifierModel(
        name=name,
        type=record.type,
        bias=(record.bias_typical, record.bias_max),
        offset=(record.offset_typical, record.offset_max),
        cmrr=record.cmrr,
        pole_resistance=POLE_RESISTANCE,
        pole_capacitance=capacitance,
        transconductance=record.gain / POLE_RESISTANCE,
        slew_current=slew_current,
        clamp=slew_current / CLAMP_SOFTNESS,
        swing_low=record.swing_low,
        swing_high=record.swing_high,
        output_resistance=max(record.output_resistance, LEAST_OUTPUT_RESISTANCE),
        short_circuit=record.short_circuit_typical or UNKNOWN_SHORT_CIRCUIT,
        quiescent=record.quiescent_typical,
    )


def diode_fit(record: Diode, current: float) -> tuple[float, float]:
    """Emission coefficient [-] and saturation current [A] of ``V = N VT ln(I / IS)`` about a current.

    Two neighbouring points of the forward curve fix both; a single point fixes the saturation current
    for a customary emission coefficient.

    Parameters
    ----------
    record : Diode
        With at least one (current, typical drop, greatest drop) point.
    current : float
        Where the fit should be best. [A]

    References
    ----------
    W. Shockley, "The theory of p-n junctions in semiconductors and p-n junction transistors",
    Bell System Technical Journal 28 (1949) 435-489.
    """
    points = [(point[0], point[1]) for point in record.forward]
    upper = next((n for n, point in enumerate(points) if point[0] >= current), len(points) - 1)
    upper = max(upper, min(1, len(points) - 1))
    high, low = points[upper], points[max(upper - 1, 0)]
    emission = EMISSION[record.schottky]
    if high[1] > low[1]:
        # flatter than an ideal junction is a curve read badly; steeper is series resistance, and kept
        emission = max(1.0, (high[1] - low[1]) / (THERMAL_VOLTAGE * math.log(high[0] / low[0])))
    nearest = min((low, high), key=lambda point: abs(math.log(point[0] / current))) if current > 0 else low
    return emission, nearest[0] * math.exp(-nearest[1] / (emission * THERMAL_VOLTAGE))
