"""Amplifier outputs that fight each other."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Section
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import closed_contacts, groups, listed

#: Outputs that may drive one node [outputs]. Source: what an output is.
MOST_OUTPUTS = 1


class TiedOutputs(Rule):
    """No two amplifier outputs are wired together, in no state of the sockets.

    Checks:
        How many outputs drive each node, first by the wires alone, then with every switch contact
        closed as it is when nothing is plugged in.
    Matters:
        Two outputs on one node push their short-circuit currents into each other as soon as they
        differ.
    Fails:
        start from: lane
        U1 7=CH1_BUF
    Passes:
        start from: lane
    Limits:
        Outputs that meet behind a resistor each are not seen, rightly. Header pins and rails are other
        rules'.
    References:
        Common practice: the driver-conflict check of every schematic editor.
    """

    name = "tied-outputs"
    subject = "wiring"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every node with an output on it."""
        board = context.board
        join = groups((a, b) for _, a, b in closed_contacts(board))
        nodes: dict[str, list[Section]] = {}
        for section in board.sections:
            if section.output:
                nodes.setdefault(join(section.output), []).append(section)
        for node, sections in sorted(nodes.items()):
            nets = tuple(sorted({s.output for s in sections if s.output}))
            fault = None
            if len(sections) > MOST_OUTPUTS:
                if len(nets) == 1:
                    where, fix = f"wired together on net {nets[0]}", "give each output a net of its own"
                else:
                    where = f"joined by closed socket contacts (nets {listed(nets)})"
                    fix = "take the switch contact off the output"
                fault = Fault(
                    f"the outputs of {listed(s.name for s in sections)} are {where}",
                    "each drives its short-circuit current into the other as soon as they differ",
                    fix,
                )
            yield Measurement(
                parts=tuple(dict.fromkeys(s.package for s in sections)),
                what=f"{node}: {len(sections)} output{'' if len(sections) == 1 else 's'}",
                measured=float(len(sections)),
                limit=float(MOST_OUTPUTS),
                unit="outputs",
                nets=nets,
                fault=fault,
            )
