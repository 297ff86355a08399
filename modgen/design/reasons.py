"""Why each value was taken: reason, binding limit, margin and what lost, in words for the review."""

from __future__ import annotations

from dataclasses import replace

from modgen.catalogue import Catalogue
from modgen.design import practice
from modgen.design.choose import Candidate, Outcome
from modgen.design.model import Choice, Values
from modgen.design.network import meeting
from modgen.design.runners_up import MOST, least_compensation, network_lost, runners_up
from modgen.design.shelf_neighbours import whose_prices
from modgen.design.stage import loading_paths
from modgen.design.supply import Ends, reverse_stress
from modgen.formulas.amplifier import clamp_current, short_power
from modgen.formulas.loading import loading_error
from modgen.formulas.pitch import scale_to_cents as cents
from modgen.spec.model import Spec
from modgen.units import format_quantity as text

_ORDER = {"cost": "the least cost", "accuracy": "the least error", "size": "the least board area"}


def choices(spec: Spec, outcome: Outcome, values: Values, catalogue: Catalogue) -> tuple[Choice, ...]:
    """Every decision of a design, with its reason and what lost."""
    made = [_amplifier(spec, outcome, values), *_network(spec, outcome), _terminator(spec, values)]
    made += [_input_series(spec, outcome, values), *_output(spec, values), *_supply(spec, outcome, values)]
    made += _ranges(spec, outcome, values)
    lost = runners_up(spec, catalogue, outcome, values)
    return tuple(replace(c, runners_up=lost[c.subject]) if c.subject in lost else c for c in made)


def role_reasons(made: tuple[Choice, ...]) -> dict[str, str]:
    """The reason of each choice by the role of the parts it decided."""
    return {choice.subject: choice.reason for choice in made}


def _amplifier(spec: Spec, outcome: Outcome, values: Values) -> Choice:
    best = outcome.best
    stage = best.stage
    count = {p.key: values.packages.count(p) for p in values.packages}
    idle = sum(p.sections for p in values.packages) - 2 * spec.channels
    packages = " and ".join(f"{n} x {key}" for key, n in count.items())
    lost = [(other.stage.type, _lost(spec, best, other)) for other in outcome.others[:2]]
    lost += [(name, why) for name, why in outcome.refused]
    idle_text = f"; {idle} idle section{'s' if idle > 1 else ''} tied to 0 V" if idle else ""
    return Choice(
        "amplifier",
        f"{stage.type}: {packages}",
        f"{_ORDER[spec.build.prefer]} of the types that keep every limit"
        f" ({len(outcome.others) + 1} of {len(outcome.others) + 1 + len(outcome.refused)} do){idle_text}",
        f"{stage.headroom_at}, {text(stage.headroom, 'voltage')} left at the low end of the rails",
        stage.headroom / max(abs(spec.signal.low), abs(spec.signal.high)),
        tuple(lost),
    )


def _lost(spec: Spec, best: Candidate, other: Candidate) -> str:
    if other.network.biased and not best.network.biased:
        return f"its bias through the control is an offset of {text(other.network.offset, 'voltage')}"
    if other.network.leaky != best.network.leaky or other.network.oversized != best.network.oversized:
        return "its glide network fits the range less well"
    if other.stage.output.hot and not best.stage.output.hot:
        return f"draws more than {text(practice.MOST_SHORT, 'current')} when an output is shorted"
    if spec.build.prefer == "cost" and other.cost > best.cost:
        return f"costs {other.cost / best.cost - 1:.1%} more for the board at {whose_prices(spec)}"
    if spec.build.prefer == "size" and other.area > best.area:
        return f"takes {other.area / best.area - 1:.1%} more area"
    if spec.build.prefer == "size" and other.cost > best.cost:
        return f"takes as much area and costs {other.cost / best.cost - 1:.1%} more at {whose_prices(spec)}"
    if other.error > best.error:
        return f"{cents(other.error):.3g} instead of {cents(best.error):.3g} cents of error, worst case"
    return "equal in what was asked; it comes later by name"


def _network(spec: Spec, outcome: Outcome) -> list[Choice]:
    best = outcome.best.network
    glide = spec.glide
    worst = "worst case" if glide.cover == "worst-case" else "nominal"
    lost: list[tuple[str, str]] = []
    # of one pair of capacitor and control the best isolating resistor stands for all
    seen = [(best.capacitor, best.control)]
    for other in outcome.networks:
        pair = (other.capacitor, other.control)
        if pair not in seen and len(lost) < MOST:
            seen.append(pair)
            named = f"{' beside '.join(other.capacitor.key)} with {other.control.key} and {other.isolating.key}"
            lost.append((named, network_lost(spec, best, other)))
    lost += list(outcome.dielectrics)
    first, *beside = best.capacitor.key
    how = " and, switched in, " if best.capacitor.switched else " beside "
    arrangement = " (two, back to back)" if best.capacitor.back_to_back else "".join(how + key for key in beside)
    reach = f"{text(best.shortest, 'time')} to {text(best.longest, 'time')} {worst} ({glide.measure})"
    asked = f"{text(glide.shortest, 'time')} to {text(glide.longest, 'time')}"
    low, high = 1 - best.shortest / glide.shortest, 1 - glide.longest / best.longest
    isolating = (
        f"the largest that keeps the shortest glide: {text(best.shortest, 'time')} of "
        f"{text(glide.shortest, 'time')} asked, "
        f"with {text(best.control.end, 'resistance')} left at the end of the control"
    )
    return [
        Choice(
            "glide-capacitor",
            f"{first}{arrangement}",
            f"{_ORDER[spec.build.prefer]} of {outcome.combinations} combinations: reaches {reach} "
            f"where {asked} is asked",
            "the longest glide" if high <= low else "the shortest glide",
            min(low, high),
            tuple(lost),
        ),
        Choice(
            "glide-control",
            best.control.key,
            f"with this capacitor it reaches {text(best.longest, 'time')}; {text(best.control.end, 'resistance')} "
            f"can be left at its end; rated {text(best.control.voltage, 'voltage')} for a step of "
            f"{text(spec.signal.high - spec.signal.low, 'voltage')}",
            "the longest glide",
            high,
        ),
        Choice("isolating", best.isolating.key, isolating, "the shortest glide", low),
    ]


