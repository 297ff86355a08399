"""What two circuits are compared as: elements with pins on nets, and nothing of how they are called.

An element is a part, or one section of a package that holds several. What it is made of is told by its kind and by
aspects (value, rating, part); a pin by its slot. Pins of one slot may change places: the ends of a resistor.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

#: begins the name of the net that stands for "in this package"; no net of a file can be called so
PACKAGE = "\0"
#: the slot that ties a section to its package
MEMBER = "package"
#: reference classes of what is on a board without being part of the circuit
MECHANICAL = frozenset({"H", "MH", "TP", "LOGO", "MP", "FID"})


@dataclass(frozen=True)
class Pin:
    """One pin: its number as people say it, its slot, and its net (empty when it is open)."""

    number: str
    slot: str
    net: str


@dataclass(frozen=True)
class Element:
    """A part or a section. ``aspects`` are sorted; one that is not known is left out and not compared."""

    ref: str
    kind: str
    aspects: tuple[tuple[str, str], ...]
    pins: tuple[Pin, ...]

    def aspect(self, name: str) -> str | None:
        """What is known of one aspect."""
        return next((text for key, text in self.aspects if key == name), None)


def different(one: Element, other: Element) -> tuple[str, ...]:
    """The aspects that both state, and not alike."""
    if one.aspects == other.aspects:
        return ()
    known = dict(other.aspects)
    return tuple(name for name, text in one.aspects if known.get(name, text) != text)


class Graph:
    """Elements and nets as numbers, each with its neighbours."""

    def __init__(self, elements: Sequence[Element]) -> None:
        self.elements = tuple(elements)
        self.nets = tuple(sorted({pin.net for element in elements for pin in element.pins if pin.net}))
        self.number = {name: n for n, name in enumerate(self.nets)}
        #: per element its pins as (slot, net), net -1 when open
        self.pins: list[list[tuple[str, int]]] = [
            [(pin.slot, self.number.get(pin.net, -1)) for pin in element.pins] for element in elements
        ]
        #: per net what is on it as (kind and slot, element)
        self.on: list[list[tuple[str, int]]] = [[] for _ in self.nets]
        for n, element in enumerate(self.elements):
            for slot, net in self.pins[n]:
                if net >= 0:
                    self.on[net].append((f"{element.kind} {slot}", n))

    def package(self, net: int) -> bool:
        """Whether a net is none, but stands for a package."""
        return self.nets[net].startswith(PACKAGE)
