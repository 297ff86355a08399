"""A diode in a supply lead that is too small."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.power import rail_powers
from modgen.catalogue.records import Diode
from modgen.design.practice import CURRENT_DERATING, LEAST_RECTIFIER
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import above, left, rails
from modgen.units import format_quantity


class DiodeRating(Rule):
    """The diode of each rail is a rectifier, and carries at most half of its rated current.

    Checks:
        Each diode in series with a rail is rated for 0.5 A at least. With a spec: the greatest steady
        current of its rail against half of its rating; beyond the rating is an error, beyond half of it
        a warning.
    Matters:
        When the module is plugged in, the reservoirs charge through this diode, and with a shorted
        output or ribbon all of the fault current does: a small signal diode opens, or worse, shorts, and
        the protection is gone unseen.
    Fails:
        start from: lane
        D1 1n4148
    Passes:
        start from: lane
    Limits:
        Surge current is judged only by the least rating. Diodes outside of the rails are not judged.
        Reverse voltage is for reverse-polarity.
    References:
        Ratings: Diodes Inc. DS23001, Panjit 1N4148 datasheet. Half an ampere, and half of a rating: common
        practice, no source.
    """

    name = "diode-rating"
    subject = "ratings"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every diode of every rail."""
        board, spec = context.board, context.spec
        share, powers = format_quantity(CURRENT_DERATING, "ratio"), {}
        if spec is not None:
            powers = {power.bus_nominal > 0: power for power in rail_powers(board, spec.rails, spec.signal)}
        for rail in rails(board):
            for ref in rail.diodes:
                record = board.record(ref)
                if not isinstance(record, Diode):
                    continue
                rated, least = record.forward_current, LEAST_RECTIFIER
                carries, wanted = format_quantity(rated, "current"), format_quantity(least, "current")
                margin = above(rated, least)
                fault = None
                if margin < 0:
                    fault = Fault(
                        f"{ref} ({board.part(ref).value}) carries {carries}; a supply lead wants {wanted}",
                        "reservoirs charge through it, and a shorted ribbon or output draws all of it through here",
                        "fit a rectifier of 1 A",
                    )
                yield Measurement(
                    parts=(ref,),
                    what=f"{ref} in the {rail.name}: made for {carries} where {wanted} is wanted",
                    measured=rated,
                    limit=least,
                    unit="A",
                    margin=margin,
                    nets=rail.nets,
                    fault=fault,
                )
                power = powers.get(rail.sign > 0)
                if power is None:
                    continue
                current, limit = power.current_max, CURRENT_DERATING * rated
                draw = format_quantity(current, "current")
                margin = left(current, limit)
                fault = None
                if margin < 0:
                    over = current > rated
                    fault = Fault(
                        f"{ref} carries {carries} and the {rail.name} draws {draw}"
                        + ("" if over else f", more than the {share} of a rating that is used"),
                        "the diode overheats" if over else "it runs hot, and inrush adds to that",
                        "fit a diode of a higher forward current",
                        level="error" if over else "warning",
                    )
                yield Measurement(
                    parts=(ref,),
                    what=f"{ref} in the {rail.name}: {draw} of {carries} x {share}",
                    measured=current,
                    limit=limit,
                    unit="A",
                    margin=margin,
                    nets=rail.nets,
                    fault=fault,
                    key="channels",
                )
