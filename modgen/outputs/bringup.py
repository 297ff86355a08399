"""What to measure on a new board, in order, and what this design should show.

Every figure is computed: from the netlist what is on a rail, from the analyses what it carries, from the records
what a diode drops.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING

from modgen.analysis.model import RailPower
from modgen.catalogue.records import Amplifier, Capacitor, Diode
from modgen.catalogue.records import Part as Record
from modgen.netlist.model import Netlist
from modgen.outputs.marking import net_words
from modgen.outputs.pages import BLANK, NOTHING, TICK, Table, columns, natural, percent, quantity, short_ranges, signed

if TYPE_CHECKING:
    from modgen.outputs.model import Job

#: Least resistance from a rail to 0 V that is not a fault, packages out [ohm]. Common practice, no source.
LEAST_RAIL_RESISTANCE = 1e3
#: A joint, and the leads of the meter [ohm]. Common practice, no source.
MOST_JOINT = 1.0
#: Current limits are set in steps of this [A].
LIMIT_STEP = 10e-3
#: Time constants after which a step is over for the eye: e**-5 is 0.7 %. [-]
SETTLED = 5.0
#: Current that a multimeter's diode range sends, about [A]. Common practice, no source.
DIODE_RANGE = 1e-3

Records = Mapping[str, Record]


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


def rail_net(rail: RailPower) -> str:
    """A rail's name as pages write it.

    Parameters
    ----------
    rail
        From the analyses. [-]

    Returns
    -------
    str
        ``V+`` or ``V−``.
    """
    return net_words(rail.name)


def on_net(netlist: Netlist, net: str) -> tuple[tuple[str, str], ...]:
    """Pins on a net; none when there is no such net.

    Parameters
    ----------
    netlist
        The module. [-]
    net
        Its name. [-]

    Returns
    -------
    tuple
        Pairs of reference and pin number.
    """
    found = netlist.by_net.get(net)
    return found.pins if found else ()


def reservoirs(job: Job, records: Records, rail: RailPower) -> tuple[tuple[str, ...], float]:
    """Capacitors between a rail and 0 V, and their sum.

    Parameters
    ----------
    job
        The module. [-]
    records
        Catalogue record by reference. [-]
    rail
        Which rail. [-]

    Returns
    -------
    tuple
        References in order, and the total capacitance [F].
    """
    ground = {ref for ref, _ in on_net(job.netlist, "0V")}
    refs = sorted({ref for ref, _ in on_net(job.netlist, rail.name)} & ground, key=natural)
    found = [(ref, records[ref]) for ref in refs]
    caps = [(ref, part.capacitance) for ref, part in found if isinstance(part, Capacitor)]
    return tuple(ref for ref, _ in caps), math.fsum(value for _, value in caps)


def loads(job: Job, records: Records, rail: RailPower) -> tuple[str, ...]:
    """Resistors and controls with a pin on a rail: what a meter would read through.

    Parameters
    ----------
    job, records, rail
        As for :func:`reservoirs`. [-]

    Returns
    -------
    tuple of str
        References in order; none in a design whose rails feed packages alone.
    """
    refs = {ref for ref, _ in on_net(job.netlist, rail.name)}
    return tuple(sorted((r for r in refs if records[r].kind in ("resistor", "control")), key=natural))


def supply_pins(job: Job, records: Records, net: str) -> str:
    """The package pins on a net, as people say them: ``U1–U3 pin 8``.

    Parameters
    ----------
    job, records
        As for :func:`reservoirs`. [-]
    net
        A rail, or ``0V``. [-]

    Returns
    -------
    str
        Packages grouped by pin number; only supply pins.
    """
    groups: dict[str, list[str]] = {}
    for ref, pin in on_net(job.netlist, net):
        part = records[ref]
        if isinstance(part, Amplifier) and pin in (part.positive_pin, part.negative_pin):
            groups.setdefault(pin, []).append(ref)
    return "; ".join(f"{short_ranges(groups[pin])} pin {pin}" for pin in sorted(groups, key=int))


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
    out = "packages out" if not soldered_flat(job, records) else "packages are on the board"
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
            f"{short_ranges(header)} pins {', '.join(sorted(zero, key=int))} to the sleeve of {short_ranges(r for r, _ in sleeves)}",
            f"less than {quantity(MOST_JOINT, 'resistance')}",
        ),
    ]
    for rail in job.analyses.rails:
        rows.append(_diode_row(job, records, rail, header))
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
        rows.append(
            (
                f"{rail_net(rail)} to 0 V, ohms, {out}",
                f"{pins}; {leads}",
                f"starts low and rises past {quantity(LEAST_RAIL_RESISTANCE, 'resistance')} while {short_ranges(refs)} "
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
                f"rises past {quantity(LEAST_RAIL_RESISTANCE, 'resistance')} too, into {quantity(series, 'capacitance')}",
            )
        )
    return Table(
        "Before power",
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
    current, typical, most = diode.forward[0]
    near = f"at {quantity(current, 'current')} {quantity(typical, 'voltage')} typical, {quantity(most, 'voltage')} at most"
    return (
        f"{rail.diode} the right way round, diode range",
        f"red lead on {net_words(anode)}, black on {net_words(cathode)}; {net_words(outer)} is {short_ranges(header)} "
        f"{'pin' if len(pins) == 1 else 'pins'} {', '.join(sorted(pins, key=int))}",
        f"one drop ({diode.order_code or diode.key}: {near}), and open with the leads exchanged once the reservoir has charged",
    )


def soldered_flat(job: Job, records: Records) -> bool:
    """Whether the packages are surface-mount, so that they cannot be left out.

    Parameters
    ----------
    job, records
        As for :func:`reservoirs`. [-]

    Returns
    -------
    bool
        True as soon as one is.
    """
    return any(isinstance(records[p.ref], Amplifier) and records[p.ref].mount == "surface" for p in job.netlist.parts)


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
            "!Rail", "#Supply", "#Current limit", "Measure at", "#Volts, packages in", "#Current", "_Volts", "_Current", ""
        ),
        tuple(rows),
        note=f"In brackets: what a good board shows over ±{tolerance} of the supply's voltage and every current it may draw. "
        "Without packages no current flows and the diode drops less: the pins then stand between the figure above and the supply.",
    )


def output_bounds(job: Job) -> tuple[float, float]:
    """What an output may show with 0 V at its input [V].

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    tuple of float
        Low and high; on a single supply not below 0 V, and up to where the amplifier's swing begins. [V]
    """
    offset = job.analyses.accuracy.offset_worst
    if not job.spec.rails.single:
        return -offset, offset
    swings = [h.can_low for h in job.analyses.headroom if h.subject == "swing" and "output" in h.stage]
    return 0.0, max([offset, *swings])


def path_table(job: Job) -> Table:
    """Which input drives which outputs, and the offset of each output.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    Table
        One row a channel.
    """
    low, high = output_bounds(job)
    jacks: dict[tuple[str, int], list[str]] = {}
    for part in job.netlist.parts:
        role, channel = part.field("role"), part.field("channel")
        if role in ("input-jack", "output-jack") and channel.isdecimal():
            jacks.setdefault((role, int(channel)), []).append(part.ref)
    rows = []
    for channel in range(1, job.spec.channels + 1):
        fed = job.spec.input_of(channel)
        own = short_ranges(jacks.get(("input-jack", fed), ())) or NOTHING
        rows.append(
            (
                str(channel),
                own if fed == channel else f"{own} (shared with channel {fed})",
                short_ranges(jacks.get(("output-jack", channel), ())) or NOTHING,
                f"{signed(low, 'voltage')} to {signed(high, 'voltage')}",
                BLANK,
                TICK,
            )
        )
    return Table(
        "Outputs with nothing plugged in",
        columns("!Channel", "Input", "Outputs", "#Expect at 0 V in", "_Found", ""),
        tuple(rows),
    )


def measure_words(job: Job) -> str:
    """How a glide time is read off, in words.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    str
        For the measure that the spec asks for.
    """
    glide = job.spec.glide
    if glide.measure == "time-constant":
        return "from the start of the step until 63.2 % of it is done"
    if glide.measure == "settle":
        return (
            f"from the start of a step of {quantity(glide.step, 'voltage')} until the output stays within "
            f"{quantity(glide.within, 'voltage')} of where it ends"
        )
    return "from 10 % to 90 % of the step"


def hold_time(job: Job) -> float:
    """How long each half of the test wave must last at the slow end [s].

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    float
        Five of the greatest time constants, or half as long again as the greatest glide if that is more. [s]
    """
    longest = 0.0
    for channel in job.analyses.glide:
        spread = channel.longest.high / channel.longest.nominal
        longest = max(longest, SETTLED * channel.time_constant_longest * spread, 1.5 * channel.longest.high)
    return longest


def glide_table(job: Job) -> Table:
    """Glide times with their limits, and room to write what was measured.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    Table
        One row a channel and position of the control.
    """
    rows = []
    for channel in job.analyses.glide:
        for where, interval in (
            ("fully anticlockwise", channel.shortest),
            ("middle", channel.middle),
            ("fully clockwise", channel.longest),
        ):
            rows.append(
                (
                    f"{channel.channel}, {where}",
                    channel.control,
                    quantity(interval.nominal, "time"),
                    quantity(interval.low, "time"),
                    quantity(interval.high, "time"),
                    BLANK,
                    TICK,
                )
            )
    return Table(
        "Glide times",
        columns("!Channel and control", "Part", "#Nominal", "#Not below", "#Not above", "_Found", ""),
        tuple(rows),
    )
