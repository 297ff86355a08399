"""A pin that is connected to nothing."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import HEADER_GROUND, HEADER_NEGATIVE, HEADER_POSITIVE, may_stay_open

#: what each pin of the power header is for, and the net it belongs on
SUPPLY = {
    **dict.fromkeys(HEADER_NEGATIVE, "the negative supply"),
    **dict.fromkeys(HEADER_GROUND, "0 V"),
    **dict.fromkeys(HEADER_POSITIVE, "the positive supply"),
}
NET = {
    **dict.fromkeys(HEADER_NEGATIVE, "BUS-"),
    **dict.fromkeys(HEADER_GROUND, "0V"),
    **dict.fromkeys(HEADER_POSITIVE, "BUS+"),
}


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
    needs_rails = False

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
                if board.kind(ref) == "header":
                    label = SUPPLY.get(pin, label)
                label = f"pin {pin} ({label})" if label and label != pin else f"pin {pin}"
                if len(pins) < 2 and not excuse:
                    alone = f"is alone on net {net}" if net else "is on no net"
                    fault = Fault(
                        f"{label} of {ref} {alone}",
                        "a part with an open pin is not in the circuit"
                        if board.kind(ref) != "header"
                        else f"the ribbon brings {SUPPLY.get(pin, 'a supply')} there, and nothing takes it",
                        f"connect {ref} pin {pin}, or take {ref} out"
                        if board.kind(ref) != "header"
                        else f"connect {ref} pin {pin} to {NET.get(pin, 'its supply')}",
                    )
                yield Measurement(
                    parts=(ref,),
                    what=f"{ref} pin {pin} {f'on {net}' if net else 'open'}{f': {excuse}' if excuse else ''}",
                    nets=(net,) if net else (),
                    fault=fault,
                )
