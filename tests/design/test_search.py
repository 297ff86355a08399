"""The search equals brute force: every combination, one by one, in plain Python, on reduced catalogues."""

from __future__ import annotations

import itertools
import math
import random
import time
import tracemalloc
from collections import Counter
from collections.abc import Callable, Iterator

import pytest

from modgen.catalogue import Amplifier, Capacitor, Catalogue, Control, Diode, Resistor
from modgen.design import practice
from modgen.design.capacitors import Arrangement, arrangements, pairs
from modgen.design.choose import choose
from modgen.design.network import Grid, Room, controls, isolators, meeting
from modgen.design.stage import Stage, stages_of
from modgen.design.supply import price_at
from modgen.formulas.glide import time_factor
from modgen.problems import InputError
from modgen.spec import Spec

AMPLIFIERS = ("TL07x", "LF35x", "OPAx134", "LM358")


def reduced(catalogue: Catalogue, seed: int, caps: int = 9, pots: int = 6, resistors: int = 24) -> Catalogue:
    """A random part of the catalogue, with all that the search does not look at left in."""
    chance = random.Random(seed)
    keep: list[str] = []
    for kind, most in ((Capacitor, caps), (Control, pots), (Resistor, resistors)):
        fit = [
            p.key
            for p in catalogue.of(kind)
            if p.mount != "surface"
            and not (isinstance(p, Capacitor) and p.capacitance < 220e-9 and p.dielectric != "c0g")
            and not (isinstance(p, Control) and (p.resistance < 90e3 or p.taper != "log"))
        ]
        keep += chance.sample(fit, most)
    keep += [a.key for a in catalogue.of(Amplifier) if a.type in AMPLIFIERS and a.mount == "through-hole"]
    keep += [d.key for d in catalogue.of(Diode) if d.mount == "through-hole"]
    # without these no stage can be made at all, whatever the sample
    keep += ["metal-film-0207-1k0", "metal-film-0207-10k", "metal-film-0207-470k", "metal-film-0207-1m0"]
    return Catalogue({key: catalogue.parts[key] for key in sorted(set(keep))})


def steps(cost: float, error: float, area: float) -> tuple[int, int, int]:
    return (
        math.floor(cost / practice.COST_STEP + 0.5 + 1e-6),
        math.floor(1200 * error / practice.ERROR_STEP + 0.5 + 1e-6),
        math.floor(area * 1e6 / practice.AREA_STEP + 0.5 + 1e-6),
    )


def tolerance_of(cap: Arrangement) -> float:
    """Every part off the same way, weighed by its share."""
    return sum(p.tolerance * p.capacitance for p in cap.parts) / sum(p.capacitance for p in cap.parts)


def feasible(spec: Spec, cap: Arrangement, pot: Control, r: Resistor) -> tuple[float, float] | None:
    """Guaranteed shortest and longest glide, or None outside the asked range: hand formulas, no arrays."""
    factor = time_factor(spec.glide.measure, spec.glide.step, spec.glide.within)
    if spec.glide.cover == "worst-case":
        c_low, c_high = (cap.capacitance * (1 + s * tolerance_of(cap)) for s in (-1, 1))
        shortest = factor * c_high * (r.resistance * (1 + r.tolerance) + pot.end_high)
        longest = factor * c_low * (r.resistance * (1 - r.tolerance) + pot.resistance * (1 - pot.tolerance))
    else:
        shortest = factor * cap.capacitance * (r.resistance + pot.end)
        longest = factor * cap.capacitance * (r.resistance + pot.resistance)
    if cap.switched:
        fast, worst = cap.parts[0], spec.glide.cover == "worst-case"
        slow_shortest = shortest
        fast_longest = longest * fast.capacitance / cap.capacitance
        shortest = shortest * fast.capacitance / cap.capacitance
        if worst:
            fast_longest *= (1 - fast.tolerance) / (1 - tolerance_of(cap))
            shortest *= (1 + fast.tolerance) / (1 + tolerance_of(cap))
        if fast_longest < slow_shortest:
            return None
    if shortest > spec.glide.shortest * (1 + 1e-9) or longest < spec.glide.longest * (1 - 1e-9):
        return None
    return shortest, longest


def added_pairs(singles: list[Arrangement]) -> list[Arrangement]:
    """A capacitor for the fast range with every larger one that a switch can add."""
    return [
        Arrangement((one.parts[0], two.parts[0]), switched=True)
        for one in singles
        for two in singles
        if not one.leaky and not two.leaky and two.capacitance > one.capacitance
    ]


