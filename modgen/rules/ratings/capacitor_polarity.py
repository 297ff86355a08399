"""A polarised capacitor that can stand on its head."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board
from modgen.analysis.model import MissingRail
from modgen.analysis.power import rail_powers
from modgen.analysis.supply_states import missing_rails
from modgen.analysis.voltage import net_bounds, span_across
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import left
from modgen.spec.model import Rails
from modgen.units import format_quantity

#: Reverse voltage that is let pass [V]. Makers allow up to 1 V (Vishay document 28309), as a fault, not as
#: a working condition; only rounding is let pass here.
REVERSE = 1e-6


class CapacitorPolarity(Rule):
    """No polarised capacitor is ever reversed.

    Checks:
        For every polarised capacitor the least voltage from its + end to its - end, over every supply
        and socket state: it must not be below zero. Of two back to back with like ends tied to each
        other and to nothing else, each takes only its own sign. With a spec: the reservoir of a rail
        that is missing at the bus, which the amplifiers' current then holds one drop of the rail's
        diode the wrong way round, against 1 V.
    Matters:
        A reversed electrolytic leaks, heats and vents. In the glide position it sees both signs as soon
        as a signal does.
    Fails:
        start from: lane
        C5 1=V- 2=0V
    Passes:
        start from: lane
    Limits:
        Reversal during power-up and power-down counts only as far as a missing rail shows it. A broken
        contact of the header, with which nothing holds the missing rail, is not judged. Without a
        spec the rails are taken by sign alone, and the voltage in the message is then for rails of 1 V.
    References:
        Vishay document 28309: reverse voltage at most 1 V. Back-to-back pairs: common practice.
    """

    name = "capacitor-polarity"
    subject = "ratings"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every polarised capacitor."""
        board, spec = context.board, context.spec
        rails = spec.rails if spec is not None else Rails(1.0, 0.0 if board.single else -1.0, 0.0)
        bounds = net_bounds(board, rails)
        for ref in board.parts_of("capacitor"):
            if not board.polarised(ref):
                continue
            plus, minus = board.net(ref, "1"), board.net(ref, "2")
            lowest, _ = span_across(board, bounds, ref)
            partner = board.partner(ref)
            fault = None
            if lowest < -REVERSE:
                volts = format_quantity(-lowest, "voltage", 4)
                how = f"by {volts}" if spec is not None else f"(net {plus} can stand below net {minus})"
                fault = Fault(
                    f"{ref} is polarised and can be reversed {how}",
                    f"its + end (pin 1) is on {plus}, which can stand below {minus}",
                    f"turn {ref} round, fit one that is not polarised, or two back to back",
                )
            words = f"back to back with {partner}" if partner else f"+ on {plus}, - on {minus}"
            yield Measurement(
                parts=(ref,) if partner is None else (ref, partner),
                what=f"{ref}: {words}",
                measured=lowest,
                limit=0.0,
                unit="V",
                nets=tuple(net for net in (plus, minus) if net),
                fault=fault,
            )
        if spec is not None:
            for missing in missing_rails(board, spec.rails, rail_powers(board, spec.rails, spec.signal)):
                if missing.capacitor:
                    yield _missing(board, missing)


def _missing(board: Board, missing: MissingRail) -> Measurement:
    ref = missing.capacitor
    volts, most = format_quantity(missing.measured, "voltage"), format_quantity(missing.limit, "voltage")
    fault = None
    margin = left(missing.measured, missing.limit)
    if margin < 0:
        fault = Fault(
            f"{ref} bears {most} in reverse and gets {volts} while {missing.rail} is missing at the bus",
            "the current of the amplifiers flows on into the rail that is not there, and through its diode",
            "fit a diode that drops less at this current, such as a Schottky, or a capacitor that is not polarised",
        )
    return Measurement(
        parts=(ref,),
        what=f"{ref}: {volts} in reverse of {most} while {missing.rail} is missing",
        measured=missing.measured,
        limit=missing.limit,
        unit="V",
        margin=margin,
        nets=(missing.rail, board.ground),
        fault=fault,
        key="rails.positive" if missing.rail == "V+" else "rails.negative",
    )
