"""A channel that is out of tune."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.accuracy import scale_terms
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import left
from modgen.units import format_quantity


class ScaleError(Rule):
    """The scale error of every channel keeps within the budget.

    Checks:
        For each channel the sum of all scale errors in the worst case at 25 degC: source into
        terminators, common-mode rejection and gain of both buffers, output resistor into the load,
        insulation of the glide capacitor.
    Matters:
        A scale error grows with every octave and cannot be tuned out; five cents an octave are heard.
    Fails:
        start from: lane
        spec: accuracy.scale 0.4 %
    Passes:
        start from: lane
    Limits:
        The sum takes all errors to have one sign. Warm-up and drift are not in it.
    References:
        Loading of a divider, any textbook on circuits; WIMA MKS 2 and KNOWLES C0G datasheets,
        insulation.
    """

    name = "scale-error"
    subject = "function"
    needs_spec = True

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every channel."""
        board, spec = context.board, context.spec
        assert spec is not None
        kind = "pitch" if spec.signal.pitch else "ratio"
        unit = " per octave" if spec.signal.pitch else ""

        def text(value: float) -> str:
            return format_quantity(value, kind, 4) + unit

        for lane in board.channels:
            terms = scale_terms(board, lane, spec.signal)
            worst, budget = sum(term.worst for term in terms), spec.accuracy.scale
            fault = None
            margin = left(worst, budget)
            if margin < 0:
                chief = max(terms, key=lambda term: term.worst)
                fault = Fault(
                    f"channel {lane.channel} can be off by {text(worst)} in scale; the budget is {text(budget)}",
                    f"most of it is {chief.name} ({chief.source}): {text(chief.worst)}",
                    f"take {chief.remedy}",
                )
            yield Measurement(
                parts=tuple(
                    dict.fromkeys(
                        (
                            *lane.terminators,
                            lane.first.package,
                            lane.second.package,
                            *lane.output_series,
                            *lane.capacitors,
                        )
                    )
                ),
                what=f"channel {lane.channel}: {text(worst)} of {text(budget)}",
                measured=worst,
                limit=budget,
                unit="-",
                margin=margin,
                fault=fault,
                key="accuracy.scale",
            )
