"""The one order of parts, nets and pins, whoever made the netlist."""

from __future__ import annotations

from collections.abc import Iterable

from modgen.netlist.model import Net, Part


def sorted_parts(parts: Iterable[Part]) -> tuple[Part, ...]:
    """Parts by reference class, then number; duplicates by everything else they say."""
    return tuple(sorted(parts, key=lambda p: (p.letters, p.number, p.ref, p.sheet, p.value, p.land_pattern, p.fields)))


def sorted_nets(nets: Iterable[Net]) -> tuple[Net, ...]:
    """Nets by name, the pins of each by reference and number."""
    return tuple(sorted((Net(net.name, tuple(sorted(net.pins))) for net in nets), key=lambda net: (net.name, net.pins)))
