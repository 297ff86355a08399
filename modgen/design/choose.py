"""The choice: every amplifier type with every glide network, ranked in the spec's order.

``prefer`` names what comes first; sums are over the whole board, so the best pair is found even when
a dearer stage leaves room for a cheaper network.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace
from itertools import islice

from modgen.catalogue import Catalogue
from modgen.catalogue.records import Amplifier
from modgen.design import practice, refusals
from modgen.design.capacitors import Arrangement, arrangements, pairs, switched
from modgen.design.network import Grid, Network, Reach, Room, controls, in_steps, isolators
from modgen.design.stage import Stage, stages_of
from modgen.problems import InputError
from modgen.spec.model import Spec

#: pairs of capacitors looked at together
CHUNK = 256


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
        raise refusals.no_capacitor(spec, catalogue, dielectrics)
    pots, fault = controls(spec, catalogue)
    if not pots:
        raise refusals.no_control(spec, fault)
    resistors = isolators(spec, catalogue)
    stages = {name: stages_of(spec, catalogue, forms) for name, forms in types.items()}
    able = [stage for found, _ in stages.values() for stage in found]
    if not able:
        raise refusals.no_amplifier(
            spec,
            [(name, why) for name, (_, why) in stages.items()],
            lambda other: any(stages_of(other, catalogue, forms)[0] for forms in types.values()),
        )
    best: dict[str, Candidate] = {}
    source: dict[str, Grid] = {}
    reach = Reach()
    looked = 0
    grid: Grid | None = None
    for chunk in _portions(spec, caps, best):
        grid = Grid(spec, chunk, pots, resistors)
        looked += len(chunk)
        for name, candidate in _best_of_each(spec, grid, stages).items():
            if name not in best or candidate.key < best[name].key:
                best[name], source[name] = candidate, grid
        if not best:
            reach = reach.wider(grid.reach(_roomiest(spec, able)))
    refused = [
        (name, why or refusals.network_fault(grid, _roomiest(spec, found)))
        for name, (found, why) in stages.items()
        if name not in best
    ]
    if not best:
        raise refusals.no_network(spec, reach, _roomiest(spec, able), refused, _with_switch(spec, catalogue))
    first, *others = sorted(best.values(), key=lambda candidate: candidate.key)
    return Outcome(
        best=first,
        others=tuple(others),
        networks=tuple(source[first.stage.type].ranked(_room(spec, first.stage))),
        refused=tuple(refused),
        dielectrics=tuple(sorted(dielectrics.items())),
        combinations=looked * len(pots) * len(resistors) * len(types),
    )


def _portions(spec: Spec, caps: list[Arrangement], best: dict[str, Candidate]) -> Iterator[list[Arrangement]]:
    """Arrangements in portions, so that memory does not grow with their number; ``best`` is what was found so far.

    A second part is looked at only where one alone leaks, bends the amplifier's bias or does not reach: in the
    order of preference one part comes before two.
    """
    if spec.glide.ranges == 1:
        yield caps
        if best and min(candidate.key for candidate in best.values())[:2] == (False, False):
            return
    every = switched(caps) if spec.glide.ranges > 1 else pairs(caps)
    while chunk := list(islice(every, CHUNK)):
        yield chunk


def _with_switch(spec: Spec, catalogue: Catalogue) -> bool:
    """Whether a range switch would do what one range cannot."""
    if spec.glide.ranges > 1:
        return False
    try:
        choose(replace(spec, glide=replace(spec.glide, ranges=2)), catalogue)
    except InputError:
        return False
    return True


def _best_of_each(spec: Spec, grid: Grid, stages: dict[str, tuple[list[Stage], str]]) -> dict[str, Candidate]:
    """The best candidate of each type that has one."""
    found = {name: _best(spec, grid, ways) for name, (ways, _) in stages.items()}
    return {name: candidate for name, candidate in found.items() if candidate is not None}


def _types(spec: Spec, catalogue: Catalogue) -> dict[str, list[Amplifier]]:
    """Amplifier types with the forms that can be mounted, by name; only the asked one unless it is left open."""
    asked = spec.build.amplifier
    every = catalogue.of(Amplifier)
    names = {a.key: _names(a) for a in every}
    wanted = [a for a in every if asked == "auto" or asked.lower() in (name.lower() for name in names[a.key])]
    if not wanted:
        raise refusals.unknown_amplifier(spec, {name for known in names.values() for name in known})
    fit = [a for a in wanted if a.mount == spec.build.mount]
    if not fit:
        raise refusals.wrong_mount(spec, wanted)
    return {name: [a for a in fit if a.type == name] for name in sorted({a.type for a in fit})}


def _names(amplifier: Amplifier) -> tuple[str, ...]:
    """What an amplifier may be called: its type, its type number without the package, its key, its order code."""
    stem = amplifier.key.partition("-")[0].upper()
    return tuple(name for name in (amplifier.type, stem, amplifier.key, amplifier.order_code) if name)


def _room(spec: Spec, stage: Stage) -> Room:
    """What a stage leaves to the network.

    The isolating resistor alone must keep a step over the whole span within the current that the buffer
    guarantees: a control can be turned to nothing, and a buffer that limits makes the glide slower than computed.
    """
    amplifier = stage.amplifier
    drive = amplifier.short_circuit_least
    if amplifier.sink_near_negative and spec.rails.single and spec.signal.low < practice.JUNCTION:
        # the last part of a falling glide is driven by what the output can sink next to its rail
        drive = amplifier.sink_near_negative
    return Room(
        bias=amplifier.bias_max,
        scale=spec.accuracy.scale - stage.scale,
        offset=spec.accuracy.offset - stage.offset,
        isolating=(spec.signal.high - spec.signal.low) / drive,
    )


def _roomiest(spec: Spec, stages: list[Stage]) -> Room:
    """The room of the stage that leaves most of its tighter budget."""
    rooms = [_room(spec, stage) for stage in stages]
    return max(rooms, key=lambda room: min(room.scale / spec.accuracy.scale, room.offset / spec.accuracy.offset))


def _primary(spec: Spec, cost: float, error: float, area: float) -> float:
    return {"cost": cost, "accuracy": error, "size": area}[spec.build.prefer]


def _stage_steps(spec: Spec, stage: Stage) -> tuple[float, float, float]:
    span = spec.signal.high - spec.signal.low
    return in_steps(stage.cost, stage.scale + stage.offset / span, stage.area)


def _candidate(spec: Spec, stage: Stage, network: Network) -> Candidate:
    """A whole module with its key: sums of the steps of both halves, so that neither rounds the other."""
    span = spec.signal.high - spec.signal.low
    mine = _stage_steps(spec, stage)
    theirs = in_steps(network.cost, network.scale + network.offset / span, network.area)
    cost, error, area = (a + n * b for a, b, n in zip(mine, theirs, (spec.channels, 1, spec.channels), strict=True))
    key = (
        network.leaky,
        network.biased,
        len(network.capacitor.parts),
        network.oversized,
        stage.output.hot,
        _primary(spec, cost, error, area),
        # among equals in what is preferred: the range that fits best, then the cheaper; then what costs nothing: the
        # terminator on which dirt on the board counts least, the output resistor that protects best
        round(math.log(network.mismatch), 6),
        cost,
        stage.terminator.resistance,
        -stage.output.series.resistance,
        error,
        area,
        stage.type,
        *(p.key for p in stage.packages),
        stage.diode.key,
        network.capacitor.key,
        network.control.key,
        network.isolating.key,
    )
    return Candidate(
        stage,
        network,
        cost=stage.cost + spec.channels * network.cost,
        error=stage.scale + network.scale + (stage.offset + network.offset) / span,
        area=stage.area + spec.channels * network.area,
        key=key,
    )


def _best(spec: Spec, grid: Grid, stages: list[Stage]) -> Candidate | None:
    """The best candidate of one type: stages in rising order of what is preferred, until none can win."""
    if not len(grid.index):
        return None
    best: Candidate | None = None
    fewest = min(len(arrangement.parts) for arrangement in grid.caps)
    # stages that leave the same room, as those that differ in their diode do, have the same best network
    networks: dict[Room, list[Network]] = {}
    ordered = sorted((s.output.hot, _primary(spec, *_stage_steps(spec, s)), n) for n, s in enumerate(stages))
    for hot, least, n in ordered:
        if best is not None and best.key[:6] < (False, False, fewest, False, hot, least):
            break
        stage = stages[n]
        room = _room(spec, stage)
        if room not in networks:
            networks[room] = grid.ranked(room, most=1)
        for network in networks[room]:
            candidate = _candidate(spec, stage, network)
            if best is None or candidate.key < best.key:
                best = candidate
    return best
