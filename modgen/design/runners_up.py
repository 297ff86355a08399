"""What else was near for each value, and the limit or the order that it lost by.

The search itself knows what came next among amplifiers and glide networks; for the other values the neighbours
in the catalogue are held against the same limits here.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Iterator
from itertools import islice

from modgen.catalogue import Catalogue
from modgen.catalogue.records import Resistor
from modgen.design import practice
from modgen.design.choose import Outcome
from modgen.design.model import Values
from modgen.design.network import Grid, Network, controls, isolators
from modgen.design.shelf_neighbours import Lost, dearer, other_capacitors, other_diodes, whose_prices
from modgen.design.stage import loading_paths, terminators
from modgen.design.supply import Ends, headroom, price_at
from modgen.formulas.amplifier import clamp_current, short_power
from modgen.formulas.loading import loading_error
from modgen.formulas.pitch import scale_to_cents as cents
from modgen.spec.model import Spec
from modgen.units import format_quantity as text

#: how many are named for each value
MOST = 2

Why = Callable[[Resistor], str]


def runners_up(spec: Spec, catalogue: Catalogue, outcome: Outcome, values: Values) -> dict[str, tuple[Lost, ...]]:
    """What came next for each value but amplifier and glide capacitor, which the search ranks itself.

    Parameters
    ----------
    spec : Spec
        What is asked for. [-]
    catalogue : Catalogue
        What can be bought. [-]
    outcome : Outcome
        What the search found. [-]
    values : Values
        What was chosen. [-]

    Returns
    -------
    dict
        By the subject of the choice: at most two of (what, why it lost). [-]
    """
    n, jacks = spec.channels * spec.order.boards, spec.jacks
    found: dict[str, Iterable[Lost]] = {
        "glide-control": _controls(spec, catalogue, outcome),
        "isolating": _isolating(spec, catalogue, outcome, n),
        "terminator": _beside(
            spec, catalogue, values.terminator, jacks.inputs * spec.order.boards, _terminator(spec, catalogue, values)
        ),
        "input-series": _beside(spec, catalogue, values.input_series, n, _series(spec, outcome, values, "input")),
        "output-series": _beside(
            spec, catalogue, values.output_series, jacks.outputs * spec.order.boards, _output(spec, outcome, values)
        ),
        "reverse-polarity": other_diodes(spec, catalogue, outcome),
    }
    if values.feedback is not None and values.compensation is not None:
        found["feedback"] = _beside(spec, catalogue, values.feedback, n, _series(spec, outcome, values, "feedback"))
        # the voltage of both rails can stand across it
        found["compensation"] = other_capacitors(
            spec, catalogue, values.compensation, n, 2 * Ends.of(spec.rails).greatest, least_compensation(values)
        )
    if values.range_capacitor is not None and values.range_keeper is not None:
        found["range-capacitor"] = _range_capacitors(spec, outcome)
        found["range-keeper"] = _beside(spec, catalogue, values.range_keeper, n, _keeper(values))
    rails = (1 if spec.rails.single else 2) * spec.order.boards
    rail = Ends.of(spec.rails).greatest
    packages = len(values.packages)
    reservoir = practice.RESERVOIR * (1 + packages // practice.RESERVOIR_PACKAGES)
    found["reservoir"] = other_capacitors(spec, catalogue, values.reservoir, rails, rail, reservoir)
    found["decoupling"] = other_capacitors(
        spec, catalogue, values.decoupling, packages * rails, rail, practice.DECOUPLING * (1 - 1e-9)
    )
    return {subject: tuple(islice(lost, MOST)) for subject, lost in found.items()}


def network_lost(spec: Spec, best: Network, other: Network) -> str:
    """Why one glide network comes behind another in the spec's order."""
    if other.leaky and not best.leaky:
        return "its leakage is an offset"
    if other.oversized and not best.oversized:
        return f"reaches {text(other.longest, 'time')}: most of the travel would lie beyond what is asked"
    if spec.build.prefer == "cost" and other.cost > best.cost + 1e-9:
        return f"costs {other.cost - best.cost:.2f} more a channel at {whose_prices(spec)}"
    if spec.build.prefer == "size" and other.area > best.area:
        return f"takes {(other.area - best.area) * 1e6:.0f} mm2 more a channel"
    insulation = f"insulation costs {cents(other.scale):.3g} instead of {cents(best.scale):.3g} cents per octave"
    worse = cents(other.scale - best.scale) >= practice.ERROR_STEP
    if spec.build.prefer == "accuracy" and worse:
        return insulation
    if other.mismatch > best.mismatch * (1 + 1e-6):
        return f"fits the range less closely ({text(other.shortest, 'time')} to {text(other.longest, 'time')})"
    if other.cost > best.cost + 1e-9:
        return f"costs {other.cost - best.cost:.2f} more a channel at {whose_prices(spec)}"
    return insulation if worse else "no better in what was asked; it comes later by name"


