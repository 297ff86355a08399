"""Which net is which in two circuits that are not the same, so that as little as possible differs.

Exactly that is a search without end. Here what is alike around two nets, up to some distance, speaks for taking one
for the other; from what is sure one goes on to its neighbours; what is wrong in the end is put right by trial. The
names of nets decide only where nothing else does.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Sequence

from modgen.netlist.assign import DETAIL, NO_NET, PART, Assignment, assign, moved, nets_of
from modgen.netlist.elements import Graph
from modgen.netlist.growth import Growth

#: starts, each with other choices where several nets look alike
STARTS = 5
#: cost that needs no second opinion: one part that differs in four things, or is gone
SIMPLE = PART + 4 * DETAIL
#: trials to put the wrong nets of one start right
TRIALS = 120
#: elements and pairs that are looked at in all, so that any two circuits come to an end
EFFORT = 400_000
#: a mapping of nets, and what it leaves unexplained
Found = tuple[list[int], Assignment]


def nearest_nets(first: Graph, second: Graph) -> tuple[list[int], Assignment]:
    """The mapping of nets, and of elements under it, with the least difference that was found.

    Parameters
    ----------
    first, second
        The circuits.

    Returns
    -------
    tuple
        The second circuit's net for each of the first (or ``NO_NET``), and the pairs of elements.
    """
    return _Search(first, second).best()


class _Search:
    """Tries mappings and keeps the cheapest; ``left`` says how much may still be looked at."""

    def __init__(self, first: Graph, second: Graph) -> None:
        self.first, self.second = first, second
        self.left = EFFORT

    def best(self) -> Found:
        """By names, then by structure with one choice after another, as long as something simple is not found."""
        best = self._settled([self.second.number.get(name, NO_NET) for name in self.first.nets])
        for turn in range(STARTS):
            if best[1].cost <= SIMPLE or (turn and self.left <= 0):
                break
            grown = self._settled(Growth(self.first, self.second, turn).grow())
            best = min(best, self._repaired(*grown), key=lambda found: found[1].cost)
        return self._repaired(*best)

    def _settled(self, nets: list[int]) -> Found:
        """Elements by nets, nets by elements, until nothing gets better."""
        best = nets, self._assigned(nets)
        while best[1].cost:
            voted = nets_of(self.first, self.second, best[1].pairs, best[0])
            if voted == best[0]:
                break
            found = self._assigned(voted)
            if found.cost >= best[1].cost:
                break
            best = voted, found
        return best

    def _assigned(self, nets: list[int]) -> Assignment:
        found = assign(self.first, self.second, nets)
        self.left -= found.work
        return found

    def _repaired(self, nets: list[int], found: Assignment) -> Found:
        """Exchange the images of nets that something is wrong with, as long as that helps."""
        trials = TRIALS
        while found.cost:
            better = None
            for tried in self._exchanged(nets, found):
                if trials <= 0 or self.left <= 0:
                    return nets, found
                trials -= 1
                other = self._settled(tried)
                if other[1].cost < found.cost - 1e-9:
                    better = other
                    break
            if better is None:
                break
            nets, found = better
        return nets, found

    def _exchanged(self, nets: list[int], found: Assignment) -> Iterator[list[int]]:
        """Mappings that differ from one in the image of a net that something is wrong with."""
        mine, theirs = _wrong(self.first, self.second, nets, found)
        for net in mine:
            for to in [*theirs, NO_NET]:
                if nets[net] == to or (to != NO_NET and self.first.package(net) != self.second.package(to)):
                    continue
                tried = nets.copy()
                if to != NO_NET and to in tried:
                    tried[tried.index(to)] = nets[net]
                tried[net] = to
                yield tried


def _wrong(first: Graph, second: Graph, nets: Sequence[int], found: Assignment) -> tuple[list[int], list[int]]:
    """Nets of both circuits that some difference is on, those with few pins first."""
    mine: Counter[int] = Counter()
    theirs: Counter[int] = Counter()
    lots = [(found.missing, first, mine), (found.extra, second, theirs)]
    for elements, graph, seen in lots:
        for element in elements:
            seen.update(net for _, net in graph.pins[element] if net >= 0)
    for one, other in found.pairs:
        if moved(first, second, nets, one, other) != (0, False):
            want = Counter((slot, nets[net] if net >= 0 else -1) for slot, net in first.pins[one])
            have = Counter(second.pins[other])
            theirs.update(net for _, net in (have - want) if net >= 0)
            gone = want - have
            mine.update(net for slot, net in first.pins[one] if net >= 0 and (slot, nets[net]) in gone)
    return (
        sorted(mine, key=lambda net: (len(first.on[net]), net)),
        sorted(theirs, key=lambda net: (len(second.on[net]), net)),
    )
