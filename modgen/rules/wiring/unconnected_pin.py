"""A pin that is connected to nothing."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import may_stay_open


class UnconnectedPin(Rule):
    """Every pin that the catalogue lists is on a net with another pin.

    Checks:
        Every pin of every part: the catalogue record's, or the netlist's own list for a part that is
        not in the catalogue. Two kinds may stay open: the tip switch of an output socket, and the
        header pins of a negative rail that the board does not use.
    Matters:
        A part with an open pin is not in the circuit, however well it is placed.
    Fails:
        start from: lane
        C1 2=
    Passes:
        start from: lane
    Limits:
        A pin that only meets another pin of its own part counts as connected.
    References:
        Common practice: the unconnected-pin check of every schematic editor.
    """

    name = "unconnected-pin"
    subject = "wiring"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every pin of every part."""
        board = context.board
        for ref in board.refs:
            record = board.record(ref)
            names = {pin.number: pin.name for pin in record.pins} if record is not None else {}
            for pin in board.pins(ref):
                net = board.net(ref, pin)
                pins = board.on(net) if net else ()
                excuse = may_stay_open(board, ref, pin) if len(pins) < 2 else ""
                fault = None
                label = names.get(pin, "")
                label = f"pin {pin} ({label})" if label and label != pin else f"pin {pin}"
                if len(pins) < 2 and not excuse:
                    alone = f"is alone on net {net}" if net else "is on no net"
                    fault = Fault(
                        f"{label} of {ref} {alone}",
                        "a part with an open pin is not in the circuit",
                        f"connect {ref} pin {pin}, or take {ref} out",
                    )
                yield Measurement(
                    parts=(ref,),
                    what=f"{ref} pin {pin} {f'on {net}' if net else 'open'}{f': {excuse}' if excuse else ''}",
                    nets=(net,) if net else (),
                    fault=fault,
                )
