"""A package on a supply it is not made for."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board
from modgen.analysis.model import RailPower
from modgen.analysis.power import rail_powers
from modgen.catalogue.records import Amplifier
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import above, ground_nets, left
from modgen.spec.model import Spec
from modgen.units import format_quantity


class SupplyRange(Rule):
    """Every package can stand the rails, and works on what is left of them.

    Checks:
        For each package, across both of its supply pins: the rails at the high end of their tolerance,
        with no drop in the diodes, against the absolute maximum; the nominal rails against the
        recommended range; the rails at their low end, behind the diodes at the greatest current,
        against the least supply.
    Matters:
        Parts for 7 V, 16 V and 36 V come in the same package under the same pinout. Above the absolute
        maximum they are destroyed; below their least supply nothing in the datasheet holds.
    Fails:
        start from: lane
        U1 tlv9152-soic8
    Passes:
        start from: lane
    Limits:
        Surges beyond the tolerance of the rails are not known.
    References:
        TI SBOS986C page 1 (16 V), Microchip DS21733J (6 V), ST TL072 datasheet rev 4: supply limits.
    """

    name = "supply-range"
    subject = "supply"
    needs_spec = True

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Three limits of every package."""
        board, spec = context.board, context.spec
        assert spec is not None
        powers = rail_powers(board, spec.rails, spec.signal)
        for ref in board.parts_of("amplifier"):
            record = board.record(ref)
            if isinstance(record, Amplifier):
                yield from self._package(board, spec, powers, ref, record)

    def _package(
        self, board: Board, spec: Spec, powers: tuple[RailPower, ...], ref: str, record: Amplifier
    ) -> Iterator[Measurement]:
        grounds = ground_nets(board)
        on_ground = board.net(ref, record.negative_pin) in grounds
        negative = 0.0 if on_ground else spec.rails.negative
        nominal = spec.rails.positive - negative
        high = nominal * (1 + spec.rails.tolerance)
        low = sum(abs(p.protected_low) for p in powers if p.bus_nominal > 0 or not on_ground)
        key = "build.amplifier" if spec.build.amplifier != "auto" else "rails.positive"
        name = f"{ref} ({record.type})"

        def volts(value: float) -> str:
            return format_quantity(value, "voltage", 4)

        fault = None
        margin = left(high, record.supply_absolute)
        if margin < 0:
            fault = Fault(
                f"{name} withstands {volts(record.supply_absolute)} across its supply pins and can see {volts(high)}",
                f"the rails reach that at {format_quantity(spec.rails.tolerance, 'ratio')} tolerance",
                "take an amplifier for a higher supply, or lower rails",
            )
        yield Measurement(
            parts=(ref,),
            what=f"{ref}: {volts(high)} of {volts(record.supply_absolute)} absolute maximum",
            measured=high,
            limit=record.supply_absolute,
            unit="V",
            margin=margin,
            fault=fault,
            key=key,
        )
        fault = None
        margin = left(nominal, record.supply_most)
        if margin < 0:
            fault = Fault(
                f"{name} is made for up to {volts(record.supply_most)} across its supply pins; "
                f"the rails are {volts(nominal)}",
                "beyond the recommended range its figures are not guaranteed",
                "take an amplifier for a higher supply, or lower rails",
                level="warning",
            )
        yield Measurement(
            parts=(ref,),
            what=f"{ref}: {volts(nominal)} nominal of {volts(record.supply_most)} recommended",
            measured=nominal,
            limit=record.supply_most,
            unit="V",
            margin=margin,
            fault=fault,
            key=key,
        )
        fault = None
        margin = above(low, record.supply_least)
        if margin < 0:
            fault = Fault(
                f"{name} needs {volts(record.supply_least)} across its supply pins; "
                f"{volts(low)} can be left of the rails",
                "that is the low end of their tolerance, less the greatest drop of the diodes",
                "take an amplifier for a lower supply, or higher rails",
            )
        yield Measurement(
            parts=(ref,),
            what=f"{ref}: {volts(low)} left where {volts(record.supply_least)} is needed",
            measured=low,
            limit=record.supply_least,
            unit="V",
            margin=margin,
            fault=fault,
            key=key,
        )
