"""An unused amplifier left to itself."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board, Section
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import ground_nets, least_path, listed


class IdleAmplifier(Rule):
    """Every unused section is a follower of 0 V.

    Checks:
        Each section whose output leads to nothing but itself: its output is tied to its inverting
        input, and its non-inverting input to 0 V, straight or through a resistor (through a resistor
        where the type wants that), on a net that no signal is on.
    Matters:
        An open section sits at a rail or oscillates, heats its package and couples into its neighbours.
    Fails:
        start from: lane
        U1 5=IDLE1B 6=IDLE1B 7=
    Passes:
        start from: lane
    Limits:
        A section that drives some part is in use, whatever the part is for. Followers of a mid-rail are
        not known.
    References:
        Texas Instruments SLOA277B, section 7.1 (unused amplifiers: follower to 0 V, through a resistor
        for some types).
    """

    name = "idle-amplifier"
    subject = "wiring"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every section, in use or not."""
        board = context.board
        for section in board.sections:
            if in_use(board, section):
                yield Measurement(parts=(section.package,), what=f"{section.name} drives {section.output}")
                continue
            fault = self._fault(board, section)
            yield Measurement(
                parts=(section.package,),
                what=f"{section.name} is idle" + ("" if fault else " and follows 0 V"),
                nets=(section.output,) if section.output else (),
                fault=fault,
            )

    def _fault(self, board: Board, section: Section) -> Fault | None:
        grounds = ground_nets(board)
        why = "an open section sits at a rail or oscillates, heats its package and couples into its neighbours"
        output, inverting, noninverting = section.pins
        if not section.follower:
            return Fault(
                f"{section.name} is not used, and its output (pin {output}) is not tied to its inverting input "
                f"(pin {inverting})",
                why,
                f"join pins {output} and {inverting} of {section.package}, and take pin {noninverting} to 0 V",
            )
        net = section.noninverting
        path = least_path(board, net, grounds) if net else None
        if path is None:
            return Fault(
                f"{section.name} is not used, and its non-inverting input (pin {noninverting}) does not lead to 0 V",
                why,
                f"take pin {noninverting} of {section.package} to 0 V",
            )
        shared = [other for other in board.sections if net not in grounds and _lives_on(board, other, section, net)]
        if shared:
            return Fault(
                f"{section.name} is not used, and its non-inverting input (pin {noninverting}) shares net {net} with "
                f"{listed(other.name for other in shared)}",
                "it follows a signal in the place of 0 V, and its tie loads that signal",
                f"give pin {noninverting} of {section.package} a net of its own",
            )
        if section.record.ground_input_through_resistor and not path[2]:
            return Fault(
                f"{section.name} is not used, and its non-inverting input (pin {noninverting}) is tied straight to 0 V",
                f"the maker of {section.record.type} asks for a resistor between an input and 0 V",
                f"take pin {noninverting} of {section.package} to 0 V through a resistor",
                level="warning",
            )
        return None


def _lives_on(board: Board, other: Section, idle: Section, net: str | None) -> bool:
    """Whether another section drives a net, or reads it for something that is used."""
    if (other.package, other.index) == (idle.package, idle.index):
        return False
    return net == other.output or (net in (other.inverting, other.noninverting) and in_use(board, other))


def in_use(board: Board, section: Section) -> bool:
    """Whether an output leads to anything but the section's own inputs."""
    if section.output is None:
        return False
    own = {(section.package, pin) for pin in section.pins}
    return any(pin not in own for pin in board.on(section.output))
