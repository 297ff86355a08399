"""A rail that a header turned round would destroy."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board
from modgen.analysis.supply_states import reversed_supply
from modgen.catalogue.records import Diode
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import Rail, left, rails
from modgen.spec.model import Spec
from modgen.units import format_quantity


class ReversePolarity(Rule):
    """Each rail has a series diode, the right way round, that bears what it may see.

    Checks:
        Between the header and what each rail feeds stands a diode; it conducts from the header on the
        positive rail and towards it on the negative one. With a spec: its reverse voltage against the
        header turned round while the reservoirs are still charged (both rails together at the high end
        of their tolerance, twice the rail on a single supply); and, as a warning, what leaks through it
        then, which flows on through the amplifiers the wrong way round, against the clamp current of
        all their sections.
    Matters:
        The key of a shrouded header is not dependable in the field. Turned round without a diode, every
        package and electrolytic of the board is destroyed at once.
    Fails:
        start from: lane
        D1 1=BUS+ 2=V+
    Passes:
        start from: lane
    Limits:
        Knows series diodes only: protection by transistors or fuses shows as missing. Its current
        is for diode-rating to judge.
    References:
        Reverse voltage of 1N5817 to 1N5819: Diodes Inc. DS23001. Series diode in each rail: common
        practice.
    """

    name = "reverse-polarity"
    subject = "supply"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every diode of every rail."""
        board = context.board
        for rail in rails(board):
            if not rail.diodes:
                yield Measurement(
                    parts=board.parts_of("header"),
                    what=f"{rail.name}: no diode",
                    nets=(rail.bus,),
                    fault=Fault(
                        f"no diode stands between the header and the {rail.name} (net {rail.bus})",
                        "a header turned round would put the wrong sign on every package and electrolytic",
                        f"put a diode in series with {rail.bus}",
                    ),
                )
            for ref in rail.diodes:
                yield from self._diode(board, context.spec, rail, ref)
        if context.spec is not None:
            yield from _leaks(board, context.spec)

    def _diode(self, board: Board, spec: Spec | None, rail: Rail, ref: str) -> Iterator[Measurement]:
        right = board.net(ref, "2" if rail.sign > 0 else "1") == rail.bus
        fault = None
        if not right:
            fault = Fault(
                f"{ref} stands the wrong way round in the {rail.name}",
                "it blocks the supply, and conducts when the header is turned round",
                f"put its {'anode (pin 2)' if rail.sign > 0 else 'cathode (pin 1)'} on {rail.bus}",
            )
        yield Measurement(
            parts=(ref,),
            what=f"{ref} in the {rail.name}: {'right' if right else 'wrong'} way round",
            nets=rail.nets,
            fault=fault,
        )
        record = board.record(ref)
        if spec is None or not isinstance(record, Diode):
            return
        high = 1 + spec.rails.tolerance
        positive, negative = spec.rails.positive * high, spec.rails.negative * high
        stress = 2 * positive if spec.rails.single else positive - negative
        limit = board.rating(ref, "voltage") or record.reverse_voltage
        volts = format_quantity(stress, "voltage", 4)
        fault = None
        margin = left(stress, limit)
        if margin < 0:
            fault = Fault(
                f"{ref} blocks {format_quantity(limit, 'voltage')} and can see {volts}",
                "that is what a header turned round puts on it while the reservoirs are still charged",
                "fit a diode of a higher reverse voltage",
            )
        yield Measurement(
            parts=(ref,),
            what=f"{ref} in the {rail.name}: {volts} in reverse of {format_quantity(limit, 'voltage')}",
            measured=stress,
            limit=limit,
            unit="V",
            margin=margin,
            nets=rail.nets,
            fault=fault,
            key="rails.positive" if rail.sign > 0 else "rails.negative",
        )


def _leaks(board: Board, spec: Spec) -> Iterator[Measurement]:
    """What passes through each diode that blocks a header turned round."""
    # makers state what a junction bears at an input; the one at the supply pins is no smaller
    bears = sum(section.record.clamp_current for section in board.sections)
    for found in reversed_supply(board, spec.rails):
        if not found.blocked or not found.leakage or bears <= 0:
            continue
        seen, most = format_quantity(found.leakage, "current"), format_quantity(bears, "current")
        fault = None
        margin = left(found.leakage, bears)
        if margin < 0:
            fault = Fault(
                f"{found.diode} leaks {seen} with the header turned round; the amplifiers' junctions bear {most}",
                "it flows from the rail through the supply pins of the amplifiers, the wrong way round",
                "fit a diode that leaks less: a silicon rectifier, or a Schottky diode of a higher reverse voltage",
                level="warning",
            )
        yield Measurement(
            parts=(found.diode,),
            what=f"{found.diode}: leaks {seen} of {most} with the header turned round",
            measured=found.leakage,
            limit=bears,
            unit="A",
            margin=margin,
            fault=fault,
            key="rails.positive" if found.rail == "V+" else "rails.negative",
        )
