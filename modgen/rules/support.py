"""What several rules ask of a board: DC paths, closed contacts, rails traced from the header, wording."""

from __future__ import annotations

import heapq
from collections.abc import Callable, Collection, Iterable
from dataclasses import dataclass, replace

from modgen.analysis.board import Board
from modgen.analysis.model import Headroom
from modgen.rules.contract import Fault, Measurement
from modgen.units import format_quantity

#: Pins of the 2x5 power header (design convention; common practice).
HEADER_NEGATIVE = ("1", "2")
HEADER_GROUND = ("3", "4", "5", "6", "7", "8")
HEADER_POSITIVE = ("9", "10")

#: A resistor in a rail up to this is a filter [ohm]; above, it would drop volts. Common practice, no source.
MOST_FILTER = 100.0

#: a switched contact: socket, tip net, switch net
Contact = tuple[str, str, str]


#: what stands this near to a limit is on it [-]. Source: the rounding of binary fractions.
ROUNDING = 1e-9


def left(measured: float, limit: float) -> float:
    """Share of an upper limit that is left [-]; negative beyond it, 0 on it but for rounding.

    Parameters
    ----------
    measured
        What is held against the limit.
    limit
        The limit, in the same unit. At or below zero nothing is left of it: -1 for anything above.
    """
    if limit <= 0:
        return 0.0 if measured <= limit else -1.0
    return settled(1.0 - measured / limit)


def above(measured: float, limit: float) -> float:
    """How far a value stands above its lower limit, as a share of the limit [-]; negative below it.

    Parameters
    ----------
    measured
        What is held against the limit.
    limit
        The limit, in the same unit and above zero.
    """
    return settled(measured / limit - 1.0)


def settled(margin: float) -> float:
    """A margin, or 0 when only rounding keeps it from that."""
    return 0.0 if abs(margin) < ROUNDING else margin


def listed(names: Iterable[str]) -> str:
    """Names as people list them: ``U1``, ``U1 and U2``, ``U1, U2 and U3``."""
    words = list(names)
    if len(words) < 2:
        return "".join(words)
    return f"{', '.join(words[:-1])} and {words[-1]}"


# --- nets as one node while contacts are closed ----------------------------------------------------


def groups(pairs: Iterable[tuple[str, str]]) -> Callable[[str], str]:
    """Join pairs of nets; the result maps a net to the first name, in sorting order, of its group."""
    parent: dict[str, str] = {}

    def find(net: str) -> str:
        while parent.setdefault(net, net) != net:
            parent[net] = parent[parent[net]]
            net = parent[net]
        return net

    for a, b in pairs:
        low, high = sorted((find(a), find(b)))
        parent[high] = low
    return find


def closed_contacts(board: Board) -> tuple[Contact, ...]:
    """``(jack, tip net, switch net)`` of every switched contact that joins two nets with nothing plugged in."""
    return tuple(
        (jack.ref, jack.tip, jack.switch)
        for jack in board.jacks
        if jack.tip and jack.switch and jack.tip != jack.switch
    )


#: Switches that share nets and are tried in every combination [switches]; of more, all stand alike. Our choice.
MOST_TOGETHER = 4


def switch_positions(board: Board) -> tuple[tuple[Contact, ...], ...]:
    """Closed contacts of the panel switches, as ``(switch, common net, throw net)``, in all their positions.

    Switches that meet on a net are tried in every combination; those that do not are set at once, since no
    position of the one matters to the other. Without a switch there is one state, with nothing closed.
    """
    join = groups((contact.common, contact.throw) for contact in board.contacts)
    clusters: dict[str, list[str]] = {}
    for contact in board.contacts:
        refs = clusters.setdefault(join(contact.common), [])
        if contact.ref not in refs:
            refs.append(contact.ref)
    tried: list[list[tuple[Contact, ...]]] = []
    for refs in clusters.values():
        states = list(board.switch_states(refs))
        if len(refs) > MOST_TOGETHER:
            states = [states[0], states[-1]]
        tried.append([tuple((c.ref, c.common, c.throw) for c in state) for state in states])
    most = max((len(states) for states in tried), default=1)
    return tuple(tuple(c for states in tried for c in states[n % len(states)]) for n in range(most))


