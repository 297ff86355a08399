"""An amplifier that is fed the wrong way round."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.catalogue.records import Amplifier
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import ground_nets, rails


class SwappedSupply(Rule):
    """The supply pins of every package are on the right rails, behind the protection.

    Checks:
        The rails are traced from the power header through the diodes; each package has its positive
        supply pin on the positive rail and its negative one on the negative rail, or on 0 V where there
        is none.
    Matters:
        Fed the wrong way round, a package conducts from rail to rail through its substrate and is
        destroyed at once. Dual and quad packages have their supply pins at different corners, so the
        fault is easily drawn.
    Fails:
        start from: lane
        U1 4=V+ 8=V-
    Passes:
        start from: lane
    Limits:
        Trusts the header's pins: a cable turned round is the reverse-polarity rule's.
    References:
        Supply pins of 8- and 14-pin packages: ST TL072 datasheet rev 4, Microchip DS21733J.
    """

    name = "swapped-supply"
    subject = "wiring"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Both supply pins of every package."""
        board = context.board
        found = rails(board)
        grounds = ground_nets(board)
        positive = {net for rail in found if rail.sign > 0 for net in (rail.protected or (rail.bus,))}
        negative = {net for rail in found if rail.sign < 0 for net in (rail.protected or (rail.bus,))}
        buses = {rail.bus for rail in found}
        lower = negative or set(grounds)
        for ref in board.parts_of("amplifier"):
            record = board.record(ref)
            if not isinstance(record, Amplifier):
                continue
            for pin, wanted, wrong, word in (
                (record.positive_pin, positive, lower, "positive"),
                (record.negative_pin, lower, positive, "negative"),
            ):
                net = board.net(ref, pin)
                fault = None
                if net not in wanted:
                    if net is None:
                        what = f"the {word} supply pin {pin} of {ref} is on no net"
                    elif net in wrong:
                        what = f"the {word} supply pin {pin} of {ref} is on {net}, the rail of the other supply pin"
                    elif net in buses:
                        what = f"the {word} supply pin {pin} of {ref} is on {net}, ahead of the protection"
                    else:
                        what = f"the {word} supply pin {pin} of {ref} is on net {net}, which is not its rail"
                    fault = Fault(
                        what,
                        "a package that is fed the wrong way round conducts from rail to rail and is destroyed"
                        if net in wrong
                        else "the section has no supply there, or an unprotected one",
                        f"connect pin {pin} of {ref} to {' or '.join(sorted(wanted)) or 'its rail'}",
                    )
                yield Measurement(
                    parts=(ref,),
                    what=f"{ref} pin {pin} ({word} supply) on {net or 'no net'}",
                    nets=(net,) if net else (),
                    fault=fault,
                )
