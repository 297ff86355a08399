"""``circuit.cir``: the netlist as a deck that ngspice runs as it is and that prints the glide times.

The deck is written from the netlist and the catalogue: the circuit that is simulated is the one that is
laid out, so that the simulator's answer is a check on the computed times and not an echo of them. Every
input has a plug in it (its switched contact is open), every output has its load. A panel switch is a resistor for
each of its contacts, next to nothing or next to infinite; range switches are set for every run.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

from modgen.analysis.board import Board, Lane
from modgen.catalogue.records import Amplifier, Capacitor, Control, Diode
from modgen.outputs.spice_models import amplifier_model, diode_fit
from modgen.outputs.wording import answered

if TYPE_CHECKING:
    from modgen.netlist.model import Netlist
    from modgen.outputs.model import Job
    from modgen.spec.model import Spec

#: Steps a time constant: what the measured time is then off by interpolation is some parts in 1e5
STEPS_PER_TIME_CONSTANT = 100
#: The step's edge, in time constants: short against everything that is measured
EDGE = 1e-4
#: What is run: its name, where the control stands (fast end, half travel, slow end), whether in the slow range
Position = tuple[str, int, bool]
POSITIONS: tuple[Position, ...] = (("shortest", 0, False), ("middle", 1, True), ("longest", 2, True))
#: With a range switch also where the ranges meet
RANGE_POSITIONS: tuple[Position, ...] = (
    POSITIONS[0],
    ("fast_longest", 2, False),
    ("slow_shortest", 0, True),
    *POSITIONS[1:],
)
#: Resistance of a contact of a switch [ohm]
CLOSED, OPEN = 0.01, 1e12


@dataclass(frozen=True)
class Probe:
    """One channel: where to look, what is turned and how far in each run, and of which runs it tells."""

    channel: int
    out: str
    #: the resistor element that stands for the turned part of the control; "" when nothing turns
    element: str
    resistances: tuple[float, ...]
    time_constants: tuple[float, ...]
    #: contacts of a range switch, as resistor elements, each with its resistance in every run
    contacts: tuple[tuple[str, tuple[float, ...]], ...]
    told: tuple[str, ...]


@dataclass(frozen=True)
class Run:
    """One transient: the control's position, the step of the analysis, its end, the step's edge [s]."""

    position: str
    index: int
    step: float
    end: float
    edge: float


def number(value: float) -> str:
    """A number as ngspice reads it: no unit prefix, so that M and m cannot be confused."""
    return f"{value:.9g}"


def identifier(text: str) -> str:
    """A text as part of an element's or a model's name."""
    return re.sub(r"[^A-Za-z0-9]+", "_", text)


def element(letter: str, ref: str, suffix: str = "") -> str:
    """An element's name: the reference, behind the letter that ngspice tells kinds by when it has another."""
    name = identifier(ref) + suffix
    return name if name.upper().startswith(letter) else letter + name


class Nodes:
    """Node names for net names: lower case, letters, digits and underscores, no two the same; 0 V is ``0``."""

    def __init__(self, netlist: Netlist, ground: str) -> None:
        used = {"signal"}  # the deck's own node
        self._net_of = netlist.net_of
        self._names: dict[str, str] = {}
        for net in netlist.nets:
            plain = net.name.lower().replace("+", "p").replace("-", "n")
            # a node called 1 would pass for a number in an expression
            name = "n" + re.sub(r"[^a-z0-9]+", "_", plain).strip("_")
            while name in used:
                name += "x"
            used.add(name)
            self._names[net.name] = "0" if net.name == ground else name

    def pin(self, ref: str, pin: str) -> str | None:
        """The node a pin is on, None when it is open."""
        net = self._net_of.get((ref, pin))
        return None if net is None else self._names[net]

    def net(self, name: str) -> str:
        """The node of a net."""
        return self._names[name]


def spice_deck(job: Job) -> bytes:
    """The deck of a module's netlist.

    Parameters
    ----------
    job : Job
        The module, built and judged.

    Returns
    -------
    bytes
        ASCII text; ``ngspice -b`` prints one line per channel and position,
        ``CH1 shortest 4.83e-03`` [s], and one ``CH1 error -1.2e-03`` [V]. With a range switch ``shortest`` is in
        the fast range, ``middle`` and ``longest`` are in the slow one, and ``fast_longest`` and ``slow_shortest``
        tell where they meet.

    Raises
    ------
    ValueError
        When an amplifier's pin is open or a lane has no output socket: such a circuit cannot be simulated.
    """
    from jinja2 import Environment, PackageLoader, StrictUndefined

    board = Board.of(job.netlist, job.catalogue)
    nodes = Nodes(job.netlist, board.ground)
    ranged = any(lane.switch for lane in board.channels)
    positions = RANGE_POSITIONS if ranged else POSITIONS
    probes = tuple(_probe(board, lane, nodes, positions) for lane in board.channels)
    environment = Environment(
        loader=PackageLoader("modgen.outputs", "templates"),
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
        autoescape=False,
    )
    environment.filters["number"] = number
    start, stop = step_of(job.spec)
    text = environment.get_template("circuit.cir.j2").render(
        title=_ascii(job.netlist.title or job.spec.module),
        waived=tuple(_ascii(line) for line in answered(job.report)),
        spec=job.spec,
        blocks=tuple(_blocks(board, nodes)),
        supply=tuple(_supply(job.spec, board, nodes)),
        diodes=tuple(_diodes(board)),
        amplifiers=tuple(_amplifiers(board)),
        probes=probes,
        start=start,
        stop=stop,
        runs=tuple(_runs(job.spec, probes, positions)),
        ranged=ranged,
        remaining=remaining_of(job.spec),
    )
    return text.encode("ascii", "replace")


