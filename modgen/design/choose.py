"""The choice: every amplifier type with every glide network, ranked in the spec's order.

``prefer`` names what comes first; sums are over the whole board, so the best pair is found even when
a dearer stage leaves room for a cheaper network.
"""

from __future__ import annotations

import difflib
from dataclasses import dataclass

from modgen.catalogue import Catalogue
from modgen.catalogue.records import Amplifier
from modgen.design.network import Grid, Network, arrangements, controls, isolators
from modgen.design.stage import Stage, stages_of
from modgen.problems import InputError, Place, Problem
from modgen.spec.model import Spec
from modgen.units import format_quantity


@dataclass(frozen=True)
class Candidate:
    """A whole module by its values, with the figures it is ranked by."""

    stage: Stage
    network: Network
    cost: float
    error: float
    area: float
    key: tuple[object, ...]


@dataclass(frozen=True)
class Outcome:
    """The best candidate, the best of every other type, the best other networks, and who was refused why."""

    best: Candidate
    others: tuple[Candidate, ...]
    networks: tuple[Network, ...]
    refused: tuple[tuple[str, str], ...]
    dielectrics: tuple[tuple[str, str], ...]
    combinations: int


def choose(spec: Spec, catalogue: Catalogue) -> Outcome:
    """Find the best module.

    Raises
    ------
    InputError
        Nothing fits; says which bound blocks, the nearest that can be had and what to change.
    """
    types = _types(spec, catalogue)
    caps, dielectrics = arrangements(spec, catalogue)
    if not caps:
        raise _no_capacitor(spec, catalogue, dielectrics)
    pots, fault = controls(spec, catalogue)
    if not pots:
        raise InputError(
            [
                _problem(
                    spec,
                    "glide.taper",
                    f"no control can be used: {fault}",
                    "",
                    "ask for another taper, a smaller span, or add a control to your own catalogue file",
                )
            ]
        )
    grid = Grid(spec, caps, pots, isolators(spec, catalogue))
    refused: list[tuple[str, str]] = []
    found: list[Candidate] = []
    able: list[Stage] = []
    for name, forms in types.items():
        stages, why = stages_of(spec, catalogue, forms)
        able += stages
        best = _best(spec, grid, stages)
        if best is not None:
            found.append(best)
        else:
            refused.append((name, why or _network_fault(spec, grid, stages)))
    if not found:
        raise _nothing(spec, grid, able, refused)
    found.sort(key=lambda candidate: candidate.key)
    first = found[0]
    ranked = grid.ranked(first.stage.amplifier.bias_max, *_left(spec, first.stage))
    return Outcome(
        best=first,
        others=tuple(found[1:]),
        networks=tuple(ranked),
        refused=tuple(refused),
        dielectrics=tuple(sorted(dielectrics.items())),
        combinations=len(caps) * len(pots) * len(grid.resistors) * len(types),
    )


def _types(spec: Spec, catalogue: Catalogue) -> dict[str, list[Amplifier]]:
    """Amplifier types with the forms that can be mounted, by name; only the asked one unless it is left open."""
    asked = spec.build.amplifier
    every = catalogue.of(Amplifier)
    names = {a.type for a in every} | {a.key for a in every} | {a.order_code for a in every if a.order_code}
    if asked != "auto" and asked not in names:
        near = difflib.get_close_matches(asked, sorted(names), 1)
        hint = f"did you mean '{near[0]}'? " if near else ""
        raise InputError(
            [
                _problem(
                    spec,
                    "build.amplifier",
                    f"amplifier '{asked}' is not in the catalogue",
                    "",
                    f"{hint}`modgen catalogue amplifier` lists them; a file of your own can be added with build.catalogue",
                )
            ]
        )
    wanted = [a for a in every if asked == "auto" or asked in (a.type, a.key, a.order_code)]
    fit = [a for a in wanted if a.mount == spec.build.mount]
    if not fit:
        raise InputError(
            [
                _problem(
                    spec,
                    "build.amplifier",
                    f"amplifier '{asked}' is not sold for {spec.build.mount} mounting",
                    "its forms in the catalogue are " + ", ".join(sorted(a.key for a in wanted)),
                    "choose another type, or the other mount",
                )
            ]
        )
    return {name: [a for a in fit if a.type == name] for name in sorted({a.type for a in fit})}


def _left(spec: Spec, stage: Stage) -> tuple[float, float]:
    """What a stage leaves of the scale [-] and offset [V] budgets."""
    return spec.accuracy.scale - stage.scale, spec.accuracy.offset - stage.offset


def _candidate(spec: Spec, stage: Stage, network: Network) -> Candidate:
    cost = stage.cost + spec.channels * network.cost
    area = stage.area + spec.channels * network.area
    span = spec.signal.high - spec.signal.low
    error = stage.scale + network.scale + (stage.offset + network.offset) / span
    order = {"cost": (cost, error, area), "accuracy": (error, cost, area), "size": (area, cost, error)}
    first = tuple(round(value, 9) for value in order[spec.build.prefer])
    key = (
        network.leaky,
        network.oversized,
        first[0],
        # what costs nothing more: the output resistor that protects best, the terminator that loads least dirt
        -stage.output.series.resistance,
        stage.terminator.resistance,
        *first[1:],
        round(network.mismatch, 9),
        stage.type,
        *(p.key for p in stage.packages),
        stage.diode.key,
        network.capacitor.part.key,
        network.control.key,
        network.isolating.key,
    )
    return Candidate(stage, network, cost, error, area, key)


