"""The netlist seen as electronics: records, sections, sockets, and the lanes found by structure.

Values come from the netlist's own text, ratings from its fields when it has them and else from the
catalogue: a netlist that came back from layout is judged by what it says, not by what was designed.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from functools import cached_property
from itertools import product
from typing import Protocol

from modgen.analysis.lanes import Lane, find_lanes
from modgen.analysis.model import Interval
from modgen.analysis.parts import POSITIONS, Contact, Jack, Neighbour, Section, field_number, reference_order
from modgen.analysis.rails import named_rails
from modgen.catalogue.records import Amplifier, Capacitor
from modgen.catalogue.records import Part as Record
from modgen.formulas.loading import parallel
from modgen.netlist.model import Netlist, Part
from modgen.problems import InputError, Place, Problem
from modgen.units import QuantityError, read_value

__all__ = ["Board", "Contact", "Jack", "Lane", "Neighbour", "Records", "Section"]

GROUND = "0V"
#: what a value is of, and how one is written
_QUANTITIES = {
    "resistor": ("resistance", "4.7k"),
    "control": ("resistance", "1M"),
    "capacitor": ("capacitance", "100n"),
}
_CLASSES = {"R": "resistor", "C": "capacitor", "D": "diode", "U": "amplifier", "J": "header", "S": "switch"}


class Records(Protocol):
    """Anything that finds a catalogue record by its key."""

    def get(self, key: str) -> Record | None:
        """The record, or None."""


@dataclass(frozen=True)
class Board:
    """A netlist with the catalogue record of each part beside it. Build it with :meth:`of`."""

    netlist: Netlist
    #: (reference, record or None), in the netlist's order
    records: tuple[tuple[str, Record | None], ...]
    #: (usual name, the file's own) of supply nets that are called otherwise there
    own_names: tuple[tuple[str, str], ...] = ()

    @classmethod
    def of(cls, netlist: Netlist, catalogue: Records) -> Board:
        """Look up the ``part`` field of every part.

        Parameters
        ----------
        netlist
            The circuit.
        catalogue
            Where the ``part`` fields are looked up.

        Returns
        -------
        Board
            The same circuit; parts without a record are in :attr:`unknown`. Supply nets that go under names of their
            own have the usual ones, where it is plain which is which (:mod:`modgen.analysis.rails`).
        """
        found = []
        for part in netlist.parts:
            key = part.field("part")
            found.append((part.ref, catalogue.get(key) if key else None))
        named, own_names = named_rails(netlist, found)
        return cls(named, tuple(found), own_names)

    # --- parts -----------------------------------------------------------------------------------

    @cached_property
    def _record_of(self) -> dict[str, Record | None]:
        out: dict[str, Record | None] = {}
        for ref, record in self.records:
            out.setdefault(ref, record)
        return out

    def record(self, ref: str) -> Record | None:
        """The catalogue record of a part, None when there is none."""
        return self._record_of.get(ref)

    @cached_property
    def refs(self) -> tuple[str, ...]:
        """All references, each once, by class and number."""
        return tuple(sorted(self.netlist.by_ref, key=reference_order))

    @cached_property
    def unknown(self) -> tuple[str, ...]:
        """References without a catalogue record (mounting holes, test points, parts from elsewhere)."""
        return tuple(ref for ref in self.refs if self.record(ref) is None)

    def part(self, ref: str) -> Part:
        """The netlist's part.

        Raises
        ------
        KeyError
            When there is no such reference.
        """
        return self.netlist.by_ref[ref]

    def kind(self, ref: str) -> str:
        """Resistor, capacitor, diode, amplifier, control, jack, switch, header, or ``""`` when it is not known.

        From the record; of a part without one from its reference class (design convention, section 8).
        """
        record = self.record(ref)
        if record is not None:
            return record.kind
        pins = self.pins(ref)
        letters = self.part(ref).letters
        if letters == "R" and "3" in pins:
            return "control"
        if letters == "J" and "T" in pins:
            return "jack"
        return _CLASSES.get(letters, "")

    def parts_of(self, kind: str) -> tuple[str, ...]:
        """References of one kind, by class and number."""
        return self._by_kind.get(kind, ())

    @cached_property
    def _by_kind(self) -> dict[str, tuple[str, ...]]:
        kinds = {ref: self.kind(ref) for ref in self.refs}
        return {kind: tuple(ref for ref in self.refs if kinds[ref] == kind) for kind in sorted(set(kinds.values()))}

    def pins(self, ref: str) -> tuple[str, ...]:
        """Pin numbers of a part: the record's, else the netlist's own, else those that are connected."""
        record = self.record(ref)
        if record is not None and record.pins:
            return tuple(pin.number for pin in record.pins)
        part = self.part(ref)
        if part.pins:
            return part.pins
        return self._connected.get(ref, ())

    @cached_property
    def _connected(self) -> dict[str, tuple[str, ...]]:
        out: dict[str, list[str]] = {}
        for owner, pin in sorted(self.netlist.net_of):
            out.setdefault(owner, []).append(pin)
        return {ref: tuple(pins) for ref, pins in out.items()}

    def channel(self, ref: str) -> int:
        """The ``channel`` field as a number, 0 when it is absent or not a number."""
        text = self.part(ref).field("channel")
        return int(text) if text.isascii() and text.isdigit() else 0

    # --- values ----------------------------------------------------------------------------------

    def value(self, ref: str) -> float | None:
        """What the value text of a part says, in base SI units; None when it is not a number."""
        try:
            number = read_value(self.part(ref).value)
        except QuantityError:
            return None
        return number if number >= 0 else None

    def rating(self, ref: str, name: str) -> float | None:
        """A figure of a part, e.g. ``voltage`` [V], ``power`` [W], ``tolerance`` [-]: field first, then record."""
        number = field_number(self.part(ref).field(name))
        if number is not None:
            return number
        held = getattr(self.record(ref), name, None)
        return float(held) if isinstance(held, int | float) else None

    def interval(self, ref: str) -> Interval | None:
        """The value with its tolerance; a part whose tolerance nobody states counts as exact."""
        value = self.value(ref)
        if value is None:
            return None
        tolerance = self.rating(ref, "tolerance") or 0.0
        return Interval(value, value * (1 - tolerance), value * (1 + tolerance))

    def resistance(self, ref: str) -> Interval:
        """Resistance of a resistor or control with its tolerance [ohm].

        Raises
        ------
        InputError
            When the value text is not a number.
        """
        return self._interval_or_raise(ref)

    def capacitance(self, ref: str) -> Interval:
        """Capacitance with its tolerance [F].

        Raises
        ------
        InputError
            When the value text is not a number above zero.
        """
        return self._interval_or_raise(ref)

    @cached_property
    def unreadable(self) -> tuple[Problem, ...]:
        """A problem for every resistor, control and capacitor whose value or tolerance cannot be used."""
        found = (_fault(self, ref) for kind in _QUANTITIES for ref in self.parts_of(kind))
        return tuple(problem for problem in found if problem is not None)

    def _interval_or_raise(self, ref: str) -> Interval:
        problem, found = _fault(self, ref), self.interval(ref)
        if problem is not None or found is None:
            raise InputError([problem] if problem else [])
        return found

    def polarised(self, ref: str) -> bool:
        """Whether a capacitor has a + end."""
        record = self.record(ref)
        if isinstance(record, Capacitor):
            return record.polarised
        return self.part(ref).field("dielectric") == "electrolytic"

    def least_parallel(self, refs: Iterable[str]) -> float:
        """Least resistance of resistors in parallel, each at its low end [ohm]; infinite for none."""
        return parallel(*(self.resistance(ref).low for ref in refs))

    # --- nets ------------------------------------------------------------------------------------

    ground = GROUND
    bus_positive = "BUS+"
    bus_negative = "BUS-"
    positive = "V+"

    def net(self, ref: str, pin: str) -> str | None:
        """The net a pin is on, None when it is open."""
        return self.netlist.net_of.get((ref, pin))

    @cached_property
    def single(self) -> bool:
        """Whether there is no negative rail."""
        return "V-" not in self.netlist.by_net

    @cached_property
    def negative(self) -> str:
        """The lower supply net of the amplifiers: ``V-``, or ``0V`` on a single supply."""
        return GROUND if self.single else "V-"

    @cached_property
    def supply_nets(self) -> tuple[str, ...]:
        """Nets that hold a supply: 0 V, protected rails and bus rails, as far as they exist."""
        names = (GROUND, "V+", "V-", "BUS+", "BUS-")
        return tuple(name for name in names if name in self.netlist.by_net)

    def on(self, net: str) -> tuple[tuple[str, str], ...]:
        """``(reference, pin)`` pairs on a net; none for a net that does not exist."""
        found = self.netlist.by_net.get(net)
        return found.pins if found else ()

    @cached_property
    def _neighbours(self) -> dict[str, tuple[Neighbour, ...]]:
        table: dict[str, list[Neighbour]] = {}
        for ref in self.refs:
            kind = self.kind(ref)
            if kind in ("resistor", "capacitor", "diode"):
                pairs = [("1", "2")]
            elif kind == "control":
                pairs = [("1", "2"), ("2", "3"), ("1", "3")]
            else:
                continue
            seen: set[tuple[str, str]] = set()
            for a, b in pairs:
                left, right = self.net(ref, a), self.net(ref, b)
                # pins tied together are one end, so a rheostat is one way through, not two
                if left is None or right is None or left == right or (left, right) in seen:
                    continue
                seen |= {(left, right), (right, left)}
                table.setdefault(left, []).append(Neighbour(ref, kind, a, right, b))
                table.setdefault(right, []).append(Neighbour(ref, kind, b, left, a))
        return {net: tuple(found) for net, found in table.items()}

    def between(self, net: str, *kinds: str) -> tuple[Neighbour, ...]:
        """What stands between a net and other nets: two-terminal parts and controls, of these kinds or all."""
        found = self._neighbours.get(net, ())
        return tuple(n for n in found if not kinds or n.kind in kinds)

    def ties(self, first: str, second: str, *kinds: str) -> tuple[str, ...]:
        """References of the parts directly between two nets."""
        return tuple(n.ref for n in self.between(first, *kinds) if n.net == second)

    # --- what is on the board --------------------------------------------------------------------

    @cached_property
    def sections(self) -> tuple[Section, ...]:
        """Every amplifier section, packages by reference, sections in the record's order."""
        out = []
        for ref in self.parts_of("amplifier"):
            record = self.record(ref)
            if not isinstance(record, Amplifier):
                continue
            for index, (output, inverting, noninverting) in enumerate(record.section_pins):
                out.append(
                    Section(
                        package=ref,
                        index=index,
                        record=record,
                        pins=(output, inverting, noninverting),
                        output=self.net(ref, output),
                        inverting=self.net(ref, inverting),
                        noninverting=self.net(ref, noninverting),
                        positive=self.net(ref, record.positive_pin),
                        negative=self.net(ref, record.negative_pin),
                    )
                )
        return tuple(out)

    @cached_property
    def jacks(self) -> tuple[Jack, ...]:
        """Every socket with the nets of its tip, tip switch and sleeve."""
        return tuple(
            Jack(ref, self.net(ref, "T"), self.net(ref, "TN"), self.net(ref, "S")) for ref in self.parts_of("jack")
        )

    @cached_property
    def contacts(self) -> tuple[Contact, ...]:
        """Every contact of every panel switch that joins two nets; those of one switch are never closed together."""
        out = []
        for ref in self.parts_of("switch"):
            common = self.net(ref, "2")
            for position, pin in POSITIONS.items():
                throw = self.net(ref, pin)
                if common is not None and throw is not None and common != throw:
                    out.append(Contact(ref, position, common, throw))
        return tuple(out)

    def switch_states(self, refs: Iterable[str]) -> Iterator[tuple[Contact, ...]]:
        """The closed contacts in every combination of positions of these switches, the others open."""
        choices = []
        for ref in refs:
            mine = [contact for contact in self.contacts if contact.ref == ref]
            choices.append([[c for c in mine if c.position == position] for position in POSITIONS])
        for state in product(*choices):
            yield tuple(contact for closed in state for contact in closed)

    @cached_property
    def channels(self) -> tuple[Lane, ...]:
        """The lanes, found by structure (see :mod:`modgen.analysis.lanes`), by channel number."""
        return find_lanes(self)

    def partner(self, ref: str) -> str | None:
        """The other capacitor of a back-to-back pair, None when there is none.

        Two polarised capacitors are back to back when like ends meet on a net that has nothing else on it.
        """
        if self.kind(ref) != "capacitor" or not self.polarised(ref):
            return None
        for pin in ("1", "2"):
            net = self.net(ref, pin)
            others = [(r, p) for r, p in self.on(net or "") if r != ref]
            if len(others) != 1 or len(self.on(net or "")) != 2:
                continue
            other, other_pin = others[0]
            if other_pin == pin and self.kind(other) == "capacitor" and self.polarised(other):
                return other
        return None


def _fault(board: Board, ref: str) -> Problem | None:
    """What is wrong with the value of a part that needs one."""
    kind = board.kind(ref)
    if kind not in _QUANTITIES:
        kind = "resistor"
    what, example = _QUANTITIES[kind]
    value = board.value(ref)
    # a link of 0 ohm is a resistor; a capacitor or a control of nothing is a mistake
    if value is None or (kind != "resistor" and value == 0):
        return Problem(
            Place("netlist"),
            f"{ref} has the value {board.part(ref).value!r}, which is not a {what}",
            "every analysis of the netlist reads the values that stand in it",
            f"give {ref} a plain number with one SI prefix and no unit, such as {example}",
        )
    tolerance = board.rating(ref, "tolerance") or 0.0
    if tolerance >= 1:
        return Problem(
            Place("netlist"),
            f"{ref} has a tolerance of {100 * tolerance:g} %",
            "a part that may be nothing at all has no least value to reckon with",
            f"give {ref} a tolerance below 100 %",
        )
    return None
