"""Which element is which, once it is known which net is which; and what that leaves unexplained.

What a difference costs decides between explanations: one part with two wrong pins is simpler than two parts with
one each, and both are simpler than two parts gone and two others come.
"""

from __future__ import annotations

from collections import Counter, defaultdict
from collections.abc import Sequence
from dataclasses import dataclass

from modgen.netlist.elements import MEMBER, Graph, different

#: what a net is that the other circuit does not have; and the net of a pin that is open
NO_NET, OPEN = -2, -1
#: cost of one part that differs at all, of each pin or aspect of it, and of a section in another package
PART, DETAIL, ELSEWHERE = 1.0, 0.25, 0.3

#: elements on one net that are tried for one that nothing agrees with; on a supply all are as good as the first
MOST = 40


@dataclass(frozen=True)
class Assignment:
    """Pairs of elements, those without a partner, the cost of all that differs, and how much was looked at for that."""

    pairs: tuple[tuple[int, int], ...]
    missing: tuple[int, ...]
    extra: tuple[int, ...]
    cost: float
    work: int


def moved(first: Graph, second: Graph, nets: Sequence[int], one: int, other: int) -> tuple[int, bool]:
    """How many pins of a pair are on another net than they should be; and whether it is in another package."""
    want = Counter((slot, nets[net] if net >= 0 else OPEN) for slot, net in first.pins[one])
    have = Counter(second.pins[other])
    # a pin that one of two types of package has and the other has not is wrong too
    left, right = want - have, have - want
    member = any(slot == MEMBER for slot, _ in left)
    return (
        max(sum(count for (slot, _), count in side.items() if slot != MEMBER) for side in (left, right)),
        member,
    )


def pair_cost(first: Graph, second: Graph, nets: Sequence[int], one: int, other: int) -> float:
    """Cost of taking one element for another of the same kind."""
    pins, member = moved(first, second, nets, one, other)
    details = pins + bool(different(first.elements[one], second.elements[other]))
    return (PART + DETAIL * details if details else 0.0) + ELSEWHERE * member


def alone_cost(graph: Graph, element: int) -> float:
    """Cost of an element that the other circuit does not have."""
    return PART + DETAIL * len(graph.pins[element])


def assign(first: Graph, second: Graph, nets: Sequence[int]) -> Assignment:
    """The cheapest pairs of elements under a mapping of nets.

    Parameters
    ----------
    first, second
        The circuits.
    nets
        The second circuit's net for each net of the first, or ``NO_NET``.

    Returns
    -------
    Assignment
        First those that agree in everything, of these the ones of the same reference; then the rest by cost.
    """
    pairs, rest, spare = _exact(first, second, nets)
    found: list[tuple[float, bool, int, int]] = []
    at: dict[tuple[str, int], list[int]] = defaultdict(list)
    called: dict[tuple[str, str], list[int]] = defaultdict(list)
    for other in spare:
        element = second.elements[other]
        called[element.ref, element.kind].append(other)
        for net in {net for _, net in second.pins[other]}:
            at[element.kind, net].append(other)
    for one in rest:
        element = first.elements[one]
        near = set(called.get((element.ref, element.kind), ()))
        # on whatever pin: a diode that was turned round is still that diode
        for _, net in first.pins[one]:
            near.update(at.get((element.kind, nets[net] if net >= 0 else OPEN), [])[:MOST])
        for other in near:
            cost = pair_cost(first, second, nets, one, other)
            if cost < alone_cost(first, one) + alone_cost(second, other):
                found.append((cost, element.ref != second.elements[other].ref, one, other))
    total = 0.0
    done, used = set[int](), set[int]()
    for cost, _, one, other in sorted(found):
        if one not in done and other not in used:
            done.add(one)
            used.add(other)
            pairs.append((one, other))
            total += cost
    missing = tuple(one for one in rest if one not in done)
    extra = tuple(other for other in spare if other not in used)
    total += sum(alone_cost(first, one) for one in missing) + sum(alone_cost(second, other) for other in extra)
    work = len(first.elements) + len(second.elements) + 10 * len(found)
    return Assignment(tuple(sorted(pairs)), missing, extra, total, work)


def _exact(first: Graph, second: Graph, nets: Sequence[int]) -> tuple[list[tuple[int, int]], list[int], list[int]]:
    """Pairs that agree in everything; then what is left of both."""
    lots: dict[object, dict[int, str]] = defaultdict(dict)
    for other, element in enumerate(second.elements):
        lots[element.kind, element.aspects, tuple(sorted(second.pins[other]))][other] = element.ref
    pairs: list[tuple[int, int]] = []
    waiting: list[tuple[int, dict[int, str]]] = []
    rest: list[int] = []
    for one, element in enumerate(first.elements):
        pins = tuple(sorted((slot, nets[net] if net >= 0 else OPEN) for slot, net in first.pins[one]))
        lot = lots.get((element.kind, element.aspects, pins))
        if not lot:
            rest.append(one)
            continue
        same = next((other for other, ref in lot.items() if ref == element.ref), None)
        if same is None:
            waiting.append((one, lot))
            continue
        del lot[same]
        pairs.append((one, same))
    for one, lot in waiting:
        if lot:
            other = next(iter(lot))
            del lot[other]
            pairs.append((one, other))
        else:
            rest.append(one)
    return pairs, sorted(rest), sorted(other for lot in lots.values() for other in lot)


def nets_of(first: Graph, second: Graph, pairs: Sequence[tuple[int, int]], before: Sequence[int] = ()) -> list[int]:
    """The mapping of nets that most pins of these pairs speak for.

    Parameters
    ----------
    first, second
        The circuits.
    pairs
        Which element is which.
    before
        A mapping that ends of one slot are told apart by; and that is kept where nothing speaks against it.
    """
    votes: Counter[tuple[int, int]] = Counter()
    for one, other in pairs:
        want: dict[str, list[int]] = defaultdict(list)
        have: dict[str, list[int]] = defaultdict(list)
        for slot, net in first.pins[one]:
            want[slot].append(net)
        for slot, net in second.pins[other]:
            have[slot].append(net)
        for slot, mine in want.items():
            theirs = list(have.get(slot, ()))
            left = []
            for net in mine:
                to = before[net] if before and net >= 0 else NO_NET
                if to in theirs:
                    theirs.remove(to)
                    votes[net, to] += 2
                else:
                    left.append(net)
            share = 2 if len(left) == 1 else 1
            for net in left:
                for to in theirs:
                    if net >= 0 and to >= 0:
                        votes[net, to] += share
    out = [NO_NET] * len(first.nets)
    used: set[int] = set()
    order = sorted(
        votes,
        key=lambda p: (-votes[p], not before or before[p[0]] != p[1], first.nets[p[0]] != second.nets[p[1]], p),
    )
    for net, to in order:
        if out[net] == NO_NET and to not in used and first.package(net) == second.package(to):
            out[net] = to
            used.add(to)
    return out
