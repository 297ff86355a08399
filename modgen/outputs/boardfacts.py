"""What stands on a rail, which parts have a role, which jack is whose: read from the netlist."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import TYPE_CHECKING

from modgen.analysis.model import RailPower
from modgen.catalogue.records import Amplifier, Capacitor
from modgen.catalogue.records import Part as Record
from modgen.netlist.model import Netlist
from modgen.outputs.marking import net_words
from modgen.outputs.wording import natural, short_ranges

if TYPE_CHECKING:
    from modgen.outputs.model import Job

Records = Mapping[str, Record]


def records_of(job: Job) -> dict[str, Record]:
    """The catalogue record of every part of the netlist.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    dict
        By reference, in the order of the netlist.
    """
    placed = {part.ref: part.record for part in job.design.parts}
    return {part.ref: placed[part.ref] for part in job.netlist.parts}


def by_role(netlist: Netlist) -> dict[str, tuple[str, ...]]:
    """References by the role their parts say they have.

    Parameters
    ----------
    netlist
        The module. [-]

    Returns
    -------
    dict
        Role to references in the order of the netlist; parts without a role under the empty text.
    """
    roles: dict[str, list[str]] = {}
    for part in netlist.parts:
        roles.setdefault(part.field("role"), []).append(part.ref)
    return {role: tuple(refs) for role, refs in roles.items()}


def range_words(job: Job) -> str:
    """Which position of the range switches is slow, in a sentence.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    str
        ``The slow range is with pins 1 and 2 joined, the fast one with pins 2 and 3.``; empty without a range switch.
    """
    found: dict[tuple[str, ...], list[str]] = {}
    for glide in job.analyses.glide:
        if glide.ranges:
            found.setdefault(tuple(r.position for r in glide.ranges), []).append(str(glide.channel))
    texts = []
    for positions, channels in found.items():
        fast, slow = (" and ".join(position.split("-")) for position in positions)
        whose = f" of channel {', '.join(channels)}" if len(found) > 1 else ""
        texts.append(f"The slow range{whose} is with pins {slow} joined, the fast one with pins {fast}.")
    return " ".join(texts)


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
    return "; ".join(f"{short_ranges(groups[pin])} pin\u00a0{pin}" for pin in sorted(groups, key=int))


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
