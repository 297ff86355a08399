"""What an amplifier type brings with it: packages, diode, terminator, series and output resistors.

For one type everything but the glide network is decided here, together with what is then left of the
accuracy budgets; a type that cannot do it says why.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import islice

from modgen.catalogue import Catalogue
from modgen.catalogue.records import Amplifier, Capacitor, Diode, Resistor
from modgen.design import practice
from modgen.design.supply import (
    Ends,
    capacitor_for,
    diode_fault,
    greatest_drop,
    headroom,
    price_at,
    rail_current,
    supply_faults,
    supply_left,
)
from modgen.formulas.amplifier import common_mode_error, follower_gain_error, short_power
from modgen.formulas.loading import loading_error, parallel
from modgen.formulas.pitch import scale_to_cents as cents
from modgen.formulas.shorts import section_power
from modgen.spec.model import Spec
from modgen.units import format_quantity


@dataclass(frozen=True)
class OutputStage:
    """The output resistor, outside the loop or inside it with its feedback parts."""

    series: Resistor
    inside: bool
    feedback: Resistor | None
    compensation: Capacitor | None
    scale: float  # error into the load [-]
    drive: float  # how much further than the span the amplifier must go [-]
    hot: bool  # whether a short draws more than practice would have it


@dataclass(frozen=True)
class Stage:
    """All of a module but its glide network, for one amplifier type."""

    type: str
    packages: tuple[Amplifier, ...]
    diode: Diode
    current: float
    drop: float
    headroom: float
    headroom_at: str
    terminator: Resistor
    input_series: Resistor
    output: OutputStage
    idle_tie: Resistor | None
    scale: float
    offset: float
    cost: float
    area: float

    @property
    def amplifier(self) -> Amplifier:
        """Figures of the type; the same in each form."""
        return self.packages[0]


def packagings(forms: Sequence[Amplifier], channels: int, prefer: str, boards: int) -> tuple[Amplifier, ...]:
    """Dual and quad packages for two sections a channel: the least cost, area or idle sections.

    Quads come first, so that a channel's two sections share a package.
    """
    duals = sorted((f for f in forms if f.sections == 2), key=lambda f: f.key)
    quads = sorted((f for f in forms if f.sections == 4), key=lambda f: f.key)
    need = 2 * channels
    options: list[tuple[Amplifier, ...]] = []
    whole: list[tuple[Amplifier, ...]] = [()]
    whole += [(quad,) * n for quad in quads for n in range(1, math.ceil(need / 4) + 1)]
    for start in whole:
        rest = max(0, math.ceil((need - 4 * len(start)) / 2))
        options += [start + (dual,) * rest for dual in duals] if rest else [start]

    def key(option: tuple[Amplifier, ...]) -> tuple[float, ...]:
        counts = {p: option.count(p) for p in option}
        cost = math.fsum(n * price_at(p, n * boards) for p, n in counts.items())
        area = math.fsum(p.body.area for p in option)
        idle = sum(p.sections for p in option) - need
        first = (area, cost) if prefer == "size" else (cost, area)
        return (round(first[0], 9), idle, round(first[1], 9), len(option))

    return min(options, key=lambda option: (*key(option), [p.key for p in option]))


def buffers_error(a: Amplifier) -> float:
    """Scale error of both buffers: common-mode rejection and open-loop gain, at their least [-]."""
    return 2 * (common_mode_error(a.cmrr) + follower_gain_error(a.gain))


def loading_paths(spec: Spec) -> int:
    """How many terminators one source can see at once: all of them when unplugged inputs are chained."""
    return spec.jacks.inputs if spec.normalling == "chain" else 1


def terminators(spec: Spec, catalogue: Catalogue) -> Iterator[tuple[Resistor, float]]:
    """Terminators with the scale error they cause: the lowest within each share of the budget, in turn."""
    parallel = loading_paths(spec)
    fit = sorted(
        (
            r
            for r in catalogue.of(Resistor)
            if r.mount == spec.build.mount
            and practice.LEAST_TERMINATOR <= r.resistance <= practice.MOST_TERMINATOR
            and r.voltage >= Ends.of(spec.rails).greatest
        ),
        key=lambda r: (r.resistance, price_at(r, spec.jacks.inputs * spec.order.boards), r.key),
    )

    def error(r: Resistor) -> float:
        return loading_error(spec.signal.source, r.resistance * (1 - r.tolerance) / parallel)

    shares: tuple[float, ...] = practice.SOURCE_SHARES
    if all(error(r) > shares[0] * spec.accuracy.scale for r in fit):
        shares = (practice.MOST_SOURCE_SHARE,)
    for share in shares:
        within = (r for r in fit if error(r) <= share * spec.accuracy.scale)
        for r in islice(within, 1):
            yield r, error(r)


def output_stages(spec: Spec, catalogue: Catalogue, amplifier: Amplifier) -> list[OutputStage]:
    """Output stages that survive a short to 0 V, cheapest way of each kind first.

    The feedback resistor meets what is plugged into an output, so it protects the input behind it when the
    module has no power, as the series resistor does at the other end.
    """
    rail = Ends.of(spec.rails).greatest
    boards = spec.channels * spec.order.boards

    def survives(r: Resistor) -> bool:
        return short_power(rail, r.resistance, amplifier.short_circuit_most) <= practice.SHORT_DERATING * r.power

    def hot(r: Resistor) -> bool:
        return min(rail / r.resistance, amplifier.short_circuit_most) > practice.MOST_SHORT

    fit = sorted(
        (
            r
            for r in catalogue.of(Resistor)
            if r.mount == spec.build.mount
            and practice.LEAST_OUTPUT <= r.resistance <= practice.MOST_OUTPUT
            and survives(r)
        ),
        key=lambda r: (-r.resistance, price_at(r, boards), r.body.area, r.key),
    )
    stages: list[OutputStage] = []
    if spec.output.protection != "inside":
        seen: set[float] = set()
        for r in fit:
            high = r.resistance * (1 + r.tolerance)
            if r.resistance not in seen:
                seen.add(r.resistance)
                stages.append(OutputStage(r, False, None, None, loading_error(high, spec.signal.load), 0.0, hot(r)))
    single = spec.jacks.outputs == spec.channels
    if spec.output.protection != "outside" and single and fit:
        series = fit[0]
        feedback = series_resistor(spec, catalogue, amplifier, least=clamp_resistance(spec, amplifier))
        if feedback is not None:
            least = practice.COMPENSATION_FACTOR * practice.CABLE_CAPACITANCE * series.resistance / feedback.resistance
            c0g = [c for c in catalogue.of(Capacitor) if c.mount == spec.build.mount and c.dielectric == "c0g"]
            compensation = capacitor_for(c0g, least, 20 * least, 2 * rail, boards)
            if compensation is not None:
                drive = series.resistance * (1 + series.tolerance) / spec.signal.load
                stages.append(OutputStage(series, True, feedback, compensation, 0.0, drive, hot(series)))
    return stages


def clamp_resistance(spec: Spec, amplifier: Amplifier) -> float:
    """What keeps the current from a powered neighbour into an unpowered input within half its limit [ohm]."""
    return (Ends.of(spec.rails).greatest - practice.JUNCTION) / (practice.CURRENT_DERATING * amplifier.clamp_current)


def series_resistor(spec: Spec, catalogue: Catalogue, amplifier: Amplifier, least: float) -> Resistor | None:
    """The largest resistor up to practice's limit through which the bias takes a tenth of the offset budget at most.

    When protection asks for more than practice likes, the smallest that protects.
    """
    most = max(practice.MOST_SERIES, 1.1 * least)
    if amplifier.bias_max > 0:
        most = min(most, practice.BIAS_SHARE * spec.accuracy.offset / amplifier.bias_max)
    boards = spec.channels * spec.order.boards
    fit = [
        r
        for r in catalogue.of(Resistor)
        if r.mount == spec.build.mount and least * (1 - 1e-9) <= r.resistance <= most * (1 + 1e-9)
    ]
    return min(fit, key=lambda r: (-r.resistance, price_at(r, boards), r.body.area, r.key), default=None)


def stages_of(spec: Spec, catalogue: Catalogue, forms: Sequence[Amplifier]) -> tuple[list[Stage], str]:
    """Every way to build the module round one amplifier type; or none, and why."""
    amplifier = min(forms, key=lambda f: f.key)
    fault = supply_faults(amplifier, spec)
    if fault:
        return [], fault
    packages = packagings(forms, spec.channels, spec.build.prefer, spec.order.boards)
    clamp = clamp_resistance(spec, amplifier)
    series = series_resistor(spec, catalogue, amplifier, least=clamp)
    if series is None:
        return [], (
            f"its bias of {format_quantity(amplifier.bias_max, 'current')} through the "
            f"{format_quantity(clamp, 'resistance')} "
            "that protects its input from a powered neighbour takes too much of the offset budget"
        )
    current = rail_current(spec, packages)
    diodes = [d for d in catalogue.of(Diode) if d.mount == spec.build.mount]
    usable = [d for d in diodes if not diode_fault(d, spec, current)]
    if not usable:
        return [], "no diode fits the rail: " + "; ".join(f"{d.key} {diode_fault(d, spec, current)}" for d in diodes)
    options: list[Stage] = []
    blocks: list[tuple[float, str]] = []
    outputs, heat = [], []
    for output in output_stages(spec, catalogue, amplifier):
        fault = _heat_fault(spec, packages, output)
        if fault:
            heat.append(fault)
        else:
            outputs.append(output)
    termination = list(terminators(spec, catalogue))
    if not outputs:
        return [], heat[0] if heat else "no output resistor in the catalogue survives a short at the output"
    for diode in usable:
        drop = greatest_drop(diode, current)
        left = supply_left(spec, drop)
        if left < amplifier.supply_least:
            short = f"behind {diode.key} {format_quantity(left, 'voltage')} can be left across its supply pins"
            blocks.append((left - amplifier.supply_least, f"{short}, and it needs {amplifier.supply_least:.4g} V"))
            continue
        for output in outputs:
            margin, at = headroom(amplifier, spec, drop, output.drive)
            if margin < (0.0 if at.endswith("0 V") else practice.LEAST_HEADROOM):
                how = "short" if margin < 0 else f"to spare, and {practice.LEAST_HEADROOM:.4g} V is wanted"
                blocks.append((margin, f"{at} is {format_quantity(abs(margin), 'voltage')} {how} behind {diode.key}"))
                continue
            for terminator, loading in termination:
                scale = loading + output.scale + buffers_error(amplifier)
                offset = _offset(spec, amplifier, series, terminator, output)
                if scale > spec.accuracy.scale or offset > spec.accuracy.offset:
                    continue
                options.append(
                    _stage(
                        spec,
                        catalogue,
                        packages,
                        diode,
                        (current, drop),
                        (margin, at),
                        (terminator, loading),
                        series,
                        output,
                    )
                )
    if options:
        return options, ""
    if blocks:
        return [], max(blocks)[1]
    return [], _budget_fault(spec, catalogue, amplifier, series, outputs)


def _heat_fault(spec: Spec, packages: Sequence[Amplifier], output: OutputStage) -> str:
    """Why a package gets too hot with one of its outputs shorted to 0 V; empty when it does not."""
    ends = Ends.of(spec.rails)
    for package in dict.fromkeys(packages):
        short = section_power(ends.greatest, output.series.resistance, package.short_circuit_most)
        total = package.sections * package.quiescent_max * ends.total_high + short
        if total > package.dissipation:
            return (
                f"{package.key} turns {format_quantity(total, 'power')} into heat with an output shorted, and bears "
                f"{format_quantity(package.dissipation, 'power')}"
            )
    return ""


def _offset(spec: Spec, a: Amplifier, series: Resistor, terminator: Resistor, output: OutputStage) -> float:
    """Offset of both buffers without the glide network's part [V]."""
    # inputs that share a socket, or are chained, put their bias through the same source
    fed = spec.channels if spec.normalling == "chain" else spec.channels - spec.jacks.inputs + 1
    source = fed * parallel(spec.signal.source, terminator.resistance)
    through = source + series.resistance * (1 + series.tolerance)
    if output.feedback is not None:
        through += output.feedback.resistance * (1 + output.feedback.tolerance)
    floor = max(0.0, a.swing_low - spec.signal.low) if spec.rails.single else 0.0
    return 2 * a.offset_max + a.bias_max * through + floor


