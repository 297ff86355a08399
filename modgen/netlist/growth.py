"""One good guess at which net is which in two circuits that are not the same.

Colours of nodes by what is around them, up to some distance, are the same in both circuits where nothing near differs.
What has a colour of its own is sure; from what is sure one goes on to its neighbours, and asks for less and less that
must be alike. Where several nets look alike one is taken, and all that hangs on it follows before the next choice.
"""

from __future__ import annotations

from collections import Counter, defaultdict
from collections.abc import Sequence

from modgen.netlist.assign import NO_NET
from modgen.netlist.elements import Graph

#: greatest distance that is looked at [pins]
DEPTH = 12
#: nets with more pins than this are no way from one element to the next
HUB = 12
#: least share of pins that two such nets must have in common [-]
ALIKE = 0.5
#: net numbers of both circuits by colour
Lots = dict[int, tuple[list[int], list[int]]]


class Growth:
    """Takes nets and elements of one circuit for those of another, the surest first."""

    def __init__(self, first: Graph, second: Graph, turn: int) -> None:
        self.turn = turn
        self.first, self.second = first, second
        self.nets = [NO_NET] * len(first.nets)
        self.back = [NO_NET] * len(second.nets)
        self.to: dict[int, int] = {}
        self.used: set[int] = set()
        #: nets in the order in which they became known, and how many of these have nothing beside them any more
        self.recent: list[int] = []
        self.open = 0

    def grow(self) -> list[int]:
        """The nets that are sure, their surroundings, and so on with less and less that must be alike."""
        self._hubs()
        exact = self._colours(True, DEPTH)
        loose = self._colours(False, 4)
        near = [exact[depth][1] for depth in (4, 2, 1, 0)]
        # nearer than this everything looks alike
        for net_lots, elements in [*reversed(exact[2:]), *reversed(loose[1:])]:
            # what hangs on a net that is known is surer than what only looks alike, so that goes first
            ways = [elements, *near]
            self.open = 0
            self._spread(ways, [net for net, to in enumerate(self.nets) if to != NO_NET])
            while True:
                known = set(self.recent)
                if beside := self._beside(elements):
                    self._take(*beside)
                elif pair := self._choice(net_lots):
                    self._take_net(*pair)
                else:
                    break
                self._spread(ways, [net for net in self.recent if net not in known])
        return self.nets

    # --- sure things ---------------------------------------------------------------------------------

    def _hubs(self) -> None:
        """Nets that much hangs on, by what hangs on them."""
        profiles = [
            {n: Counter(name for name, _ in on) for n, on in enumerate(graph.on) if _hub(on) and not graph.package(n)}
            for graph in (self.first, self.second)
        ]
        found = []
        for net, mine in profiles[0].items():
            for to, theirs in profiles[1].items():
                common = sum((mine & theirs).values()) / max(sum((mine | theirs).values()), 1)
                if common >= ALIKE:
                    found.append((-common, self.first.nets[net] != self.second.nets[to], net, to))
        for _, _, net, to in sorted(found):
            if self.nets[net] == NO_NET and self.back[to] == NO_NET:
                self._take_net(net, to)

    def _colours(self, exact: bool, depth: int) -> list[tuple[Lots, list[list[int]]]]:
        """For each distance: nets by colour, and the colour of each element of both."""
        graphs = (self.first, self.second)
        names: dict[object, int] = {}
        sure = [
            {net: ("sure", net) for net, to in enumerate(self.nets) if to != NO_NET},
            {to: ("sure", net) for net, to in enumerate(self.nets) if to != NO_NET},
        ]
        elements = [
            [names.setdefault((e.kind, e.aspects if exact else ()), len(names)) for e in g.elements] for g in graphs
        ]
        nets = [
            [names.setdefault(fixed.get(n, g.package(n)), len(names)) for n in range(len(g.nets))]
            for g, fixed in zip(graphs, sure, strict=True)
        ]
        out = [(self._lots(nets), elements)]
        for _ in range(depth):
            names = {}
            following = [
                [
                    names.setdefault(
                        (elements[s][n], tuple(sorted((slot, nets[s][net] if net >= 0 else -1) for slot, net in pins))),
                        len(names),
                    )
                    for n, pins in enumerate(g.pins)
                ]
                for s, g in enumerate(graphs)
            ]
            nets = [
                [
                    names.setdefault(
                        sure[s].get(n) or ("net", nets[s][n], tuple(sorted((slot, elements[s][e]) for slot, e in on))),
                        len(names),
                    )
                    for n, on in enumerate(g.on)
                ]
                for s, g in enumerate(graphs)
            ]
            elements = following
            out.append((self._lots(nets), elements))
        return out

    @staticmethod
    def _lots(colours: list[list[int]]) -> Lots:
        out: Lots = {}
        for side in (0, 1):
            for node, colour in enumerate(colours[side]):
                out.setdefault(colour, ([], []))[side].append(node)
        return {colour: lot for colour, lot in out.items() if lot[0] and lot[1]}

    # --- going on ------------------------------------------------------------------------------------

    def _take_net(self, net: int, to: int) -> None:
        self.nets[net], self.back[to] = to, net
        self.recent.append(net)

    def _take(self, one: int, other: int) -> None:
        """Take an element for another, and with it the nets that are then the only ones left for each other."""
        self.to[one] = other
        self.used.add(other)
        want: dict[str, list[int]] = defaultdict(list)
        have: dict[str, list[int]] = defaultdict(list)
        for slot, net in self.first.pins[one]:
            if net < 0 or self.nets[net] == NO_NET:
                want[slot].append(net)
        for slot, net in self.second.pins[other]:
            if net < 0 or self.back[net] == NO_NET:
                have[slot].append(net)
        for slot, mine in want.items():
            theirs = have.get(slot, [])
            if len(mine) == 1 == len(theirs) and mine[0] >= 0 and theirs[0] >= 0:
                net, to = mine[0], theirs[0]
                free = self.nets[net] == NO_NET and self.back[to] == NO_NET
                if free and self.first.package(net) == self.second.package(to):
                    self._take_net(net, to)

    def _spread(self, ways: list[list[list[int]]], start: list[int]) -> None:
        """Go on from nets that are known, with less and less that must be alike."""
        first = len(self.recent)
        n = 0
        while n < len(ways):
            before = len(self.to)
            for net in [*start, *self.recent[first:]]:
                self._onward(ways[n], net)
            n = 0 if len(self.to) > before else n + 1

    def _onward(self, elements: list[list[int]], start: int) -> None:
        """From a net that is known to elements on it that are the only ones of their colour there, and so on."""
        queue = [start]
        while queue:
            net = queue.pop()
            known = len(self.recent)
            lots: dict[tuple[str, int], tuple[list[int], list[int]]] = {}
            for side, graph, at in ((0, self.first, net), (1, self.second, self.nets[net])):
                for slot, element in graph.on[at]:
                    if element not in (self.used if side else self.to):
                        lots.setdefault((slot, elements[side][element]), ([], []))[side].append(element)
            for mine, theirs in lots.values():
                pair = self._only(mine, theirs)
                if pair is not None and pair[0] not in self.to and pair[1] not in self.used:
                    self._take(*pair)
            queue += self.recent[known:]

    def _beside(self, elements: list[list[int]]) -> tuple[int, int] | None:
        """Of elements that look alike on a net that is known, two that nothing speaks against."""
        while self.open < len(self.recent):
            net = self.recent[self.open]
            to = self.nets[net]
            if max(len(self.first.on[net]), len(self.second.on[to])) <= HUB:
                theirs = [(slot, n) for slot, n in self.second.on[to] if n not in self.used]
                for slot, one in self.first.on[net]:
                    if one in self.to:
                        continue
                    fitting = [
                        (self.first.elements[one].ref != self.second.elements[other].ref, other)
                        for name, other in theirs
                        if name == slot and elements[0][one] == elements[1][other] and self._fits(one, other)
                    ]
                    if fitting:
                        return one, sorted(fitting)[self.turn % len(fitting)][1]
            self.open += 1
        return None

    def _only(self, mine: list[int], theirs: list[int]) -> tuple[int, int] | None:
        """The one pair of these that is on the same nets, as far as they are known."""
        if len(mine) == 1 == len(theirs):
            return (mine[0], theirs[0]) if self._fits(mine[0], theirs[0]) else None
        if len(mine) > 4 or len(theirs) > 4:
            return None
        fitting = [(one, other) for one in mine for other in theirs if self._fits(one, other, wholly=True)]
        return fitting[0] if len(fitting) == 1 else None

    def _fits(self, one: int, other: int, wholly: bool = False) -> bool:
        """Whether no net that is known speaks against a pair; or every one is known and speaks for it."""
        want = Counter((slot, self.nets[net]) for slot, net in self.first.pins[one] if net >= 0)
        have = Counter(
            (slot, net if self.back[net] != NO_NET else NO_NET) for slot, net in self.second.pins[other] if net >= 0
        )
        if wholly:
            return want == have
        return all(to == NO_NET for _, to in (*(want - have), *(have - want)))

    def _choice(self, net_lots: Lots) -> tuple[int, int] | None:
        """Of nets that look alike the fewest, and of these the first two; of the same name where there are such."""
        best: tuple[tuple[int, int, int], tuple[int, int]] | None = None
        for mine, theirs in net_lots.values():
            free = [net for net in mine if self.nets[net] == NO_NET]
            left = [net for net in theirs if self.back[net] == NO_NET]
            if not free or not left:
                continue
            size = max(len(free), len(left))
            if best is not None and size > best[0][0]:
                continue
            names = {self.second.nets[to]: to for to in left}
            named = next((net for net in free if self.first.nets[net] in names), None)
            if named is not None and not self.turn:
                pair = named, names[self.first.nets[named]]
            else:
                pair = free[0], left[self.turn % len(left)]
            key = (size, *pair)
            if best is None or key < best[0]:
                best = key, pair
        return best[1] if best else None


def _hub(on: Sequence[tuple[str, int]]) -> bool:
    """Whether a net has many pins, is at a header or feeds packages."""
    return len(on) > HUB or any(name.startswith(("header ", "package ")) for name, _ in on)
