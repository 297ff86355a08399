"""A capacitor on more voltage than it is made for."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.voltage import net_bounds, span_across
from modgen.catalogue.records import Capacitor
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import left
from modgen.units import format_quantity

#: Share of the rating that is used when the catalogue says nothing of the part [-]. Common practice, no source.
DERATING = 0.8


class CapacitorVoltage(Rule):
    """No capacitor sees more than the derated share of its rated voltage.

    Checks:
        For every capacitor the worst voltage across it, over every supply and socket state with the
        rails at the high end of their tolerance, against its rating times the derating of its kind.
        Beyond the rating is an error, between derated and rated voltage a warning.
    Matters:
        An electrolytic beyond its rating heats and vents, a film capacitor breaks down, and both live
        shorter the closer to it they run.
    Fails:
        start from: lane
        C4 voltage=10V
    Passes:
        start from: lane
    Limits:
        Ripple current, surges beyond the rails and loss of capacitance under bias are not judged.
    References:
        Rated and surge voltage: Vishay document 28309. Derating: common practice, 80 % or less.
    """

    name = "capacitor-voltage"
    subject = "ratings"
    needs_spec = True

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every capacitor."""
        board, spec = context.board, context.spec
        assert spec is not None
        bounds = net_bounds(board, spec.rails)
        for ref in board.parts_of("capacitor"):
            lowest, highest = span_across(board, bounds, ref)
            worst = max(abs(lowest), abs(highest))
            rated = board.rating(ref, "voltage")
            volts = format_quantity(worst, "voltage", 4)
            nets = tuple(net for net in (board.net(ref, "1"), board.net(ref, "2")) if net)
            if rated is None:
                yield Measurement(
                    parts=(ref,), what=f"{ref}: {volts}, rating unknown", measured=worst, unit="V", nets=nets
                )
                continue
            record = board.record(ref)
            share = record.derating if isinstance(record, Capacitor) else DERATING
            limit = rated * share
            fault = None
            margin = left(worst, limit)
            if margin < 0:
                over = left(worst, rated) < 0
                rating, derated = format_quantity(rated, "voltage", 4), format_quantity(limit, "voltage", 4)
                fault = Fault(
                    f"{ref} is rated {rating} and can see {volts}"
                    if over
                    else f"{ref} can see {volts}, more than the {derated} that a {rating} part is used at",
                    "the greatest voltage between its nets over every supply and socket state",
                    "fit a part of a higher rated voltage",
                    level="error" if over else "warning",
                )
            yield Measurement(
                parts=(ref,),
                what=f"{ref}: {volts} of {format_quantity(rated, 'voltage', 4)} x {format_quantity(share, 'ratio')}",
                measured=worst,
                limit=limit,
                unit="V",
                margin=margin,
                nets=nets,
                fault=fault,
                key="rails.positive",
            )
