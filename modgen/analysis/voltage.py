"""Greatest voltage on every net and across every two-terminal part, over every supply and jack state.

Rails stand at the high end of their tolerance, before any diode drop; a socket may carry whatever a
neighbour on the same rails can put out, powered or not; an amplifier's output stays within its supply
pins; a node that only passive parts tie lies within the hull of what they are tied to. 0 V is in every
hull, so that a missing rail, an unpowered module and an empty socket are covered too.
"""

from __future__ import annotations

from collections.abc import Mapping

from modgen.analysis.board import Board
from modgen.analysis.model import Bound
from modgen.spec.model import Rails


def net_bounds(board: Board, rails: Rails | None) -> dict[str, Bound]:
    """Worst-case bounds of every net.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    rails
        The supply at the power header. None: nothing is known and nothing is inferred.

    Returns
    -------
    dict
        Net name to :class:`Bound` [V], sorted by name; empty when ``rails`` is None.

    Notes
    -----
    The hull of a tied node is exact as a bound without knowing the resistances: any resistive network
    gives a convex combination of the voltages that drive it. What is not covered: energy from outside
    the rails (static discharge, a mains fault in a neighbour).
    """
    if rails is None:
        return {}
    high = rails.positive * (1 + rails.tolerance)
    low = rails.negative * (1 + rails.tolerance)
    driven = _driven(board, low, high)
    names = [net.name for net in board.netlist.nets]
    found = {name: driven[name] for name in names if name in driven}

    ties: dict[str, set[str]] = {name: set() for name in names}
    capacitive: dict[str, set[str]] = {name: set() for name in names}
    for name in names:
        for step in board.between(name):
            (capacitive if step.kind == "capacitor" else ties)[name].add(step.net)
    for jack in board.jacks:
        if jack.tip and jack.switch:
            ties[jack.tip].add(jack.switch)
            ties[jack.switch].add(jack.tip)
    for contact in board.contacts:
        # a capacitor keeps from one position what it takes to the other, so that both count at once
        ties[contact.common].add(contact.throw)
        ties[contact.throw].add(contact.common)

    _spread(names, ties, driven, found)
    # nodes that no current can reach follow their capacitors, from a node that is known
    _spread(names, capacitive, dict(found), found)
    # a net that nothing known holds may stand anywhere the supply reaches
    return {name: Bound(name, *found.get(name, (low, high))) for name in sorted(names)}


def _driven(board: Board, low: float, high: float) -> dict[str, tuple[float, float]]:
    """Nets that something holds or drives."""
    held = {
        board.ground: (0.0, 0.0),
        board.positive: (0.0, high),
        board.bus_positive: (0.0, high),
        "V-": (low, 0.0),
        board.bus_negative: (low, 0.0),
    }
    out: dict[str, tuple[float, float]] = {}

    def drive(net: str | None, bottom: float, top: float) -> None:
        if net is None or net in held:
            return
        known = out.get(net, (0.0, 0.0))
        out[net] = (min(known[0], bottom), max(known[1], top))

    for jack in board.jacks:
        drive(jack.tip, low, high)
    for section in board.sections:
        # a supply pin that is open, or on a net of no known voltage, bounds nothing: then the whole supply does
        pins = [held.get(net, (low, high)) if net else (low, high) for net in (section.positive, section.negative)]
        drive(section.output, min(p[0] for p in pins), max(p[1] for p in pins))
    for ref in board.unknown:
        if board.kind(ref) in ("resistor", "capacitor", "diode", "control", "jack", "switch", "header"):
            continue
        nets = {net for pin in board.pins(ref) if (net := board.net(ref, pin))}
        if len(nets) > 1:
            for net in sorted(nets):
                drive(net, low, high)
    return {**out, **held}


def _spread(
    names: list[str],
    ties: Mapping[str, set[str]],
    sources: Mapping[str, tuple[float, float]],
    found: dict[str, tuple[float, float]],
) -> None:
    """Give each connected group of nets that nothing drives the hull of the driven nets around it."""
    done: set[str] = set()
    for name in names:
        if name in sources or name in done:
            continue
        group, edge, queue = {name}, set[str](), [name]
        while queue:
            for other in ties[queue.pop()]:
                if other in sources:
                    edge.add(other)
                elif other not in group:
                    group.add(other)
                    queue.append(other)
        done |= group
        if edge:
            hull = (min(sources[e][0] for e in edge), max(sources[e][1] for e in edge))
            for member in group:
                found[member] = hull


def span_across(board: Board, bounds: Mapping[str, Bound], ref: str) -> tuple[float, float]:
    """Least and greatest voltage from pin 1 to pin 2 of a two-terminal part.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    bounds
        From :func:`net_bounds`.
    ref
        A resistor, capacitor, diode, or a control (its pin 1 against its other end).

    Returns
    -------
    tuple of float
        (lowest, highest) [V]; (0.0, 0.0) when a pin is open.

    Notes
    -----
    Capacitors in series share one voltage: each sees at most what stands across the string, never the
    sum of two independent extremes. Of a back-to-back pair each sees only the right sign, since the
    other one takes the wrong one (common practice; it conducts after about a volt in reverse).
    """
    ends = _ends(board, ref)
    if ends is None or any(net not in bounds for net in ends):
        return 0.0, 0.0
    if board.kind(ref) == "capacitor":
        if board.partner(ref) is not None:
            lowest, highest = _string(board, bounds, ref, ends)
            return 0.0, max(abs(lowest), abs(highest))
        return _string(board, bounds, ref, ends)
    return _difference(bounds, *ends)


def across(board: Board, bounds: Mapping[str, Bound], ref: str) -> float:
    """Worst voltage across a two-terminal part, without sign.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    bounds
        From :func:`net_bounds`.
    ref
        A resistor, capacitor, diode or control.

    Returns
    -------
    float
        The greater magnitude of :func:`span_across` [V].
    """
    lowest, highest = span_across(board, bounds, ref)
    return max(abs(lowest), abs(highest))


def _ends(board: Board, ref: str) -> tuple[str, str] | None:
    one = board.net(ref, "1")
    others = [board.net(ref, pin) for pin in (("3", "2") if board.kind(ref) == "control" else ("2",))]
    other = next((net for net in others if net is not None and net != one), None)
    if board.kind(ref) == "control" and one is None:
        one, other = board.net(ref, "2"), board.net(ref, "3")
    if one is None or other is None:
        return None
    return one, other


def _difference(bounds: Mapping[str, Bound], one: str, two: str) -> tuple[float, float]:
    if one == two:
        return 0.0, 0.0
    return bounds[one].low - bounds[two].high, bounds[one].high - bounds[two].low


def _string(board: Board, bounds: Mapping[str, Bound], ref: str, ends: tuple[str, str]) -> tuple[float, float]:
    """The voltage across the whole string of capacitors that a capacitor is part of, seen its way round."""
    far = []
    for net in ends:
        at, last = net, ref
        while len(board.on(at)) == 2:
            onward = [n for n in board.between(at, "capacitor") if n.ref != last]
            if len(onward) != 1 or onward[0].ref == ref:
                break
            last, at = onward[0].ref, onward[0].net
        far.append(at)
    return _difference(bounds, far[0], far[1])