# --- DC paths -----------------------------------------------------------------------------------


def least_path(
    board: Board,
    start: str,
    ends: Iterable[str],
    contacts: Iterable[Contact] = (),
    around: Collection[str] = (),
) -> tuple[float, str, tuple[str, ...]] | None:
    """The way of least resistance from a net to one of several, through resistors and controls.

    Parameters
    ----------
    board
        The board.
    start
        Where it begins.
    ends
        Nets at which it may end.
    contacts
        Closed jack contacts, as of :func:`closed_contacts`, that may be used at no resistance.
    around
        Nets that may not be passed on the way, though it may begin or end there.

    Returns
    -------
    tuple or None
        Resistance [ohm] (a part without a readable value counts as 0), the net where it ends, and the
        parts on the way; None when there is none.
    """
    goals = set(ends)
    joined: dict[str, list[tuple[str, str]]] = {}
    for jack, a, b in contacts:
        joined.setdefault(a, []).append((jack, b))
        joined.setdefault(b, []).append((jack, a))
    heap: list[tuple[float, str, tuple[str, ...]]] = [(0.0, start, ())]
    done: set[str] = set()
    while heap:
        ohms, at, refs = heapq.heappop(heap)
        if at in done:
            continue
        done.add(at)
        if at in goals:
            return ohms, at, refs
        if at != start and at in around:
            continue
        for step in board.between(at, "resistor", "control"):
            if step.net not in done:
                heapq.heappush(heap, (ohms + (board.value(step.ref) or 0.0), step.net, (*refs, step.ref)))
        for jack, net in joined.get(at, ()):
            if net not in done:
                heapq.heappush(heap, (ohms, net, (*refs, jack)))
    return None


# --- rails traced from the header ------------------------------------------------------------------


@dataclass(frozen=True)
class Rail:
    """One supply as it is wired: at the header, the diodes in series, and behind them.

    ``sign`` is +1 or -1. ``diodes`` are those between the bus and nets that feed supply pins; ``protected``
    are these nets, also behind a filter resistor.
    """

    sign: int
    bus: str
    diodes: tuple[str, ...]
    protected: tuple[str, ...]

    @property
    def name(self) -> str:
        """How people call it."""
        return "positive rail" if self.sign > 0 else "negative rail"

    @property
    def nets(self) -> tuple[str, ...]:
        """Every net of the rail."""
        return (self.bus, *self.protected)


def header_nets(board: Board, pins: Iterable[str]) -> tuple[str, ...]:
    """Nets on these pins of the power headers, sorted."""
    found = {board.net(ref, pin) for ref in board.parts_of("header") for pin in pins}
    return tuple(sorted(net for net in found if net))


def ground_nets(board: Board) -> tuple[str, ...]:
    """The nets that are 0 V: on the header's middle pins, and the one of that name."""
    return tuple(sorted({*header_nets(board, HEADER_GROUND), board.ground}))


