"""An amplifier without feedback."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.loops import feedback_of, loop_through_others
from modgen.rules.support import listed
from modgen.rules.wiring.idle_amplifier import in_use
from modgen.units import format_quantity


class OpenLoopAmplifier(Rule):
    """Every amplifier in use has a way for direct current from its output to its inverting input.

    Checks:
        For each section that drives something: the output reaches the inverting input by wires and
        resistors, if need be by way of other amplifiers. A capacitor alone is no such way.
    Matters:
        With its full gain of a hundred thousand and no feedback, a few microvolts of offset put the
        output at a rail.
    Fails:
        start from: lane
        U1 6=CH1_FB
        R6 metal-film-0207-10k 1=CH1_FB 2=0V
    Passes:
        start from: lane
    Limits:
        An input that is on no net at all is for floating-input to say. Comparators, which are meant to
        have no feedback, show as a fault.
    References:
        Open-loop gain: ST TL072 datasheet rev 4.
    """

    name = "open-loop-amplifier"
    subject = "wiring"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every section that drives something."""
        board = context.board
        for section in board.sections:
            if not in_use(board, section) or section.inverting is None or section.output is None:
                continue
            if section.output in board.supply_nets:
                continue  # it was moved there, which output-on-rail says
            found = feedback_of(board, section)
            fault = None
            share = format_quantity(found.inverting, "ratio")
            what = f"{section.name}: {share} of {section.output} back to {section.inverting}"
            if not found.inverting and not found.noninverting:
                what = f"{section.name}: feedback through other amplifiers"
                if not loop_through_others(board, section):
                    capacitors = board.ties(section.output, section.inverting, "capacitor")
                    only = f" but through {listed(capacitors)}" if capacitors else ""
                    what = f"{section.name}: no feedback"
                    fault = Fault(
                        f"nothing{only} leads from the output of {section.name} (net {section.output}) to its "
                        f"inverting input (net {section.inverting})",
                        "at its full gain a few microvolts of offset put the output at a rail",
                        f"tie pin {section.pins[1]} of {section.package} to {section.output}, "
                        "straight or through a resistor",
                    )
            yield Measurement(
                parts=(section.package,), what=what, nets=(section.output, section.inverting), fault=fault
            )
