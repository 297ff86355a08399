"""A signal that goes beyond an amplifier's input range."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.headroom import headrooms
from modgen.analysis.power import rail_powers
from modgen.catalogue.records import Amplifier
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import headroom_measurement, listed


class CommonMode(Rule):
    """The signal stays within the guaranteed input range of every buffer.

    Checks:
        For each kind of stage: the span of the signal, with the offset of what is before it, against
        the guaranteed common-mode range, with the rails at the low end of their tolerance and behind
        their diodes.
    Matters:
        Below its range a JFET input turns the output's phase round: the pitch jumps to a rail in the
        middle of a note.
    Fails:
        start from: lane
        spec: signal.span -10 V to 10 V
    Passes:
        start from: lane
    Limits:
        Takes the headroom that the maker states at one supply to hold at every supply. Judges the lanes
        it finds by structure.
    References:
        ST TL072 datasheet rev 4, common-mode input range; TI SNOSBW5C, phase reversal.
    """

    name = "common-mode"
    subject = "signal"
    needs_spec = True

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Each kind of stage."""
        board, spec = context.board, context.spec
        assert spec is not None
        powers = rail_powers(board, spec.rails, spec.signal)
        for stage in headrooms(board, powers, spec.signal, spec.accuracy):
            if stage.subject != "common mode":
                continue
            records = [board.record(ref) for ref in stage.parts]
            reverses = any(isinstance(r, Amplifier) and r.phase_reversal for r in records)
            fault = Fault(
                f"the {stage.stage} ({listed(stage.parts)}) takes inputs {{way}} {{can}} "
                "and the signal reaches {needed}",
                "beyond its range the output of this type turns its phase round and jumps"
                if reverses
                else "beyond its range the output does not follow the input",
                "narrow signal.span, raise the rails, or take an amplifier with a wider input range",
            )
            yield headroom_measurement(stage, fault)
