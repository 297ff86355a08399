"""A part nobody knows the figures of."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.lost import TOLD
from modgen.rules.structure import without_function
from modgen.rules.support import listed


class NotInCatalogue(Rule):
    """Every part is one that the catalogue knows.

    Checks:
        The field ``part`` of every part is a key of the catalogue. A part that lost the field, and whose
        value names one part of the spec of its reference class, or an order code, is taken for that; a note
        says so. Mounting holes, test points and logos that join nothing are not parts.
    Matters:
        Without a record no rating, pin or price of the part is known: every other rule passes over it,
        and it cannot be ordered.
    Fails:
        start from: lane
        R1 part=left-over-from-a-drawer
    Passes:
        start from: lane
    Limits:
        A part that carries the wrong key is judged by the wrong record; so is one whose value is that of
        another.
    References:
        Common practice: a parts list names orderable parts.
    """

    name = "not-in-catalogue"
    subject = "ordering"
    needs_rails = False

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every part."""
        aside = without_function(context.board)
        told: dict[str, list[str]] = {}
        for part in context.board.netlist.parts:
            if part.ref in aside:
                continue
            if part.field(TOLD):
                told.setdefault(part.field("part"), []).append(part.ref)
            key = part.field("part")
            fault = None
            if context.board.record(part.ref) is None:
                named = f"part {key!r}, which is not in the catalogue" if key else "no catalogue part"
                fault = Fault(
                    f"{part.ref} ({part.value or 'no value'}) names {named}",
                    "its ratings, pins and price are unknown, so no other rule can judge it and it cannot be ordered",
                    "correct the field 'part', or add the part to a file listed under build.catalogue",
                )
            yield Measurement(parts=(part.ref,), what=f"{part.ref} is {key or 'unnamed'}", fault=fault)
        for key, refs in told.items():
            message = f"{listed(refs)} {'name' if len(refs) > 1 else 'names'} no catalogue part; taken for {key}"
            why = "value and reference class are that part's; whether it was meant cannot be judged"
            fault = Fault(message, why, f"give back the field 'part': {key}", level="note")
            yield Measurement(parts=tuple(refs), what=message, fault=fault)
