"""Supply states that are no fault of the board: header reversed, one rail missing, module off among others."""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator

from modgen.analysis.board import Board, Lane
from modgen.analysis.feeding import nets_after
from modgen.analysis.lanes import Feed
from modgen.analysis.model import Backfeed, MissingRail, RailPower, ReversedSupply
from modgen.analysis.parts import reference_order
from modgen.analysis.power import drop
from modgen.catalogue.records import Amplifier, Diode
from modgen.catalogue.records import Jack as JackRecord
from modgen.formulas.amplifier import clamp_current
from modgen.spec.model import Rails

#: forward drop of a junction that clamps [V]. Common practice, no source.
JUNCTION = 0.6
#: what a polarised capacitor bears the wrong way round [V]. Source: Vishay 038 RSU, document 28309.
LEAST_REVERSE = 1.0
#: pins of the power header: the ribbon's way round turns n into 11 - n (common practice)
_NEGATIVE, _POSITIVE, _LAST = ("1", "2"), ("9", "10"), 11


def reversed_supply(board: Board, rails: Rails) -> tuple[ReversedSupply, ...]:
    """Each rail with the power header plugged in the wrong way round.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    rails
        The supply at the power header.

    Returns
    -------
    tuple of ReversedSupply
        ``V+``, and ``V-`` when there is one; none without a power header.

    Notes
    -----
    Settled, the rail is empty and the diode keeps off what its bus net gets. A board that was running a moment
    ago still has its reservoirs charged: their voltage then stands on top. A diode counts when it conducts from
    bus to rail in normal use. What its leakage pulls at the rails flows back through the amplifiers' junctions,
    so that their supply pins see less than one junction the wrong way round. When nothing blocks, they see
    what the reversed bus nets say.
    """
    high = rails.positive * (1 + rails.tolerance)
    low = rails.negative * (1 + rails.tolerance)
    seen = _reversed_nets(board, low, high)
    if not seen:
        return ()
    diodes = {
        "V+": _diode(board, board.bus_positive, board.positive),
        "V-": _diode(board, "V-", board.bus_negative),
    }
    names = ["V+"] if board.single else ["V+", "V-"]
    ends: dict[str, float] = {}
    rows = []
    for name in names:
        sign = 1.0 if name == "V+" else -1.0
        bus_net = board.bus_positive if sign > 0 else board.bus_negative
        at = seen.get(bus_net, seen.get(name, 0.0))
        record = board.record(diodes[name]) if diodes[name] else None
        blocked = bool(diodes[name])
        # a rail that is wired straight to the bus, or only through a diode the wrong way round, gets what that gets
        ends[name] = 0.0 if blocked else at
        charge = high if sign > 0 else -low
        rows.append((name, at, diodes[name], record, blocked, max(0.0, -sign * at), charge))
    across = ends["V+"] - ends.get("V-", 0.0)
    if all(row[4] for row in rows):
        across = -JUNCTION
    return tuple(
        ReversedSupply(
            rail=name,
            diode=diode,
            bus=at,
            blocked=blocked,
            settled=reverse if blocked else 0.0,
            leakage=record.leakage if isinstance(record, Diode) and reverse else 0.0,
            amplifiers=across,
            measured=reverse + charge if blocked else 0.0,
            limit=(board.rating(diode, "reverse_voltage") or 0.0) if diode else 0.0,
        )
        for name, at, diode, record, blocked, reverse, charge in rows
    )


def _reversed_nets(board: Board, low: float, high: float) -> dict[str, float]:
    """What each net on a power header gets with the header the wrong way round [V]; the greatest magnitude."""
    out: dict[str, float] = {}
    for ref in board.parts_of("header"):
        for pin in board.pins(ref):
            net = board.net(ref, pin)
            if net is None or not pin.isdigit():
                continue
            mirror = str(_LAST - int(pin))
            voltage = low if mirror in _NEGATIVE else high if mirror in _POSITIVE else 0.0
            if abs(voltage) >= abs(out.get(net, 0.0)):
                out[net] = voltage
    return out


def _diode(board: Board, anode: str, cathode: str) -> str:
    """The diode from one net to another that conducts that way; ``""`` when there is none or something bridges it."""
    if board.ties(anode, cathode, "resistor"):
        return ""
    between = board.ties(anode, cathode, "diode")
    right = [ref for ref in between if board.net(ref, "2") == anode and board.net(ref, "1") == cathode]
    return right[0] if right and len(right) == len(between) else ""


def missing_rails(board: Board, rails: Rails, powers: Iterable[RailPower]) -> tuple[MissingRail, ...]:
    """Each rail at 0 V on the bus while the other one stands.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    rails
        The supply at the power header.
    powers
        The rails, from :func:`modgen.analysis.power.rail_powers`; their currents decide the drop of a diode.

    Returns
    -------
    tuple of MissingRail
        ``V+`` missing, then ``V-`` missing; none on a single supply, where the module is then off.

    Notes
    -----
    The bus holds the missing rail at 0 V: the supply's output and what else hangs on it. The current of the
    amplifiers flows on into that rail, and through its diode, which conducts that way, into the bus: the rail
    stands one drop on the wrong side of 0 V. That is what the reservoir bears the wrong way round. With the
    contact open instead, nothing holds the rail, and it may go as far as the other one.
    """
    found = {power.name: power for power in powers}
    if board.single or rails.single or set(found) != {"V+", "V-"}:
        return ()
    volts = max(rails.positive, -rails.negative) * (1 + rails.tolerance)
    out = []
    for name, other, sign in (("V+", "V-", 1.0), ("V-", "V+", -1.0)):
        # the whole board's current, since it comes from the rail that is there
        through = drop(board, found[name].diode, found[other].current_max, worst=True)
        stands = found[other].protected_high
        here = -sign * through
        low, high = min(here, stands), max(here, stands)
        worst = _reservoir(board, name)
        # a neighbour at the missing side drives an input beyond a supply pin that stands on the other side
        driven = [_input_current(board, lane, volts + through) for lane in board.channels if lane.input_net]
        out.append(
            MissingRail(
                rail=name,
                low=low,
                high=high,
                input_current=max(driven, default=0.0),
                capacitor=worst,
                broken=abs(stands) if worst else 0.0,
                measured=through if worst else 0.0,
                limit=LEAST_REVERSE,
            )
        )
    return tuple(out)