def step_of(spec: Spec) -> tuple[float, float]:
    """Where the input steps from and to [V]: about the middle of the span, where no output limits."""
    middle = (spec.signal.low + spec.signal.high) / 2
    size = spec.glide.step if spec.glide.measure == "settle" else (spec.signal.high - spec.signal.low) / 2
    return middle - size / 2, middle + size / 2


def remaining_of(spec: Spec) -> float:
    """Share of the step that remains when the measured time ends [-]."""
    if spec.glide.measure == "rise":
        return 0.1
    if spec.glide.measure == "time-constant":
        return math.exp(-1)
    return spec.glide.within / spec.glide.step


def _ascii(text: str) -> str:
    """A text for a comment of one line, in the letters that every simulator reads."""
    return re.sub(r"[^ -~]+", "?", text)


def _runs(spec: Spec, probes: tuple[Probe, ...], positions: tuple[Position, ...]) -> Iterator[Run]:
    """Analysis steps from the expected times: fine for the fastest lane, long enough for the slowest."""
    until = math.log(1 / remaining_of(spec)) + 1.0
    for index, (position, _, _) in enumerate(positions):
        fastest = min(probe.time_constants[index] for probe in probes)
        slowest = max(probe.time_constants[index] for probe in probes)
        edge = EDGE * fastest
        yield Run(position, index, fastest / STEPS_PER_TIME_CONSTANT, until * slowest + edge, edge)


def _probe(board: Board, lane: Lane, nodes: Nodes, positions: tuple[Position, ...]) -> Probe:
    if not lane.output_nets:
        raise ValueError(f"channel {lane.channel} has no output socket to look at")
    fast, slow = (
        sum(1 / sum(1 / board.capacitance(ref).nominal for ref in branch.refs) for branch in branches)
        for branches in (lane.branches, lane.slow_branches)
    )
    series = sum(board.resistance(ref).nominal for ref in lane.isolating)
    turned = _positions(board, lane)
    resistances = tuple(turned[where] for _, where, _ in positions)
    contacts = []
    if lane.switch is not None:
        for contact in (contact for contact in board.contacts if contact.ref == lane.switch.ref):
            held = {True: lane.switch.slow, False: lane.switch.fast}
            states = tuple(CLOSED if held[slow] == contact.position else OPEN for _, _, slow in positions)
            contacts.append((_contact(contact.ref, contact.position), states))
    return Probe(
        channel=lane.channel,
        out=nodes.net(lane.output_nets[0]),
        element=_turned(board, lane) if lane.wiring.adjustable else "",
        resistances=resistances,
        time_constants=tuple((series + turned[where]) * (slow if late else fast) for _, where, late in positions),
        contacts=tuple(contacts),
        told=tuple(name for name, _, _ in (positions if lane.switch else POSITIONS)),
    )


def _contact(ref: str, position: str) -> str:
    """The element of a switch's contact."""
    return element("R", ref, "_A" if position == "1-2" else "_B")


def _positions(board: Board, lane: Lane) -> tuple[float, float, float]:
    """Resistance of the control at the fast end, at half travel and at the slow end [ohm]."""
    whole = board.resistance(lane.control).nominal
    if not lane.wiring.adjustable:
        return whole, whole, whole
    record = board.record(lane.control)
    if not isinstance(record, Control):
        return 0.0, whole / 2, whole
    end = max(record.end_resistance, record.end_share * whole)
    middle = record.middle if lane.wiring.rising else 1 - record.middle
    return end, max(end, middle * whole), whole


def _turned(board: Board, lane: Lane) -> str:
    """The element between the wiper and the end of the track that is in the way."""
    reversed_ = lane.wiring.form in ("reversed", "loose-reversed")
    return element("R", lane.control, "_B" if reversed_ else "_A")


def _blocks(board: Board, nodes: Nodes) -> Iterator[tuple[str, tuple[str, ...]]]:
    """Heading and lines: shared parts, then each channel's."""
    turned = {lane.control: _turned(board, lane) for lane in board.channels}
    lines: dict[int, list[str]] = {0: []}
    for ref in board.refs:
        lines.setdefault(board.channel(ref), []).extend(_element(board, ref, nodes, turned.get(ref, "")))
    for channel in sorted(lines):
        yield f"Channel {channel}" if channel else "Shared parts", tuple(lines[channel])