def rails(board: Board) -> tuple[Rail, ...]:
    """The rails, positive first, traced from the header pins; by name when there is no header.

    A net that an amplifier is not fed from is still a rail: what matters is where the bus gets to. Of a header
    that is wired the wrong way round the rails are those that the board means (see :func:`header_turned`).
    """
    grounds = set(ground_nets(board))
    headers = bool(board.parts_of("header"))
    fed = {net for s in board.sections for net in (s.positive, s.negative) if net} - grounds
    positive_pins, negative_pins = HEADER_POSITIVE, HEADER_NEGATIVE
    if header_turned(board):
        positive_pins, negative_pins = negative_pins, positive_pins
    out = []
    for sign, pins, bus_name, name in (
        (1, positive_pins, board.bus_positive, board.positive),
        (-1, negative_pins, board.bus_negative, "V-"),
    ):
        buses = header_nets(board, pins) if headers else ()
        if not headers:
            buses = tuple(net for net in (bus_name, name) if net in board.netlist.by_net)[:1]
        for bus in buses:
            if bus in grounds:
                continue
            stop = {bus, *grounds}
            diodes = [(n.ref, _filtered(board, n.net, stop)) for n in board.between(bus, "diode")]
            diodes = [(ref, nets) for ref, nets in diodes if not nets & grounds]
            # a diode that leads to no supply pin clamps something; it is not in the rail
            series = [(ref, nets) for ref, nets in diodes if nets & fed] or diodes
            behind = sorted({net for _, nets in series for net in nets})
            out.append(Rail(sign, bus, tuple(ref for ref, _ in series), tuple(behind)))
    return tuple(out)


def _filtered(board: Board, net: str, stop: set[str]) -> set[str]:
    """A net and those behind resistors that are no more than a filter in the rail."""
    stop = stop | {s.output for s in board.sections if s.output}  # what an amplifier drives is no rail
    found, queue = {net}, [net]
    while queue:
        for step in board.between(queue.pop(), "resistor"):
            value = board.value(step.ref)
            if value is not None and value <= MOST_FILTER and step.net not in found | stop:
                found.add(step.net)
                queue.append(step.net)
    return found


def header_turned(board: Board) -> bool:
    """Whether the header carries the negative supply where the positive one belongs, and the other way round.

    The diodes and the supply pins behind them say what a bus is meant to be; where they do not agree, or there are
    none, the names of the nets do. Diodes alone, or packages alone, the wrong way round are their own fault.
    """
    over = {s.positive for s in board.sections if s.positive}
    under = {s.negative for s in board.sections if s.negative} - set(ground_nets(board))
    at_positive = _meant(board, header_nets(board, HEADER_POSITIVE), over, under)
    at_negative = _meant(board, header_nets(board, HEADER_NEGATIVE), over, under)
    if at_positive is None:  # nothing at all is connected there
        return at_negative == 1
    return at_positive == -1 and at_negative in (1, None)


def _meant(board: Board, buses: tuple[str, ...], over: set[str], under: set[str]) -> int | None:
    """What nets at the header are meant to carry: 1 positive, -1 negative, 0 not known; None for no nets."""
    stop = {*buses, *ground_nets(board)}
    votes, names = set(), set()
    for bus in buses:
        for step in board.between(bus, "diode"):
            reached = _filtered(board, step.net, stop)
            if step.pin == "2" and reached & over:
                votes.add(1)
            if step.pin == "1" and reached & under:
                votes.add(-1)
        if bus in (board.bus_positive, board.positive):
            names.add(1)
        if bus in (board.bus_negative, "V-"):
            names.add(-1)
    if not buses:
        return None
    said = votes or names
    return said.pop() if len(said) == 1 else 0


def pins_text(ref: str, pins: Iterable[str]) -> str:
    """Pins of a part as people say them: ``pin 3 of J1``, ``pins 1 and 2 of J1``, ``pins 3 to 8 of J1``."""
    found = list(pins)
    numbers = [int(pin) for pin in found if pin.isdigit()]
    if len(found) > 2 and len(numbers) == len(found) and numbers == list(range(numbers[0], numbers[-1] + 1)):
        return f"pins {found[0]} to {found[-1]} of {ref}"
    return f"pin{'s' if len(found) > 1 else ''} {listed(found)} of {ref}"


