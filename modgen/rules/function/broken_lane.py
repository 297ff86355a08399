"""A control that stands in no complete lane."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import least_path, listed


class BrokenLane(Rule):
    """Every control stands in a row of buffer, control, capacitor and buffer.

    Checks:
        Each control is the one of a lane that is found by structure. Where it is not, what the row lacks is
        named: an amplifier that drives one end, a capacitor from the other end to 0 V, a buffer
        behind that; or that the capacitor's end is held by an output or a supply. One that is on a single
        net is for control-wiper to say.
    Matters:
        A lane without its capacitor passes the signal and does not glide; one without a buffer does not pass it at
        all. The parts are placed, soldered and paid for.
    Fails:
        start from: lane
        without C1
    Passes:
        start from: lane
    Limits:
        Takes every control for a glide control; a level control shows as a fault.
    References:
        RC low-pass between two followers: common practice, any textbook on circuits.
    """

    name = "broken-lane"
    subject = "function"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every control."""
        board = context.board
        lanes = {lane.control: lane for lane in board.channels}
        for ref in board.parts_of("control"):
            lane = lanes.get(ref)
            if lane is not None:
                yield Measurement(
                    parts=(ref,), what=f"{ref}: {lane.first.name} to {lane.second.name}", nets=(lane.glide_net,)
                )
                continue
            nets = tuple(dict.fromkeys(net for pin in board.pins(ref) if (net := board.net(ref, pin))))
            if len(nets) < 2:
                yield Measurement(parts=(ref,), what=f"{ref}: on one net, or on none (control-wiper)", nets=nets)
                continue
            lacks = _lacks(board, nets)
            yield Measurement(
                parts=(ref,),
                what=f"{ref}: in no lane",
                nets=nets,
                fault=Fault(
                    f"{ref} ({listed(nets)}) stands in no lane: {lacks}",
                    "a lane is a buffer, the control, a capacitor to 0 V and a second buffer in a row; this "
                    "one does not glide",
                    f"wire {ref} as the other controls are, or take it out",
                ),
            )


def _lacks(board: Board, nets: tuple[str, ...]) -> str:
    """What keeps a control from being part of a lane, the first that explains the rest."""
    outputs = {s.output: s.name for s in reversed(board.sections) if s.output}
    readers = {s.noninverting: s.name for s in reversed(board.sections) if s.noninverting}

    def held(net: str) -> list[str]:
        return [step.ref for step in board.between(net, "capacitor")]

    # the end with the capacitor and the buffer is the one that glides; pin 3 of equal ones, by convention
    glides = max(nets, key=lambda net: (2 * bool(held(net)) + (net in readers), nets.index(net)))
    if glides in board.supply_nets:
        return f"net {glides} is a supply"
    if glides in outputs:
        return f"net {glides} is driven by {outputs[glides]}, so that nothing glides on it"
    if not held(glides):
        return f"no capacitor stands from {glides} to 0 V"
    if glides not in readers:
        return f"no buffer follows {glides}"
    others = [net for net in nets if net != glides]
    if not any(least_path(board, net, outputs, around=board.supply_nets) for net in others):
        return f"no amplifier output leads to {listed(others)}"
    return f"what stands from {glides} to 0 V is not capacitors alone, or what leads there is no single way"