def networks(spec: Spec, catalogue: Catalogue, stage: Stage) -> Iterator[tuple[tuple, tuple[str, str, str]]]:
    """Every network that fits what a stage leaves of the budgets, with its part of the key."""
    span = spec.signal.high - spec.signal.low
    signal = max(abs(spec.signal.low), abs(spec.signal.high))
    bias = stage.amplifier.bias_max
    singles = arrangements(spec, catalogue)[0]
    caps = added_pairs(singles) if spec.glide.ranges == 2 else [*singles, *pairs(singles)]
    for cap, pot, r in itertools.product(caps, controls(spec, catalogue)[0], isolators(spec, catalogue)):
        times = feasible(spec, cap, pot, r)
        if times is None or span / (r.resistance * (1 - r.tolerance)) > stage.amplifier.short_circuit_least:
            continue
        through = r.resistance * (1 + r.tolerance) + pot.resistance * (1 + pot.tolerance)
        insulation = math.inf if cap.leaky else 1 / sum(1 / part.insulation(signal) for part in cap.parts)
        scale = through / (through + insulation) if insulation < math.inf else 0.0
        offset = bias * through + (cap.parts[0].leakage(signal) * through if cap.leaky else 0.0)
        if scale > spec.accuracy.scale - stage.scale or offset > spec.accuracy.offset - stage.offset:
            continue
        n = spec.channels * spec.order.boards
        bought = Counter(cap.parts)
        cost = sum(k * price_at(part, k * n) for part, k in bought.items()) + price_at(pot, n) + price_at(r, n)
        area = sum(part.body.area for part in cap.parts) + pot.body.area + r.body.area
        mismatch = times[1] / spec.glide.longest * spec.glide.shortest / times[0]
        oversized = times[1] > practice.OVERSIZE * spec.glide.longest
        yield (
            (
                cap.leaky,
                bias * through > 0.1 * spec.accuracy.offset,
                len(cap.parts),
                oversized,
                steps(cost, scale + offset / span, area),
                round(math.log(mismatch), 6),
            ),
            (cap.key, pot.key, r.key),
        )


def brute_force(spec: Spec, catalogue: Catalogue) -> tuple[str, tuple[str, ...]] | None:
    """The best of every stage with every network, by the stated order and nothing else."""
    span = spec.signal.high - spec.signal.low
    best: tuple | None = None
    by_type: dict[str, list[Amplifier]] = {}
    for a in catalogue.of(Amplifier):
        by_type.setdefault(a.type, []).append(a)
    first = {"cost": 0, "accuracy": 1, "size": 2}[spec.build.prefer]
    for name, forms in by_type.items():
        for stage in stages_of(spec, catalogue, forms)[0]:
            mine = steps(stage.cost, stage.scale + stage.offset / span, stage.area)
            for (leaky, biased, count, oversized, theirs, mismatch), keys in networks(spec, catalogue, stage):
                weights = (spec.channels, 1, spec.channels)
                sums = tuple(a + n * b for a, b, n in zip(mine, theirs, weights, strict=True))
                key = (
                    leaky,
                    biased,
                    count,
                    oversized,
                    stage.output.hot,
                    sums[first],
                    mismatch,
                    sums[0],
                    stage.terminator.resistance,
                    -stage.output.series.resistance,
                    sums[1],
                    sums[2],
                    name,
                    [p.key for p in stage.packages],
                    stage.diode.key,
                    keys,
                )
                if best is None or key < best:
                    best = key
    return None if best is None else (best[12], (*best[13], best[14], *best[15]))


CASES = {
    "cost, nominal": (),
    "size": ("build: {prefer: size}",),
    "accuracy, worst case": (
        "build: {prefer: accuracy}",
        "glide: {shortest: 20 ms, longest: 1 s, cover: worst-case}",
    ),
    "pitch": ("signal: {pitch: true}",),
    "beyond one capacitor": ("glide: {shortest: 200 ms, longest: 12 s}", "accuracy: {offset: 3 %}"),
    "two ranges": ("glide: {shortest: 2 ms, longest: 5 s, ranges: 2}",),
    "two ranges that must meet": ("glide: {shortest: 60 ms, longest: 8 s, ranges: 2}", "accuracy: {offset: 3 %}"),
    "two ranges, size, worst case": (
        "build: {prefer: size}",
        "glide: {shortest: 20 ms, longest: 4 s, ranges: 2, cover: worst-case}",
    ),
    "settling, 25 boards": (
        "glide: {shortest: 20 ms, longest: 3 s, measure: settle, step: 5 V, within: 5 cents}",
        "order: {boards: 25}",
    ),
}


SEEDS = [0, 1, *(pytest.param(seed, marks=pytest.mark.slow) for seed in range(2, 10))]


@pytest.mark.parametrize("case", CASES)
@pytest.mark.parametrize("seed", SEEDS)
def test_equals_brute_force(catalogue: Catalogue, spec_of: Callable, case: str, seed: int) -> None:
    spec, small = spec_of(*CASES[case]), reduced(catalogue, seed)
    expected = brute_force(spec, small)
    if expected is None:
        with pytest.raises(InputError):
            choose(spec, small)
        return
    best = choose(spec, small).best
    parts = (
        *(p.key for p in best.stage.packages),
        best.stage.diode.key,
        best.network.capacitor.key,
        best.network.control.key,
        best.network.isolating.key,
    )
    assert (best.stage.type, parts) == expected


