"""A part that layout cannot place."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.structure import without_function


class NoLandPattern(Rule):
    """Every part names a land pattern.

    Checks:
        The land pattern of every part is stated.
    Matters:
        A layout editor drops or refuses a part without one, and the board comes back without it.
    Fails:
        start from: lane
        R1 land=
    Passes:
        start from: lane
    Limits:
        Does not open the layout library: a name that is misspelt there is not seen here.
    References:
        IPC-7351B, land pattern naming (from memory); common practice.
    """

    name = "no-land-pattern"
    subject = "ordering"
    needs_rails = False

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every part."""
        # a logo is drawn, not fitted; nothing of the circuit is missing without it
        aside = without_function(context.board)
        for part in context.board.netlist.parts:
            fault = None
            if not part.land_pattern.strip() and part.ref not in aside:
                fault = Fault(
                    f"{part.ref} ({part.value or 'no value'}) has no land pattern",
                    "a layout editor drops or refuses a part that it cannot place",
                    "take a part from the catalogue, or name one for it under build.land_patterns",
                )
            yield Measurement(
                parts=(part.ref,), what=f"{part.ref} {part.land_pattern or 'without land pattern'}", fault=fault
            )
