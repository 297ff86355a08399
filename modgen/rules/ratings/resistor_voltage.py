"""A resistor on more voltage than it is made for."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.voltage import across, net_bounds
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import left
from modgen.units import format_quantity


class ResistorVoltage(Rule):
    """No resistor sees more than the voltage that its body is made for.

    Checks:
        For every fixed resistor the greatest voltage between its nets, over every supply and socket state with the
        rails at the high end of their tolerance, against the limiting element voltage of its record.
    Matters:
        A chip of a large value can be far below its power and still arc across its trimming cut: its value
        drifts first, then it opens.
    Fails:
        start from: lane
        R1 voltage=10V
    Passes:
        start from: lane
    Limits:
        Pulses beyond the rails and static discharge are not judged. Parts without a stated voltage are passed over.
    References:
        Limiting element voltage: Vishay Beyschlag document 28766; IEC 60115-1 (from memory).
    """

    name = "resistor-voltage"
    subject = "ratings"
    needs_spec = True

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every fixed resistor whose rating is known."""
        board, spec = context.board, context.spec
        assert spec is not None
        bounds = net_bounds(board, spec.rails)
        for ref in board.parts_of("resistor"):
            rated = board.rating(ref, "voltage")
            if rated is None:
                continue
            volts = across(board, bounds, ref)
            seen, most = format_quantity(volts, "voltage", 4), format_quantity(rated, "voltage", 4)
            margin = left(volts, rated)
            fault = None
            if margin < 0:
                fault = Fault(
                    f"{ref} is made for {most} and can see {seen}",
                    "its element drifts, and arcs across its trimming cut at last",
                    "fit a larger body, or two in series",
                )
            yield Measurement(
                parts=(ref,),
                what=f"{ref}: {seen} of {most}",
                measured=volts,
                limit=rated,
                unit="V",
                margin=margin,
                nets=tuple(net for net in (board.net(ref, "1"), board.net(ref, "2")) if net),
                fault=fault,
                key="rails.positive",
            )
