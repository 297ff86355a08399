"""A resistor that runs hotter than it may."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass

from modgen.analysis.board import Board
from modgen.analysis.model import Bound
from modgen.analysis.power import rail_powers
from modgen.analysis.shorts import GROUND, shorts
from modgen.analysis.voltage import across, net_bounds
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import left
from modgen.spec.model import Rails, Spec
from modgen.units import format_quantity


@dataclass(frozen=True)
class Load:
    """What a resistor may have to burn [W], and when; ``bound`` when it is a bound and not the figure itself."""

    power: float
    when: str
    bound: bool = False


class ResistorPower(Rule):
    """No resistor burns more than it is rated for, also with an output shorted.

    Checks:
        Output resistors: the socket shorted to 0 V while the amplifier drives to a rail at the high end
        of its tolerance, or as far as its greatest short-circuit current lets it; and, as a warning, to
        another module's output at the opposite rail, behind the source impedance. Resistors between a
        socket and an amplifier's input: the whole rail from a powered neighbour while the module is
        off. All others through which a steady current can flow: the worst voltage between their nets.
    Matters:
        A plug that is half in shorts an output for as long as it stays there, and an overloaded
        resistor discolours the board and drifts before it burns.
    Fails:
        start from: lane
        R5 metal-film-0204-220r
    Passes:
        start from: lane
    Limits:
        Takes nominal resistances, since no amplifier drives quite to its rail. Currents that only
        charge a capacitor are not steady and are not counted. A resistor in a chain or a network is
        judged as if it saw the whole voltage; as that is only a bound, it is a warning then. Ambient
        above 70 degC is not considered.
    References:
        Power ratings at 70 degC: Vishay Beyschlag document 28766. Short-circuit current: ST TL072
        datasheet rev 4.
    """

    name = "resistor-power"
    subject = "ratings"
    needs_spec = True

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every resistor with a readable value and a known rating."""
        board, spec = context.board, context.spec
        assert spec is not None
        bounds = net_bounds(board, spec.rails)
        for ref in board.parts_of("resistor"):
            rated, ohms = board.rating(ref, "power"), board.value(ref)
            if rated is None or ohms is None or ohms <= 0:
                continue
            load = worst_load(board, bounds, spec.rails, ref, ohms)
            watts, most = format_quantity(load.power, "power"), format_quantity(rated, "power")
            fault = None
            margin = left(load.power, rated)
            if margin < 0:
                most_of = "at most " if load.bound else ""
                fault = Fault(
                    f"{ref} ({format_quantity(ohms, 'resistance')}) is rated {most} and can burn "
                    f"{most_of}{watts} {load.when}",
                    "it drifts, discolours the board and burns at last",
                    "fit a larger body, or a larger value"
                    + (" (inside the feedback loop it costs no scale)" if "shorted" in load.when else ""),
                    level="warning" if load.bound else "",
                )
            yield Measurement(
                parts=(ref,),
                what=f"{ref}: {watts} of {most} {load.when}",
                measured=load.power,
                limit=rated,
                unit="W",
                margin=margin,
                nets=tuple(net for net in (board.net(ref, "1"), board.net(ref, "2")) if net),
                fault=fault,
                key="output.protection" if "shorted" in load.when else "rails.positive",
            )
        yield from _against_another_output(board, spec)


def _against_another_output(board: Board, spec: Spec) -> Iterator[Measurement]:
    """Output resistors with their socket on another module's output; those that a short to 0 V burns are left out."""
    every = shorts(board, rail_powers(board, spec.rails, spec.signal), spec.signal)
    burnt = {short.net for short in every if short.against == GROUND and left(short.measured, short.limit) < 0}
    for short in every:
        if short.against == GROUND or not short.resistor or short.net in burnt or not math.isfinite(short.limit):
            continue
        watts, most = format_quantity(short.measured, "power"), format_quantity(short.limit, "power")
        when = f"with its socket on {short.against} at the opposite rail"
        fault = None
        margin = left(short.measured, short.limit)
        if margin < 0:
            fault = Fault(
                f"{short.resistor} is rated {most} and can burn {watts} {when}",
                "two outputs patched together stay so until somebody wonders why nothing comes out",
                "fit a larger body, or a larger value (inside the feedback loop it costs no scale)",
                level="warning",
            )
        yield Measurement(
            parts=(short.resistor,),
            what=f"{short.resistor}: {watts} of {most} {when}",
            measured=short.measured,
            limit=short.limit,
            unit="W",
            margin=margin,
            nets=(short.net,),
            fault=fault,
            key="output.protection",
        )


def worst_load(board: Board, bounds: dict[str, Bound], rails: Rails, ref: str, ohms: float) -> Load:
    """What a resistor may have to burn, by where it stands."""
    ends = [board.net(ref, "1"), board.net(ref, "2")]
    if None in ends or ends[0] == ends[1]:
        return Load(0.0, "with no current through it")
    high = max(rails.positive, -rails.negative) * (1 + rails.tolerance)
    outputs = {s.output: s for s in board.sections if s.output}
    tips = {jack.tip for jack in board.jacks if jack.tip}
    for near, far in (ends, ends[::-1]):
        if near in outputs and far in tips and far not in outputs:
            current = min(high / ohms, outputs[near].record.short_circuit_most)
            return Load(current * current * ohms, "with its output shorted")
    stiff = {*board.supply_nets, *outputs, *tips}
    reach = [_reaches(board, net, ref, stiff) for net in ends if net is not None]
    if all(reach):
        volts = across(board, bounds, ref)
        sure = all(net in stiff for net in ends)
        return Load(volts * volts / ohms, "at the worst voltage between its nets", bound=not sure)
    inputs = {net for s in board.sections for net in (s.inverting, s.noninverting) if net}
    dead = next(net for net, held in zip(ends, reach, strict=True) if not held)
    live = next((net for net in ends if net != dead), None)
    if dead in inputs and live in tips:
        return Load(high * high / ohms, "from a powered neighbour while the module is off")
    return Load(0.0, "with no steady current through it")


def _reaches(board: Board, start: str, without: str, stiff: set[str]) -> bool:
    """Whether a net is held, or held through resistors other than one."""
    if start in stiff:
        return True
    seen, queue = {start}, [start]
    while queue:
        for step in board.between(queue.pop(), "resistor", "control"):
            if step.ref == without or step.net in seen:
                continue
            if step.net in stiff:
                return True
            seen.add(step.net)
            queue.append(step.net)
    return False
