"""Outputs shorted to 0 V and to another module's output at the opposite rail: currents, and what gets hot."""

from __future__ import annotations

import math

from modgen.analysis.board import Board, Lane
from modgen.analysis.lanes import Feed
from modgen.analysis.model import Dissipation, RailPower, Short
from modgen.analysis.parts import Section
from modgen.catalogue.records import Amplifier
from modgen.formulas.shorts import section_power, shorted_current
from modgen.spec.model import Signal

GROUND = "0 V"
OTHER = "another output"


def shorts(board: Board, powers: tuple[RailPower, ...], signal: Signal) -> tuple[Short, ...]:
    """Every output of every lane, shorted to 0 V and to another module's output.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    powers
        The rails, from :func:`modgen.analysis.power.rail_powers`.
    signal
        Its source impedance stands in the other module's output.

    Returns
    -------
    tuple of Short
        Two of each output, by lane.

    Raises
    ------
    InputError
        When a value in a lane is not a number.

    Notes
    -----
    The amplifier drives right to its rail at the high end of the tolerance, without the drop of its diode or
    of its own output; the resistor is at its nominal value in return. The other module stands on the same
    rails and drives to the opposite one. The power of the section is the greatest over every level
    that it may drive: at half the voltage, unless its current limit comes first.
    """
    high, low = rail_tops(powers)
    out = []
    for lane in board.channels:
        for feed in lane.feeds:
            ohm = board.resistance(feed.resistor).nominal if feed.resistor else 0.0
            top = max(high, -low)
            out.append(_short(board, lane, feed, GROUND, top, ohm, ohm))
            out.append(_short(board, lane, feed, OTHER, high - low, ohm, ohm + signal.source))
    return tuple(out)


def rail_tops(powers: tuple[RailPower, ...]) -> tuple[float, float]:
    """The rails at the high end of their tolerance: (positive, negative) [V]; 0 for one that is not there."""
    high = next((p.protected_high for p in powers if p.name == "V+"), 0.0)
    low = next((p.protected_high for p in powers if p.name == "V-"), 0.0)
    return high, low


def _short(board: Board, lane: Lane, feed: Feed, against: str, voltage: float, resistor: float, whole: float) -> Short:
    record = lane.second.record
    least = shorted_current(voltage, whole, record.short_circuit_least)
    most = shorted_current(voltage, whole, record.short_circuit_most)
    rated = board.rating(feed.resistor, "power") if feed.resistor else None
    return Short(
        channel=lane.channel,
        section=lane.second.name,
        net=feed.net,
        resistor=feed.resistor,
        against=against,
        voltage=voltage,
        current_least=least,
        current_most=most,
        package=section_power(voltage, whole, record.short_circuit_most),
        measured=most * most * resistor,
        limit=math.inf if rated is None else rated,
    )


def dissipations(board: Board, powers: tuple[RailPower, ...], found: tuple[Short, ...]) -> tuple[Dissipation, ...]:
    """Every package at rest, with the worst single short at its outputs.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    powers
        The rails, from :func:`modgen.analysis.power.rail_powers`.
    found
        From :func:`shorts`.

    Returns
    -------
    tuple of Dissipation
        By reference.

    Notes
    -----
    At rest: greatest quiescent current of every section across both rails at their high end. One short at a
    time; what the package may dissipate is as its record states it, at 25 degC.
    """
    high, low = rail_tops(powers)
    owner: dict[str, Section] = {section.name: section for section in board.sections}
    out = []
    for ref in board.parts_of("amplifier"):
        record = board.record(ref)
        if not isinstance(record, Amplifier):
            continue
        rest = record.sections * record.quiescent_max * (high - low)
        mine = [s for s in found if s.section in owner and owner[s.section].package == ref]
        worst = max(mine, key=lambda s: s.package, default=None)
        short = worst.package if worst else 0.0
        out.append(
            Dissipation(
                package=ref,
                quiescent=rest,
                short=short,
                against=worst.against if worst else "",
                measured=rest + short,
                limit=record.dissipation,
            )
        )
    return tuple(out)
