"""A control on more than its track bears."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board, Lane
from modgen.analysis.voltage import across, net_bounds
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import left
from modgen.spec.model import Spec
from modgen.units import format_quantity


class ControlRating(Rule):
    """No control sees more voltage or power than its track is rated for.

    Checks:
        Voltage: the whole span of the signal across the track, as just after a step; a control that is
        not in a lane, the worst voltage between its nets. Power: a full-span square wave that is quick
        beside the glide, so that half the span drives the isolating resistor and what is left of the
        track at the worst rotation.
    Matters:
        Small carbon controls are rated 20 V and some 10 V; beyond it the track wears, crackles and
        changes its law.
    Fails:
        start from: lane
        R4 control-9mm-linear-1m0
        spec: signal.span -12 V to 12 V
    Passes:
        start from: lane
    Limits:
        The power is held against the whole track's rating. Near the fast end a short piece of track
        carries the current of each step for about one time constant; that is not judged.
    References:
        Bourns PTV09 datasheet (20 V DC, 0.05 W); Alps RK09L (10 V DC).
    """

    name = "control-rating"
    subject = "ratings"
    level = "warning"
    needs_spec = True

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every control."""
        board, spec = context.board, context.spec
        assert spec is not None
        bounds = net_bounds(board, spec.rails)
        lanes = {lane.control: lane for lane in board.channels}
        span = spec.signal.high - spec.signal.low
        for ref in board.parts_of("control"):
            lane = lanes.get(ref)
            volts = span if lane is not None else across(board, bounds, ref)
            rated = board.rating(ref, "voltage")
            if rated is not None:
                yield self._voltage(ref, volts, rated, "signal.span" if lane is not None else "rails.positive")
            power = board.rating(ref, "power")
            if power is not None and lane is not None:
                yield self._power(board, spec, lane, power)

    def _voltage(self, ref: str, volts: float, rated: float, key: str) -> Measurement:
        seen, most = format_quantity(volts, "voltage", 4), format_quantity(rated, "voltage", 4)
        fault = None
        margin = left(volts, rated)
        if margin < 0:
            fault = Fault(
                f"{ref} is rated {most} and can see {seen} across its track",
                "the track wears, crackles and changes its law",
                "take a control of a higher rated voltage, or a smaller span",
            )
        return Measurement(
            parts=(ref,),
            what=f"{ref}: {seen} of {most} across the track",
            measured=volts,
            limit=rated,
            unit="V",
            margin=margin,
            fault=fault,
            key=key,
        )

    def _power(self, board: Board, spec: Spec, lane: Lane, rated: float) -> Measurement:
        ref = lane.control
        series = sum(board.resistance(r).low for r in lane.isolating)
        burned = power_in_track(
            (spec.signal.high - spec.signal.low) / 2,
            series,
            board.resistance(ref).nominal,
            lane.first.record.short_circuit_most,
        )
        seen, most = format_quantity(burned, "power"), format_quantity(rated, "power")
        fault = None
        margin = left(burned, rated)
        if margin < 0:
            fault = Fault(
                f"{ref} is rated {most} and can burn {seen}",
                "a quick full-span square wave does it at the worst rotation",
                "take a larger isolating resistor with a smaller capacitor, or a control of a higher power",
            )
        return Measurement(
            parts=(ref,),
            what=f"{ref}: {seen} of {most}",
            measured=burned,
            limit=rated,
            unit="W",
            margin=margin,
            fault=fault,
            key="signal.span",
        )


def power_in_track(drive: float, series: float, track: float, limit: float) -> float:
    """Greatest power in a rheostat of 0 to ``track`` [ohm] behind ``series`` [ohm].

    Parameters
    ----------
    drive
        Voltage across both. [V]
    series
        Resistance in series. [ohm]
    track
        Whole resistance of the track. [ohm]
    limit
        Greatest current of the source, above zero. [A]

    Returns
    -------
    float
        Power at the worst rotation [W].

    Notes
    -----
    ``P(r) = (V/(Rs + r))^2 r`` is greatest at ``r = Rs``, or where the source's limit ends, or at the whole
    track when that is less.

    References
    ----------
    Maximum power transfer, any textbook on circuits.
    """
    worst = min(max(series, drive / limit - series), track)
    if series + worst <= 0:
        return 0.0
    current = min(drive / (series + worst), limit)
    return current * current * worst
