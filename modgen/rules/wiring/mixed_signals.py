"""An amplifier input that two signals reach."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board, Jack
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import ground_nets, is_input, listed

#: signals that may reach one input [signals]. Source: what a channel is.
MOST_SIGNALS = 1


class MixedSignals(Rule):
    """At most one signal reaches each amplifier input.

    Checks:
        For each input of each section, which sources reach its net through resistors and controls, other
        inputs not passed: amplifier outputs, and sockets that are not fed by one or whose tip switch is
        wired, as an input's is. There is at most one. The summing input of an inverting amplifier is let
        be.
    Matters:
        Two nets that should be apart and are one leave every part in its place and every input with a path: the
        board passes each of the checks on paths, and plays a mixture of two channels, or a channel that
        follows itself.
    Fails:
        start from: lane
        U1 3=CH1_GLIDE
        R2 2=CH1_GLIDE
    Passes:
        start from: pair
    Limits:
        A mixer that adds through resistors into a follower is meant to do this, and shows as a fault. Capacitors
        and switch contacts are not followed.
    References:
        Superposition, any textbook on circuits; one source an input: common practice in circuits without a mixer.
    """

    name = "mixed-signals"
    subject = "wiring"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Each net with an amplifier input on it, once."""
        board = context.board
        grounds = set(ground_nets(board))
        readers: dict[str, list[str]] = {}
        inputs = {net for s in board.sections for net in (s.inverting, s.noninverting) if net}
        for section in board.sections:
            summing = section.noninverting in grounds and not section.follower
            for net in (section.noninverting, None if summing else section.inverting):
                if net is not None and net not in grounds and section.name not in readers.get(net, []):
                    readers.setdefault(net, []).append(section.name)
        stop = {*board.supply_nets, *grounds}
        outputs = {s.output: (s.name, s.package) for s in reversed(board.sections) if s.output}
        sockets = {
            jack.tip: jack.ref for jack in reversed(board.jacks) if jack.tip and _is_source(board, jack, grounds)
        }
        for net in sorted(set(readers) - stop):
            # what reaches another input is that one's to judge; a summing input lets nothing through
            found = _sources(board, net, stop | (inputs - {net, *outputs}), outputs, sockets)
            names = sorted(found)
            fault = None
            if len(found) > MOST_SIGNALS:
                fault = Fault(
                    f"{listed(names)} reach the input{'s' * (len(readers[net]) > 1)} of {listed(readers[net])} "
                    f"together, on net {net}",
                    "they pull against each other through their resistors, and the channel plays a mixture",
                    f"part what is joined on {net}, so that one signal is left on it",
                )
            yield Measurement(
                parts=tuple(dict.fromkeys(ref for refs in found.values() for ref in refs)) if fault else (),
                what=f"{net}: {listed(names) or 'no signal'}",
                measured=float(len(found)),
                limit=float(MOST_SIGNALS),
                unit="signals",
                nets=(net,),
                fault=fault,
            )


def _is_source(board: Board, jack: Jack, grounds: set[str]) -> bool:
    """Whether a socket brings a signal: nothing feeds it, or it is wired as an input is."""
    wired = jack.switch is not None and jack.switch != jack.tip and len(board.on(jack.switch)) > 1
    return jack.tip not in grounds and (wired or is_input(board, jack.ref))


def _sources(
    board: Board,
    start: str,
    stop: set[str],
    outputs: dict[str, tuple[str, str]],
    sockets: dict[str, str],
) -> dict[str, tuple[str, ...]]:
    """What reaches a net, by name, each with the parts on the way."""
    found: dict[str, tuple[str, ...]] = {}
    queue: list[tuple[str, tuple[str, ...]]] = [(start, ())]
    seen = {start}
    while queue:
        at, refs = queue.pop(0)
        if at in outputs:
            name, package = outputs[at]
            found.setdefault(name, (package, *refs))
        if at in sockets:
            found.setdefault(sockets[at], (sockets[at], *refs))
        if at != start and (at in outputs or at in sockets):
            continue  # what stands behind a source does not come through it
        for step in board.between(at, "resistor", "control"):
            if step.net not in seen | stop:
                seen.add(step.net)
                queue.append((step.net, (*refs, step.ref)))
    return found
