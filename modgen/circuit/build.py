"""From the design to the circuit, its netlist and the text of its netlist file."""

from __future__ import annotations

import logging
import re
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass, replace
from types import MappingProxyType
from typing import Any

from modgen.circuit.library import SOURCE, library
from modgen.circuit.plan import CircuitMismatch, Plan, PlannedPart, differences, plan_of
from modgen.circuit.speed import fast_circuit
from modgen.design.model import Design
from modgen.netlist.model import Net, Netlist, Part
from modgen.netlist.order import sorted_nets, sorted_parts

#: nets that a supply drives (design conventions, section 8); the library's check wants to be told
RAILS = ("0V", "V+", "V-", "BUS+", "BUS-")
#: what the netlist file names as its origin: the program, since a path would differ from place to place
ORIGIN = "modgen"

_PIN_KINDS = {
    "passive": "PASSIVE",
    "input": "INPUT",
    "output": "OUTPUT",
    "supply+": "PWRIN",
    "supply-": "PWRIN",
}


@dataclass(frozen=True)
class Built:
    """A circuit as it was read back, and the text of its netlist file."""

    netlist: Netlist
    netlist_text: str


class _Heard(logging.Handler):
    """Keeps what a logger says from level warning up: (level, text)."""

    def __init__(self) -> None:
        super().__init__(logging.WARNING)
        self.messages: list[tuple[str, str]] = []

    def emit(self, record: logging.LogRecord) -> None:
        """Keep one message."""
        self.messages.append((record.levelname.lower(), record.getMessage().strip()))


@contextmanager
def _listening(logger: logging.Logger) -> Iterator[list[tuple[str, str]]]:
    """What a logger of the library says while the block runs."""
    heard = _Heard()
    logger.addHandler(heard)
    try:
        yield heard.messages
    finally:
        logger.removeHandler(heard)


def build(design: Design, land_patterns: Mapping[str, str] = MappingProxyType({})) -> Built:
    """Make the circuit of a design, check it against the design, and write its netlist.

    Parameters
    ----------
    design
        The module: every part with the net on each of its pins.
    land_patterns
        Names of one's own layout library, by the computed land-pattern name; others stay as they are.

    Returns
    -------
    Built
        The netlist read back from the circuit, with the messages of the library's own rule check, and
        the text of the netlist file. The same design gives the same text, everywhere.

    Raises
    ------
    CircuitMismatch
        When what was built is not what was designed.
    """
    plan = plan_of(design, land_patterns)
    with library() as skidl, _listening(skidl.logger.rt_logger) as complaints:
        circuit = _make(skidl, plan)
        netlist = _read_back(circuit, plan.netlist.title)
        wrong = differences(plan.netlist, netlist) + _open_differences(circuit, plan)
        if wrong:
            raise CircuitMismatch(wrong)
        messages = _electrical_check(skidl, circuit)
        text = _reproducible(
            circuit.generate_netlist(tool=skidl.KICAD8, do_backup=False, track_src=False, track_abs_path=True),
            plan.netlist.title,
            1 + len(plan.blocks),
        )
        if complaints:
            # nothing in a circuit that was made of unique names and connected once deserves a warning
            raise CircuitMismatch(sorted({text for _, text in complaints}))
    return Built(replace(netlist, library_messages=messages), text)


def _make(skidl: Any, plan: Plan) -> Any:
    """The library's circuit object: blocks, parts, nets."""
    circuit = fast_circuit(skidl)
    pins: dict[tuple[str, str], Any] = {}
    by_block: dict[str, list[PlannedPart]] = {block: [] for block in ("", *plan.blocks)}
    for planned in plan.parts:
        by_block[planned.part.sheet.strip("/")].append(planned)
    for block, members in by_block.items():
        if block:
            with skidl.Group(block, tag=block, circuit=circuit):
                for planned in members:
                    pins.update(_make_part(skidl, circuit, planned))
        else:
            for planned in members:
                pins.update(_make_part(skidl, circuit, planned))
    for net in plan.netlist.nets:
        # all pins at once: joining them one by one takes time with the square of their number
        made = skidl.Net(net.name, circuit)
        made.connect([pins[pin] for pin in net.pins])
        if net.name in RAILS:
            made.drive = skidl.POWER
    if plan.open_pins:
        circuit.NC.connect([pins[pin] for pin in plan.open_pins])
    return circuit


def _make_part(skidl: Any, circuit: Any, planned: PlannedPart) -> dict[tuple[str, str], Any]:
    """One part in the circuit; its pins by reference and number."""
    part, record = planned.part, planned.placed.record
    kinds = skidl.Pin.types
    made = skidl.Part(
        name=record.key,
        tool=skidl.SKIDL,
        circuit=circuit,
        # references are given one line on; until then the part has one that no part of ours can have
        ref_prefix="?",
        tag=planned.tag,
        pins=[skidl.Pin(num=pin.number, name=pin.name, func=kinds[_PIN_KINDS[pin.kind]]) for pin in record.pins],
        value=part.value,
        footprint=part.land_pattern,
        description=record.description,
    )
    made.ref = part.ref
    for name, text in part.fields:
        made.fields[name] = text
    return {(part.ref, pin.num): pin for pin in made.pins}


def _read_back(circuit: Any, title: str) -> Netlist:
    """The circuit as the library has it."""
    parts = [
        Part(
            ref=str(part.ref),
            value=str(part.value),
            land_pattern=str(part.footprint),
            fields=tuple(sorted((str(name), str(text)) for name, text in part.fields.items())),
            sheet="/".join(part.hiertuple) + "/",
        )
        for part in circuit.parts
    ]
    nets = [
        Net(str(net.name), tuple((str(pin.part.ref), str(pin.num)) for pin in net.pins))
        for net in circuit.nets
        if net is not circuit.NC
    ]
    return Netlist(title, sorted_parts(parts), sorted_nets(nets))


def _open_differences(circuit: Any, plan: Plan) -> list[str]:
    """Pins that should be marked as open and are not, or the other way round."""
    marked = sorted((str(pin.part.ref), str(pin.num)) for pin in circuit.NC.pins)
    wanted = list(plan.open_pins)
    return [] if marked == wanted else [f"the open pins are {marked}, not {wanted}"]


def _electrical_check(skidl: Any, circuit: Any) -> tuple[tuple[str, str], ...]:
    """What the library's own rule check says of the circuit: (level, text), sorted."""
    with _listening(skidl.erc_logger) as messages:
        circuit.ERC()
    return tuple(sorted(messages))


def _reproducible(text: str, title: str, sheets: int) -> str:
    """The library's text with a title and an origin, for which it has no interface."""
    head, mark, body = text.partition("(components")
    head, sources = re.subn(rf'\(source "[^"]*{SOURCE}"\)', f'(source "{ORIGIN}")', head)
    found = sources, head.count("(title)"), head.count('(date "")')
    if not mark or found != (1 + sheets, sheets, 1):
        raise CircuitMismatch([f"the library writes another head than expected: {found} for {sheets} sheets"])
    quoted = title.replace('"', '\\"')
    head = head.replace("(title)", f'(title "{quoted}")')
    return head + mark + body.rstrip("\n") + "\n"
