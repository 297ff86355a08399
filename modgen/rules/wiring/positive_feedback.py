"""An amplifier that drives itself to a rail."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.loops import feedback_of
from modgen.rules.support import listed
from modgen.rules.wiring.idle_amplifier import in_use
from modgen.units import format_quantity


class PositiveFeedback(Rule):
    """More of every output comes back to the inverting input than to the other one.

    Checks:
        For each section that drives something, the share of its output's voltage at both of its inputs, by
        the resistors and wires around it, with every supply and other output at 0 V and the sockets
        open.
    Matters:
        An amplifier whose inputs are exchanged holds whatever rail it first reaches. It is the most
        usual slip in a drawing, since the inputs stand next to each other.
    Fails:
        start from: lane
        U1 2=CH1_A 3=CH1_BUF
    Passes:
        start from: lane
    Limits:
        Looks at direct current; feedback through capacitors and through other amplifiers is not
        followed. A comparator that is meant to latch shows as a fault.
    References:
        Feedback of operational amplifiers: Texas Instruments SLOA011, and any textbook (from memory).
    """

    name = "positive-feedback"
    subject = "wiring"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every section that drives something."""
        board = context.board
        for section in board.sections:
            if not in_use(board, section):
                continue
            found = feedback_of(board, section)
            if not found.inverting and not found.noninverting:
                continue  # it has no loop of its own, which is for open-loop-amplifier to say
            minus, plus = section.pins[1], section.pins[2]
            much, little = (format_quantity(v, "ratio") for v in (found.noninverting, found.inverting))
            fault = None
            if found.positive:
                swap = f"swap pins {listed(sorted((minus, plus), key=int))} of {section.package}"
                if found.exchanged:
                    message = (
                        f"the output of {section.name} is fed back to its non-inverting input (pin {plus}) and not to "
                        f"its inverting one (pin {minus})"
                    )
                else:
                    message = (
                        f"{much} of the output of {section.name} comes back to its non-inverting "
                        f"input (pin {plus}) and {little} to its inverting one (pin {minus})"
                    )
                    swap += ", or feed more back to the inverting input"
                fault = Fault(message, "it drives itself to a rail and stays there", swap)
            yield Measurement(
                parts=(section.package,),
                what=f"{section.name}: {little} back to the inverting input, {much} to the other",
                nets=tuple(net for net in (section.inverting, section.noninverting) if net),
                fault=fault,
            )
