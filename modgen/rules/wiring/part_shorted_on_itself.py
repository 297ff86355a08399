"""A part with both ends on one net."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import listed


class PartShortedOnItself(Rule):
    """No resistor, capacitor or diode has both of its pins on one net, and no switch two.

    Checks:
        The nets on both pins of every two-terminal part, and on the pins of every panel switch.
    Matters:
        Such a part does nothing, and usually a net was drawn through it: what it should have kept apart
        is one.
    Fails:
        start from: lane
        R2 2=CH1_IN
    Passes:
        start from: lane
    Limits:
        Controls are for control-wiper, sockets for jack-contacts.
    References:
        Common practice: the shorted-part check of schematic editors.
    """

    name = "part-shorted-on-itself"
    subject = "wiring"
    needs_rails = False

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every two-terminal part and every switch."""
        board = context.board
        yield from _switches(board)
        for kind in ("capacitor", "diode", "resistor"):
            for ref in board.parts_of(kind):
                one, two = board.net(ref, "1"), board.net(ref, "2")
                fault = None
                if one is not None and one == two:
                    fault = Fault(
                        f"both pins of {ref} ({board.part(ref).value or 'no value'}) are on net {one}",
                        "the part does nothing, and what it should keep apart is joined",
                        f"put one pin of {ref} on the net that was meant",
                    )
                yield Measurement(
                    parts=(ref,),
                    what=f"{ref} between {one or 'no net'} and {two or 'no net'}",
                    nets=tuple(net for net in dict.fromkeys((one, two)) if net),
                    fault=fault,
                )


def _switches(board: Board) -> Iterator[Measurement]:
    for ref in board.parts_of("switch"):
        pins: dict[str, list[str]] = {}
        for pin in ("1", "2", "3"):
            if net := board.net(ref, pin):
                pins.setdefault(net, []).append(pin)
        net, shorted = next(((net, found) for net, found in pins.items() if len(found) > 1), ("", []))
        fault = None
        if shorted:
            fault = Fault(
                f"pins {listed(shorted)} of {ref} are on net {net}",
                "the switch joins what is joined already, or the same in both positions",
                f"put one of these pins of {ref} on the net that was meant",
            )
        yield Measurement(parts=(ref,), what=f"{ref} on {listed(pins) or 'no net'}", nets=tuple(pins), fault=fault)