def _ranges(spec: Spec, outcome: Outcome, values: Values) -> list[Choice]:
    """What a range switch brings: nothing without one."""
    added, switch, keeper = values.range_capacitor, values.range_switch, values.range_keeper
    if added is None or switch is None or keeper is None:
        return []
    network = outcome.best.network
    fast_longest, slow_shortest = meeting(spec, network.capacitor, network.control, network.isolating)
    step = spec.signal.high - spec.signal.low
    return [
        Choice(
            "range-capacitor",
            added.key,
            f"switched in beside {values.glide.key} for the slow range, which begins at "
            f"{text(slow_shortest, 'time')}; "
            f"the fast range ends at {text(fast_longest, 'time')}, so that nothing is missing between them",
            "the overlap of the ranges",
            1 - slow_shortest / fast_longest,
        ),
        Choice(
            "range-switch",
            switch.key,
            f"asked for by glide.ranges; a step over the whole span puts {text(step, 'voltage')} across its open "
            f"contact, rated {text(switch.voltage, 'voltage')}",
            "the contact's voltage",
            1 - step / switch.voltage,
        ),
        Choice(
            "range-keeper",
            keeper.key,
            "keeps the waiting capacitor at the output's voltage, so that the slow range begins without a jump; it "
            f"follows within {text(keeper.resistance * added.capacitance, 'time')} (time constant)",
        ),
    ]


def _terminator(spec: Spec, values: Values) -> Choice:
    r = values.terminator
    paths = loading_paths(spec)
    error = loading_error(spec.signal.source, r.resistance * (1 - r.tolerance) / paths)
    several = f", {paths} of them in parallel when chained inputs are unplugged" if paths > 1 else ""
    return Choice(
        "terminator",
        r.key,
        f"holds an open input at 0 V and loads a {text(spec.signal.source, 'resistance')} source by "
        f"{cents(error):.3g} cents per octave{several}",
        "the scale budget",
        1 - error / spec.accuracy.scale,
    )


def _input_series(spec: Spec, outcome: Outcome, values: Values) -> Choice:
    a = outcome.best.stage.amplifier
    r = values.input_series
    worst = Ends.of(spec.rails).greatest
    current = clamp_current(worst, r.resistance)
    return Choice(
        "input-series",
        r.key,
        f"lets {text(current, 'current')} into the input of a module without power from a neighbour at "
        f"{text(worst, 'voltage')}; {text(a.clamp_current, 'current')} is the limit",
        "the input's clamp current",
        1 - current / a.clamp_current,
    )


def _output(spec: Spec, values: Values) -> list[Choice]:
    r = values.output_series
    rail = Ends.of(spec.rails).greatest
    power = short_power(rail, r.resistance, values.packages[0].short_circuit_most)
    share = 1 - power / r.power
    heat = f"an output shorted to 0 V puts {text(power, 'power')} into it, rated {text(r.power, 'power')}"
    if not values.inside_loop:
        error = loading_error(r.resistance * (1 + r.tolerance), spec.signal.load)
        reason = f"{heat}; into {text(spec.signal.load, 'resistance')} it costs {cents(error):.3g} cents per octave"
        return [Choice("output-series", r.key, reason, "power with the output shorted", share)]
    assert values.feedback is not None
    assert values.compensation is not None
    return [
        Choice(
            "output-series",
            r.key,
            f"inside the feedback loop, where it costs nothing in scale; {heat}",
            "power with the output shorted",
            share,
        ),
        Choice(
            "feedback",
            values.feedback.key,
            "takes the feedback from the jack, behind the output resistor, and keeps a powered neighbour out of the "
            "inverting input",
            "the largest resistance of a feedback path",
            1 - values.feedback.resistance / practice.MOST_SERIES,
        ),
        Choice(
            "compensation",
            values.compensation.key,
            "keeps the output amplifier stable into "
            f"{text(practice.CABLE_CAPACITANCE, 'capacitance')} of cable: with the "
            f"feedback resistor at least {practice.COMPENSATION_FACTOR:.0f} times the time constant "
            "of output resistor and cable",
            "stability with a cable",
            values.compensation.capacitance / least_compensation(values) - 1,
        ),
    ]


def _supply(spec: Spec, outcome: Outcome, values: Values) -> list[Choice]:
    stage = outcome.best.stage
    d, stress, rail = values.diode, reverse_stress(spec), Ends.of(spec.rails).greatest
    made = [
        Choice(
            "reverse-polarity",
            d.key,
            f"blocks a header turned round ({text(stress, 'voltage')} of "
            f"{text(d.reverse_voltage, 'voltage')}) and drops at most "
            f"{text(stage.drop, 'voltage')} at {text(stage.current, 'current')}",
            "reverse voltage",
            1 - stress / d.reverse_voltage,
        )
    ]
    for subject, c, purpose in (
        ("reservoir", values.reservoir, "reservoir of each rail behind its diode"),
        ("decoupling", values.decoupling, "one for each supply pin of each package"),
    ):
        made.append(
            Choice(
                subject,
                c.key,
                f"{purpose}; rated {text(c.voltage, 'voltage')} for {text(rail, 'voltage')}",
                "rated voltage, derated",
                1 - rail / (c.voltage * c.derating),
            )
        )
    return made
