"""A socket whose contacts are exchanged."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board, Jack
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import ground_nets, is_input, listed, rails
from modgen.spec.model import Spec

CONTACTS = {"T": "tip", "TN": "tip switch", "S": "sleeve"}


class JackContacts(Rule):
    """Tip, tip switch and sleeve of every socket are on the nets that they are for.

    Checks:
        The sleeve is on 0 V and the tip on a signal. The tip switch of an input is on 0 V or on the tip of
        another input, that of an output is open. With a spec: each input's switch leads to the input
        before it where the spec asks for a chain, and to 0 V elsewhere.
    Matters:
        The contacts of a socket stand side by side and each maker numbers them his own way. Exchanged, a
        socket passes nothing, shorts its signal as soon as a plug goes in, or feeds the wrong lane when none
        is in.
    Fails:
        start from: lane
        J2 T=0V TN=CH1_IN
    Passes:
        start from: lane
    Limits:
        Takes a socket whose tip no amplifier drives for an input. An open tip or sleeve is for
        unconnected-pin to say.
    References:
        IEC 60603-11 (from memory): tip and sleeve. Switched contacts: common practice.
    """

    name = "jack-contacts"
    subject = "wiring"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every socket, and the order of the inputs."""
        board = context.board
        supplies = {*board.supply_nets, *(net for rail in rails(board) for net in rail.nets)}
        grounds = set(ground_nets(board))
        faulty = False
        for jack in board.jacks:
            fault = _fault(board, jack, grounds, supplies)
            faulty = faulty or fault is not None
            yield Measurement(
                parts=(jack.ref,),
                what=f"{jack.ref}: " + ", ".join(f"{CONTACTS[pin]} on {net or 'no net'}" for pin, net in _nets(jack)),
                nets=tuple(dict.fromkeys(net for _, net in _nets(jack) if net)),
                fault=fault,
            )
        if context.spec is not None and not faulty:
            yield from _order(board, context.spec, grounds)


def _nets(jack: Jack) -> tuple[tuple[str, str | None], ...]:
    return ("T", jack.tip), ("TN", jack.switch), ("S", jack.sleeve)


def _swap(jack: Jack, one: str, two: str) -> str:
    return f"swap {one} and {two} of {jack.ref}"


def _fault(board: Board, jack: Jack, grounds: set[str], supplies: set[str]) -> Fault | None:
    """What is wrong with one socket; the first that explains the rest."""
    tip, switch, sleeve = jack.tip, jack.switch, jack.sleeve
    dead = "a plug finds 0 V or a supply where the signal should be"
    if sleeve is not None and sleeve not in grounds:
        message = f"the sleeve of {jack.ref} is on {sleeve}, not on 0 V"
        why = "the plug of a cable joins the sleeve to the 0 V of its neighbour, and shorts what is on it"
        if tip in grounds:
            return Fault(f"{message}, and its tip is on {tip}", why, _swap(jack, "T", "S"))
        if switch in grounds and is_input(board, jack.ref):
            return Fault(f"{message}, and its tip switch is on {switch}", why, _swap(jack, "TN", "S"))
        return Fault(message, why, f"put S of {jack.ref} on 0V")
    if tip in supplies | grounds:
        message = f"the tip of {jack.ref} is on {tip}, a supply"
        if switch is not None and switch not in supplies | grounds:
            return Fault(f"{message}, and its tip switch is on {switch}", dead, _swap(jack, "T", "TN"))
        return Fault(message, dead, f"put T of {jack.ref} on its signal")
    if tip is None or switch is None or len(board.on(switch)) < 2:
        return None
    if switch == tip:
        return Fault(
            f"tip and tip switch of {jack.ref} are both on {tip}",
            "the switch then does nothing, and an empty input is held by nothing but its terminator",
            f"put TN of {jack.ref} on 0V, or on the tip of the input before it",
        )
    if not is_input(board, jack.ref):
        return Fault(
            f"the tip switch of the output {jack.ref} is on {switch}",
            "with no plug in it the output is joined to that net",
            f"leave TN of {jack.ref} open",
        )
    if switch in grounds:
        return None
    if switch in supplies:
        return Fault(
            f"the tip switch of the input {jack.ref} is on {switch}, a supply",
            "with no plug in it the lane stands at the rail, and a plug on its way in shorts the supply",
            f"put TN of {jack.ref} on 0V, or on the tip of the input before it",
        )
    others = [other for other in board.jacks if other.ref != jack.ref]
    tips = [other for other in others if other.tip == switch and is_input(board, other.ref)]
    shared = [other.ref for other in others if other.tip == tip]
    if not tips and shared:
        return Fault(
            f"the tip of {jack.ref} is on {tip}, which is the tip of {listed(shared)}, and its tip switch on {switch}",
            "its plug goes into the lane before it, and its own lane is left without a socket",
            _swap(jack, "T", "TN"),
        )
    if not tips:
        return Fault(
            f"the tip switch of the input {jack.ref} is on {switch}, which is neither 0 V nor the tip of an input",
            "with no plug in it the lane takes what stands there",
            f"put TN of {jack.ref} on 0V, or on the tip of the input before it",
        )
    return None


def _order(board: Board, spec: Spec, grounds: set[str]) -> Iterator[Measurement]:
    """Whether each input falls back on what the spec asks for."""
    inputs: dict[str, int] = {}
    for lane in board.channels:
        if lane.input_net is not None:
            inputs.setdefault(lane.input_net, lane.channel)
    jacks = {jack.tip: jack for jack in reversed(board.jacks) if jack.tip in inputs}
    ordered = [(channel, net) for net, channel in sorted(inputs.items(), key=lambda entry: entry[1]) if net in jacks]
    if [channel for channel, _ in ordered] != list(range(1, spec.jacks.inputs + 1)):
        return  # a lane or a socket is missing, which other rules say
    before: str | None = None
    for channel, net in ordered:
        jack = jacks[net]
        wanted = before if spec.normalling == "chain" else None
        right = jack.switch == wanted if wanted else jack.switch in grounds
        before = net
        fault = None
        if not right and jack.switch is not None:
            asked = f"the input before it ({wanted})" if wanted else "0 V"
            fault = Fault(
                f"the tip switch of input {channel} ({jack.ref}) is on {jack.switch}; {asked} is asked for",
                f"the spec says 'normalling: {spec.normalling}'"
                + (", and the first input has none before it" if spec.normalling == "chain" and not wanted else ""),
                f"put TN of {jack.ref} on {wanted or '0V'}",
            )
        yield Measurement(
            parts=(jack.ref,),
            what=f"input {channel} ({jack.ref}) falls back on {jack.switch or 'nothing'}",
            nets=(jack.switch,) if jack.switch else (),
            fault=fault,
            key="normalling",
        )
