"""A channel that no socket leads into or out of."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board, Lane
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import is_input, listed


class ChannelWithoutSocket(Rule):
    """Every channel has an input socket, of its own or shared, and an output socket.

    Checks:
        For each lane that is found: a socket leads to its first buffer through resistors, and no amplifier feeds
        that socket; at least one socket hangs on its second buffer, straight or through a resistor.
    Matters:
        A socket that was left out, or stands on another channel's net, leaves a channel that nobody can plug
        into, though every part of it works.
    Fails:
        start from: lane
        without J2
    Passes:
        start from: lane
    Limits:
        Sockets behind capacitors are not seen. How many there should be is the spec's, and is compared there.
    References:
        Common practice: a lane begins and ends at the panel.
    """

    name = "channel-without-socket"
    subject = "function"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Both ends of every lane."""
        board = context.board
        for lane in board.channels:
            yield _input(board, lane)
            yield _output(board, lane)


def _input(board: Board, lane: Lane) -> Measurement:
    name, fault = lane.first.name, None
    nets = _behind(board, lane.first.noninverting)
    fed = [ref for ref in lane.input_jacks if not is_input(board, ref)]
    if lane.input_net is None:
        fault = Fault(
            f"no socket leads to {name}, the input buffer of channel {lane.channel} (net{'s' * (len(nets) > 1)} "
            f"{listed(nets)})",
            "nothing can be plugged into the channel",
            f"put the tip of a socket on {nets[-1] if nets else 'its input'}",
        )
    elif fed:
        fault = Fault(
            f"{listed(fed)}, the input of channel {lane.channel}, is fed by an amplifier on the board",
            "what is plugged in drives against that amplifier",
            f"part {lane.input_net} from the output that reaches it",
        )
    return Measurement(
        parts=(lane.first.package, *lane.input_jacks, *lane.input_series),
        what=f"channel {lane.channel}: {listed(lane.input_jacks) or 'no socket'} to {name}",
        nets=nets,
        fault=fault,
    )


def _output(board: Board, lane: Lane) -> Measurement:
    name, fault = lane.second.name, None
    nets = _behind(board, lane.second.output)
    if not lane.output_jacks:
        fault = Fault(
            f"no socket hangs on {name}, the output buffer of channel {lane.channel} (net{'s' * (len(nets) > 1)} "
            f"{listed(nets)})",
            "the channel cannot be heard",
            f"put the tip of a socket on {nets[-1] if nets else 'its output'}",
        )
    return Measurement(
        parts=(lane.second.package, *lane.output_jacks, *lane.output_series),
        what=f"channel {lane.channel}: {name} to {listed(lane.output_jacks) or 'no socket'}",
        nets=nets,
        fault=fault,
    )


def _behind(board: Board, net: str | None) -> tuple[str, ...]:
    """A net, and those one resistor away that are no supply."""
    if net is None:
        return ()
    near = [step.net for step in board.between(net, "resistor") if step.net not in board.supply_nets]
    return tuple(dict.fromkeys((net, *near)))
