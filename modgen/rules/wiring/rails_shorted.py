"""Two supplies that are one."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.supplies import LEVELS, NAMES, WORDS, carried
from modgen.rules.support import MOST_FILTER, listed
from modgen.units import format_quantity

#: A resistor from one supply to another below this is a link [ohm]: at 5 V it would draw half an ampere.
#: Common practice, no source.
LINK = 10.0


class RailsShorted(Rule):
    """No two supplies meet on one net or through a link.

    Checks:
        What each net carries, by the header's pins and by the diodes that conduct from or to them: 0 V,
        the supplies at the header, the rails behind the diodes. Each net carries one of them. Between
        two of them stands no resistor below 10 ohm, between a supply at the header and its own rail none
        below 100 ohm, and no diode that conducts from the higher to the lower.
    Matters:
        The first board that is plugged in shorts the case's supply, and its ribbon burns before the fuse
        blows. A link from the header to the rail behind the diode takes the protection away.
    Fails:
        start from: lane
        U1 8=0V
        D1 1=0V
        C2 1=0V
        C4 1=0V
    Passes:
        start from: lane
    Limits:
        Parts that are neither resistor nor diode (fuses, inductors) are not followed.
    References:
        Contacts of the 2x5 power header: common practice.
    """

    name = "rails-shorted"
    subject = "wiring"
    needs_rails = False

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every supply net, and every part between two of them."""
        board = context.board
        found = carried(board)
        why = "the supply is shorted as soon as the board is plugged in"
        for net in sorted(found):
            supplies = sorted(found[net], key=NAMES.index)
            fault = None
            if len(supplies) > 1:
                said = [f"{WORDS[supply]} ({found[net][supply]})" for supply in supplies]
                protected = len({LEVELS[supply] for supply in supplies}) == 1
                fault = Fault(
                    f"net {net} carries {listed(said)}",
                    "the protection is bridged, and a header turned round destroys the board" if protected else why,
                    f"give {listed(supplies)} nets of their own",
                )
            yield Measurement(
                parts=tuple(dict.fromkeys(ref for ref, _ in board.on(net))) if fault else (),
                what=f"{net} carries {listed(WORDS[supply] for supply in supplies)}",
                nets=(net,),
                fault=fault,
            )
        single = {net: next(iter(said)) for net, said in found.items() if len(said) == 1}
        yield from _bridges(board, single, why)


def _bridges(board: Board, supply: dict[str, str], why: str) -> Iterator[Measurement]:
    """Resistors and diodes between two supplies."""
    for ref in (*board.parts_of("resistor"), *board.parts_of("diode")):
        one, two = board.net(ref, "1"), board.net(ref, "2")
        if one not in supply or two not in supply or supply[one] == supply[two]:
            continue
        nets = tuple(net for net in (one, two) if net)
        ends = f"{one} and {two}"
        fault = None
        if board.kind(ref) == "diode":
            what = f"{ref} from {two} to {one}"
            if LEVELS[supply[two]] > LEVELS[supply[one]]:
                fault = Fault(
                    f"{ref} conducts from {two} to {one}, two supplies",
                    why,
                    f"take {ref} out, or put it in series with one supply",
                )
        else:
            ohms = board.value(ref) or 0.0
            same = LEVELS[supply[one]] == LEVELS[supply[two]]
            what = f"{ref} ({format_quantity(ohms, 'resistance')}) between {ends}"
            if ohms <= MOST_FILTER and same:
                fault = Fault(
                    f"{ref} ({format_quantity(ohms, 'resistance')}) joins {ends}, past the diode between them",
                    "the protection is bridged, and a header turned round destroys the board",
                    f"take {ref} out",
                )
            elif ohms < LINK and not same:
                fault = Fault(
                    f"{ref} ({format_quantity(ohms, 'resistance')}) joins {ends}, two supplies", why, f"take {ref} out"
                )
        yield Measurement(parts=(ref,), what=what, nets=nets, fault=fault)
    for contact in board.contacts:
        one, two = contact.common, contact.throw
        if one in supply and two in supply and supply[one] != supply[two]:
            yield Measurement(
                parts=(contact.ref,),
                what=f"{contact.ref} at {contact.position} between {one} and {two}",
                nets=(one, two),
                fault=Fault(
                    f"{contact.ref} joins {one} and {two}, two supplies, at {contact.position}",
                    "the supply is shorted, or its protection bridged, in that position",
                    f"take {contact.ref} off one of them",
                ),
            )