def _best(spec: Spec, grid: Grid, stages: list[Stage]) -> Candidate | None:
    """The best candidate of one type: stages in rising order of what is preferred, until none can win."""
    span = spec.signal.high - spec.signal.low

    def primary(stage: Stage) -> float:
        return {"cost": stage.cost, "accuracy": stage.scale + stage.offset / span, "size": stage.area}[
            spec.build.prefer
        ]

    best: Candidate | None = None
    for stage in sorted(stages, key=lambda s: (primary(s), s.diode.key, -s.output.series.resistance)):
        if best is not None and not (best.network.leaky or best.network.oversized):
            leading = best.key[2]
            assert isinstance(leading, float)
            if primary(stage) > leading + 1e-9:
                break
        ranked = grid.ranked(stage.amplifier.bias_max, *_left(spec, stage), most=1)
        if ranked:
            candidate = _candidate(spec, stage, ranked[0])
            if best is None or candidate.key < best.key:
                best = candidate
    return best


def _network_fault(spec: Spec, grid: Grid, stages: list[Stage]) -> str:
    stage = max(stages, key=lambda s: min(_left(spec, s)))
    if not len(grid.index):
        return "no capacitor and control in the catalogue span the glide range"
    offset = float((grid.leak + stage.amplifier.bias_max * grid.through).min())
    left = _left(spec, stage)
    if offset > left[1]:
        return (
            f"its bias of up to {format_quantity(stage.amplifier.bias_max, 'current')} through the control is an offset of "
            f"{format_quantity(offset, 'voltage')} at least; {format_quantity(max(left[1], 0.0), 'voltage')} of the budget are left"
        )
    return (
        f"the capacitor's insulation costs {1200 * float(grid.scale.min()):.3g} cents per octave at least; "
        f"{1200 * max(left[0], 0.0):.3g} of the budget are left"
    )


def _problem(spec: Spec, key: str, what: str, why: str, fix: str) -> Problem:
    return Problem(spec.place(key), what, why, fix)


def _no_capacitor(spec: Spec, catalogue: Catalogue, refused: dict[str, str]) -> InputError:
    asked = spec.build.capacitor
    names = sorted(
        {c.family for c in catalogue.parts.values() if c.kind == "capacitor"}
        | {getattr(c, "dielectric", "") for c in catalogue.parts.values() if c.kind == "capacitor"}
    )
    if asked != "auto" and asked not in names:
        near = difflib.get_close_matches(asked, names, 1)
        hint = f"did you mean '{near[0]}'? " if near else ""
        return InputError(
            [
                _problem(
                    spec,
                    "build.capacitor",
                    f"capacitor family '{asked}' is not in the catalogue",
                    "",
                    hint + "the families are " + ", ".join(names),
                )
            ]
        )
    why = "; ".join(f"{name} {reason}" for name, reason in sorted(refused.items()))
    what = f"no {'capacitor' if asked == 'auto' else asked} in the catalogue can be the glide capacitor"
    return InputError(
        [
            _problem(
                spec,
                "build.capacitor",
                what,
                why or f"none is made for {spec.build.mount} mounting",
                "leave build.capacitor at auto, or name a film or C0G family",
            )
        ]
    )


def _nothing(spec: Spec, grid: Grid, able: list[Stage], refused: list[tuple[str, str]]) -> InputError:
    """Why no type works: the glide range when some type would do without it, else each type's own reason."""
    why = "; ".join(f"{name} {reason}" for name, reason in refused)
    if not able:
        key = "build.amplifier" if spec.build.amplifier != "auto" else "rails"
        return InputError(
            [
                _problem(
                    spec,
                    key,
                    "no amplifier in the catalogue works on these rails with this signal"
                    if key == "rails"
                    else f"amplifier '{spec.build.amplifier}' does not work in this module",
                    why,
                    "change the rails, the signal's span, the accuracy budget or the amplifier so that one of these reasons falls away",
                )
            ]
        )
    if len(grid.index):
        return InputError(
            [
                _problem(
                    spec,
                    "accuracy",
                    "the accuracy budget cannot be kept over the glide range",
                    why,
                    "allow more error, ask for a shorter longest glide, or another amplifier or capacitor",
                )
            ]
        )
    stage = min(able, key=lambda s: (s.amplifier.bias_max, s.scale))
    longest, shortest = grid.nearest(stage.amplifier.bias_max, *_left(spec, stage))
    glide = spec.glide
    cover = "guaranteed over tolerance" if glide.cover == "worst-case" else "nominally"
    asked = f"{_time(glide.shortest)} to {_time(glide.longest)}"
    reach = []
    if longest is not None:
        reach.append(f"{_time(glide.shortest)} to {_time(longest)}")
    if shortest is not None:
        reach.append(f"{_time(shortest)} to {_time(glide.longest)}")
    if longest is None and shortest is None:
        blocks = "neither end can be reached"
    elif longest is None:
        blocks = "the shortest glide blocks: no capacitor is small enough for any control and resistor"
    elif shortest is None:
        blocks = "the longest glide blocks: no capacitor is large enough for any control"
    else:
        blocks = (
            "the two together block: the resistance left at the end of a control, and its total, set the widest range "
            "that one control spans"
        )
    near = f"; the nearest that can be had: {' or '.join(reach)}" if reach else ""
    return InputError(
        [
            Problem(
                _place(spec),
                f"a glide of {asked} ({glide.measure}) cannot be had {cover} from the catalogue",
                blocks + near,
                "change glide.shortest or glide.longest to a range that can be had, or add capacitors or controls with build.catalogue",
            )
        ]
    )


def _place(spec: Spec) -> Place:
    return spec.place("glide.longest")


def _time(value: float) -> str:
    return format_quantity(value, "time")