@pytest.mark.slow
def test_most_samples_hold_a_solution(catalogue: Catalogue, spec_of: Callable) -> None:
    """Otherwise the comparison above would compare nothing."""
    found = sum(
        brute_force(spec_of(*lines), reduced(catalogue, seed)) is not None
        for lines in CASES.values()
        for seed in range(2)
    )
    assert found >= 8


@pytest.mark.parametrize("prefer", ["cost", "accuracy", "size"])
def test_order_of_the_catalogue_does_not_matter(catalogue: Catalogue, spec_of: Callable, prefer: str) -> None:
    spec = spec_of(f"build: {{prefer: {prefer}}}")
    keys = list(catalogue.parts)
    random.Random(5).shuffle(keys)
    shuffled = Catalogue({key: catalogue.parts[key] for key in keys})
    assert choose(spec, shuffled).best.key == choose(spec, catalogue).best.key


def test_nearest_range_is_the_true_extreme(catalogue: Catalogue, spec_of: Callable) -> None:
    spec = spec_of("glide: {shortest: 1 ms, longest: 100 s}")
    small = reduced(catalogue, 1)
    caps, pots, rs = arrangements(spec, small)[0], controls(spec, small)[0], isolators(spec, small)
    grid = Grid(spec, caps, pots, rs)
    reach = grid.reach(Room(0.0, 1.0, 1.0, 0.0))
    factor = math.log(9)
    times = [
        (factor * c.capacitance * (r.resistance + p.end), factor * c.capacitance * (r.resistance + p.resistance))
        for c, p, r in itertools.product(caps, pots, rs)
    ]
    quick = [b for a, b in times if a <= 1e-3]
    slow = [a for a, b in times if b >= 100]
    assert reach.longest == (pytest.approx(max(quick)) if quick else 0.0)
    assert reach.shortest == (pytest.approx(min(slow)) if slow else math.inf)


def test_many_combinations_in_little_time_and_memory(catalogue: Catalogue, spec_of: Callable) -> None:
    """Pairs of the full catalogue: tens of millions of combinations, looked at in portions."""
    spec = spec_of("glide: {shortest: 40 ms, longest: 30 s}")
    choose(spec, catalogue)  # imports and caches first
    tracemalloc.start()
    start = time.process_time()
    outcome = choose(spec, catalogue)
    spent = time.process_time() - start
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    assert outcome.combinations > 10_000_000
    assert len(outcome.best.network.capacitor.parts) == 2
    assert peak < 200e6
    assert spent < 5.0, "about 0.6 s on two idle cores; tracing costs a part of it"


def test_ranges_that_do_not_meet_are_not_reached(catalogue: Catalogue, spec_of: Callable) -> None:
    """Neither found nor named as the nearest that can be had: a control of 10 kohm cannot fill the gap."""
    spec = spec_of("glide: {shortest: 20 ms, longest: 100 ms, ranges: 2}")
    one, two = (catalogue.parts[f"film-pet-5mm-63v-{value}"] for value in ("100n", "1u0"))
    caps = [Arrangement((one, two), switched=True)]
    pots = [p for p in catalogue.of(Control) if p.resistance == 10e3][:1]
    rs = [r for r in catalogue.of(Resistor) if r.resistance == 47e3][:1]
    grid = Grid(spec, caps, pots, rs)
    assert len(grid.index) == 0
    reach = grid.reach(Room(0.0, 1.0, 1.0, 0.0))
    assert (reach.longest, reach.shortest) == (0.0, math.inf)
    # a control of 1 Mohm does fill it: up to 2.197 x 1.1 uF x 1.047 Mohm
    wide = [p for p in catalogue.of(Control) if p.resistance == 1e6][:1]
    reach = Grid(spec, caps, wide, rs).reach(Room(0.0, 1.0, 1.0, 0.0))
    assert reach.longest == pytest.approx(math.log(9) * 1.1e-6 * 1.047e6)


@pytest.mark.parametrize("cover", ["nominal", "worst-case"])
def test_where_two_ranges_meet(catalogue: Catalogue, spec_of: Callable, cover: str) -> None:
    spec = spec_of(f"glide: {{shortest: 1 ms, longest: 1 s, ranges: 2, measure: time-constant, cover: {cover}}}")
    one, two = (catalogue.parts[f"film-pet-5mm-63v-{value}"] for value in ("100n", "1u0"))
    cap = Arrangement((one, two), switched=True)
    pot = next(p for p in catalogue.of(Control) if p.resistance == 1e6)
    r = next(r for r in catalogue.of(Resistor) if r.resistance == 1e3)
    upper, lower = meeting(spec, cap, pot, r)
    if cover == "nominal":
        assert (upper, lower) == pytest.approx((100e-9 * 1.001e6, 1.1e-6 * (1e3 + pot.end)))
    else:
        c_low, c_high = 100e-9 * (1 - one.tolerance), 1.1e-6 * (1 + cap.tolerance)
        r_low, r_high = 1e3 * (1 - r.tolerance), 1e3 * (1 + r.tolerance)
        assert upper == pytest.approx(c_low * (r_low + 1e6 * (1 - pot.tolerance)))
        assert lower == pytest.approx(c_high * (r_high + pot.end_high))