def _budget_fault(
    spec: Spec, catalogue: Catalogue, a: Amplifier, series: Resistor, outputs: Sequence[OutputStage]
) -> str:
    offset = 2 * a.offset_max
    if offset > spec.accuracy.offset:
        return (
            f"two sections can be off by {format_quantity(offset, 'voltage')}; "
            f"the budget is {format_quantity(spec.accuracy.offset, 'voltage')}"
        )
    best = min(output.scale for output in outputs)
    loading = min((error for _, error in terminators(spec, catalogue)), default=float("inf"))
    total = best + buffers_error(a) + loading
    if total > spec.accuracy.scale:
        if loading == float("inf"):
            return "no terminator in the catalogue loads the source little enough for the scale budget"
        return (
            f"scale is off by {cents(total):.3g} cents per octave at best; the budget is "
            f"{cents(spec.accuracy.scale):.3g} (loading of the source {cents(loading):.3g}, output resistor "
            f"{cents(best):.3g}, common-mode rejection and gain of two buffers {cents(buffers_error(a)):.3g})"
        )
    return "scale and offset budgets cannot both be kept"


def _stage(
    spec: Spec,
    catalogue: Catalogue,
    packages: tuple[Amplifier, ...],
    diode: Diode,
    draw: tuple[float, float],
    margin: tuple[float, str],
    termination: tuple[Resistor, float],
    series: Resistor,
    output: OutputStage,
) -> Stage:
    a = packages[0]
    terminator, loading = termination
    boards, n, jacks = spec.order.boards, spec.channels, spec.jacks
    idle = sum(p.sections for p in packages) - 2 * n
    tie = series_resistor(spec, catalogue, a, least=1e3) if idle and a.ground_input_through_resistor else None
    bill: list[tuple[Amplifier | Diode | Resistor | Capacitor | None, int]] = [
        *((p, packages.count(p)) for p in dict.fromkeys(packages)),
        (diode, 1 if spec.rails.single else 2),
        (terminator, jacks.inputs),
        (series, n),
        (output.series, jacks.outputs),
        (output.feedback, n),
        (output.compensation, n),
        (tie, idle),
    ]
    parts = [(part, count) for part, count in bill if part is not None]
    return Stage(
        type=a.type,
        packages=packages,
        diode=diode,
        current=draw[0],
        drop=draw[1],
        headroom=margin[0],
        headroom_at=margin[1],
        terminator=terminator,
        input_series=series,
        output=output,
        idle_tie=tie,
        scale=loading + output.scale + buffers_error(a),
        offset=_offset(spec, a, series, terminator, output),
        cost=math.fsum(count * price_at(part, count * boards) for part, count in parts),
        area=math.fsum(count * part.body.area for part, count in parts),
    )
