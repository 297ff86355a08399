"""A capacitor that waits with nothing to hold it."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import listed


class UnheldCapacitor(Rule):
    """A capacitor that a range switch leaves out waits at the output's voltage.

    Checks:
        For each lane with a range switch, that a resistor ties the capacitors that its fast range leaves out to
        the output of the second buffer, directly or through the contact that is then closed.
    Matters:
        A capacitor that is left alone keeps the voltage it had, or drifts; switched in, it pulls the glide node
        there, and the output jumps by volts and glides back.
    Fails:
        start from: lane
        S1 switch-toggle-spdt 1=CH1_GLIDE 2=CH1_RANGE
        C6 film-pp-box-250v-1u0 1=CH1_RANGE 2=0V
    Passes:
        start from: lane
        S1 switch-toggle-spdt 1=CH1_GLIDE 2=CH1_RANGE 3=CH1_KEEP
        C6 film-pp-box-250v-1u0 1=CH1_RANGE 2=0V
        R6 metal-film-0207-10k 1=CH1_DRIVE 2=CH1_KEEP
    Limits:
        Does not judge how fast the capacitor follows. With an output resistor inside the loop it waits at the
        amplifier's output, which differs from the glide node by the drop in that resistor.
    References:
        Common practice, no source.
    """

    name = "unheld-capacitor"
    subject = "wiring"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every lane."""
        for lane in context.board.channels:
            switch = lane.switch
            if switch is None:
                yield Measurement(parts=lane.capacitors, what=f"channel {lane.channel}: no capacitor is switched")
                continue
            waiting = tuple(ref for ref in lane.slow_capacitors if all(ref not in b.refs for b in lane.branches))
            fault = None
            if not switch.keepers:
                fault = Fault(
                    f"nothing holds {listed(waiting)} of channel {lane.channel} while {switch.ref} stands at "
                    f"{switch.fast}",
                    "it keeps what voltage it had, and the output jumps there when the slow range is chosen",
                    f"tie net {switch.waiting} in that position to {lane.second.output} through a resistor",
                )
            yield Measurement(
                parts=(switch.ref, *waiting, *switch.keepers),
                what=f"channel {lane.channel}: {listed(waiting)} kept by {listed(switch.keepers) or 'nothing'}",
                nets=(switch.waiting,),
                fault=fault,
            )
