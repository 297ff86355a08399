"""An amplifier input that is tied to a rail."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import ground_nets, rails
from modgen.rules.wiring.idle_amplifier import in_use


class InputOnRail(Rule):
    """No amplifier input is tied to a rail, and no follower that drives something to 0 V.

    Checks:
        The net of each input of each section is no rail and no supply at the header. The non-inverting input of a
        follower whose output is used is not on 0 V either.
    Matters:
        An input on a rail is beyond its range: the output stands at a rail, or turns its phase round. A
        follower of 0 V sends 0 V, and its channel is silent.
    Fails:
        start from: lane
        U1 3=V+
        R2 2=V+
    Passes:
        start from: lane
    Limits:
        An input on 0 V is only judged at a follower; an inverting amplifier wants it there. A follower of 0 V
        that buffers a reference shows as a fault.
    References:
        Common-mode input range: ST TL072 datasheet rev 4.
    """

    name = "input-on-rail"
    subject = "wiring"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Both inputs of every section."""
        board = context.board
        grounds = set(ground_nets(board))
        supplies = {*board.supply_nets, *(net for rail in rails(board) for net in rail.nets)} - grounds
        for section in board.sections:
            inputs = (("inverting", section.inverting), ("non-inverting", section.noninverting))
            for (kind, net), pin in zip(inputs, section.pins[1:], strict=True):
                fault = None
                silent = kind == "non-inverting" and net in grounds and section.follower and in_use(board, section)
                if net in supplies:
                    fault = Fault(
                        f"the {kind} input of {section.name} (pin {pin}) is tied to {net}",
                        "that is beyond its range: the output stands at a rail, or turns its phase round",
                        f"take pin {pin} of {section.package} off {net}",
                    )
                elif silent:
                    fault = Fault(
                        f"{section.name} follows {net} (pin {pin}) and drives {section.output}",
                        "what comes behind it gets 0 V, whatever is plugged in",
                        f"take pin {pin} of {section.package} off {net}",
                    )
                yield Measurement(
                    parts=(section.package,),
                    what=f"{kind} input of {section.name} on {net or 'no net'}",
                    nets=tuple(n for n in (net, section.output if silent else None) if n),
                    fault=fault,
                )
