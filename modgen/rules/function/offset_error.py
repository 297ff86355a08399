"""A channel that is shifted."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.accuracy import offset_terms
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import left
from modgen.units import format_quantity


class OffsetError(Rule):
    """The offset of every channel keeps within the budget.

    Checks:
        For each channel the sum of all offsets in the worst case at 25 degC: offset voltage of both
        buffers, their bias current through the resistors at their inputs with the control at its
        longest, leakage of the glide capacitor.
    Matters:
        A bipolar input behind a megohm, or an electrolytic in the glide position, shifts the pitch by
        semitones, and by more when it is warm.
    Fails:
        start from: lane
        spec: accuracy.offset 10 mV
    Passes:
        start from: lane
    Limits:
        The sum takes all errors to have one sign. Leakage is the maker's limit, which real parts
        undercut by far.
    References:
        ST TL072 datasheet rev 4, offset voltage and bias current; Vishay document 28309, leakage.
    """

    name = "offset-error"
    subject = "function"
    needs_spec = True

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every channel."""
        board, spec = context.board, context.spec
        assert spec is not None
        budget = spec.accuracy.offset
        for lane in board.channels:
            terms = offset_terms(board, lane, spec.signal)
            worst = sum(term.worst for term in terms)
            seen, most = (format_quantity(value, "voltage", 4) for value in (worst, budget))
            fault = None
            margin = left(worst, budget)
            if margin < 0:
                chief = max(terms, key=lambda term: term.worst)
                fault = Fault(
                    f"channel {lane.channel} can be off by {seen}; the budget is {most}",
                    f"most of it is {chief.name} ({chief.source}): {format_quantity(chief.worst, 'voltage')}",
                    f"take {chief.remedy}",
                )
            yield Measurement(
                parts=tuple(
                    dict.fromkeys(
                        (*lane.input_series, lane.first.package, lane.control, *lane.capacitors, lane.second.package)
                    )
                ),
                what=f"channel {lane.channel}: {seen} of {most}",
                measured=worst,
                limit=budget,
                unit="V",
                margin=margin,
                fault=fault,
                key="accuracy.offset",
            )
