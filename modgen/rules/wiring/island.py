"""Parts that are connected to each other and to nothing else."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import listed


class Island(Rule):
    """Every part that is connected to anything is connected to the circuit.

    Checks:
        Groups of parts that hang together by their nets, supplies included. The one with the power
        header is the circuit, or the largest where there is no header; there must be no other.
    Matters:
        An island is a piece that was copied and never joined, or one that a renamed net cut off; layout
        places it, and it does nothing.
    Fails:
        start from: lane
        R8 metal-film-0207-10k 1=LEFT 2=OVER
        C8 c0g-radial-100v-470p 1=LEFT 2=OVER
    Passes:
        start from: lane
    Limits:
        A piece that shares nothing but 0 V with the rest counts as connected. A part on no net at all is
        for unconnected-pin to say.
    References:
        Common practice: connectivity check of layout editors.
    """

    name = "island"
    subject = "wiring"
    needs_rails = False

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every group of parts."""
        board = context.board
        groups = connected(board)
        headers = set(board.parts_of("header"))
        main = next((g for g in groups if headers & set(g)), groups[0] if groups else ())
        for group in groups:
            nets = tuple(net.name for net in board.netlist.nets if any(ref in group for ref, _ in net.pins))
            fault = None
            if group != main:
                what = "has no connection" if len(group) == 1 else "are joined to each other and have no connection"
                fault = Fault(
                    f"{listed(group)} {what} to the rest of the circuit (net{'s' if len(nets) > 1 else ''} "
                    f"{listed(nets)})",
                    "it was copied and never joined, or a net of another name cuts it off",
                    "join it to the net that was meant, or take it out",
                )
            count = f"{len(group)} part{'s' if len(group) > 1 else ''}"
            yield Measurement(
                parts=group if fault else (),
                what=f"the circuit: {count}" if group == main else f"an island of {count}",
                nets=nets if fault else (),
                fault=fault,
            )


def connected(board: Board) -> list[tuple[str, ...]]:
    """Groups of parts that nets join, the largest first; of equal ones that with the first part.

    A part alone counts only where it shares a net between its own pins: a pin on a net of its own joins nothing.
    """
    by_ref: dict[str, set[str]] = {}
    for net in board.netlist.nets:
        refs = {ref for ref, _ in net.pins}
        if len(net.pins) > 1:
            for ref in refs:
                by_ref.setdefault(ref, set()).update(refs)
    seen: set[str] = set()
    groups = []
    for ref in board.refs:
        if ref in seen or ref not in by_ref:
            continue
        group, queue = {ref}, [ref]
        while queue:
            for other in by_ref[queue.pop()] - group:
                group.add(other)
                queue.append(other)
        seen |= group
        groups.append(tuple(r for r in board.refs if r in group))
    return sorted(groups, key=lambda group: -len(group))
