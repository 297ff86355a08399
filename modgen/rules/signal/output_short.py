"""An output that a shorted plug overloads."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.accuracy import scale_terms
from modgen.analysis.board import Board
from modgen.design.practice import MOST_SHORT, SHORT_DERATING
from modgen.formulas.loading import loading_error
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import is_input, least_path, left, listed
from modgen.spec.model import Spec
from modgen.units import format_quantity

#: From a value to the next that is sold, at the high end of its tolerance [-]. Source: IEC 60063 E24, 1 %.
NEXT = 1.1 * 1.01


class OutputShort(Rule):
    """Each output socket stands behind a resistor that makes a short harmless.

    Checks:
        For each output socket, the resistors between it and the amplifier that drives it. With the
        socket at 0 V and the amplifier at a rail at the high end of its tolerance, or at its greatest
        short-circuit current: the power in each resistor against 65 % of its rating, and the current
        against 25 mA, where the scale budget leaves room for a resistor that keeps it. Beyond 25 mA is a
        warning, and an error where the amplifier's own limit comes before the resistor's.
    Matters:
        Every plug shorts tip to sleeve on its way in, and a forgotten one does so for hours. Without a
        resistor the package heats and the rail sags; with a small one the resistor does.
    Fails:
        start from: lane
        without R5
        J3 T=CH1_DRIVE
    Passes:
        start from: lane
    Limits:
        A short to a rail of another module, which doubles the voltage, is not judged.
    References:
        Power ratings: Vishay Beyschlag document 28766. Short-circuit current: ST TL072 datasheet rev 4.
        65 % and 25 mA: common practice, no source.
    """

    name = "output-short"
    subject = "signal"
    needs_spec = True

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every output socket."""
        board, spec = context.board, context.spec
        assert spec is not None
        for jack in board.jacks:
            if jack.tip is not None and not is_input(board, jack.ref):
                yield from _jack(board, spec, jack.ref, jack.tip)


def _jack(board: Board, spec: Spec, jack: str, tip: str) -> Iterator[Measurement]:
    outputs = {s.output: s for s in reversed(board.sections) if s.output}
    inputs = {net for s in board.sections for net in (s.inverting, s.noninverting) if net} - set(outputs)
    path = least_path(board, tip, outputs, around={*board.supply_nets, *inputs})
    assert path is not None, "an output socket is one that an amplifier drives"
    ohms, net, refs = path
    section = outputs[net]
    high = max(spec.rails.positive, -spec.rails.negative) * (1 + spec.rails.tolerance)
    most = section.record.short_circuit_most
    current = min(high / ohms, most) if ohms > 0 else most
    amps = format_quantity(current, "current")
    if ohms <= 0:
        yield Measurement(
            parts=(jack, section.package),
            what=f"{jack}: no resistor",
            nets=(tip,),
            fault=Fault(
                f"{jack} is tied straight to the output of {section.name}",
                f"a shorted plug draws {amps} out of {section.package}, which heats it and pulls at the rail",
                f"put a resistor between {section.name} and {jack}, with its feedback taken before or behind it",
            ),
        )
        return
    for ref in refs:
        rated, value = board.rating(ref, "power"), board.value(ref) or 0.0
        if rated is None:
            continue
        power, limit = current * current * value, SHORT_DERATING * rated
        watts, of = format_quantity(power, "power"), format_quantity(rated, "power")
        margin = left(power, limit)
        fault = None
        if margin < 0:
            fault = Fault(
                f"{ref} ({format_quantity(value, 'resistance')}) burns {watts} with {jack} shorted; "
                f"{format_quantity(SHORT_DERATING, 'ratio')} of its {of} is used",
                "a plug that is half in shorts the output for as long as it stays there",
                "fit a larger body, or a larger value",
            )
        yield Measurement(
            parts=(jack, ref),
            what=f"{ref} with {jack} shorted: {watts} of {of} x {format_quantity(SHORT_DERATING, 'ratio')}",
            measured=power,
            limit=limit,
            unit="W",
            margin=margin,
            nets=(tip,),
            fault=fault,
            key="rails.positive",
        )
    spare: float | None = left(current, MOST_SHORT)
    usual = format_quantity(MOST_SHORT, "current")
    fault = None
    if current > MOST_SHORT and not _choice(board, spec, jack, high / MOST_SHORT):
        spare, usual = None, f"{usual}, for which the scale budget leaves no room"
    elif left(current, MOST_SHORT) < 0:
        fault = Fault(
            f"{jack} draws {amps} when it is shorted; {usual} is usual at most",
            f"it heats {section.package} and pulls at the rail, with every plug on its way in",
            f"fit {format_quantity(high / MOST_SHORT, 'resistance')} or more in place of {listed(refs)}",
            # where the amplifier's own limit comes first, the resistor does nothing
            level="error" if left(most, high / ohms) >= 0 else "warning",
        )
    yield Measurement(
        parts=(jack, *refs),
        what=f"{jack} shorted: {amps} of {usual}",
        measured=current,
        limit=MOST_SHORT,
        unit="A",
        margin=spare,
        nets=(tip,),
        fault=fault,
        key="rails.positive",
    )


def _choice(board: Board, spec: Spec, jack: str, least: float) -> bool:
    """Whether the lane of a socket could have a resistor of this value without leaving its scale budget."""
    for lane in board.channels:
        if jack not in lane.output_jacks or lane.inside_loop:
            continue
        ohms = [board.resistance(feed.resistor).high for feed in lane.feeds if feed.resistor and jack in feed.jacks]
        rest = sum(term.worst for term in scale_terms(board, lane, spec.signal))
        rest -= sum(loading_error(value, spec.signal.load) for value in ohms)
        return rest + loading_error(NEXT * least, spec.signal.load) <= spec.accuracy.scale
    return True
