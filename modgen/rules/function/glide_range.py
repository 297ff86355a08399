"""A control that does not reach the glide that is asked for."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board, Lane
from modgen.analysis.glide import LaneValues, boards_inside, factor_of
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import above, left
from modgen.spec.model import Glide
from modgen.units import format_quantity

#: Share of boards that should reach the whole range although only nominal values are asked for [-]. Our choice.
LEAST_BOARDS = 0.90


def percent(share: float) -> str:
    """A share to a tenth of a per cent; what is not quite all is not called all, nor what is rare none."""
    if share < 0.0005:  # so many were drawn, and no more is known
        return "less than 0.1 %"
    if 0.9995 <= share < 1:
        return "more than 99.9 %"
    return f"{100 * share:.1f} %".replace(".0 %", " %")


class GlideRange(Rule):
    """Every channel's control covers the whole glide range of the spec.

    Checks:
        For each channel, by the spec's own measure: the glide at the fast end of the control is not
        longer than the shortest that is asked for, and at the slow end not shorter than the longest;
        with nominal values, or with every part at the wrong end of its tolerance when the spec says
        ``cover: worst-case``. With a range switch the one is held against the fast range and the other
        against the slow one, and the longest of the fast range is not below the shortest of the slow
        one. Where nominal values are asked for, the share of boards that reach the whole range on every
        channel is worked out, and noted below 90 %.
    Matters:
        It is what the module is for. What a control leaves at its end of travel often sets the shortest
        glide, and its tolerance the longest.
    Fails:
        start from: lane
        C1 film-pp-box-63v-100n
    Passes:
        start from: lane
    Limits:
        Finds lanes by structure: one buffer, one control and resistors, capacitors to 0 V, one buffer.
        Slew limits of the amplifiers and loss of capacitance under bias are not counted.
    References:
        IEEE Std 181, transition duration 10 % to 90 %: ln 9 times the time constant.
    """

    name = "glide-range"
    subject = "function"
    needs_spec = True

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Both ends of every channel, and channels that are missing."""
        board, spec = context.board, context.spec
        assert spec is not None
        lanes = {lane.channel: lane for lane in board.channels}
        factor = factor_of(spec.glide)
        reached = set(lanes) == set(range(1, spec.channels + 1))
        for channel in sorted({*range(1, spec.channels + 1), *lanes}):
            lane = lanes.get(channel)
            if lane is None:
                yield Measurement(
                    parts=tuple(ref for ref in board.refs if board.channel(ref) == channel),
                    what=f"channel {channel}: not found",
                    fault=Fault(
                        f"channel {channel} has no glide stage",
                        "no buffer, control, capacitor to 0 V and second buffer stand in a row for it",
                        "compare its wiring with that of the other channels, or correct 'channels' in the spec",
                    ),
                    key="channels",
                )
                continue
            for measurement in self._lane(spec.glide, lane, LaneValues.of(board, lane), factor):
                reached = reached and measurement.fault is None
                yield measurement
        # with a range that is not reached, or a lane that is not there, the share says nothing new
        if reached and spec.glide.cover == "nominal":
            yield self._share(board, spec.glide)

    def _share(self, board: Board, glide: Glide) -> Measurement:
        share, _, _ = boards_inside(board, glide)
        text = percent(share)
        fault = None
        if share < LEAST_BOARDS:
            fault = Fault(
                f"{text} of boards reach the whole range on every channel within tolerance",
                "cover is nominal: the range is kept by parts of exactly their nominal value",
                "ask for glide: {cover: worst-case}",
                level="note",
            )
        return Measurement(
            parts=(),
            what=f"{text} of boards reach the whole range",
            measured=round(100 * share, 9),
            limit=100 * LEAST_BOARDS,
            unit="%",
            fault=fault,
            key="glide.cover",
        )

    def _lane(self, glide: Glide, lane: Lane, values: LaneValues, factor: float) -> Iterator[Measurement]:
        parts = (*lane.isolating, lane.control, *lane.capacitors, *((lane.switch.ref,) if lane.switch else ()))
        worst = glide.cover == "worst-case"
        how = "over tolerance" if worst else "with nominal values"

        def seconds(value: float) -> str:
            return format_quantity(value, "time", 4)

        fast = values.interval(values.fastest, factor)
        shortest = fast.high if worst else fast.nominal
        fault = None
        margin = left(shortest, glide.shortest)
        if margin < 0:
            fault = Fault(
                f"channel {lane.channel} glides no faster than {seconds(shortest)} {how}; "
                f"{seconds(glide.shortest)} is asked for",
                f"that is what {' and '.join((*lane.isolating, 'the end resistance of ' + lane.control))} leave",
                "take a smaller isolating resistor, a control with less end resistance, or a smaller capacitor",
            )
        yield Measurement(
            parts=parts,
            what=f"channel {lane.channel} shortest: {seconds(shortest)} of {seconds(glide.shortest)} {how}",
            measured=shortest,
            limit=glide.shortest,
            unit="s",
            margin=margin,
            nets=(lane.glide_net,),
            fault=fault,
            key="glide.shortest",
        )
        slow = values.interval(1 - values.fastest, factor, slow=True)
        longest = slow.low if worst else slow.nominal
        fault = None
        margin = above(longest, glide.longest)
        if margin < 0:
            fault = Fault(
                f"channel {lane.channel} glides no slower than {seconds(longest)} {how}; "
                f"{seconds(glide.longest)} is asked for",
                f"{lane.control} with {' and '.join(lane.slow_capacitors)} reaches no further",
                "take a larger control or a larger capacitor",
            )
        yield Measurement(
            parts=parts,
            what=f"channel {lane.channel} longest: {seconds(longest)} where {seconds(glide.longest)} is asked {how}",
            measured=longest,
            limit=glide.longest,
            unit="s",
            margin=margin,
            nets=(lane.glide_net,),
            fault=fault,
            key="glide.longest",
        )
        if lane.switch is None and glide.ranges < 2:
            return
        yield self._ranges(glide, lane)
        if lane.switch is None:
            return
        ends = values.interval(1 - values.fastest, factor), values.interval(values.fastest, factor, slow=True)
        upper, lower = (ends[0].low, ends[1].high) if worst else (ends[0].nominal, ends[1].nominal)
        fault = None
        margin = above(upper, lower)
        if margin < 0:
            fault = Fault(
                f"channel {lane.channel} has nothing between {seconds(upper)}, the longest of its fast range, and "
                f"{seconds(lower)}, the shortest of its slow one, {how}",
                f"{' and '.join(lane.slow_capacitors)} together are too much beside what the fast range has",
                "take a larger capacitor for the fast range, or a smaller one to switch in",
            )
        yield Measurement(
            parts=parts,
            what=f"channel {lane.channel} fast range to {seconds(upper)}, slow range from {seconds(lower)} {how}",
            measured=upper,
            limit=lower,
            unit="s",
            margin=margin,
            nets=(lane.glide_net,),
            fault=fault,
            key="glide.ranges",
        )

    def _ranges(self, glide: Glide, lane: Lane) -> Measurement:
        found = 2 if lane.switch else 1
        fault = None
        if found < glide.ranges:
            fault = Fault(
                f"channel {lane.channel} has {found} range; {glide.ranges} are asked for",
                "no switch with a contact on its glide net changes the capacitance there",
                "fit the range switch with its capacitor, or take glide.ranges out of the spec",
            )
        return Measurement(
            parts=(lane.control, *((lane.switch.ref,) if lane.switch else ())),
            what=f"channel {lane.channel}: {found} range{'s' * (found > 1)}, {glide.ranges} asked",
            measured=float(found),
            limit=float(glide.ranges),
            unit="ranges",
            nets=(lane.glide_net,),
            fault=fault,
            key="glide.ranges",
        )
