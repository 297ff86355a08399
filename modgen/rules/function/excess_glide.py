"""A control whose range ends far beyond what was asked for."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.glide import LaneValues, factor_of
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import left
from modgen.units import format_quantity

#: Nominal longest glide over what was asked for, at most [-]. Sizing aims at 1.5 over tolerance; at 5 the range that
#: was asked for lies in the first fifth of a linear control. Our choice.
MOST = 5.0


class ExcessGlide(Rule):
    """No channel's slow end lies more than five times beyond the longest glide of the spec.

    Checks:
        For each channel, by the spec's own measure and with nominal values, the glide at the slow end against
        five times the longest that is asked for.
    Matters:
        A control or capacitor of ten times the value still covers the range, so that glide-range is content; but
        all of the range then lies in a sliver of the travel that no hand can set.
    Fails:
        start from: lane
        spec: glide.shortest 500 ms
        C1 value=10u
    Passes:
        start from: lane
    Limits:
        Does not weigh the taper: a log control gives the fast end more room than a linear one.
    References:
        IEEE Std 181, transition duration; the factor is common practice, no source.
    """

    name = "excess-glide"
    subject = "function"
    needs_spec = True

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every lane."""
        board, spec = context.board, context.spec
        assert spec is not None
        factor = factor_of(spec.glide)
        limit = MOST * spec.glide.longest
        for lane in board.channels:
            values = LaneValues.of(board, lane)
            longest = values.interval(1 - values.fastest, factor, slow=True).nominal
            seen, asked = format_quantity(longest, "time", 4), format_quantity(spec.glide.longest, "time", 4)
            margin = left(longest, limit)
            fault = None
            if margin < 0:
                fault = Fault(
                    f"channel {lane.channel} glides for up to {seen}; {asked} is asked for",
                    "the range that is asked for lies in a sliver of the control's travel",
                    f"fit a smaller value as {lane.control}, or less capacitance at {lane.glide_net}",
                )
            yield Measurement(
                parts=(*lane.isolating, lane.control, *lane.capacitors),
                what=f"channel {lane.channel}: {seen} of {format_quantity(limit, 'time', 4)}",
                measured=longest,
                limit=limit,
                unit="s",
                margin=margin,
                nets=(lane.glide_net,),
                fault=fault,
                key="glide.longest",
            )