def least_compensation(values: Values) -> float:
    """The least capacitor from the output to the inverting input, for the resistors of a design [F]."""
    assert values.feedback is not None
    cable = practice.CABLE_CAPACITANCE * values.output_series.resistance
    return practice.COMPENSATION_FACTOR * cable / values.feedback.resistance


def _controls(spec: Spec, catalogue: Catalogue, outcome: Outcome) -> Iterator[Lost]:
    best = outcome.best.network
    seen = {best.control.key}
    for other in outcome.networks:
        if other.control.key not in seen:
            seen.add(other.control.key)
            yield f"{other.control.key} with {' beside '.join(other.capacitor.key)}", network_lost(spec, best, other)
    near = best.control.resistance
    rest = [p for p in controls(spec, catalogue)[0] if p.key not in seen]
    for p in sorted(rest, key=lambda p: (round(abs(math.log(p.resistance / near)), 6), p.key)):
        grid = Grid(spec, [best.capacitor], [p], [best.isolating])
        shortest, longest = float(grid.shortest.max()), float(grid.longest.min())
        if longest < spec.glide.longest:
            why = f"with this capacitor it reaches {text(longest, 'time')} at most"
        elif shortest > spec.glide.shortest:
            why = f"{text(p.end, 'resistance')} can be left at its end: the shortest glide is {text(shortest, 'time')}"
        elif longest > practice.OVERSIZE * spec.glide.longest:
            why = f"reaches {text(longest, 'time')} with this capacitor: much of the travel lies beyond what is asked"
        else:
            why = dearer(spec, p, best.control, spec.channels * spec.order.boards) or "fits the range less closely"
        yield p.key, why


def _range_capacitors(spec: Spec, outcome: Outcome) -> Iterator[Lost]:
    """Other capacitors for the slow range, each with the best network that has it."""
    best = outcome.best.network
    seen = {best.capacitor.parts[-1].key}
    for other in outcome.networks:
        added = other.capacitor.parts[-1]
        if added.key not in seen:
            seen.add(added.key)
            yield f"{added.key} beside {other.capacitor.parts[0].key}", network_lost(spec, best, other)


def _keeper(values: Values) -> Why:
    added, chosen = values.range_capacitor, values.range_keeper
    assert added is not None
    assert chosen is not None

    def why(r: Resistor) -> str:
        if r.resistance > chosen.resistance:
            within, now = (text(x.resistance * added.capacitance, "time") for x in (r, chosen))
            return f"the waiting capacitor would follow within {within} instead of {now}"
        return "lets more current into the waiting capacitor, with nothing gained that is heard"

    return why


def _isolating(spec: Spec, catalogue: Catalogue, outcome: Outcome, count: int) -> Iterator[Lost]:
    best = outcome.best.network
    amplifier = outcome.best.stage.amplifier
    span = spec.signal.high - spec.signal.low
    allowed = {r.key for r in isolators(spec, catalogue)}

    def why(r: Resistor) -> str:
        grid = Grid(spec, [best.capacitor], [best.control], [r])
        shortest, longest = float(grid.shortest.max()), float(grid.longest.min())
        if shortest > spec.glide.shortest * (1 + 1e-9):
            return f"the shortest glide would be {text(shortest, 'time')}; {text(spec.glide.shortest, 'time')} is asked"
        if longest < spec.glide.longest * (1 - 1e-9):
            return f"the longest glide would be {text(longest, 'time')}; {text(spec.glide.longest, 'time')} is asked"
        drive = span / (r.resistance * (1 - r.tolerance))
        if drive > amplifier.short_circuit_least:
            return (
                f"a step would ask for {text(drive, 'current')}; the amplifier guarantees "
                f"{text(amplifier.short_circuit_least, 'current')}"
            )
        if r.key not in allowed:
            return f"outside what practice isolates a capacitor with ({text(practice.LEAST_ISOLATING, 'resistance')})"
        return f"fits the range less closely: {text(shortest, 'time')} to {text(longest, 'time')}"

    yield from _beside(spec, catalogue, best.isolating, count, why)


def _beside(spec: Spec, catalogue: Catalogue, chosen: Resistor, count: int, why: Why) -> Iterator[Lost]:
    """The next larger and the next smaller value of the same make, the cheapest of each."""
    mounted = [r for r in catalogue.of(Resistor) if r.mount == spec.build.mount]
    alike = [r for r in mounted if r.family == chosen.family] or mounted

    def key(r: Resistor) -> tuple[float, float, str]:
        return price_at(r, count), r.body.area, r.key

    above = [r for r in alike if r.resistance > chosen.resistance * (1 + 1e-9)]
    below = [r for r in alike if r.resistance < chosen.resistance * (1 - 1e-9)]
    if above:
        larger = min(above, key=lambda r: (r.resistance, *key(r)))
        yield larger.key, why(larger)
    if below:
        smaller = min(below, key=lambda r: (-r.resistance, *key(r)))
        yield smaller.key, why(smaller)


