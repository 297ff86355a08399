"""A board as elements that can be compared: what each part is, as far as the netlist says it.

What may change places without anybody noticing gets one slot: the ends of a resistor, the plates of an unpolarised
capacitor; a package is an element with its supply pins, and one for each section. References, net names, land
patterns, sheets and roles are not looked at.
"""

from __future__ import annotations

from modgen.analysis.board import Board
from modgen.catalogue.records import Amplifier
from modgen.netlist.elements import MECHANICAL, MEMBER, PACKAGE, Element, Pin
from modgen.units import QuantityError, read_value

#: kinds whose value is a number; of the others the part says what they are
NUMERIC = ("resistor", "capacitor", "control")
#: figures that are compared where both netlists have them
RATINGS = ("tolerance", "voltage", "power")


def without_function(board: Board) -> tuple[str, ...]:
    """Parts that are on the board without being part of the circuit.

    Parameters
    ----------
    board
        The netlist seen as electronics.

    Returns
    -------
    tuple of str
        Mounting holes, test points and logos by their reference class, as long as they join no two nets; and parts
        that nobody knows, on no net or on a single supply.
    """
    supplies = set(board.supply_nets)
    out = []
    for ref in board.refs:
        if board.record(ref) is not None:
            continue
        part = board.part(ref)
        nets = {net for pin in board.pins(ref) if (net := board.net(ref, pin)) is not None}
        if len(nets) > 1:
            continue
        unknown = not part.field("part") and not board.kind(ref) and nets <= supplies
        if part.letters in MECHANICAL or unknown:
            out.append(ref)
    return tuple(out)


def elements_of(board: Board, leave_out: tuple[str, ...] = ()) -> tuple[Element, ...]:
    """Every part of a board as one element, a package as one and one for each section.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    leave_out
        References that are not compared.
    """
    out: list[Element] = []
    for ref in board.refs:
        if ref in leave_out:
            continue
        record = board.record(ref)
        kind = board.kind(ref) or f"part {board.part(ref).letters}"
        if isinstance(record, Amplifier):
            out += _package(board, ref, record)
            continue
        alike = kind == "resistor" or (kind == "capacitor" and not board.polarised(ref))
        pins = tuple(Pin(pin, "end" if alike else pin, board.net(ref, pin) or "") for pin in board.pins(ref))
        out.append(Element(ref, kind, _aspects(board, ref, kind), pins))
    return tuple(out)


def _package(board: Board, ref: str, record: Amplifier) -> list[Element]:
    """A package: its supply pins and what has no function; then its sections."""

    def pin(number: str, slot: str) -> Pin:
        return Pin(number, slot, board.net(ref, number) or "")

    member = Pin("", MEMBER, f"{PACKAGE}{ref}")
    taken = {number for section in record.section_pins for number in section}
    supplies = {record.positive_pin: "supply+", record.negative_pin: "supply-"}
    rest = [n for n in board.pins(ref) if n not in taken]
    pins = [pin(n, supplies.get(n, f"pin {n}")) for n in rest]
    out = [Element(ref, "package", _aspects(board, ref, "amplifier"), (*pins, member))]
    for output, inverting, noninverting in record.section_pins:
        three = (pin(output, "output"), pin(inverting, "inverting"), pin(noninverting, "non-inverting"))
        out.append(Element(ref, "section", (), (*three, member)))
    return out


def _aspects(board: Board, ref: str, kind: str) -> tuple[tuple[str, str], ...]:
    """What is known of a part, sorted by name."""
    part, record = board.part(ref), board.record(ref)
    out = {}
    if kind in NUMERIC:
        out["value"] = _number(part.value)
    if record is not None:
        out["part"] = record.key
    elif part.field("part"):
        out["part"] = part.field("part")
    elif kind not in NUMERIC:
        out["value"] = part.value
    for name in RATINGS if kind in NUMERIC else ():
        number = board.rating(ref, name)
        if number is not None:
            out[name] = f"{number:.6g}"
    if kind == "capacitor":
        dielectric = part.field("dielectric") or getattr(record, "dielectric", "")
        if dielectric:
            out["dielectric"] = dielectric
    return tuple(sorted(out.items()))


def _number(text: str) -> str:
    """A value in one way of writing; 4.7k and 4k7 are one resistance."""
    try:
        return f"{read_value(text):.6g}"
    except QuantityError:
        return text
