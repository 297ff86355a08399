"""A supply that goes under a name of its own."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.supplies import NAMES, WORDS, unnamed
from modgen.rules.support import listed


class RailNotNamed(Rule):
    """The supply nets bear the names that the netlist conventions give them.

    Checks:
        There is a net 0V; the nets on the packages' supply pins are called V+ and, where there is a
        negative supply, V-; those on the header's supply pins BUS+ and BUS-. A supply of another name is
        taken for what it is where header, diodes and supply pins leave no doubt, and a note says so.
        Where they do and 0V, V+ or V- are not there, the rules that follow currents and voltages are not
        judged: they would take the supply for a signal and report every part on it.
    Matters:
        A rule that looks for 0 V and does not find it can clear nothing, and dozens of findings that
        all come from one name hide the others.
    Fails:
        start from: lane
        without J1
        J2 TN=GND S=GND
        J3 S=GND
        R1 2=GND
        C1 2=GND
        C2 2=GND
        C3 2=GND
        C4 2=GND
        C5 1=GND
    Passes:
        start from: lane
    Limits:
        Sees a supply by the header and the supply pins; one that is on another supply's net is not
        nameless but shorted or missing, which is for rails-shorted, swapped-supply and
        reverse-polarity to say.
    References:
        Net names of this program's netlist conventions; 0V, V+ and V- as names: common practice.
    """

    name = "rail-not-named"
    subject = "wiring"
    needs_rails = False

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every supply name that there is or should be."""
        board = context.board
        missing = {supply.name: supply for supply in unnamed(board)}
        for name in NAMES:
            supply = missing.get(name)
            if supply is None:
                if name in board.netlist.by_net:
                    what = f"{name}: {len(board.on(name))} pins"
                    yield Measurement(parts=(), what=what, nets=(name,), fault=_own(board, name))
                continue
            where = f": {supply.where}" if supply.where else ""
            why = "every voltage is measured from it" if name == "0V" else f"{name} is {WORDS[name]}"
            why += "; the rules that follow currents and voltages were not judged" if supply.blinds else ""
            fix = f"call net {listed(supply.nets)} {name}" if supply.nets else f"call the net that is 0 V {name}"
            if set(supply.nets) & set(NAMES):
                fix = f"give the pins of {WORDS[name]} a net of their own, called {name}"
            yield Measurement(
                parts=board.parts_of("header"),
                what=f"{name}: no net of that name",
                nets=supply.nets,
                fault=Fault(f"there is no net named {name}{where}", why, fix),
            )


def _own(board: Board, name: str) -> Fault | None:
    """A note for a supply that is plain to see under another name."""
    own = dict(board.own_names).get(name)
    if own is None:
        return None
    return Fault(
        f"net {own} is taken for {name}, and called so in what follows",
        f"its pins say that it is {WORDS[name]}",
        f"nothing, or call net {own} {name}",
        level="note",
    )
