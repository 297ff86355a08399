"""What differs between two circuits, by structure: as few parts and connections as can be.

Neither references nor names of nets are compared. The circuits are first held to be the same
(:mod:`modgen.netlist.refine`); where they are not, the mapping that leaves least unexplained is sought
(:mod:`modgen.netlist.nearest`), and what it leaves is said.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass

from modgen.netlist.assign import NO_NET, OPEN, Assignment, assign
from modgen.netlist.elements import MEMBER, Element, Graph, different
from modgen.netlist.nearest import nearest_nets
from modgen.netlist.refine import same_nets


@dataclass(frozen=True)
class Wire:
    """A net as both circuits call it; empty where one does not have it, both empty for a pin that is open."""

    here: str = ""
    there: str = ""


@dataclass(frozen=True)
class Moved:
    """A pin of the file that is on another net than intended."""

    ref: str
    pin: str
    found: Wire
    wanted: Wire


@dataclass(frozen=True)
class Difference:
    """One thing that differs. ``kind`` says what:

    ``missing``: a part (``intended``) that should stand between ``wires``; ``extra``: a part (``ref``) that should
    not be there; ``changed``: ``aspects`` as (name, found, intended); ``moved``: pins of one part; ``joined``: pins of
    several parts, all of net ``wires[1]``, are on ``wires[0]``; ``cut``: they are on a net of their own,
    ``wires[0]``, instead of ``wires[1]``; ``shifted``: they are on ``wires[0]`` instead of ``wires[1]``, where
    others are; ``package``: a section is in another package than its neighbours.
    """

    kind: str
    ref: str = ""
    intended: str = ""
    aspects: tuple[tuple[str, str, str], ...] = ()
    pins: tuple[Moved, ...] = ()
    wires: tuple[Wire, ...] = ()


@dataclass(frozen=True)
class Comparison:
    """Everything that differs; and which part and which net is which, as (intended, found) pairs, sorted."""

    differences: tuple[Difference, ...]
    parts: tuple[tuple[str, str], ...]
    nets: tuple[tuple[str, str], ...]


def compare(intended: Sequence[Element], found: Sequence[Element]) -> Comparison:
    """Compare two circuits by structure.

    Parameters
    ----------
    intended
        The elements of the circuit as it shall be.
    found
        The elements of the circuit that is judged.

    Returns
    -------
    Comparison
        No differences when the circuits are the same but for references, net names, order, and what
        may change places: pins of one slot, elements that are alike, whole channels.
    """
    first, second = Graph(intended), Graph(found)
    nets = same_nets(first, second)
    pairs = assign(first, second, nets) if nets is not None else None
    if nets is None or pairs is None or pairs.cost:
        nets, pairs = nearest_nets(first, second)
    return _Account(first, second, nets, pairs).comparison()


class _Account:
    """Puts what two circuits leave unexplained into as few words as can be."""

    def __init__(self, first: Graph, second: Graph, nets: list[int], pairs: Assignment) -> None:
        self.first, self.second, self.nets, self.assignment = first, second, nets, pairs
        self.back = {to: net for net, to in enumerate(nets) if to != NO_NET}

    def comparison(self) -> Comparison:
        """Parts first, then values, then connections."""
        first, second = self.first, self.second
        replaced, missing, extra = self._replaced()
        gone = {first.elements[n].ref for n in missing if first.elements[n].kind != "section"}
        come = {second.elements[n].ref for n in extra if second.elements[n].kind != "section"}
        out = [self._missing(n) for n in missing if first.elements[n].kind != "section"]
        out += [self._extra(n) for n in extra if second.elements[n].kind != "section"]
        out += replaced
        changed, moved, elsewhere = [], list[Moved](), set[tuple[str, str]]()
        for one, other in self.assignment.pairs:
            mine, theirs = first.elements[one], second.elements[other]
            names = different(mine, theirs)
            if names:
                aspects = tuple((name, theirs.aspect(name) or "", mine.aspect(name) or "") for name in names)
                changed.append(Difference("changed", theirs.ref, mine.ref, aspects=aspects))
            pins, member = self._moved(one, other)
            if theirs.ref not in come and mine.ref not in gone:
                moved += pins
            if member and mine.ref not in gone and theirs.ref not in come:
                elsewhere.add((theirs.ref, mine.ref))
        out += changed
        out += self._connections(moved)
        out += [Difference("package", ref, wanted) for ref, wanted in sorted(elsewhere)]
        parts = {
            (first.elements[one].ref, second.elements[other].ref)
            for one, other in self.assignment.pairs
            if first.elements[one].kind != "section"
        }
        nets = [
            (first.nets[net], second.nets[to])
            for net, to in enumerate(self.nets)
            if to != NO_NET and not first.package(net)
        ]
        return Comparison(tuple(out), tuple(sorted(parts)), tuple(sorted(nets)))

    def _replaced(self) -> tuple[list[Difference], list[int], list[int]]:
        """A part of another kind in the place of one that is missing; then what is left."""
        places: dict[tuple[int, ...], list[int]] = defaultdict(list)
        for other in self.assignment.extra:
            places[tuple(sorted(net for _, net in self.second.pins[other]))].append(other)
        out, missing, used = [], [], set[int]()
        for one in self.assignment.missing:
            where = tuple(sorted(self.nets[net] if net >= 0 else OPEN for _, net in self.first.pins[one]))
            lot = places.get(where, []) if where and NO_NET not in where else []
            if not lot or self.first.elements[one].kind == "section":
                missing.append(one)
                continue
            other = lot.pop(0)
            used.add(other)
            mine, theirs = self.first.elements[one], self.second.elements[other]
            aspects = [("kind", theirs.kind, mine.kind)]
            names = dict.fromkeys(name for name, _ in (*theirs.aspects, *mine.aspects))
            aspects += [(name, theirs.aspect(name) or "", mine.aspect(name) or "") for name in names]
            out.append(Difference("changed", theirs.ref, mine.ref, aspects=tuple(aspects)))
        return out, missing, [n for n in self.assignment.extra if n not in used]

    def _missing(self, one: int) -> Difference:
        element = self.first.elements[one]
        wires = dict.fromkeys(self._intended(net) for slot, net in self.first.pins[one] if net >= 0 and slot != MEMBER)
        return Difference("missing", intended=element.ref, aspects=_stated(element), wires=tuple(wires))

    def _extra(self, other: int) -> Difference:
        element = self.second.elements[other]
        wires = dict.fromkeys(self._found(net) for slot, net in self.second.pins[other] if net >= 0 and slot != MEMBER)
        return Difference("extra", element.ref, aspects=_stated(element), wires=tuple(wires))

    def _intended(self, net: int) -> Wire:
        """A net of the intended circuit."""
        if net < 0:
            return Wire()
        to = self.nets[net]
        return Wire(self.second.nets[to] if to != NO_NET else "", self.first.nets[net])

    def _found(self, net: int) -> Wire:
        """A net of the file."""
        if net < 0:
            return Wire()
        back = self.back.get(net)
        return Wire(self.second.nets[net], self.first.nets[back] if back is not None else "")

    def _moved(self, one: int, other: int) -> tuple[list[Moved], bool]:
        """The pins of a pair that are elsewhere, and whether the package is another."""
        want: dict[str, list[tuple[int, str]]] = defaultdict(list)
        for (slot, net), pin in zip(self.first.pins[one], self.first.elements[one].pins, strict=True):
            want[slot].append((net, pin.number))
        have: dict[str, list[tuple[int, str]]] = defaultdict(list)
        element = self.second.elements[other]
        for (slot, net), pin in zip(self.second.pins[other], element.pins, strict=True):
            have[slot].append((net, pin.number))
        out, member = [], False
        for slot, mine in want.items():
            theirs = have.get(slot, [])
            left = []
            to = {number: self.nets[net] if net >= 0 else OPEN for net, number in mine}
            # of pins that may change places those that did not are right
            for net, number in sorted(mine, key=lambda pin: (to[pin[1]], pin[1]) not in theirs):
                same = [pin for pin in theirs if pin[0] == to[number]]
                if same:
                    theirs.remove((to[number], number) if (to[number], number) in same else same[0])
                else:
                    left.append(net)
            if slot == MEMBER:
                member = bool(left)
                continue
            for net, (got, number) in zip(left, theirs, strict=False):
                out.append(Moved(element.ref, number, self._found(got), self._intended(net)))
        return out, member

    def _connections(self, moved: list[Moved]) -> list[Difference]:
        """Pins of several parts that went the same way are one difference; the others are one a part."""
        ways: dict[tuple[Wire, Wire], list[Moved]] = defaultdict(list)
        for pin in moved:
            ways[pin.found, pin.wanted].append(pin)
        out, single = [], defaultdict[str, list[Moved]](list)
        for (found, wanted), pins in ways.items():
            if len({pin.ref for pin in pins}) > 1 and found.here and wanted.there:
                kind = "shifted"
                if not wanted.here and found.there:
                    kind = "joined"
                elif wanted.here and not found.there:
                    kind = "cut"
                out.append(Difference(kind, pins=tuple(pins), wires=(found, wanted)))
                continue
            for pin in pins:
                single[pin.ref].append(pin)
        return [*out, *(Difference("moved", ref, pins=tuple(pins)) for ref, pins in single.items())]


def _stated(element: Element) -> tuple[tuple[str, str, str], ...]:
    """What an element is, as aspects without anything to hold them against."""
    return (("kind", element.kind, element.kind), *((name, text, text) for name, text in element.aspects))
