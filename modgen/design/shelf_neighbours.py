"""Diodes and capacitors that lie beside a chosen one on the shelf, and why they stayed there."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.catalogue import Catalogue
from modgen.catalogue.records import Capacitor, Diode
from modgen.catalogue.records import Part as Record
from modgen.design import practice
from modgen.design.choose import Outcome
from modgen.design.supply import diode_fault, greatest_drop, headroom, price_at, supply_left
from modgen.spec.model import Spec
from modgen.units import format_quantity as text

#: what and why it lost
Lost = tuple[str, str]


def whose_prices(spec: Spec) -> str:
    """Whose prices a comparison stands on."""
    if spec.order.prices:
        return "your own prices, and the catalogue's invented ones where you give none"
    return "the catalogue's invented prices"


def other_diodes(spec: Spec, catalogue: Catalogue, outcome: Outcome) -> Iterator[Lost]:
    """First those that would do, cheapest first; then those that would not."""
    stage = outcome.best.stage
    count = (1 if spec.rails.single else 2) * spec.order.boards
    others = [d for d in catalogue.of(Diode) if d.mount == spec.build.mount and d.key != stage.diode.key]
    faults = {d.key: diode_fault(d, spec, stage.current) or _drops(spec, outcome, d) for d in others}
    by_area = spec.build.prefer == "size"
    for d in sorted(
        others,
        key=lambda d: (bool(faults[d.key]), d.body.area if by_area else 0.0, price_at(d, count), d.body.area, d.key),
    ):
        drop = greatest_drop(d, stage.current)
        yield (
            d.key,
            faults[d.key]
            or dearer(spec, d, stage.diode, count)
            or (
                f"drops {text(drop, 'voltage')} instead of {text(stage.drop, 'voltage')}"
                if drop > stage.drop
                else "no better in what was asked; it comes later by name"
            ),
        )


def _drops(spec: Spec, outcome: Outcome, diode: Diode) -> str:
    """Why the amplifier does not get enough behind another diode; empty when it does."""
    stage = outcome.best.stage
    drop = greatest_drop(diode, stage.current)
    left = supply_left(spec, drop)
    if left < stage.amplifier.supply_least:
        return f"leaves {text(left, 'voltage')} across the amplifier's supply pins"
    margin, at = headroom(stage.amplifier, spec, drop, stage.output.drive)
    if margin < (0.0 if at.endswith("0 V") else practice.LEAST_HEADROOM):
        return f"drops {text(drop, 'voltage')}, which leaves {text(margin, 'voltage')} of {at}"
    return ""


def other_capacitors(
    spec: Spec, catalogue: Catalogue, chosen: Capacitor, count: int, volts: float, least: float
) -> Iterator[Lost]:
    """The next by price that would do; then the next smaller one."""
    alike = [
        c
        for c in catalogue.of(Capacitor)
        if c.mount == spec.build.mount and c.dielectric == chosen.dielectric and c.key != chosen.key
    ]
    fit = [c for c in alike if c.capacitance >= least and c.voltage * c.derating >= volts]
    for c in sorted(fit, key=lambda c: (price_at(c, count), c.capacitance, c.body.area, c.key))[:1]:
        yield c.key, dearer(spec, c, chosen, count) or _larger(c, chosen)
    small = [c for c in alike if c.capacitance < least and c.voltage * c.derating >= volts]
    for c in sorted(small, key=lambda c: (-c.capacitance, price_at(c, count), c.key))[:1]:
        yield c.key, f"{text(c.capacitance, 'capacitance')} where {text(least, 'capacitance')} is wanted"
    weak = [c for c in alike if c.capacitance >= least and c.voltage * c.derating < volts]
    for c in sorted(weak, key=lambda c: (-c.voltage, c.capacitance, c.key))[:1]:
        yield (
            c.key,
            f"rated {text(c.voltage, 'voltage')}, of which {text(c.derating, 'ratio')} is used, for {volts:.4g} V",
        )


def _larger(other: Capacitor, chosen: Capacitor) -> str:
    if other.capacitance > chosen.capacitance:
        return f"{text(other.capacitance, 'capacitance')} is more than is needed, at the same price"
    if other.body.area > chosen.body.area:
        return f"takes {(other.body.area - chosen.body.area) * 1e6:.0f} mm2 more at the same price"
    return "equal in what was asked; it comes later by name"


def dearer(spec: Spec, other: Record, chosen: Record, count: int) -> str:
    """What another part costs more, or how much larger it is where that comes first; empty when it is neither."""
    if spec.build.prefer == "size" and other.body.area > chosen.body.area * (1 + 1e-9):
        return f"takes {(other.body.area - chosen.body.area) * 1e6:.0f} mm2 more"
    more = price_at(other, count) - price_at(chosen, count)
    return f"costs {more:.2f} more each at {whose_prices(spec)}" if more >= 0.005 else ""
