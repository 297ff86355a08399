"""Amplifier outputs that fight each other."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board, Section
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import closed_contacts, groups, listed, switch_positions

#: Outputs that may drive one node [outputs]. Source: what an output is.
MOST_OUTPUTS = 1
#: A resistor up to this joins its ends [ohm]. Source: wire links and zero-ohm resistors are below 50 mohm.
LINK = 1.0


class TiedOutputs(Rule):
    """No two amplifier outputs are wired together, in no state of the sockets and switches.

    Checks:
        How many outputs drive each node, first by the wires alone, then with every switch contact
        of a socket closed as it is when nothing is plugged in, and the panel switches in each
        position. An output whose resistor is inside its feedback loop drives the net behind the
        resistor; links of up to 1 ohm are wires.
    Matters:
        Two outputs on one node push their short-circuit currents into each other as soon as they
        differ.
    Fails:
        start from: lane
        U1 7=CH1_BUF
    Passes:
        start from: lane
    Limits:
        Outputs that meet behind a resistor each, outside their loops, are not seen, rightly. Header pins
        and rails are other rules'.
    References:
        Common practice: the driver-conflict check of every schematic editor.
    """

    name = "tied-outputs"
    subject = "wiring"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every node with an output on it."""
        board = context.board
        links = [
            (net, step.net)
            for net in board.netlist.by_net
            for step in board.between(net, "resistor")
            if (ohms := board.value(step.ref)) is not None and ohms <= LINK
        ]
        wired = groups(links)
        nodes: dict[str, list[tuple[Section, str]]] = {}
        for state in switch_positions(board):
            join = groups([*links, *((a, b) for _, a, b in (*closed_contacts(board), *state))])
            found: dict[str, list[tuple[Section, str]]] = {}
            for section in board.sections:
                for net in driven(board, section):
                    found.setdefault(join(net), []).append((section, net))
            for node, drivers in found.items():
                # what fights in one position fights
                nodes[node] = max(nodes.get(node, []), drivers, key=len)
        for node, drivers in sorted(nodes.items()):
            nets = tuple(sorted({net for _, net in drivers}))
            sections = list(dict.fromkeys(section for section, _ in drivers))
            fault = None
            if len(sections) > MOST_OUTPUTS:
                fix = "give each output a net of its own"
                inside = [s.name for s, net in drivers if net != s.output]
                if len({wired(net) for net in nets}) == 1:
                    where = f"wired together on net {nets[0]}" if len(nets) == 1 else f"linked (nets {listed(nets)})"
                    where += f", which {listed(inside)} hold{'s' if len(inside) == 1 else ''} by feedback" * bool(
                        inside
                    )
                else:
                    switched = groups([*links, *((a, b) for _, a, b in closed_contacts(board))])
                    by = "socket" if len({switched(net) for net in nets}) == 1 else "switch"
                    where = f"joined by closed {by} contacts (nets {listed(nets)})"
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


def driven(board: Board, section: Section) -> tuple[str, ...]:
    """The nets that an output holds at a voltage: its own, and one behind a resistor where its feedback is taken."""
    if section.output is None:
        return ()
    nets = [section.output]
    tips = {jack.tip for jack in board.jacks if jack.tip}
    if section.inverting is not None and not section.follower:
        for step in board.between(section.output, "resistor"):
            # where feedback is taken straight from a summing node, no socket is on that
            taken = bool(board.ties(step.net, section.inverting, "resistor")) and step.net not in board.supply_nets
            if taken or (step.net == section.inverting and step.net in tips):
                nets.append(step.net)
    return tuple(dict.fromkeys(nets))
