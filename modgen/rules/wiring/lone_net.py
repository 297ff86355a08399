"""A net that goes nowhere."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.engine import nearest
from modgen.rules.support import may_stay_open

#: A net joins at least this many pins [pins]. Source: what a net is.
LEAST_PINS = 2
#: nets of a netlist in which a name that was meant is guessed
MOST_NAMES = 1000


class LoneNet(Rule):
    """Every net has at least two pins.

    Checks:
        The number of pins of each net; the nearest other net name is given, for a net with one pin is
        often a misspelt one.
    Matters:
        Two names for what was meant as one net leave an open circuit that no part shows.
    Fails:
        start from: lane
        C1 1=CH1_GLDIE
    Passes:
        start from: lane
    Limits:
        A misspelt name with two pins on it passes here; the parts behind it show as floating or idle.
        The open tip switch of an output socket and unused header pins are allowed a net of their own.
    References:
        Common practice: the single-pin-net check of every layout editor.
    """

    name = "lone-net"
    subject = "wiring"
    needs_rails = False

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every net."""
        board = context.board
        # a guess at the right name takes a look at every name
        names = [net.name for net in board.netlist.nets] if len(board.netlist.nets) <= MOST_NAMES else []
        for net in board.netlist.nets:
            fault = None
            count = len(net.pins)
            if count < LEAST_PINS and not any(may_stay_open(board, ref, pin) for ref, pin in net.pins):
                near = nearest(net.name, [name for name in names if name != net.name])
                on = f"only pin {net.pins[0][1]} of {net.pins[0][0]}" if net.pins else "no pin"
                fault = Fault(
                    f"net {net.name} has {on} on it",
                    "a net that ends where it begins is an open circuit, often a misspelt name",
                    f"join it to the net that was meant{f', perhaps {near}' if near else ''}",
                )
            yield Measurement(
                parts=tuple(sorted({ref for ref, _ in net.pins})) if count < LEAST_PINS else (),
                what=f"{net.name}: {count} pin{'' if count == 1 else 's'}",
                measured=float(count),
                limit=float(LEAST_PINS),
                unit="pins",
                nets=(net.name,),
                fault=fault,
            )