def _reservoir(board: Board, rail: str) -> str:
    """The first polarised capacitor between a rail and 0 V."""
    refs = [ref for ref in board.ties(rail, board.ground, "capacitor") if board.polarised(ref)]
    return min(refs, key=reference_order, default="")


def powered_off(board: Board, rails: Rails) -> tuple[Backfeed, ...]:
    """Currents from powered neighbours into the unpowered module.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    rails
        What the neighbours stand on.

    Returns
    -------
    tuple of Backfeed
        Every amplifier input that a socket leads to, every output, every socket, and the rails.

    Raises
    ------
    InputError
        When a value in a lane is not a number.

    Notes
    -----
    Both supply pins at 0 V, one junction from each pin to them, resistors at the low end of their tolerance, a
    neighbour without a resistance of its own at its rail. A section takes into an input what its record's
    clamp current says, and into its output what its short-circuit limit is at most (common practice: makers let
    that flow through the same junctions for as long as the package stays cool). A socket is judged by the
    rating of its contacts. What all inputs put into one rail is judged by the typical quiescent current: below
    it, the amplifiers hold the rail down; above, the board begins to run on its neighbours. Outputs are not
    counted there, since nobody patches two outputs together for long.
    """
    volts = max(rails.positive, -rails.negative) * (1 + rails.tolerance)
    return (*_inputs(board, volts), *_outputs(board, volts), *_sockets(board, volts), *_rails(board, volts))


def _clamped(volts: float, ohm: float) -> float:
    return clamp_current(volts, ohm, JUNCTION) if ohm > 0.0 else math.inf


def _input_current(board: Board, lane: Lane, volts: float) -> float:
    return _clamped(volts, sum(board.resistance(ref).low for ref in lane.input_series))


def _output_current(board: Board, feed: Feed, volts: float) -> float:
    return _clamped(volts, board.resistance(feed.resistor).low if feed.resistor else 0.0)


def _feedback_current(board: Board, lane: Lane, volts: float) -> float:
    """Into the inverting input of a second buffer that looks at its output socket."""
    return _clamped(volts, board.resistance(lane.feedback).low) if lane.inside_loop and lane.feedback else 0.0


def _inputs(board: Board, volts: float) -> Iterator[Backfeed]:
    for lane in board.channels:
        first, second = lane.first, lane.second
        if lane.input_net is not None:
            parts = (first.package, *lane.input_series)
            current = _input_current(board, lane, volts)
            yield Backfeed("input", first.name, parts, volts, current, first.record.clamp_current)
        if lane.inside_loop and lane.feedback:
            parts = (second.package, lane.feedback)
            current = _feedback_current(board, lane, volts)
            yield Backfeed("input", second.name, parts, volts, current, second.record.clamp_current)


def _outputs(board: Board, volts: float) -> Iterator[Backfeed]:
    for lane in board.channels:
        for feed in lane.feeds:
            parts = (lane.second.package, *((feed.resistor,) if feed.resistor else ()))
            limit = lane.second.record.short_circuit_most
            yield Backfeed("output", lane.second.name, parts, volts, _output_current(board, feed, volts), limit)


def _sockets(board: Board, volts: float) -> Iterator[Backfeed]:
    for jack in board.jacks:
        if jack.tip is None or jack.tip == board.ground:
            continue
        nets = nets_after(board, jack.tip)
        currents = [volts / low if low else math.inf for low in _terminations(board, nets)]
        packages = []
        for lane in board.channels:
            if lane.input_net in nets:
                currents.append(_input_current(board, lane, volts))
                packages.append(lane.first.package)
            for feed in lane.feeds:
                if feed.net in nets:
                    currents += [_output_current(board, feed, volts), _feedback_current(board, lane, volts)]
                    packages.append(lane.second.package)
        if not packages:
            continue
        record = board.record(jack.ref)
        limit = record.current if isinstance(record, JackRecord) else math.inf
        parts = (jack.ref, *sorted(set(packages), key=reference_order))
        yield Backfeed("jack", jack.ref, parts, volts, math.fsum(currents), limit)


def _terminations(board: Board, nets: Iterable[str]) -> Iterator[float]:
    for net in nets:
        for ref in board.ties(net, board.ground, "resistor"):
            yield board.resistance(ref).low


def _rails(board: Board, volts: float) -> Iterator[Backfeed]:
    # one buffer may drive several lanes, and has one input all the same
    fed = {lane.first.name: lane for lane in board.channels if lane.input_net is not None}
    total = math.fsum(_input_current(board, lane, volts) for lane in fed.values())
    packages = tuple(sorted({lane.first.package for lane in fed.values()}, key=reference_order))
    for name in ("V+",) if board.single else ("V+", "V-"):
        quiet = 0.0
        for ref in board.parts_of("amplifier"):
            record = board.record(ref)
            if not isinstance(record, Amplifier):
                continue
            if board.net(ref, record.positive_pin if name == "V+" else record.negative_pin) == name:
                quiet += record.sections * record.quiescent_typical
        yield Backfeed("rail", name, packages, volts, total, quiet)
