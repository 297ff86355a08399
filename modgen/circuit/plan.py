"""What the circuit shall be: the design in the words of the netlist, before any library has touched it.

The plan is the one description that the circuit is made from and that the circuit, read back, is held
against.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping
from dataclasses import dataclass

from modgen.circuit.text import fields_of
from modgen.design.model import Design, Placed
from modgen.netlist.model import Net, Netlist, Part
from modgen.netlist.order import sorted_nets, sorted_parts


class CircuitMismatch(Exception):  # noqa: N818 - it says what happened
    """The built circuit is not the one that was designed: a fault of the program, not of the user."""

    def __init__(self, differences: list[str]) -> None:
        self.differences = tuple(differences)
        super().__init__("the circuit differs from the design: " + "; ".join(differences))


@dataclass(frozen=True)
class PlannedPart:
    """One part to be made. ``tag`` tells it from every other part of its block, whatever its number."""

    part: Part
    tag: str
    placed: Placed


@dataclass(frozen=True)
class Plan:
    """Everything to be made: ``netlist`` is what must come out, ``open_pins`` what shall stay unconnected."""

    netlist: Netlist
    parts: tuple[PlannedPart, ...]
    open_pins: tuple[tuple[str, str], ...]
    blocks: tuple[str, ...]


def block_of(channel: int) -> str:
    """The name of a channel's hierarchical block: ``CH3``; empty for shared parts."""
    return f"CH{channel}" if channel else ""


def _tags(parts: tuple[Placed, ...]) -> list[str]:
    """A tag for each part, made of its role and a count within its block.

    The library derives a part's identity from block and tag, and a layout editor finds its footprints again
    by that identity. So tags do not use references: one channel more numbers the parts anew, but the
    capacitor of channel 1 stays the same part.
    """
    seen: Counter[tuple[int, str]] = Counter()
    tags = []
    for placed in parts:
        stem = f"{placed.role}-{placed.serves}" if placed.serves else placed.role
        seen[(placed.channel, stem)] += 1
        tags.append(f"{stem}-{seen[(placed.channel, stem)]}")
    return tags


def _unwritable(text: str) -> bool:
    """Whether the netlist format cannot hold a text: backslash, line break or another control character."""
    return "\\" in text or not text.isprintable()


def _texts(plan: Netlist, parts: tuple[Placed, ...]) -> list[str]:
    """Every text that goes into the netlist."""
    out = [plan.title, *(net.name for net in plan.nets)]
    for part in plan.parts:
        out += [part.ref, part.value, part.land_pattern, *(text for _, text in part.fields)]
    for placed in parts:
        out += [placed.record.description, *(pin.name for pin in placed.record.pins)]
    return out


def plan_of(design: Design, land_patterns: Mapping[str, str]) -> Plan:
    """The plan of a design.

    Parameters
    ----------
    design
        The module.
    land_patterns
        Names of one's own layout library, by the computed land-pattern name.

    Returns
    -------
    Plan
        Parts, nets, blocks and open pins.

    Raises
    ------
    CircuitMismatch
        When the design contradicts itself: a reference or pin twice, a pin that the part does not have,
        a text that the format cannot hold.
    """
    wrong: list[str] = []
    nets: dict[str, list[tuple[str, str]]] = {}
    open_pins: list[tuple[str, str]] = []
    planned: list[PlannedPart] = []
    for ref, count in Counter(placed.ref for placed in design.parts).items():
        if count > 1:
            wrong.append(f"{ref} stands for {count} parts")
    for placed, tag in zip(design.parts, _tags(design.parts), strict=True):
        known = {pin.number for pin in placed.record.pins}
        for number, count in Counter(number for number, _ in placed.pins).items():
            if number not in known:
                wrong.append(f"{placed.ref} has no pin {number} ({placed.record.key})")
            if count > 1:
                wrong.append(f"{placed.ref} pin {number} is connected {count} times")
        for number, net in placed.pins:
            if net:
                nets.setdefault(net, []).append((placed.ref, number))
            else:
                open_pins.append((placed.ref, number))
        pattern = placed.record.land_pattern
        block = block_of(placed.channel)
        part = Part(
            ref=placed.ref,
            value=placed.value,
            land_pattern=land_patterns.get(pattern, pattern),
            fields=fields_of(placed),
            sheet=f"/{block}/" if block else "/",
        )
        planned.append(PlannedPart(part, tag, placed))
    netlist = Netlist(
        title=design.title,
        parts=sorted_parts(p.part for p in planned),
        nets=sorted_nets(Net(name, tuple(pins)) for name, pins in nets.items()),
    )
    wrong += [
        f"the netlist cannot hold the text {text!r}"
        for text in sorted({text for text in _texts(netlist, design.parts) if _unwritable(text)})
    ]
    if wrong:
        raise CircuitMismatch(wrong)
    blocks = tuple(block_of(k) for k in sorted({p.channel for p in design.parts if p.channel}))
    return Plan(netlist, tuple(planned), tuple(sorted(open_pins)), blocks)


def differences(planned: Netlist, built: Netlist) -> list[str]:
    """What differs between two netlists, one line each: parts, values, fields, blocks, every pin."""
    out = []
    if planned.title != built.title:
        out.append(f"the title is {built.title!r}, not {planned.title!r}")
    before, after = {p.ref: p for p in planned.parts}, {p.ref: p for p in built.parts}
    for ref in sorted(before.keys() | after.keys()):
        if ref not in after:
            out.append(f"{ref} is missing")
        elif ref not in before:
            out.append(f"{ref} was not designed")
        elif before[ref] != after[ref]:
            out.append(f"{ref} is {after[ref]}, not {before[ref]}")
    for pin in sorted(planned.net_of.keys() | built.net_of.keys()):
        was, now = planned.net_of.get(pin, ""), built.net_of.get(pin, "")
        if was != now:
            out.append(f"{pin[0]} pin {pin[1]} is on {now or 'nothing'}, not on {was or 'nothing'}")
    if not out and (planned.parts, planned.nets) != (built.parts, built.nets):
        out.append("a part or a pin stands twice")
    return out
