"""Supply nets by what they carry: which go without the name they should have, and which are one net.

The names are those of the netlist conventions: ``0V``, ``V+`` and ``V-`` behind the diodes, ``BUS+`` and ``BUS-``
at the header. What a net is comes from the header's pins and the diodes; a name is only held against that.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from modgen.analysis.board import Board
from modgen.catalogue.records import Amplifier
from modgen.rules.support import (
    HEADER_GROUND,
    HEADER_NEGATIVE,
    HEADER_POSITIVE,
    MOST_FILTER,
    header_nets,
    header_turned,
    listed,
    pins_text,
)

#: every name that a supply net may have
NAMES = ("0V", "V+", "V-", "BUS+", "BUS-")
#: names of nets in words
WORDS = {
    "0V": "0 V",
    "V+": "the protected positive rail",
    "V-": "the protected negative rail",
    "BUS+": "the positive supply at the header",
    "BUS-": "the negative supply at the header",
}
#: where a supply stands: above, on or below 0 V
LEVELS = {"BUS+": 1, "V+": 1, "0V": 0, "BUS-": -1, "V-": -1}


@dataclass(frozen=True)
class Unnamed:
    """A supply that goes under no name, or under one of its own.

    ``nets`` are where it seems to be; ``where`` says why, in words. ``blinds`` tells whether the other rules can
    make anything of the netlist without the name.
    """

    name: str
    nets: tuple[str, ...]
    where: str
    blinds: bool


def header_pins(board: Board, name: str) -> tuple[str, ...]:
    """The header's pins for ``0V``, ``BUS+`` or ``BUS-``, turned round where the header is."""
    positive, negative = HEADER_POSITIVE, HEADER_NEGATIVE
    if header_turned(board):
        positive, negative = negative, positive
    return {"0V": HEADER_GROUND, "BUS+": positive, "BUS-": negative}[name]


def unnamed(board: Board) -> tuple[Unnamed, ...]:
    """Every supply that the board has and that no net is named for.

    Parameters
    ----------
    board
        The netlist seen as electronics.

    Returns
    -------
    tuple of Unnamed
        None for a netlist with neither amplifiers nor a header. A rail whose pins are on another supply's net is
        not nameless but missing, which other rules say; 0 V is always needed.
    """
    known = board.netlist.by_net
    if not board.sections and not board.parts_of("header"):
        return ()
    out = []
    if "0V" not in known:
        nets = header_nets(board, HEADER_GROUND)
        out.append(Unnamed("0V", nets, _where(board, nets, header=HEADER_GROUND), blinds=True))
    for name, sign in (("V+", 1), ("V-", -1)):
        fed = _fed(board, sign)
        if name not in known and fed and not set(fed) & set(NAMES):
            out.append(Unnamed(name, fed, _where(board, fed, sign=sign), blinds=True))
    for name in ("BUS+", "BUS-"):
        pins = header_pins(board, name)
        nets = header_nets(board, pins)
        if name not in known and nets and not set(nets) & set(NAMES):
            out.append(Unnamed(name, nets, _where(board, nets, header=pins), blinds=False))
    return tuple(out)


def blind(board: Board) -> str:
    """Why rules that follow currents and voltages can make nothing of a netlist; ``""`` when they can.

    Parameters
    ----------
    board
        The netlist seen as electronics.

    Returns
    -------
    str
        A supply has no name of its own, or two of different sign are one net.
    """
    nameless = [supply.name for supply in unnamed(board) if supply.blinds]
    if nameless:
        return f"there is no net named {listed(nameless)}"
    for net, supplies in sorted(carried(board).items()):
        if len({LEVELS[supply] for supply in supplies}) > 1:
            return f"net {net} carries {listed(sorted(supplies, key=NAMES.index))}"
    return ""


def _fed(board: Board, sign: int) -> tuple[str, ...]:
    """Nets of all packages' supply pins of one sign; the lower one counts only where it is not 0 V."""
    grounds = {"0V", *header_nets(board, HEADER_GROUND)}
    found = {s.positive if sign > 0 else s.negative for s in board.sections}
    return tuple(sorted(net for net in found if net and net not in grounds))


def _where(board: Board, nets: Iterable[str], *, header: tuple[str, ...] = (), sign: int = 0) -> str:
    """Which pins are on these nets, in words."""
    said = []
    for net in nets:
        pins = []
        for ref in board.refs:
            record = board.record(ref)
            wanted: tuple[str, ...] = ()
            if header and board.kind(ref) == "header":
                wanted = header
            elif sign and isinstance(record, Amplifier):
                wanted = (record.positive_pin if sign > 0 else record.negative_pin,)
            on = [pin for pin in wanted if board.net(ref, pin) == net]
            if on:
                pins.append(pins_text(ref, on))
        if pins:
            said.append(f"{listed(pins)} {'are' if len(pins) > 1 or pins[0].startswith('pins') else 'is'} on {net}")
    return "; ".join(said)


# --- what each net carries -------------------------------------------------------------------------


def carried(board: Board) -> dict[str, dict[str, str]]:
    """What each supply net carries, and how one sees that.

    Parameters
    ----------
    board
        The netlist seen as electronics.

    Returns
    -------
    dict
        Net to a dict from supply name to evidence in words: ``{"0V": {"0V": "pins 3 to 8 of J1"}}``. A net with
        more than one supply is a short. The header's pins say where a bus is, a diode that conducts from or to it
        where its protected rail is.
    """
    out: dict[str, dict[str, str]] = {}

    def say(net: str | None, supply: str, evidence: str) -> None:
        if net is not None:
            known = out.setdefault(net, {})
            known[supply] = f"{known[supply]} and {evidence}" if supply in known else evidence

    buses: list[tuple[str, str, str]] = []  # net, its supply, the pin of a diode that conducts rightly
    for name, rail, near in (("0V", "", ""), ("BUS+", "V+", "2"), ("BUS-", "V-", "1")):
        for ref in board.parts_of("header"):
            pins = header_pins(board, name)
            by_net = {net: [pin for pin in pins if board.net(ref, pin) == net] for net in header_nets(board, pins)}
            for net, on in by_net.items():
                if on:
                    say(net, name, pins_text(ref, on))
                    if rail:
                        buses.append((net, rail, near))
    for bus, rail, near in dict.fromkeys(buses):
        far = "1" if near == "2" else "2"
        for ref in board.parts_of("diode"):
            if board.net(ref, near) == bus:
                for net in _behind(board, board.net(ref, far), set(out)):
                    say(net, rail, pins_text(ref, (far,)))
    for name in NAMES:
        if name in board.netlist.by_net and name not in out:
            say(name, name, "its name")
    return out


def _behind(board: Board, net: str | None, stop: set[str]) -> tuple[str, ...]:
    """A net and those behind filter resistors, not passing what is a supply already."""
    if net is None:
        return ()
    stop = stop | {s.output for s in board.sections if s.output}  # what an amplifier drives is no rail
    found, queue = [net], [net]
    while queue:
        for step in board.between(queue.pop(), "resistor"):
            value = board.value(step.ref)
            if value is not None and value <= MOST_FILTER and step.net not in stop | set(found):
                found.append(step.net)
                queue.append(step.net)
    return tuple(found)