def may_stay_open(board: Board, ref: str, pin: str) -> str:
    """Why a pin may be left open; ``""`` when it may not.

    The tip switch of a socket that feeds no amplifier input (an output socket) has nothing to normal, one throw of
    a panel switch may lead nowhere, and the negative pins of the header have nothing to feed on a board whose
    amplifiers stand on 0 V.
    """
    if ref not in board.netlist.by_ref:
        return ""
    kind = board.kind(ref)
    if kind == "jack" and pin == "TN" and not is_input(board, ref):
        return "an output socket normals nothing"
    if kind == "switch" and pin in ("1", "3"):
        used = [net for other in ("1", "2", "3") if other != pin and (net := board.net(ref, other))]
        if len(used) == 2 and all(len(board.on(net)) > 1 for net in used):
            return "a switch opens the way in one of its positions"
    if kind == "header":
        grounds = set(ground_nets(board))
        fed = {(s.negative in grounds) for s in board.sections}
        unused = HEADER_POSITIVE if header_turned(board) else HEADER_NEGATIVE
        if pin in unused and fed == {True} and not header_nets(board, unused):
            return "the board has no negative rail"
    return ""


def is_input(board: Board, ref: str) -> bool:
    """Whether a socket's tip leads to an amplifier input without being fed by an amplifier output.

    A socket that nothing leads to counts as an input: its switch contact would be as open as its tip.
    """
    tip, sleeve = board.net(ref, "T"), board.net(ref, "S")
    grounds = ground_nets(board)
    if tip in grounds and sleeve not in grounds:
        tip = sleeve  # tip and sleeve are exchanged: the signal is on the sleeve
    if tip is None:
        return True
    outputs = {s.output for s in board.sections if s.output}
    stop = set(board.supply_nets)
    # behind an amplifier's input another way round begins: a summing input is not fed by its own output
    inputs = {net for s in board.sections for net in (s.inverting, s.noninverting) if net}
    path = least_path(board, tip, outputs, around=stop | (inputs - outputs))
    return path is None


def is_polarised(board: Board, ref: str) -> bool:
    """Whether a capacitor has a + end."""
    return board.kind(ref) == "capacitor" and board.polarised(ref)


# --- headroom ------------------------------------------------------------------------------------


def headroom_measurement(stage: Headroom, fault: Fault) -> Measurement:
    """What a stage can do against what it must, at its tighter end.

    Parameters
    ----------
    stage
        From :func:`modgen.analysis.headroom.headrooms`.
    fault
        What is wrong when it does not fit; ``{needed}``, ``{can}`` and ``{way}`` (up to, down to) in its
        message are filled in.

    Returns
    -------
    Measurement
        Its margin is the distance to the limit as a share of half the range: of the limit itself, where the
        range lies evenly about 0 V. Where the low end is lost on a single supply, and the offset budget covers
        that, what is lost is held against the budget.
    """
    at_top = stage.can_high - stage.needed_high
    at_bottom = stage.needed_low + stage.allowance - stage.can_low
    needed, can, distance = (
        (stage.needed_high, stage.can_high, at_top)
        if at_top <= at_bottom
        else (stage.needed_low, stage.can_low, at_bottom)
    )
    texts = {
        "needed": format_quantity(needed, "voltage", 4),
        "can": format_quantity(can, "voltage", 4),
        "way": "up to" if at_top <= at_bottom else "down to",
    }
    half = (stage.can_high - stage.can_low) / 2
    margin = settled(distance / half) if half > 0 else -1.0
    if at_bottom < at_top and stage.shortfall > 0 and stage.allowance > 0 and margin >= 0:
        lost, most = (format_quantity(value, "voltage", 4) for value in (stage.shortfall, stage.allowance))
        return Measurement(
            parts=stage.parts,
            what=f"{stage.stage} {stage.subject}: the lowest {lost} are lost, of {most} that the offset budget covers",
            measured=stage.shortfall,
            limit=stage.allowance,
            unit="V",
            margin=left(stage.shortfall, stage.allowance),
            key="signal.span",
        )
    return Measurement(
        parts=stage.parts,
        what=f"{stage.stage} {stage.subject}: {texts['needed']} of {texts['can']}",
        measured=needed,
        limit=can,
        unit="V",
        margin=margin,
        fault=replace(fault, message=fault.message.format(**texts)) if margin < 0 else None,
        key="signal.span",
    )
