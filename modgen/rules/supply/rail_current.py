"""A rail that draws more than its header carries."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.power import rail_powers
from modgen.design.practice import CURRENT_DERATING
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import left, rails
from modgen.units import format_quantity


class RailCurrent(Rule):
    """No rail draws more than half of what its contacts at the header carry.

    Checks:
        For each rail the greatest steady current (all sections at rest, all outputs at the end of the
        span) against the rating of the header's contacts that bring it. Beyond the rating is an error,
        beyond half of it a warning.
    Matters:
        A contact that runs warm loosens, its resistance rises, and the rail sags with the load.
    Fails:
        start from: lane
        J1 current=2mA
    Passes:
        start from: lane
    Limits:
        The peak while every channel slews lasts milliseconds and is the reservoir's. What the case can
        give is not known.
    References:
        Header contacts and ribbon, 1 A: common practice, no source.
    """

    name = "rail-current"
    subject = "supply"
    needs_spec = True

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every rail."""
        board, spec = context.board, context.spec
        assert spec is not None
        powers = {power.bus_nominal > 0: power for power in rail_powers(board, spec.rails, spec.signal)}
        for rail in rails(board):
            power = powers.get(rail.sign > 0)
            contacts = [(ref, pin) for ref, pin in board.on(rail.bus) if board.kind(ref) == "header"]
            each = [rating for ref, _ in contacts if (rating := board.rating(ref, "current")) is not None]
            if power is None or not each:
                continue
            rated = min(each) * len(contacts)
            limit = CURRENT_DERATING * rated
            draw, most = (format_quantity(value, "current") for value in (power.current_max, rated))
            share = format_quantity(CURRENT_DERATING, "ratio")
            margin = left(power.current_max, limit)
            fault = None
            if margin < 0:
                over = power.current_max > rated
                pins = "1 contact" if len(contacts) == 1 else f"{len(contacts)} contacts together"
                fault = Fault(
                    f"the {rail.name} draws {draw}; {pins} of the header can carry {most}"
                    + ("" if over else f", of which {share} is used"),
                    "a contact that runs warm loosens, and the rail sags",
                    "bring the rail in by more contacts, or take amplifiers that draw less",
                    level="error" if over else "warning",
                )
            yield Measurement(
                parts=tuple(dict.fromkeys(ref for ref, _ in contacts)),
                what=f"{rail.name}: {draw} of {most} x {share}",
                measured=power.current_max,
                limit=limit,
                unit="A",
                margin=margin,
                nets=(rail.bus,),
                fault=fault,
                key="channels",
            )