def _terminator(spec: Spec, catalogue: Catalogue, values: Values) -> Why:
    def error(r: Resistor) -> float:
        return loading_error(spec.signal.source, r.resistance * (1 - r.tolerance) / loading_paths(spec))

    # the least share of the budget by which this one is the lowest that fits
    budget, mine = spec.accuracy.scale, error(values.terminator)
    shares = [s for s in (*practice.SOURCE_SHARES, practice.MOST_SOURCE_SHARE) if mine <= s * budget]
    tried = {r.resistance for r, _ in terminators(spec, catalogue)}

    def why(r: Resistor) -> str:
        lost = error(r)
        share = next((s for s in sorted(shares) if lost > s * budget), None)
        if r.resistance < values.terminator.resistance and share is not None:
            return (
                f"loads the source by {cents(lost):.3g} cents per octave, more than the "
                f"{text(share, 'ratio')} of the "
                "scale budget that loading is allowed"
            )
        if r.resistance > practice.MOST_TERMINATOR:
            return f"dirt on the board counts beyond {text(practice.MOST_TERMINATOR, 'resistance')}"
        if r.resistance < practice.LEAST_TERMINATOR:
            return f"below {text(practice.LEAST_TERMINATOR, 'resistance')} other sources are loaded as well"
        if r.resistance in tried or r.resistance < values.terminator.resistance:
            return f"loads the source by {cents(lost):.3g} instead of {cents(mine):.3g} cents per octave"
        return "the lowest that the scale budget allows is taken: dirt on the board counts less beside it"

    return why


def _series(spec: Spec, outcome: Outcome, values: Values, where: str) -> Why:
    """Why another series resistor at an input, or another one in the feedback path, was not taken."""
    amplifier = outcome.best.stage.amplifier
    rail = Ends.of(spec.rails).greatest

    def why(r: Resistor) -> str:
        bias = amplifier.bias_max * r.resistance
        current = clamp_current(rail, r.resistance)
        most = practice.CURRENT_DERATING * amplifier.clamp_current
        chosen = values.input_series if where == "input" else values.feedback
        assert chosen is not None
        if where == "input" and current > most:
            return (
                f"lets {text(current, 'current')} into the input from a powered neighbour; half of its "
                f"{text(amplifier.clamp_current, 'current')} is used"
            )
        if bias > practice.BIAS_SHARE * spec.accuracy.offset:
            return (
                f"bias through it is an offset of {text(bias, 'voltage')}, more than the "
                f"{text(practice.BIAS_SHARE, 'ratio')} of the offset budget that it may take"
            )
        if r.resistance > practice.MOST_SERIES:
            return (
                f"beyond {text(practice.MOST_SERIES, 'resistance')} noise and stray capacitance count, and what "
                "it adds in protection is not needed"
            )
        if where == "input":
            now = clamp_current(rail, chosen.resistance)
            return f"protects less: {text(current, 'current')} instead of {text(now, 'current')} from a neighbour"
        return "asks for a larger compensation capacitor, and a powered neighbour drives more through it"

    return why


def _output(spec: Spec, outcome: Outcome, values: Values) -> Why:
    stage, rail = outcome.best.stage, Ends.of(spec.rails).greatest
    amplifier, output = stage.amplifier, stage.output
    rest = stage.scale + outcome.best.network.scale - output.scale

    def why(r: Resistor) -> str:
        power = short_power(rail, r.resistance, amplifier.short_circuit_most)
        current = min(rail / r.resistance, amplifier.short_circuit_most)
        drive = r.resistance * (1 + r.tolerance) / spec.signal.load if output.inside else 0.0
        margin, at = headroom(amplifier, spec, stage.drop, drive)
        if power > practice.SHORT_DERATING * r.power:
            return (
                f"burns {text(power, 'power')} with the output shorted; {text(practice.SHORT_DERATING, 'ratio')} of "
                f"its {text(r.power, 'power')} is used"
            )
        if not practice.LEAST_OUTPUT <= r.resistance <= practice.MOST_OUTPUT:
            return (
                f"outside {text(practice.LEAST_OUTPUT, 'resistance')} to {text(practice.MOST_OUTPUT, 'resistance')}: "
                "enough to isolate a cable, little enough to drive one"
            )
        if margin < practice.LEAST_HEADROOM and not at.endswith("0 V"):
            return f"leaves {text(margin, 'voltage')} of {at}"
        if not output.inside:
            scale = loading_error(r.resistance * (1 + r.tolerance), spec.signal.load)
            if rest + scale > spec.accuracy.scale:
                return (
                    f"scale would be off by {cents(rest + scale):.3g} cents per octave in all; the budget is "
                    f"{cents(spec.accuracy.scale):.3g} cents per octave"
                )
            if scale > output.scale:
                return f"costs {cents(scale):.3g} instead of {cents(output.scale):.3g} cents per octave into the load"
        if current > practice.MOST_SHORT:
            return f"draws {text(current, 'current')} when shorted; {text(practice.MOST_SHORT, 'current')} is usual"
        now = min(rail / values.output_series.resistance, amplifier.short_circuit_most)
        return f"protects less: a short draws {text(current, 'current')} instead of {text(now, 'current')}"

    return why
