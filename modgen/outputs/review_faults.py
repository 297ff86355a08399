"""Computed figures of the review page for what goes wrong from outside: shorts, and states of the supply."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from modgen.outputs.marking import net_words
from modgen.outputs.pages import Cell, Table, collapsed, columns
from modgen.outputs.review_figures import margin_cell
from modgen.outputs.wording import NOTHING, quantity, signed

if TYPE_CHECKING:
    from modgen.outputs.model import Job

#: What a powered neighbour drives into, by the subject of the analysis.
_SUBJECTS = {
    "input": "one amplifier input",
    "output": "one amplifier output",
    "jack": "one socket, all that it takes",
    "rail": "one rail, from all sockets",
}


def short_tables(job: Job) -> tuple[Table, ...]:
    """Outputs shorted to 0 V and to another output, and what the packages then dissipate.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    tuple of Table
        Outputs, packages.
    """
    shorts = collapsed(
        (
            str(s.channel),
            (s.resistor,) if s.resistor else (),
            (
                s.against,
                quantity(s.voltage, "voltage"),
                _between(s.current_least, s.current_most, "current"),
                quantity(s.measured, "power") if s.resistor else Cell("no resistor", tone="stop"),
                limit_words(s.limit, "power"),
                margin_cell(s.margin) if s.resistor and math.isfinite(s.limit) else NOTHING,
            ),
        )
        for s in job.analyses.shorts
    )
    packages = collapsed(
        (
            "",
            (d.package,),
            (
                quantity(d.quiescent, "power"),
                f"{quantity(d.short, 'power')}, to {d.against}" if d.against else NOTHING,
                quantity(d.measured, "power"),
                limit_words(d.limit, "power"),
                margin_cell(d.margin),
            ),
        )
        for d in job.analyses.dissipation
    )
    return (
        Table(
            "Outputs shorted, the amplifier driving to a rail at the high end of its tolerance",
            columns(
                "!Outputs of", "Resistor", "Shorted to", "#Voltage", "#Current", "#In the resistor", "#Rated", "#Left"
            ),
            tuple((channels, resistors, *shown) for channels, resistors, shown in shorts),
            note="Another output is a neighbour's at the opposite rail, behind the source impedance of the "
            "specification. Current: with the amplifier's own limit at its least and at its most.",
        ),
        Table(
            "What the packages dissipate, at 25 °C",
            columns("!Packages", "#At rest, at most", "#Worst short adds", "#Together", "#Allowed", "#Left"),
            tuple((refs, *shown) for _, refs, shown in packages),
            note="One short at a time. In a warm case less is allowed: see the maker's derating.",
        ),
    )


def supply_state_tables(job: Job) -> tuple[Table, ...]:
    """Header the wrong way round, one rail missing, module off among powered neighbours.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    tuple of Table
        A state that cannot be, as a missing rail on a single supply, has no table.
    """
    made = (_reversed(job), _missing(job), _powered_off(job))
    return tuple(table for table in made if table.rows)


def _reversed(job: Job) -> Table:
    found = job.analyses.reversed_supply
    rows = [
        (
            net_words(r.rail),
            r.diode if r.blocked else Cell("nothing blocks", tone="stop"),
            signed(r.bus, "voltage"),
            quantity(r.settled, "voltage"),
            quantity(r.measured, "voltage"),
            limit_words(r.limit, "voltage") if r.blocked else NOTHING,
            margin_cell(r.margin),
            quantity(r.leakage, "current"),
        )
        for r in found
    ]
    least = min((r.amplifiers for r in found), default=0.0)
    if all(r.blocked for r in found):
        beyond = f"The amplifiers' supply pins see at most {quantity(-least, 'voltage')} the wrong way round."
    else:
        beyond = f"Down to {signed(least, 'voltage')} can stand across the amplifiers' supply pins."
    return Table(
        "Power header plugged in the wrong way round",
        columns(
            "!Rail", "Diode", "#Its bus gets", "#Across it, settled", "#Reservoirs charged", "#Blocks", "#Left",
            "#Leakage",
        ),
        tuple(rows),
        note=beyond,
    )  # fmt: skip


def _missing(job: Job) -> Table:
    found = job.analyses.missing_rails
    rows = [
        (
            net_words(m.rail),
            f"{signed(m.low, 'voltage')} to {signed(m.high, 'voltage')}",
            _current(m.input_current),
            m.capacitor or NOTHING,
            quantity(m.measured, "voltage") if m.capacitor else NOTHING,
            quantity(m.limit, "voltage") if m.capacitor else NOTHING,
            margin_cell(m.margin) if m.capacitor else NOTHING,
        )
        for m in found
    ]
    broken = max((m.broken for m in found), default=0.0)
    return Table(
        "One rail missing at the bus, the other at the high end of its tolerance",
        columns(
            "!Missing", "#Supply pins see", "#Into an input", "Capacitor", "#Reversed by", "#Bears", "#Left"
        ),
        tuple(rows),
        note=f"With a broken contact instead nothing holds that rail, and the capacitor may see up to "
        f"{quantity(broken, 'voltage')} the wrong way round: not judged."
        if broken
        else "",
    )  # fmt: skip


def _powered_off(job: Job) -> Table:
    rows = collapsed(
        (
            b.subject,
            (net_words(b.name),) if b.subject in ("jack", "rail") else b.parts,
            (
                _current(b.measured),
                limit_words(b.limit, "current"),
                # a board that begins to run on its neighbours is no damage
                Cell(margin.text, tone="warn")
                if isinstance(margin := margin_cell(b.margin), Cell) and b.subject == "rail"
                else margin,
            ),
        )
        for b in job.analyses.powered_off
    )
    volts = max((b.voltage for b in job.analyses.powered_off), default=0.0)
    words = [(_SUBJECTS.get(subject, subject), refs, *shown) for subject, refs, shown in rows]
    return Table(
        f"Module without power among neighbours that drive {quantity(volts, 'voltage')}, of either sign",
        columns("!Into", "Where", "#Current", "#Limit", "#Left"),
        tuple(words),
        note="The limit of a rail is what the amplifiers draw at rest: beyond it the board begins to run on its "
        "neighbours, which does no damage.",
    )


def limit_words(limit: float, kind: str) -> str:
    """A limit, or that nobody states one.

    Parameters
    ----------
    limit
        Infinite when nobody states it. [SI]
    kind
        One of :data:`modgen.units.UNITS`. [-]

    Returns
    -------
    str
        ``600 mW``, ``not stated``.
    """
    return quantity(limit, kind) if math.isfinite(limit) else "not stated"


def _current(amperes: float) -> str | Cell:
    """A current; what no resistor limits stands out."""
    return quantity(amperes, "current") if math.isfinite(amperes) else Cell("no resistor limits it", tone="stop")


def _between(least: float, most: float, kind: str) -> str:
    low, high = quantity(least, kind), quantity(most, kind)
    return low if low == high else f"{low} to {high}"
