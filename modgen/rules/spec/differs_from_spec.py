"""A netlist that came back with other parts, values or connections than it went out with."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from modgen.analysis.board import Board
from modgen.analysis.parts import reference_order
from modgen.netlist.compare import Comparison, Difference, Moved, Wire, compare
from modgen.netlist.elements import Element
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.structure import elements_of, without_function
from modgen.rules.support import listed
from modgen.units import QuantityError, format_quantity, read_value, value_text

UNITS = {"tolerance": "ratio", "voltage": "voltage", "power": "power"}
WHY = {
    "missing": "without it the circuit is not the one that was computed",
    "extra": "what it does to the circuit was never computed",
    "changed": "everything that was computed holds for the part of the spec",
    "moved": "the circuit is not the one that was computed",
    "joined": "nets that are joined carry one signal",
    "cut": "what is cut apart carries two signals",
    "shifted": "the circuit is not the one that was computed",
    "package": "sections of one type are alike, so the circuit is the same",
}


class DiffersFromSpec(Rule):
    """The netlist has the parts, values and connections that the spec asks for.

    Checks:
        The netlist against the one that is made from the spec, by structure: kind, value, rating and
        catalogue part of every part, and what each pin is connected with. References, net names, order,
        sheets and land patterns do not count; nor do exchanged channels, sections of a package, ends of
        a resistor or of an unpolarised capacitor, or parts that are alike.
    Matters:
        What was computed, sized and cleared is the circuit of the spec. A connection that was lost in
        layout, or a value changed by hand, makes it another one, and no figure of it holds any more.
    Fails:
        start from: lane
        R2 1=CH1_BUF
        C1 film-pet-5mm-63v-470n
    Passes:
        start from: lane
    Limits:
        Names the smallest set of differences that it finds; where several are as small, one of them. A
        decoupling capacitor is compared by its nets, not by the package beside it. Mounting holes, test
        points, logos and parts unknown to the catalogue that join nothing are listed, not compared. A part
        without the field part is compared by what it does say.
    References:
        Common practice: a layout is compared with its schematic before it is ordered.
    """

    name = "differs-from-spec"
    subject = "spec"
    needs_spec = True
    needs_intended = True
    needs_rails = False

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every part that is as it should be, then everything that differs."""
        board, intended = context.board, context.intended
        assert intended is not None
        aside = without_function(board)
        mine, theirs = elements_of(intended), elements_of(board, aside)
        found = compare(mine, theirs)
        faulty = {d.ref for d in found.differences} | {p.ref for d in found.differences for p in d.pins}
        for there, here in found.parts:
            if here not in faulty:
                what = here if here == there else f"{here} ({there} in the spec)"
                yield Measurement(parts=(here,), what=f"{what} is as the spec asks")
        for difference in found.differences:
            yield _measured(difference, board)
        yield from _not_judged(board, aside, found, {e.ref: e for e in mine}, theirs)


def _measured(d: Difference, board: Board) -> Measurement:
    """One difference in words."""
    parts = sorted({d.ref, *(pin.ref for pin in d.pins)} - {""}, key=reference_order)
    wires = [*d.wires, *(wire for pin in d.pins for wire in (pin.found, pin.wanted))]
    nets = tuple(dict.fromkeys(name for wire in wires for name in (wire.here or wire.there,) if name))
    if d.kind == "missing":
        # in a netlist with references given anew the number may be another part's
        parts = [d.intended] if d.intended not in board.netlist.by_ref else []
        message = f"{_part(d)}{_between(d.wires)} is missing: {d.intended} of the spec"
        fix = "put it back"
    elif d.kind == "extra":
        message = f"{d.ref}, {_part(d)}{_between(d.wires)}, is not in the spec"
        fix = f"take {d.ref} out, or ask for it in the spec"
    elif d.kind == "changed":
        is_, wants = _changes(d)
        there = f" for {d.intended}" if d.intended != d.ref else ""
        verb = "has" if all(name in UNITS for name, _, _ in d.aspects) else "is"
        message = f"{d.ref} {verb} {is_}, the spec wants {wants}{there}"
        fix = f"make {d.ref} what the spec wants, or change the spec"
    elif d.kind == "joined":
        found, wanted = d.wires
        apart = f"{wanted.there} ({_pins(d.pins)}) and {found.there}"
        message = f"net {found.here} joins what the spec keeps apart: {apart}"
        fix = f"part {wanted.there} from {found.there}"
    elif d.kind in ("cut", "shifted"):
        found, wanted = d.wires
        alone = ", a net that the spec does not have" if d.kind == "cut" else ""
        message = f"{_pins(d.pins)} are on {_net(found)}{alone}; the spec wants them on {_net(wanted)}"
        fix = f"connect them with {_net(wanted)}"
    elif d.kind == "package":
        message = f"a section of {d.ref} does what the spec gives to a section of {d.intended}"
        fix = "nothing, unless the layout should follow the spec"
    else:
        message = "; ".join(_moved(pin) for pin in d.pins)
        fix = f"connect {d.ref} as the spec has it"
    level = "note" if d.kind == "package" else ""
    return Measurement(
        parts=tuple(parts),
        what=message,
        nets=nets,
        fault=Fault(message, WHY[d.kind], fix, level),
    )


