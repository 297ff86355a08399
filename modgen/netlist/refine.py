"""Whether two circuits are the same but for their names, and which net then is which.

Colour refinement (Weisfeiler and Lehman): what stands between different neighbours gets different colours until
nothing changes. Where several nets still look alike (channels of one module do) one is taken for one of the other
circuit, the colours follow, and the next is tried when that leads nowhere.

References
----------
B. D. McKay and A. Piperno, "Practical graph isomorphism, II", J. Symbolic Computation 60 (2014): colour refinement
with individualisation.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from modgen.netlist.elements import Graph

#: pairs of nets that are tried for each other before the search is given up, per net of the circuit
TRIES = 4


@dataclass
class _State:
    """Colours of all nodes of both circuits, and the nodes of each colour (never changed in place)."""

    colour: list[int]
    members: dict[int, list[int]]
    fresh: int

    def copy(self) -> _State:
        return _State(self.colour.copy(), self.members.copy(), self.fresh)


def same_nets(first: Graph, second: Graph) -> list[int] | None:
    """The net of the second circuit for each net of the first, when the circuits are the same.

    Parameters
    ----------
    first, second
        The circuits.

    Returns
    -------
    list of int or None
        None when they differ, or (for circuits far more alike in themselves than real ones) nothing was found.
    """
    if len(first.elements) != len(second.elements) or len(first.nets) != len(second.nets):
        return None
    return _Pair(first, second).search()


class _Pair:
    """Both circuits as one graph: elements of the first, its nets, then those of the second."""

    def __init__(self, first: Graph, second: Graph) -> None:
        self.first, self.second = first, second
        self.half = len(first.elements) + len(first.nets)
        slots: dict[str, int] = {}
        self.near: list[list[tuple[int, int]]] = []
        for graph, base in ((first, 0), (second, self.half)):
            nets_at = base + len(graph.elements)
            self.near += [
                [(slots.setdefault(slot, len(slots)), nets_at + net) for slot, net in pins if net >= 0]
                for pins in graph.pins
            ]
            # the element's colour tells the kind; the slot alone is enough here
            self.near += [
                [(slots.setdefault(name.partition(" ")[2], len(slots)), base + element) for name, element in on]
                for on in graph.on
            ]

    def search(self) -> list[int] | None:
        """Refine; while nets look alike take one for another, and go back where that was wrong."""
        state = self._start()
        if not self._refine(state, list(state.members)):
            return None
        tries = TRIES * len(self.first.nets) + 100
        stack = [(state, iter(self._choices(state)))]
        while stack and tries:
            state, choices = stack[-1]
            if not self._alike(state):
                return self._nets(state)
            pair = next(choices, None)
            if pair is None:
                stack.pop()
                continue
            tries -= 1
            tried = state.copy()
            self._recolour(tried, list(pair))
            if self._refine(tried, self._around(tried, pair)):
                stack.append((tried, iter(self._choices(tried))))
        return None

    def _start(self) -> _State:
        """Colours by what an element is, and by whether a node is a net."""
        names: dict[object, int] = {}
        colour: list[int] = []
        for graph in (self.first, self.second):
            for element, pins in zip(graph.elements, graph.pins, strict=True):
                opened = tuple(sorted(slot for slot, net in pins if net < 0))
                colour.append(names.setdefault((element.kind, element.aspects, opened), len(names)))
            colour += [names.setdefault(graph.package(net), len(names)) for net in range(len(graph.nets))]
        members: dict[int, list[int]] = {}
        for node, c in enumerate(colour):
            members.setdefault(c, []).append(node)
        return _State(colour, members, len(names))

    def _refine(self, state: _State, dirty: Iterable[int]) -> bool:
        """Split colours until every node of one colour has the same neighbours; False when the sides differ."""
        waiting = set(dirty)
        for c in waiting:
            if not self._balanced(state.members[c]):
                return False
        colour, near = state.colour, self.near
        while waiting:
            changed: list[int] = []
            for c in sorted(waiting):
                groups: dict[tuple[tuple[int, int], ...], list[int]] = {}
                for node in state.members[c]:
                    seen = tuple(sorted((slot, colour[other]) for slot, other in near[node]))
                    groups.setdefault(seen, []).append(node)
                if len(groups) == 1:
                    continue
                # the largest keeps its colour: fewer neighbours have to be looked at again
                for group in sorted(groups.values(), key=lambda g: -len(g)):
                    if not self._balanced(group):
                        return False
                parts = sorted(groups.values(), key=lambda g: (-len(g), g[0]))
                state.members[c] = parts[0]
                for group in parts[1:]:
                    state.members[state.fresh] = group
                    for node in group:
                        colour[node] = state.fresh
                    changed += group
                    state.fresh += 1
            waiting = self._around(state, changed)
        return True

    def _balanced(self, nodes: list[int]) -> bool:
        return 2 * sum(node < self.half for node in nodes) == len(nodes)

    def _around(self, state: _State, nodes: Iterable[int]) -> set[int]:
        """Colours of the neighbours, but for those of one node a side: these are settled."""
        found = {state.colour[other] for node in nodes for _, other in self.near[node]}
        return {c for c in found if len(state.members[c]) > 2}

    def _recolour(self, state: _State, pair: list[int]) -> None:
        """Give two nodes a colour of their own."""
        old = state.colour[pair[0]]
        state.members[old] = [node for node in state.members[old] if node not in pair]
        state.members[state.fresh] = pair
        for node in pair:
            state.colour[node] = state.fresh
        state.fresh += 1

    def _alike(self, state: _State) -> list[int]:
        """The smallest lot of nets that look alike; empty when every net is settled."""
        base = len(self.first.elements)
        lots = {state.colour[n] for n in range(base, self.half)}
        return min((state.members[c] for c in lots if len(state.members[c]) > 2), key=lambda m: (len(m), m), default=[])

    def _choices(self, state: _State) -> list[tuple[int, int]]:
        """One net of the first circuit with each it may be; the one of the same name first."""
        lot = self._alike(state)
        if not lot:
            return []
        one, others = lot[0], [node for node in lot if node >= self.half]
        name = self._name(one)
        return [(one, other) for other in sorted(others, key=lambda node: (self._name(node) != name, node))]

    def _name(self, node: int) -> str:
        graph, base = (self.first, 0) if node < self.half else (self.second, self.half)
        return graph.nets[node - base - len(graph.elements)]

    def _nets(self, state: _State) -> list[int]:
        base = len(self.first.elements)
        return [max(state.members[state.colour[n]]) - self.half - base for n in range(base, self.half)]
