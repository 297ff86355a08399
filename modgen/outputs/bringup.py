"""What to measure on a new board, in order, and what this design should show.

Every figure is computed: from the netlist what is on a rail, from the analyses what it carries, from the records
what a diode drops.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING

from modgen.analysis.model import RailPower
from modgen.catalogue.records import Diode
from modgen.outputs.boardfacts import Records, loads, on_net, rail_net, reservoirs, soldered_flat, supply_pins
from modgen.outputs.marking import net_words
from modgen.outputs.pages import BLANK, TICK, Table, columns
from modgen.outputs.wording import percent, pin_words, quantity, short_ranges, signed

if TYPE_CHECKING:
    from modgen.outputs.model import Job

#: Least resistance from a rail to 0 V that is not a fault, packages out [ohm]. Common practice, no source.
LEAST_RAIL_RESISTANCE = 1e3

#: The same with packages in: they pass some of the meter's current [ohm]. Common practice, no source.
LEAST_WITH_PACKAGES = 100.0

#: A joint, and the leads of the meter [ohm]. Common practice, no source.
MOST_JOINT = 1.0

#: Current limits are set in steps of this [A].
LIMIT_STEP = 10e-3

#: Current that a multimeter's diode range sends, about [A]. Common practice, no source.
DIODE_RANGE = 1e-3


def current_limit(current: float) -> float:
    """The supply's current limit: the next step above what may flow.

    Parameters
    ----------
    current
        Greatest current that a good board draws. [A]

    Returns
    -------
    float
        A whole number of steps of 10 mA, always above ``current``. [A]

    Examples
    --------
    >>> round(current_limit(0.0112), 3), round(current_limit(0.020), 3)
    (0.02, 0.03)
    """
    return (math.floor(round(current / LIMIT_STEP, 9)) + 1) * LIMIT_STEP


def before_power(job: Job, records: Records) -> Table:
    """Checks with a meter on a board that has never had power.

    Parameters
    ----------
    job, records
        As for :func:`reservoirs`. [-]

    Returns
    -------
    Table
        One row a measurement.
    """
    flat = soldered_flat(job, records)
    out = "packages on the board" if flat else "packages out"
    least = quantity(LEAST_WITH_PACKAGES if flat else LEAST_RAIL_RESISTANCE, "resistance")
    note = "the packages pass some of the meter's current" if flat else ""
    header = [r for r in records if records[r].kind == "header"]
    sleeves = [p for p in on_net(job.netlist, "0V") if p[1] == "S"]
    zero = [pin for ref, pin in on_net(job.netlist, "0V") if ref in header]
    rows: list[tuple[str, str, str]] = [
        (
            "By eye, with a glass",
            "every joint, both sides",
            "no bridges, no open joints, no flux left on the glide nodes; bands, notches and stripes as in the steps",
        ),
        (
            "0 V through, ohms",
            f"{short_ranges(header)} {pin_words(zero)} to the sleeve of {short_ranges(r for r, _ in sleeves)}",
            f"less than {quantity(MOST_JOINT, 'resistance')}",
        ),
    ]
    rows += [_diode_row(job, records, rail, header) for rail in job.analyses.rails]
    for rail in job.analyses.rails:
        refs, total = reservoirs(job, records, rail)
        pins = supply_pins(job, records, rail.name)
        leads = "red lead on the rail, black on 0 V" if rail.bus_nominal > 0 else "red lead on 0 V, black on the rail"
        through = loads(job, records, rail)
        why = (
            f"{short_ranges(through)} load the rail: no less than they make together"
            if through
            else "no resistor of this design is on the rail"
        )
        why = f"{why}; {note}" if note else why
        rows.append(
            (
                f"{rail_net(rail)} to 0 V, ohms, {out}",
                f"{pins}; {leads}",
                f"starts low and rises past {least} while {short_ranges(refs)} "
                f"({quantity(total, 'capacitance')} together) charge from the meter; {why}",
            )
        )
    if len(job.analyses.rails) == 2:
        both = [reservoirs(job, records, rail)[1] for rail in job.analyses.rails]
        series = both[0] * both[1] / (both[0] + both[1]) if min(both) > 0 else 0.0
        rows.append(
            (
                f"Rail to rail, ohms, {out}",
                "red lead on V+, black on V\u2212",
                f"rises past {least} too, into {quantity(series, 'capacitance')}",
            )
        )
    return Table(
        "What to look at and measure",
        columns("!Check", "Where", "What to expect", "_Found", ""),
        tuple((*row, BLANK, TICK) for row in rows),
    )


def _diode_row(job: Job, records: Records, rail: RailPower, header: Sequence[str]) -> tuple[str, str, str]:
    diode = records[rail.diode]
    assert isinstance(diode, Diode)
    net = job.netlist.net_of
    anode, cathode = net[rail.diode, "2"], net[rail.diode, "1"]
    outer = anode if rail.bus_nominal > 0 else cathode
    pins = [pin for ref, pin in on_net(job.netlist, outer) if ref in header]
    points = [point for point in diode.forward if point[0] >= DIODE_RANGE]
    current, typical, most = points[0] if points else diode.forward[-1]
    near = (
        f"a good part drops {quantity(typical, 'voltage')}, at most {quantity(most, 'voltage')}, at "
        f"{quantity(current, 'current')}; the meter sends about {quantity(DIODE_RANGE, 'current')}"
    )
    return (
        f"{rail.diode} the right way round, diode range",
        f"red lead on {net_words(anode)}, black on {net_words(cathode)}; {net_words(outer)} is {short_ranges(header)} "
        f"{pin_words(pins)}",
        f"one drop ({near}); with the leads exchanged, open",
    )


def rails_table(job: Job, records: Records) -> Table:
    """Rail voltages and currents.

    Parameters
    ----------
    job, records
        As for :func:`reservoirs`. [-]

    Returns
    -------
    Table
        One row a rail.
    """
    rows = [
        (
            rail_net(rail),
            signed(rail.bus_nominal, "voltage"),
            quantity(current_limit(rail.current_max), "current"),
            supply_pins(job, records, rail.name),
            f"{signed(rail.protected_nominal, 'voltage')} ({signed(rail.protected_low, 'voltage')} to "
            f"{signed(rail.protected_high, 'voltage')})",
            f"{quantity(rail.current_typical, 'current')}, at most {quantity(rail.current_max, 'current')}",
            BLANK,
            BLANK,
            TICK,
        )
        for rail in job.analyses.rails
    ]
    tolerance = percent(job.spec.rails.tolerance)
    return Table(
        "Rails behind their diodes",
        columns(
            "!Rail",
            "#Supply",
            "#Current limit",
            "Measure at",
            "#Volts, packages in",
            "#Current",
            "_Volts found",
            "_Current found",
            "",
        ),
        tuple(rows),
        note=f"In brackets: what a good board shows over ±{tolerance} of the supply's voltage and every current it may "
        "draw. Without packages no current flows and the diode drops less: the pins then stand between the figure "
        "above and the supply.",
    )
