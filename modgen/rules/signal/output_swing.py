"""A signal that goes beyond what an amplifier can put out."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.headroom import headrooms
from modgen.analysis.power import rail_powers
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import headroom_measurement, listed


class OutputSwing(Rule):
    """The signal stays within the guaranteed output swing of every buffer.

    Checks:
        For each kind of stage: the span of the signal, with the offsets on the way and what an output
        resistor inside the loop takes, against the guaranteed swing into 10 kohm, with the rails at the
        low end of their tolerance and behind their diodes.
    Matters:
        Beyond its swing an output clips: the top notes of a sequence all play at one pitch.
    Fails:
        start from: lane
        spec: signal.span -10 V to 10 V
    Passes:
        start from: lane
    Limits:
        Loads below 10 kohm take more of the swing than is counted here.
    References:
        ST TL072 datasheet rev 4, output voltage swing.
    """

    name = "output-swing"
    subject = "signal"
    needs_spec = True

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Each kind of stage."""
        board, spec = context.board, context.spec
        assert spec is not None
        powers = rail_powers(board, spec.rails, spec.signal)
        for stage in headrooms(board, powers, spec.signal, spec.accuracy):
            if stage.subject != "swing":
                continue
            fault = Fault(
                f"the {stage.stage} ({listed(stage.parts)}) drives {{way}} {{can}} and the signal reaches {{needed}}",
                "beyond its swing the output clips",
                "narrow signal.span, raise the rails, or take an amplifier with a wider swing",
            )
            yield headroom_measurement(stage, fault)
