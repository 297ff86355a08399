"""An input or output that a powered neighbour burns while the module is off."""

from __future__ import annotations

import math
from collections.abc import Iterator

from modgen.analysis.model import Backfeed
from modgen.analysis.supply_states import powered_off
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import least_path, left, listed
from modgen.units import format_quantity

#: Forward drop of the junction from an input to a supply pin [V]. Common practice, no source.
JUNCTION = 0.6

#: What is judged beside inputs: where the current goes, what to do about it, and the level.
_WHAT = {
    "output": ("into its output", "fit a larger output resistor", "warning"),
    "jack": ("through its contacts", "fit larger resistors behind the socket", "warning"),
}


class InputClamp(Rule):
    """With the module off, nothing takes more current from a powered neighbour than it bears.

    Checks:
        For each amplifier input that a socket leads to: the rail at the high end of its tolerance, less
        one junction, across the resistors on the way at the low end of theirs, against the greatest
        current that the input's clamp bears. For each output of a lane: the same through its output
        resistor, against the amplifier's greatest short-circuit current, which flows through the same
        junctions; and for each socket all that its resistors take, against the rating of its contacts.
        These two are warnings: outputs are patched to outputs by mistake only.
    Matters:
        A powered-off module sees its neighbours' rails through every cable; its amplifiers' inputs then
        conduct to the supply pins, and without a resistor in the way they burn or feed the whole board.
    Fails:
        start from: lane
        R2 value=100
    Passes:
        start from: lane
    Limits:
        Takes the neighbours to be on the same rails as this module. Static discharge is not judged, nor
        what all sockets together put into a rail, which does no damage. An output without a resistor is
        for output-short.
    References:
        10 mA, the usual limit of clamp current: NE5532, MCP6002 datasheets (from memory). Method:
        common practice.
    """

    name = "input-clamp"
    subject = "signal"
    needs_spec = True

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every input that a socket leads to."""
        board, spec = context.board, context.spec
        assert spec is not None
        volts = max(spec.rails.positive, -spec.rails.negative) * (1 + spec.rails.tolerance) - JUNCTION
        tips = {jack.tip: jack.ref for jack in reversed(board.jacks) if jack.tip}
        stop = {*board.supply_nets, *(s.output for s in board.sections if s.output)}
        ends = [net for net in tips if net not in stop]
        for section in board.sections:
            for net, kind in ((section.inverting, "inverting"), (section.noninverting, "non-inverting")):
                if net is None or net in stop:
                    continue
                path = least_path(board, net, ends, around=stop)
                limit = section.record.clamp_current
                if path is None or limit <= 0:
                    continue
                _, tip, refs = path
                ohms = sum(found.low for ref in refs if (found := board.interval(ref)) is not None)
                current = volts / ohms if ohms > 0 else math.inf
                seen, most = format_quantity(current, "current"), format_quantity(limit, "current")
                by = f"{seen} through {listed(refs)}"
                if ohms <= 0:
                    by = "all that a neighbour can drive, with no resistor in the way"
                fault = None
                margin = left(current, limit) if ohms > 0 else -1.0
                if margin < 0:
                    fault = Fault(
                        f"{section.name} bears {most} into its {kind} input and takes {by}, from {tips[tip]}",
                        "while the module is off, a powered neighbour puts "
                        f"{format_quantity(volts + JUNCTION, 'voltage', 4)} on the socket",
                        f"put at least {format_quantity(volts / limit, 'resistance')} between the socket and the input",
                    )
                yield Measurement(
                    parts=(section.package, *refs),
                    what=f"{section.name} {kind} input, of {most}: {by}",
                    measured=current if ohms > 0 else None,
                    limit=limit,
                    unit="A",
                    margin=margin,
                    nets=(net,),
                    fault=fault,
                    key="rails.positive",
                )
        for fed in powered_off(board, spec.rails):
            if fed.subject in _WHAT and math.isfinite(fed.measured) and math.isfinite(fed.limit):
                yield _driven(fed)


def _driven(fed: Backfeed) -> Measurement:
    """What a neighbour drives into an output or a socket."""
    seen, most = format_quantity(fed.measured, "current"), format_quantity(fed.limit, "current")
    what, fix, level = _WHAT[fed.subject]
    fault = None
    margin = left(fed.measured, fed.limit)
    if margin < 0:
        fault = Fault(
            f"{fed.name} bears {most} {what} and takes {seen} from a powered neighbour",
            f"while the module is off, that puts {format_quantity(fed.voltage, 'voltage', 4)} on the socket",
            fix,
            level=level,
        )
    return Measurement(
        parts=fed.parts,
        what=f"{fed.name}, of {most} {what}: {seen}",
        measured=fed.measured,
        limit=fed.limit,
        unit="A",
        margin=margin,
        fault=fault,
        key="rails.positive",
    )
