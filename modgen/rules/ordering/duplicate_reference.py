"""Two parts with one reference."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator

from modgen.rules.contract import Context, Fault, Measurement, Rule


class DuplicateReference(Rule):
    """No two parts carry the same reference.

    Checks:
        Every reference of the netlist, against all others; the parts' values are named in the message.
    Matters:
        With two parts called R7 nobody can tell which value goes where, and nets that name R7 join
        both.
    Fails:
        start from: lane
        add R1 metal-film-100k 1=CH1_IN 2=0V
    Passes:
        start from: lane
    Limits:
        Says nothing about references that are missing from the sequence.
    References:
        IEEE Std 315-1975, clause 22: a reference designation identifies one part (from memory).
    """

    name = "duplicate-reference"
    subject = "ordering"
    needs_rails = False

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every reference, once."""
        parts = context.board.netlist.parts
        for ref, count in sorted(Counter(part.ref for part in parts).items()):
            fault = None
            if count > 1:
                values = ", ".join(part.value or "no value" for part in parts if part.ref == ref)
                fault = Fault(
                    f"{count} parts are called {ref} ({values})",
                    "nobody can tell which of them goes where, and every net that names one names them all",
                    "give each part a reference of its own",
                )
            yield Measurement(
                parts=(ref,),
                what=f"{ref} names {count} part{'s' if count > 1 else ''}",
                measured=float(count),
                limit=1.0,
                unit="parts",
                fault=fault,
            )
