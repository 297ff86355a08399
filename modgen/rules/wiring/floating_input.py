"""An amplifier input that nothing holds."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import closed_contacts, ground_nets, least_path, rails
from modgen.units import format_quantity


class FloatingInput(Rule):
    """Every amplifier input has a DC path to 0 V, a rail or an amplifier output, whatever is plugged in.

    Checks:
        For each input of each section, the way of least resistance through resistors and controls to 0 V, a rail or
        an output, in every state of the sockets. A plug opens the socket's switch contact, and a cable that is open
        at its far end brings nothing; a contact can only add paths, so with n sockets the 2^n states need not be
        tried: an input that is held with all contacts open is held in all of them, and one that is not
        held then floats at least in that state. An output does not hold the non-inverting input of its own section.
    Matters:
        Without a path for its bias current an input drifts to a rail, takes the output with it, and picks up hum;
        the module seems to work until a cable is pulled.
    Fails:
        start from: lane
        without R1
    Passes:
        start from: lane
    Limits:
        Takes a wiper to touch its track; diodes and capacitors do not count as paths. Does not judge how large the
        resistance of the path may be: that is the offset budget's.
    References:
        Bias current paths of operational amplifiers: common practice, in every maker's application notes (from memory).
    """

    name = "floating-input"
    subject = "wiring"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Both inputs of every section."""
        board = context.board
        contacts = closed_contacts(board)
        fixed = {*ground_nets(board), *(net for rail in rails(board) for net in rail.nets), *board.supply_nets}
        outputs = {s.output for s in board.sections if s.output}
        for section in board.sections:
            inputs = (("inverting", section.inverting), ("non-inverting", section.noninverting))
            for (kind, net), pin in zip(inputs, section.pins[1:], strict=True):
                name = f"{kind} input of {section.name}"
                if net is None:
                    yield Measurement(
                        parts=(section.package,),
                        what=f"{name}: on no net",
                        fault=Fault(
                            f"the {name} (pin {pin}) is on no net",
                            "an open input drifts to a rail and picks up hum",
                            "connect it, or make the section a follower of 0 V when it is not used",
                        ),
                    )
                    continue
                own = {section.output} if kind == "non-inverting" else set()
                ends = fixed | {out for out in outputs if out not in own}
                path = least_path(board, net, ends)
                if path is not None:
                    ohms, end, refs = path
                    by = f"through {', '.join(refs)} " if refs else ""
                    yield Measurement(
                        parts=(section.package,),
                        what=f"{name}: {format_quantity(ohms, 'resistance')} {by}to {end}",
                        measured=ohms,
                        unit="ohm",
                        nets=(net,),
                    )
                    continue
                closed = least_path(board, net, ends, contacts)
                if closed is None:
                    state = "whatever is plugged in"
                    fix = f"connect {net} to 0 V through a resistor"
                else:
                    jacks = [ref for ref in closed[2] if board.kind(ref) == "jack"]
                    state = f"when an open cable is plugged into {' or '.join(jacks)}"
                    fix = "connect the socket's tip to 0 V through a resistor of its own"
                yield Measurement(
                    parts=(section.package,),
                    what=f"{name}: no path {state}",
                    nets=(net,),
                    fault=Fault(
                        f"the {name} (net {net}) has no DC path to 0 V, a rail or an output {state}",
                        "its bias current charges the net until the output stands at a rail, and it picks up hum",
                        fix,
                    ),
                )
