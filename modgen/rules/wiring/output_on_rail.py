"""An amplifier output that is tied to a supply."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import ground_nets, rails

#: A resistor up to this joins its ends [ohm]. Source: wire links and zero-ohm resistors are below 50 mohm.
LINK = 1.0


class OutputOnRail(Rule):
    """No amplifier output is tied to 0 V or to a rail.

    Checks:
        The net of each output, and nets behind links of up to 1 ohm and contacts of panel switches:
        none is 0 V, a rail or a supply at the header.
    Matters:
        The output drives its whole short-circuit current into the supply for as long as the module is
        on, and the package heats.
    Fails:
        start from: lane
        U1 7=V+
    Passes:
        start from: lane
    Limits:
        A supply that is made by an amplifier (a mid-rail) is a net of its own and is not meant here.
    References:
        Short-circuit current and dissipation: ST TL072 datasheet rev 4.
    """

    name = "output-on-rail"
    subject = "wiring"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every output."""
        board = context.board
        supplies = {*board.supply_nets, *ground_nets(board), *(net for rail in rails(board) for net in rail.nets)}
        for section in board.sections:
            output = section.output
            if output is None:
                continue
            links = [
                n for n in board.between(output, "resistor") if (v := board.value(n.ref)) is not None and v <= LINK
            ]
            switched = [
                (contact.ref, net)
                for contact in board.contacts
                for here, net in ((contact.common, contact.throw), (contact.throw, contact.common))
                if here == output
            ]
            tied = next((end for end in ((n.ref, n.net) for n in links) if end[1] in supplies), None)
            tied = tied or next((end for end in switched if end[1] in supplies), None)
            fault = None
            if output in supplies or tied is not None:
                by = f" through {tied[0]}" if tied is not None and output not in supplies else ""
                net = output if output in supplies or tied is None else tied[1]
                fault = Fault(
                    f"the output of {section.name} (pin {section.pins[0]}) is tied to {net}{by}",
                    "it drives its short-circuit current into the supply, and the package heats",
                    f"take pin {section.pins[0]} of {section.package} off {net}",
                )
            yield Measurement(
                parts=(section.package,) if tied is None else (section.package, tied[0]),
                what=f"{section.name} drives {output}",
                nets=(output,),
                fault=fault,
            )
