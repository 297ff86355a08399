"""What each rail draws and what is left of it behind its protection diode."""

from __future__ import annotations

from dataclasses import dataclass

from modgen.analysis.board import Board, Lane
from modgen.analysis.glide import LaneValues
from modgen.analysis.model import RailPower
from modgen.catalogue.records import Amplifier, Diode
from modgen.formulas.supply import behind_diode, interpolate_drop, rail_ends
from modgen.spec.model import Rails, Signal


@dataclass(frozen=True)
class Draw:
    """Current of one rail [A]: at rest (typical, greatest), and with every channel slewing."""

    typical: float
    greatest: float
    peak: float


def rail_powers(board: Board, rails: Rails, signal: Signal) -> tuple[RailPower, ...]:
    """Voltage and current of each rail.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    rails
        The supply at the power header.
    signal
        Span and load of the outputs.

    Returns
    -------
    tuple of RailPower
        ``V+``, and ``V-`` unless the supply is single. ``protected_low`` is the low end of the rail's
        tolerance less the diode's greatest drop at the greatest steady current; ``protected_nominal`` takes
        the typical drop at the typical current; ``protected_high`` allows no drop at all, since a diode that
        carries little drops little.

    Notes
    -----
    The peak lasts for milliseconds and is the reservoir's business; the rail's low end is judged at the
    greatest current that stays.
    """
    out = []
    for name, bus, voltage in (
        ("V+", board.bus_positive, rails.positive),
        ("V-", board.bus_negative, rails.negative),
    ):
        if name == "V-" and (rails.single or board.single):
            continue
        positive = name == "V+"
        draw = _draw(board, name, signal, positive)
        diode = _diode(board, bus, name, positive)
        low, high = rail_ends(voltage, rails.tolerance)
        out.append(
            RailPower(
                name=name,
                diode=diode,
                bus_nominal=voltage,
                bus_low=low,
                bus_high=high,
                protected_nominal=behind_diode(voltage, drop(board, diode, draw.typical, worst=False)),
                protected_low=behind_diode(low, drop(board, diode, draw.greatest, worst=True)),
                protected_high=high,
                current_typical=draw.typical,
                current_max=draw.greatest,
                current_peak=draw.peak,
            )
        )
    return tuple(out)


def drop(board: Board, diode: str, current: float, *, worst: bool) -> float:
    """Forward drop of a diode at a current.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    diode
        Its reference; empty, or of a part without a record: no drop is known and none is taken off.
    current
        Forward current. [A]
    worst
        Whether the greatest drop is asked for, and not the typical one.

    Returns
    -------
    float
        Forward drop [V].
    """
    record = board.record(diode) if diode else None
    if not isinstance(record, Diode):
        return 0.0
    points = tuple((i, greatest if worst else typical) for i, typical, greatest in record.forward)
    return float(interpolate_drop(points, current))


def _diode(board: Board, bus: str, rail: str, positive: bool) -> str:
    """The diode that conducts from the bus to the rail (or, on the negative side, from the rail to the bus)."""
    anode, cathode = (bus, rail) if positive else (rail, bus)
    for ref in board.parts_of("diode"):
        if board.net(ref, "2") == anode and board.net(ref, "1") == cathode:
            return ref
    return ""


def _draw(board: Board, rail: str, signal: Signal, positive: bool) -> Draw:
    typical = greatest = 0.0
    for ref in board.parts_of("amplifier"):
        record = board.record(ref)
        if not isinstance(record, Amplifier):
            continue
        pin = record.positive_pin if positive else record.negative_pin
        if board.net(ref, pin) == rail:
            typical += record.sections * record.quiescent_typical
            greatest += record.sections * record.quiescent_max
    peak = 0.0
    reach = max(signal.high if positive else -signal.low, 0.0)
    for lane in board.channels:
        if rail in (lane.second.positive, lane.second.negative):
            greatest += sum(reach / (_loop_resistance(board, feed.resistor) + signal.load) for feed in lane.feeds)
        if rail in (lane.first.positive, lane.first.negative):
            peak += charging_current(board, lane, signal)
        if rail in (lane.second.positive, lane.second.negative):
            peak += keeping_current(board, lane, signal)
    return Draw(typical, greatest, greatest + peak)


def _loop_resistance(board: Board, resistor: str) -> float:
    return board.resistance(resistor).low if resistor else 0.0


def keeping_current(board: Board, lane: Lane, signal: Signal) -> float:
    """Greatest current into the waiting capacitor of a range switch.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    lane
        One of its lanes.
    signal
        The span of the signal.

    Returns
    -------
    float
        The whole span across the resistor that keeps it at the output's voltage, limited by the greatest
        short-circuit current of the buffer; 0 without a range switch [A].
    """
    if lane.switch is None or not lane.switch.keepers:
        return 0.0
    series = board.least_parallel(lane.switch.keepers)
    limit = lane.second.record.short_circuit_most
    span = signal.high - signal.low
    return limit if series <= 0 else min(limit, span / series)


def charging_current(board: Board, lane: Lane, signal: Signal) -> float:
    """Greatest current into a lane's glide capacitor.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    lane
        One of its lanes.
    signal
        The span of the signal.

    Returns
    -------
    float
        The whole span across the isolating resistance with the control at nothing, limited by the greatest
        short-circuit current of the buffer [A].
    """
    values = LaneValues.of(board, lane)
    series = values.series(-1) if values.adjustable else values.resistance(0.0, -1)
    limit = lane.first.record.short_circuit_most
    span = signal.high - signal.low
    return limit if series <= 0 else min(limit, span / series)
