"""What the circuit library's own electrical check said."""

from __future__ import annotations

import re
from collections.abc import Iterator

from modgen.rules.contract import Context, Fault, Measurement, Rule

#: levels of the circuit library -> levels of findings; anything else is shown as a note
LEVEL_OF = {"error": "error", "warning": "warning"}


class LibraryErc(Rule):
    """The electrical rules check of the circuit library has nothing to say.

    Checks:
        Every part and every net, for the messages that the library's own check left on it while the
        circuit was built; its errors are errors here, its warnings warnings.
    Matters:
        It knows the pin kinds of the library parts and sees conflicts of drivers by other means than
        our own rules.
    Fails:
        start from: lane
        library: error Pin conflict on net CH1_BUF, OUTPUT pin 1/1 of U1 <==> OUTPUT pin 7/7 of U1
    Passes:
        start from: lane
    Limits:
        A netlist that was read from a file carries no messages: the check runs only where a circuit is
        built.
    References:
        The circuit library's documentation, electrical rules checking.
    """

    name = "library-erc"
    subject = "wiring"
    needs_rails = False
    needs_library = True

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every message, and every part and net without one."""
        messages = context.library_messages or ()
        known = {part.ref for part in context.board.netlist.parts}
        said = " ".join(text for _, text in messages)
        for ref in context.board.refs:
            if not re.search(rf"\b{re.escape(ref)}\b", said):
                yield Measurement(parts=(ref,), what=f"{ref}: no message")
        for net in context.board.netlist.nets:
            if not re.search(rf"(?<!\S){re.escape(net.name)}(?!\w)", said):
                yield Measurement(parts=(), what=f"net {net.name}: no message", nets=(net.name,))
        for level, text in messages:
            parts = tuple(sorted(set(re.findall(r"\b[A-Z]+[0-9]+\b", text)) & known))
            yield Measurement(
                parts=parts,
                what=text,
                fault=Fault(
                    f"the circuit library reports: {text}",
                    "its electrical check compares the kinds of all pins on each net",
                    "look at the pins it names",
                    level=LEVEL_OF.get(level.lower(), "note"),
                ),
            )
