"""An amplifier input that nothing holds."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.loops import feedback_of
from modgen.rules.support import Contact, closed_contacts, ground_nets, least_path, listed, rails, switch_positions
from modgen.units import format_quantity

ALWAYS = "whatever is plugged in"


class FloatingInput(Rule):
    """Every amplifier input has a DC path to 0 V, a rail or an amplifier output, whatever is plugged in.

    Checks:
        For each input of each section, the way of least resistance through resistors and controls to 0
        V, a rail or an output, in every position of the panel switches and every state of the sockets. A
        plug opens the socket's switch contact, and a cable that is open at its far end brings nothing; a
        contact can only add paths, so with n sockets the 2^n states need not be tried: an input that is
        held with all contacts open is held in all of them, and one that is not held then floats at least
        in that state. An output does not hold the non-inverting input of its own section. A section
        whose inputs are exchanged is left to positive-feedback: no resistor would mend it.
    Matters:
        Without a path for its bias current an input drifts to a rail, takes the output with it, and
        picks up hum; the module seems to work until a cable is pulled.
    Fails:
        start from: lane
        without R1
    Passes:
        start from: lane
    Limits:
        Takes a wiper to touch its track; diodes and capacitors do not count as paths. Panel
        switches that do not meet on a net are not combined, and the instant between two positions is
        left out. Does not judge how large the resistance of the path may be: that is the offset budget's.
    References:
        Bias current paths of operational amplifiers: common practice, in every maker's application
        notes (from memory).
    """

    name = "floating-input"
    subject = "wiring"

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Both inputs of every section."""
        board = context.board
        contacts, positions = closed_contacts(board), switch_positions(board)
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
                paths = [least_path(board, net, ends, state, own) for state in positions]
                held = [path for path in paths if path is not None]
                if len(held) == len(paths):
                    ohms, end, refs = max(held)
                    by = f"through {', '.join(refs)} " if refs else ""
                    yield Measurement(
                        parts=(section.package,),
                        what=f"{name}: {format_quantity(ohms, 'resistance')} {by}to {end}",
                        measured=ohms,
                        unit="ohm",
                        nets=(net,),
                    )
                    continue
                socket = least_path(board, net, [tip for _, tip, _ in contacts], around=ends | own)
                state = (
                    position_words(board, held[0][2], positions[paths.index(None)])
                    if held
                    else floating_state(board, net, ends, own, contacts)
                )
                fix = f"connect {net} to 0 V through a resistor"
                if state != ALWAYS and not held:
                    fix = "connect the socket's tip to 0 V through a resistor of its own"
                yield Measurement(
                    parts=(section.package,),
                    what=f"{name}: no path {state}",
                    # the socket's net too: that is where the resistor belongs
                    nets=tuple(dict.fromkeys((net, socket[1]) if socket else (net,))),
                    fault=Fault(
                        f"the {name} (net {net}) has no DC path to 0 V, a rail or an output {state}",
                        "its bias current charges the net until the output stands at a rail, and it picks up hum",
                        fix,
                    ),
                )


def position_words(board: Board, refs: tuple[str, ...], open_state: tuple[Contact, ...]) -> str:
    """In which position of which switches a net floats: of those that its path leads through, where they then stand."""
    closed = {(ref, frozenset((a, b))) for ref, a, b in open_state}
    stand = [
        f"{contact.ref} at {contact.position}"
        for contact in board.contacts
        if contact.ref in refs and (contact.ref, frozenset((contact.common, contact.throw))) in closed
    ]
    # a switch with an open throw has no contact there
    stand += [
        f"{ref} off" for ref in refs if board.kind(ref) == "switch" and not any(s.startswith(f"{ref} ") for s in stand)
    ]
    return f"with {listed(stand)}"


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