def _supply(spec: Spec, board: Board, nodes: Nodes) -> Iterator[str]:
    rails = ((board.bus_positive, spec.rails.positive), (board.bus_negative, spec.rails.negative))
    for net, voltage in rails:
        if net in board.netlist.by_net:
            yield f"V{nodes.net(net)} {nodes.net(net)} 0 DC {number(voltage)}"


def _element(board: Board, ref: str, nodes: Nodes, turned: str) -> Iterator[str]:
    """The lines of one part; an open end carries nothing and has none."""
    name, kind = identifier(ref), board.kind(ref)
    if kind in ("resistor", "capacitor", "diode"):
        one, two = nodes.pin(ref, "1"), nodes.pin(ref, "2")
        if one is not None and two is not None:
            yield from _two_ended(board, ref, one, two)
    elif kind == "control":
        yield from _control(board, ref, nodes, turned)
    elif kind == "switch":
        yield from _switch(board, ref, nodes)
    elif kind == "amplifier":
        yield from _package(board, ref, nodes)
    elif kind == "jack" and (tip := nodes.pin(ref, "T")) is not None:
        outputs = {jack for lane in board.channels for jack in lane.output_jacks}
        if ref in outputs:
            yield f"RLOAD_{name} {tip} 0 {{load}}"
        else:
            yield f"RSOURCE_{name} signal {tip} {{source}}"


def _two_ended(board: Board, ref: str, one: str, two: str) -> Iterator[str]:
    name, kind, record = identifier(ref), board.kind(ref), board.record(ref)
    if isinstance(record, Diode):
        yield f"{element('D', ref)} {two} {one} DMOD_{identifier(record.key)}"
    elif kind == "resistor":
        yield f"{element('R', ref)} {one} {two} {number(board.resistance(ref).nominal)}"
    elif kind == "capacitor":
        yield f"{element('C', ref)} {one} {two} {number(board.capacitance(ref).nominal)}"
        if isinstance(record, Capacitor) and math.isfinite(record.insulation(record.voltage)):
            yield f"RINS_{name} {one} {two} {number(record.insulation(record.voltage))}"
    else:
        raise ValueError(f"{ref}: a {kind} that is not in the catalogue cannot be simulated")


def _control(board: Board, ref: str, nodes: Nodes, turned: str) -> Iterator[str]:
    one, wiper, three = (nodes.pin(ref, pin) for pin in ("1", "2", "3"))
    whole = number(board.resistance(ref).nominal)
    if wiper is None and one is not None and three is not None:
        yield f"{element('R', ref)} {one} {three} {whole}"
        return
    for letter, left, right in (("A", one, wiper), ("B", wiper, three)):
        half = element("R", ref, f"_{letter}")
        if left is not None and right is not None and left != right:
            # a half that nobody turns has all of the track but nothing flows in it, or it is a fixed part
            yield f"{half} {left} {right} {whole}" + ("  ; turned below" if half == turned else "")


def _switch(board: Board, ref: str, nodes: Nodes) -> Iterator[str]:
    """Both contacts, the switch in position 1-2."""
    for contact in board.contacts:
        if contact.ref == ref:
            ohms = CLOSED if contact.position == "1-2" else OPEN
            ends = f"{nodes.net(contact.common)} {nodes.net(contact.throw)}"
            yield f"{_contact(ref, contact.position)} {ends} {number(ohms)}  ; closed in position {contact.position}"


def _package(board: Board, ref: str, nodes: Nodes) -> Iterator[str]:
    record = board.record(ref)
    if not isinstance(record, Amplifier):
        raise ValueError(f"{ref}: an amplifier that is not in the catalogue cannot be simulated")
    for index, (out, inverting, direct) in enumerate(record.section_pins):
        section = f"{ref}{chr(ord('A') + index)}"
        pins = (direct, inverting, out, record.positive_pin, record.negative_pin)
        found = [nodes.pin(ref, pin) for pin in pins]
        if None in found:
            raise ValueError(f"{section}: pin {pins[found.index(None)]} is open, which cannot be simulated")
        yield f"X{identifier(section)} {' '.join(str(node) for node in found)} AMP_{identifier(record.type)}"


def _diodes(board: Board) -> Iterator[str]:
    """Models through the catalogue's typical forward drops about the current that flows."""
    current = sum(section.record.quiescent_typical for section in board.sections)
    seen: set[str] = set()
    for ref in board.parts_of("diode"):
        record = board.record(ref)
        if isinstance(record, Diode) and record.key not in seen:
            seen.add(record.key)
            emission, saturation = diode_fit(record, current)
            yield f".model DMOD_{identifier(record.key)} D(IS={number(saturation)} N={number(emission)})"


def _amplifiers(board: Board) -> Iterator[object]:
    seen: set[str] = set()
    for section in board.sections:
        if section.record.type not in seen:
            seen.add(section.record.type)
            yield amplifier_model(section.record, f"AMP_{identifier(section.record.type)}")
