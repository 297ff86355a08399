"""An input that a neighbour can drive into phase reversal."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import is_input, least_path
from modgen.units import format_quantity


class PhaseReversal(Rule):
    """No input that may turn its phase round stands open to a neighbour at the rail.

    Checks:
        For each section of a type whose output turns its phase round beyond the input range: whether a
        socket leads to one of its inputs, and by how much a neighbour at the same rails then exceeds the
        guaranteed range. Where the spec's span says what comes into a lane, that is measured but not
        noted, since common-mode holds the span against the range.
    Matters:
        Beyond its range the output of such a type jumps to the other rail: the pitch leaps to the end
        of its range in the middle of a note, and comes back by itself.
    Fails:
        start from: lane
        U2 tl072-dip8 1=MIX 2=MIX 3=AUX 4=V- 8=V+
        R8 metal-film-0207-10k 1=MIX 2=0V
        R9 metal-film-0207-100k 1=AUX 2=0V
        J4 jack-35-switched T=AUX TN=0V S=0V
    Passes:
        start from: lane
    Limits:
        The range is the one that the maker guarantees; most parts reach further. Clamps are not
        followed.
    References:
        ST TL072 datasheet rev 4, common-mode input range; Texas Instruments SNOSBW5C, phase reversal.
    """

    name = "phase-reversal"
    subject = "signal"
    level = "note"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every input that a socket leads to, of a type that reverses."""
        board = context.board
        tips = {jack.tip: jack.ref for jack in reversed(board.jacks) if jack.tip and is_input(board, jack.ref)}
        stop = {*board.supply_nets, *(s.output for s in board.sections if s.output)}
        ends = [net for net in tips if net not in stop]
        known = {(lane.first.package, lane.first.index) for lane in board.channels} if context.spec else set()
        # with lanes that are cut nobody knows what a socket is for; other rules say that they are
        cut = context.spec is not None and len(board.channels) < context.spec.channels
        for section in board.sections:
            record = section.record
            for net, kind in ((section.inverting, "inverting"), (section.noninverting, "non-inverting")):
                path = least_path(board, net, ends, around=stop) if net and net not in stop else None
                if path is None:
                    continue
                beyond = max(record.common_mode_low, record.common_mode_high)
                name = f"{kind} input of {section.name}"
                if not record.phase_reversal or beyond <= 0:
                    yield Measurement(parts=(section.package,), what=f"{name}: does not reverse")
                    continue
                volts, jack = format_quantity(beyond, "voltage"), tips[path[1]]
                fault = None
                if (section.package, section.index) not in known and not cut:
                    fault = Fault(
                        f"a neighbour at the rail drives the {name} ({record.type}) {volts} beyond its range, "
                        f"through {jack}",
                        "beyond its range this type turns its phase round, and its output jumps to a rail",
                        "divide or clamp the input, or take a type that does not reverse",
                    )
                yield Measurement(
                    parts=(section.package,),
                    what=f"{name}: a neighbour at the rail is {volts} beyond its range",
                    measured=beyond,
                    limit=0.0,
                    unit="V",
                    nets=(net,) if net else (),
                    fault=fault,
                    key="build.amplifier",
                )
