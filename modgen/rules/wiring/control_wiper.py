"""A control whose glide goes wrong when the wiper lifts."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.rules.contract import Context, Fault, Measurement, Rule


class ControlWiper(Rule):
    """Every control is a rheostat with its wiper tied to one end.

    Checks:
        The wiper of each control is connected, is tied to exactly one end, and the track lies between
        two nets.
    Matters:
        A wiper lifts for moments in every worn or dirty control. Tied to an end, the whole track stays
        in the way and the glide is slow for that moment; left alone, the path opens and the output
        jumps or drifts.
    Fails:
        start from: lane
        R4 3=
    Passes:
        start from: lane
    Limits:
        Judges every control as a rheostat; one that is meant as a divider shows as a warning.
    References:
        Common practice: wiper of a rheostat tied to its unused end (from memory).
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
