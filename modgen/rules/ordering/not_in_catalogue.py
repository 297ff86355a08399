"""A part nobody knows the figures of."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.rules.contract import Context, Fault, Measurement, Rule


class NotInCatalogue(Rule):
    """Every part is one that the catalogue knows.

    Checks:
        The field ``part`` of every part is a key of the catalogue.
    Matters:
        Without a record no rating, pin or price of the part is known: every other rule passes over it,
        and it cannot be ordered.
    Fails:
        start from: lane
        R1 part=left-over-from-a-drawer
    Passes:
        start from: lane
    Limits:
        A part that carries the wrong key is judged by the wrong record.
    References:
        Common practice: a parts list names orderable parts.
    """

    name = "not-in-catalogue"
    subject = "ordering"
    needs_rails = False

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every part."""
        for part in context.board.netlist.parts:
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
