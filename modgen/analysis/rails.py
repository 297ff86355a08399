"""Supply nets that go under names of their own: found by what is on them, and given the usual names.

Rules and analyses know 0 V and the rails by the names of the netlist conventions. A layout editor may have called them
otherwise; header, supply pins and diodes say which is which. Only a net that is the plain answer is renamed: where
the pins disagree the name stays, and it is for the rules to say so.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable
from dataclasses import replace

from modgen.catalogue.records import Amplifier
from modgen.catalogue.records import Part as Record
from modgen.netlist.model import Net, Netlist
from modgen.netlist.order import sorted_nets

GROUND, POSITIVE, NEGATIVE, BUS_POSITIVE, BUS_NEGATIVE = NAMES = ("0V", "V+", "V-", "BUS+", "BUS-")
#: pins of the power header; those of 0 V are the same when it is turned round
HEADER = {GROUND: ("3", "4", "5", "6", "7", "8"), BUS_POSITIVE: ("9", "10"), BUS_NEGATIVE: ("1", "2")}


def named_rails(
    netlist: Netlist, records: Iterable[tuple[str, Record | None]]
) -> tuple[Netlist, tuple[tuple[str, str], ...]]:
    """The netlist with the supplies under their usual names, as far as it is plain which they are.

    Parameters
    ----------
    netlist
        The circuit.
    records
        The catalogue record of each part, by reference.

    Returns
    -------
    tuple
        The netlist, the same one when every supply bears its name or none can be told; and the nets that got a name,
        as (usual name, the file's own).
    """
    if all(name in netlist.by_net for name in NAMES):
        return netlist, ()
    found = _found(netlist, dict(records))
    if not found:
        return netlist, ()
    nets = sorted_nets(Net(found.get(net.name, net.name), net.pins) for net in netlist.nets)
    return replace(netlist, nets=nets), tuple(sorted((name, own) for own, name in found.items()))


def _found(netlist: Netlist, record_of: dict[str, Record | None]) -> dict[str, str]:
    """The usual name of each net that shall get one."""
    at = netlist.net_of
    headers = [ref for ref, record in record_of.items() if record is not None and record.kind == "header"]
    packages = [(ref, record) for ref, record in record_of.items() if isinstance(record, Amplifier)]
    diodes = [ref for ref, record in record_of.items() if record is not None and record.kind == "diode"]
    place: dict[str, str] = {name: name for name in NAMES if name in netlist.by_net}
    # no net that already has one of the names is anything else
    taken = set(place)

    def settle(name: str, nets: Iterable[str | None]) -> None:
        """Give a name to the net on more than half of these pins, unless either is taken."""
        votes = Counter(nets)
        if name in place or not votes:
            return
        net, most = votes.most_common(1)[0]
        if net is not None and 2 * most > votes.total() and net not in taken:
            place[name] = net
            taken.add(net)

    settle(GROUND, [at.get((ref, pin)) for ref in headers for pin in HEADER[GROUND]])
    buses = {at.get((ref, pin)) for ref in headers for bus in (BUS_POSITIVE, BUS_NEGATIVE) for pin in HEADER[bus]}
    # a diode with its anode at the header feeds a positive rail, one with its cathode there a negative one
    above = {at.get((ref, "1")) for ref in diodes if at.get((ref, "2")) in buses}
    below = {at.get((ref, "2")) for ref in diodes if at.get((ref, "1")) in buses}
    upper = [at.get((ref, record.positive_pin)) for ref, record in packages]
    lower = [at.get((ref, record.negative_pin)) for ref, record in packages]
    if not below & set(upper) and not above & set(lower):
        settle(POSITIVE, upper)
        settle(NEGATIVE, lower)
    for bus, rail, near, far in ((BUS_POSITIVE, POSITIVE, "2", "1"), (BUS_NEGATIVE, NEGATIVE, "1", "2")):
        on_header = [at.get((ref, pin)) for ref in headers for pin in HEADER[bus]]
        behind = [at.get((ref, near)) for ref in diodes if rail in place and at.get((ref, far)) == place[rail]]
        settle(bus, [net for net in behind if net in netlist.by_net and _at(netlist, net, headers)] or on_header)
    return {net: name for name, net in place.items() if net != name}


def _at(netlist: Netlist, net: str | None, headers: Iterable[str]) -> bool:
    """Whether a net is at a header."""
    return net is not None and any(ref in set(headers) for ref, _ in netlist.by_net[net].pins)
