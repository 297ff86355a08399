"""A control that turns the wrong way, or fails the wrong way."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.catalogue.records import Control
from modgen.rules.contract import Context, Fault, Measurement, Rule


class ControlWiper(Rule):
    """Every control is a rheostat with its wiper tied to the end that makes clockwise slower.

    Checks:
        The wiper of each control is connected and tied to pin 3, so that clockwise leaves more of the
        track in the way, and the track lies between two nets. With a spec: its taper is the one that is
        asked for.
    Matters:
        A wiper lifts for moments in every worn or dirty control. Tied to an end, the whole track stays
        in the way and the glide is slow for that moment; left alone, the path opens and the output
        jumps or drifts. Tied to the other end, clockwise is faster and the whole taper runs backwards.
    Fails:
        start from: lane
        R4 2=CH1_CTL
    Passes:
        start from: lane
    Limits:
        Judges every control as a rheostat; one that is meant as a divider shows as a warning.
    References:
        Common practice: wiper of a rheostat tied to its unused end, pin 3 the clockwise end (from memory).
    """

    name = "control-wiper"
    subject = "wiring"
    level = "warning"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every control."""
        board = context.board
        for ref in board.parts_of("control"):
            one, wiper, three = (
                net if net and len(board.on(net)) > 1 else None for net in (board.net(ref, p) for p in "123")
            )
            fault = None
            if wiper is None:
                what = f"{ref}: wiper open"
                fault = Fault(
                    f"the wiper (pin 2) of {ref} is not connected",
                    "the control does nothing: its whole track, or nothing, is in the way",
                    f"tie pin 2 of {ref} to its pin 3",
                    level="error",
                )
            elif wiper == one == three:
                what = f"{ref}: all pins on {wiper}"
                fault = Fault(
                    f"all three pins of {ref} are on net {wiper}",
                    "the control is shorted and does nothing",
                    f"put pin 1 of {ref} on the net of the isolating resistor",
                    level="error",
                )
            elif wiper in (one, three):
                end = "1" if wiper == one else "3"
                what = f"{ref}: wiper tied to pin {end}"
                if one is None or three is None:
                    fault = Fault(
                        f"{ref} has its wiper tied to pin {end} and its other end open",
                        "nothing flows through the track",
                        f"connect pin {'3' if end == '1' else '1'} of {ref}",
                        level="error",
                    )
                elif end == "1":
                    fault = Fault(
                        f"clockwise makes the glide of {ref} faster: its wiper (pin 2) is tied to pin 1 ({one})",
                        "clockwise then takes track out of the way, and the taper runs backwards",
                        f"put pin 2 of {ref} on {three}, the net of its pin 3, and off {one}",
                        level="error",
                    )
            elif one is None and three is not None:
                what = f"{ref}: pin 1 open"
                fault = Fault(
                    f"clockwise makes the glide of {ref} faster: its pins 2 and 3 are in the way and pin 1 is open",
                    "clockwise then takes track out of the way, and a wiper that lifts opens the path",
                    f"put pin 1 of {ref} on {three}, and pin 3 on {wiper}",
                    level="error",
                )
            else:
                what = f"{ref}: wiper not tied to an end"
                fault = Fault(
                    f"the wiper (pin 2) of {ref} is not tied to an end",
                    "a wiper that lifts opens the path, and the output jumps or drifts instead of slowing down",
                    f"tie pin 2 of {ref} to the end on its glide capacitor's side",
                )
            yield Measurement(
                parts=(ref,), what=what, nets=tuple(n for n in dict.fromkeys((one, wiper, three)) if n), fault=fault
            )
            record = board.record(ref)
            if context.spec is not None and isinstance(record, Control):
                asked = context.spec.glide.taper
                fault = None
                if record.taper != asked:
                    fault = Fault(
                        f"{ref} has a {record.taper} taper; the spec asks for {asked}",
                        "the glide follows the rotation by another law than was asked for",
                        f"fit a control with a {asked} taper, or write 'taper: {record.taper}' in the spec",
                    )
                yield Measurement(
                    parts=(ref,), what=f"{ref}: {record.taper} taper, {asked} asked", fault=fault, key="glide.taper"
                )