def _not_judged(
    board: Board, aside: tuple[str, ...], found: Comparison, mine: dict[str, Element], theirs: Iterable[Element]
) -> Iterator[Measurement]:
    """What was not compared, or not wholly."""
    if aside:
        message = f"{listed(aside)} {'are' if len(aside) > 1 else 'is'} not part of the circuit, and not compared"
        fault = Fault(message, "reference class or connections say that nothing flows there", "nothing", "note")
        yield Measurement(parts=aside, what=message, fault=fault)
    partner = {here: there for there, here in found.parts}
    lacking: dict[tuple[str, ...], list[str]] = {}
    for element in theirs:
        meant = mine.get(partner.get(element.ref, ""))
        if meant is None or element.kind == "section":
            continue
        lost = tuple(name for name, _ in meant.aspects if element.aspect(name) is None)
        if lost and board.record(element.ref) is None:
            lacking.setdefault(lost, []).append(element.ref)
    for lost, refs in lacking.items():
        message = f"{listed(refs)} {'do' if len(refs) > 1 else 'does'} not state {listed(lost)}: not compared"
        fault = Fault(message, "only value and reference class are known", "give back the fields", "note")
        yield Measurement(parts=tuple(refs), what=message, fault=fault)


# --- words ----------------------------------------------------------------------------------------


def _net(wire: Wire) -> str:
    if not wire.here:
        return f"{wire.there}, which the netlist does not have" if wire.there else "nothing"
    return wire.here if wire.there in ("", wire.here) else f"{wire.here} ({wire.there} in the spec)"


def _moved(pin: Moved) -> str:
    wants = f"wants it on {_net(pin.wanted)}" if pin.wanted != Wire() else "leaves it open"
    return f"{pin.ref} pin {pin.pin} is on {_net(pin.found)}, the spec {wants}"


def _pins(pins: Iterable[Moved]) -> str:
    return listed(f"{pin.ref} pin {pin.pin}" for pin in pins)


def _between(wires: tuple[Wire, ...]) -> str:
    if not wires:
        return ", on no net"
    if len(wires) > 3:
        return f" on {len(wires)} nets"
    return f" {'between' if len(wires) > 1 else 'on'} {listed(_net(wire) for wire in wires)}"


def _part(d: Difference) -> str:
    """A part that has no partner: kind, value and catalogue part."""
    held = {name: text for name, text, _ in d.aspects}
    return _words({name: held[name] for name in ("kind", "value", "part") if name in held})


def _changes(d: Difference) -> tuple[str, str]:
    """What a part is and what it should be; ratings only where the parts are the same but for them."""
    names = [name for name, _, _ in d.aspects]
    shown = [n for n in ("kind", "value", "part") if n in names] or names
    sides = []
    for side in (1, 2):
        held = {aspect[0]: aspect[side] for aspect in d.aspects if aspect[side]}
        sides.append(_words({name: held[name] for name in shown if name in held}) or "not stated")
    return sides[0], sides[1]


def _words(held: dict[str, str]) -> str:
    """Aspects in a row, the catalogue part behind them in brackets."""
    words = [_aspect(name, text) for name, text in held.items() if name != "part"]
    if "part" in held:
        words.append(f"({held['part']})" if words else held["part"])
    return " ".join(words)


def _aspect(name: str, text: str) -> str:
    """One aspect with its unit."""
    if name == "kind":
        return "amplifier" if text == "package" else text
    if name == "value":
        try:
            return value_text(read_value(text))
        except QuantityError:
            try:
                return value_text(float(text))
            except ValueError:
                return text or "without value"
    if name in UNITS:
        return f"{name} {format_quantity(float(text), UNITS[name])}"
    return text
