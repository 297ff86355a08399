"""A power header whose pins carry what they should not."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import HEADER_GROUND, HEADER_NEGATIVE, HEADER_POSITIVE, header_turned, listed, pins_text

GROUPS = (("negative supply", HEADER_NEGATIVE), ("0 V", HEADER_GROUND), ("positive supply", HEADER_POSITIVE))


class MiswiredHeader(Rule):
    """The pins of the power header carry what every ribbon brings to them.

    Checks:
        On each header pins 1 and 2 are the negative supply, 3 to 8 are 0 V, 9 and 10 the positive
        supply: each group on one net, 0 V on the board's own, at least one pin of 0 V and of a supply
        connected. Diodes and supply pins of the packages tell whether the whole header is the wrong way
        round.
    Matters:
        The ribbon does not ask. A header that is drawn the wrong way round puts every rail on the wrong
        side, and each part behind it then looks wrong, though only the header is.
    Fails:
        start from: lane
        J1 1=BUS+ 2=BUS+ 9=BUS- 10=BUS-
    Passes:
        start from: lane
    Limits:
        Knows the 2x5 header only. Two supplies on one net are for rails-shorted, single open pins for
        unconnected-pin.
    References:
        Contacts of the 2x5 power header, stripe at pins 1 and 2: common practice.
    """

    name = "miswired-header"
    subject = "supply"
    needs_rails = False

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Each group of pins of each header."""
        board = context.board
        for ref in board.parts_of("header"):
            if header_turned(board):
                yield _turned(board, ref)
                continue
            for word, pins in GROUPS:
                yield _group(board, ref, word, pins)


def _nets(board: Board, ref: str, pins: tuple[str, ...]) -> list[str]:
    found = (board.net(ref, pin) for pin in pins)
    return list(dict.fromkeys(net for net in found if net and len(board.on(net)) > 1))


def _turned(board: Board, ref: str) -> Measurement:
    low, high = (_nets(board, ref, pins) for pins in (HEADER_NEGATIVE, HEADER_POSITIVE))
    ends = ((HEADER_NEGATIVE, low, "positive"), (HEADER_POSITIVE, high, "negative"))
    said = [f"{pins_text(ref, pins)} carry {listed(nets)}, the {word} supply" for pins, nets, word in ends if nets]
    puts = [
        f"{listed(nets)} on pins {listed(pins)}"
        for nets, pins in ((low, HEADER_POSITIVE), (high, HEADER_NEGATIVE))
        if nets
    ]
    return Measurement(
        parts=(ref,),
        what=f"{ref}: the wrong way round",
        nets=(*low, *high),
        fault=Fault(
            f"the header is wired the wrong way round: {'; '.join(said)}",
            f"a ribbon brings the negative supply to {pins_text(ref, HEADER_NEGATIVE)} and the positive one to "
            f"{listed(HEADER_POSITIVE)}; diodes and packages are right as they are",
            f"put {listed(puts)}",
        ),
    )


def _group(board: Board, ref: str, word: str, pins: tuple[str, ...]) -> Measurement:
    nets = _nets(board, ref, pins)
    fault = None
    if len(nets) > 1:
        fault = Fault(
            f"{pins_text(ref, pins)} are all {word} and stand on different nets ({listed(nets)})",
            "the ribbon joins them, whatever the board means by them",
            f"put {pins_text(ref, pins)} on one net",
        )
    elif word == "0 V" and not nets:
        fault = Fault(
            f"no pin of {ref} brings 0 V: {pins_text(ref, pins)} are open",
            "without 0 V from the header nothing on the board has a return, and the sockets' sleeves carry it",
            f"put {pins_text(ref, pins)} on 0V",
        )
    elif word == "0 V" and board.ground in board.netlist.by_net and nets != [board.ground]:
        fault = Fault(
            f"{pins_text(ref, pins)} bring 0 V to net {nets[0]}, and the board's 0 V is net {board.ground}",
            "the board has no return to the header",
            f"put {pins_text(ref, pins)} on {board.ground}",
        )
    elif word == "positive supply" and not nets:
        fault = Fault(
            f"no pin of {ref} brings the positive supply: {pins_text(ref, pins)} are open",
            "nothing on the board is fed",
            f"put {pins_text(ref, pins)} on BUS+",
        )
    return Measurement(
        parts=(ref,),
        what=f"{pins_text(ref, pins)} ({word}) on {listed(nets) or 'no net'}",
        nets=tuple(nets),
        fault=fault,
    )
