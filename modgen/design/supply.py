"""Rails, the diode in each, and how much of them an amplifier leaves to the signal."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from modgen.catalogue.records import Amplifier, Capacitor, Diode
from modgen.catalogue.records import Part as Record
from modgen.design import practice
from modgen.formulas.supply import interpolate_drop
from modgen.spec.model import Rails, Spec
from modgen.units import format_quantity


@dataclass(frozen=True)
class Ends:
    """Rails at the ends of their tolerance [V]: least and greatest magnitude, signed."""

    positive_low: float
    positive_high: float
    negative_low: float
    negative_high: float

    @classmethod
    def of(cls, rails: Rails) -> Ends:
        """The ends of a spec's rails, at the header."""
        low, high = 1 - rails.tolerance, 1 + rails.tolerance
        return cls(rails.positive * low, rails.positive * high, rails.negative * low, rails.negative * high)

    @property
    def total_high(self) -> float:
        """Across both rails at their greatest."""
        return self.positive_high - self.negative_high

    @property
    def greatest(self) -> float:
        """The greatest voltage to 0 V that a rail can have."""
        return max(self.positive_high, -self.negative_high)


def price_at(part: Record, quantity: int) -> float:
    """Unit price when ``quantity`` are bought; infinity when the catalogue has no price."""
    fitting = [step.price for step in part.prices if step.quantity <= quantity]
    return min(fitting) if fitting else part.unit_price


def supply_faults(amplifier: Amplifier, spec: Spec) -> str:
    """Why the rails do not suit an amplifier; empty when they do.

    The absolute limit is held against the high end of the tolerance without the diodes, the recommended
    range against the nominal rails.
    """
    ends = Ends.of(spec.rails)
    total = spec.rails.positive - spec.rails.negative
    volts = _volts
    if ends.total_high > amplifier.supply_absolute:
        return (
            f"withstands {volts(amplifier.supply_absolute)} across its supply pins; the rails reach "
            f"{volts(ends.total_high)} at {format_quantity(spec.rails.tolerance, 'ratio')} tolerance"
        )
    if total > amplifier.supply_most:
        return f"is made for up to {volts(amplifier.supply_most)} across its supply pins; the rails are {volts(total)}"
    return ""


def supply_left(spec: Spec, drop: float) -> float:
    """What can be left across an amplifier's supply pins behind diodes of a drop, rails at their low end [V]."""
    ends = Ends.of(spec.rails)
    return ends.positive_low - ends.negative_low - (1 if spec.rails.single else 2) * drop


def headroom(amplifier: Amplifier, spec: Spec, drop: float, drive: float) -> tuple[float, str]:
    """Least distance between the signal and what an amplifier guarantees, and what it is [V].

    ``drop`` is the greatest forward drop of the rail's diode [V]; ``drive`` how much further than the span
    the output amplifier must go, as a share (a resistor inside its loop takes some) [-].

    On a single supply the lower limits stand at 0 V and have no tolerance: the distance is counted on
    the upper side alone, and an input range or a swing that ends above the span counts as negative. A swing may
    end above the span by as much as the offset budget allows: there it is an offset.
    """
    ends = Ends.of(spec.rails)
    top = ends.positive_low - drop
    high, low = spec.signal.high, spec.signal.low
    need_high, need_low = high * (1 + drive) if high > 0 else high, low * (1 + drive) if low < 0 else low
    # an empty socket puts 0 V on the input, whatever the span is
    rest_high, rest_low = max(high, 0.0), min(low, 0.0)
    sides = [
        (top - amplifier.common_mode_high - rest_high, "the input range at the positive rail"),
        (top - amplifier.swing_high - need_high, "the output swing at the positive rail"),
    ]
    if spec.rails.single:
        beneath = [
            (rest_low - amplifier.common_mode_low, "the input range at 0 V"),
            (need_low + spec.accuracy.offset - amplifier.swing_low, "the output swing at 0 V"),
        ]
        sides += [side for side in beneath if side[0] < 0]
    else:
        bottom = ends.negative_low + drop
        sides += [
            (rest_low - (bottom + amplifier.common_mode_low), "the input range at the negative rail"),
            (need_low - (bottom + amplifier.swing_low), "the output swing at the negative rail"),
        ]
    return min(sides)


def rail_current(spec: Spec, packages: Sequence[Amplifier]) -> float:
    """Greatest steady current of one rail: all sections, and all outputs at the end of the span [A]."""
    quiescent = math.fsum(p.sections * p.quiescent_max for p in packages)
    signal = max(abs(spec.signal.low), abs(spec.signal.high))
    return quiescent + spec.jacks.outputs * signal / spec.signal.load


def reverse_stress(spec: Spec) -> float:
    """Greatest reverse voltage on a series diode: header turned round while the reservoirs are charged [V]."""
    ends = Ends.of(spec.rails)
    return 2 * ends.positive_high if spec.rails.single else ends.total_high


def diode_fault(diode: Diode, spec: Spec, current: float) -> str:
    """Why a diode cannot stand in a rail; empty when it can."""
    stress = reverse_stress(spec)
    if diode.reverse_voltage < stress:
        return (
            f"blocks {_volts(diode.reverse_voltage)}; a header turned round on charged reservoirs "
            f"puts {_volts(stress)} on it"
        )
    if diode.forward_current < practice.LEAST_RECTIFIER:
        return (
            f"carries {format_quantity(diode.forward_current, 'current')}; a supply lead wants "
            f"{format_quantity(practice.LEAST_RECTIFIER, 'current')} for charging reservoirs and a shorted ribbon"
        )
    drop = greatest_drop(diode, current)
    if drop > practice.MOST_REVERSE:
        return (
            f"drops up to {_volts(drop)}; with the other rail missing the reservoir would be reversed by as much, "
            f"and {_volts(practice.MOST_REVERSE)} is the most it stands"
        )
    if diode.forward_current * practice.CURRENT_DERATING < current:
        return (
            f"carries {format_quantity(diode.forward_current, 'current')}; the rail draws "
            f"{format_quantity(current, 'current')} and half the rating is used"
        )
    return ""


def greatest_drop(diode: Diode, current: float) -> float:
    """Greatest forward drop at a current [V]."""
    return float(interpolate_drop([(i, most) for i, _, most in diode.forward], current))


def capacitor_for(
    capacitors: Sequence[Capacitor], least: float, most: float, voltage: float, boards: int
) -> Capacitor | None:
    """The cheapest capacitor between two values whose derated rating covers a voltage; ties by value, then key."""
    fit = [c for c in capacitors if least <= c.capacitance <= most and c.voltage * c.derating >= voltage]
    return min(fit, key=lambda c: (price_at(c, boards), c.capacitance, c.body.area, c.key), default=None)


def _volts(value: float) -> str:
    return format_quantity(value, "voltage")
