"""A rail without a reservoir."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.design.practice import RESERVOIR
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import above, ground_nets, listed, rails
from modgen.units import format_quantity

#: below this share of what there should be, it counts as none [-]. Our choice.
NONE = 0.25


class Reservoir(Rule):
    """Each protected rail has at least 10 µF to 0 V.

    Checks:
        The capacitors between each rail, behind its diode, and 0 V, added up by their nominal values.
        Below a quarter of 10 µF is an error, up to 10 µF a warning.
    Matters:
        A ribbon has a microhenry and every channel that slews pulls milliamperes through it; decoupling
        capacitors bridge nanoseconds, the reservoir the rest.
    Fails:
        start from: lane
        without C4
    Passes:
        start from: lane
    Limits:
        Loss of capacitance under bias and with age is not counted. A capacitor ahead of the diode does
        not count: it holds nothing up behind it.
    References:
        10 µF a rail at the header: common practice, no source.
    """

    name = "reservoir"
    subject = "supply"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every rail."""
        board = context.board
        grounds = set(ground_nets(board))
        for rail in rails(board):
            nets = rail.protected or (rail.bus,)
            refs = sorted(
                {n.ref for net in nets for n in board.between(net, "capacitor") if n.net in grounds},
                key=board.refs.index,
            )
            total = sum(board.value(ref) or 0.0 for ref in refs)
            have, want = format_quantity(total, "capacitance"), format_quantity(RESERVOIR, "capacitance")
            margin = above(total, RESERVOIR)
            fault = None
            if margin < 0:
                fault = Fault(
                    f"the {rail.name} ({listed(nets)}) has {have} to 0 V; {want} is usual",
                    "what the channels draw when they slew comes through the ribbon, and the rail dips with it",
                    f"put a capacitor of {want} or more from {nets[0]} to 0V",
                    level="error" if total < NONE * RESERVOIR else "warning",
                )
            yield Measurement(
                parts=tuple(refs),
                what=f"{rail.name}: {have} where {want} is usual",
                measured=total,
                limit=RESERVOIR,
                unit="F",
                margin=margin,
                nets=nets,
                fault=fault,
            )
