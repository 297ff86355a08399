"""An amplifier input that nothing holds."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.loops import feedback_of
from modgen.rules.support import Contact, closed_contacts, ground_nets, least_path, listed, rails
from modgen.units import format_quantity

ALWAYS = "whatever is plugged in"


class FloatingInput(Rule):
    """Every amplifier input has a DC path to 0 V, a rail or an amplifier output, whatever is plugged in.

    Checks:
        For each input of each section, the way of least resistance through resistors and controls to 0
        V, a rail or an output, in every state of the sockets. A plug opens the socket's switch contact,
        and a cable that is open at its far end brings nothing; a contact can only add paths, so with n
        sockets the 2^n states need not be tried: an input that is held with all contacts open is held
        in all of them, and one that is not held then floats at least in that state. An output does not
        hold the non-inverting input of its own section. A section whose inputs are exchanged is left to
        positive-feedback: no resistor would mend it.
    Matters:
        Without a path for its bias current an input drifts to a rail, takes the output with it, and
        picks up hum; the module seems to work until a cable is pulled.
    Fails:
        start from: lane
        without R1
    Passes:
        start from: lane
    Limits:
        Takes a wiper to touch its track; diodes and capacitors do not count as paths. Does not judge
        how large the resistance of the path may be: that is the offset budget's.
    References:
        Bias current paths of operational amplifiers: common practice, in every maker's application
        notes (from memory).
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
            if feedback_of(board, section).exchanged:
                yield Measurement(
                    parts=(section.package,), what=f"{section.name}: its inputs are exchanged (positive-feedback)"
                )
                continue
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
                # what an output only feeds back to its own non-inverting input defines nothing
                own = {section.output} if kind == "non-inverting" and section.output else set()
                ends = fixed | {out for out in outputs if out not in own}
                path = least_path(board, net, ends, around=own)
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
                state = floating_state(board, net, ends, own, contacts)
                fix = f"connect {net} to 0 V through a resistor"
                if state != ALWAYS:
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


def floating_state(board: Board, net: str, ends: set[str], around: set[str], contacts: tuple[Contact, ...]) -> str:
    """In which states of the sockets a net that hangs on closed contacts floats, in words.

    The contacts of some sockets hold it; it floats as soon as none of them is closed. Named are the
    sockets each of which alone makes it float, else a smallest set that does so together.
    """
    if least_path(board, net, ends, contacts, around) is None:
        return ALWAYS
    jacks = list(dict.fromkeys(ref for ref, _, _ in contacts))

    def floats(opened: list[str]) -> bool:
        closed = [contact for contact in contacts if contact[0] not in opened]
        return least_path(board, net, ends, closed, around) is None

    alone = [ref for ref in jacks if floats([ref])]
    if alone:
        return f"when an open cable is plugged into {' or '.join(alone)}"
    together = list(jacks)
    for ref in jacks:
        fewer = [other for other in together if other != ref]
        if floats(fewer):
            together = fewer
    return f"when open cables are plugged into {listed(together)} together"
