"""A waiver that answers for nothing."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import listed
from modgen.spec.model import Waiver


class StaleWaiver(Rule):
    """Every waiver of the spec names a rule that exists and parts that are there, and waives something.

    Checks:
        Each entry under ``waive``: its rule exists, every part it names is on the board and has a
        finding of that rule on it (or there is one anywhere, when it names none). Runs after all other
        rules.
    Matters:
        A waiver left behind, or a part left behind in one, hides the next fault of that kind before
        anybody has looked at it.
    Fails:
        start from: lane
        spec: waive idle-amplifier U1
    Passes:
        start from: lane
        J2 TN=
        spec: waive unconnected-pin J2
    Limits:
        A waiver of a rule that was not run is judged only by its parts being there. A stale waiver cannot
        be waived.
    References:
        Common practice in static checkers: an unused suppression is reported.
    """

    name = "stale-waiver"
    subject = "ordering"
    level = "warning"
    needs_spec = True
    needs_rails = False
    runs_last = True

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every waiver of the spec."""
        from modgen.rules.engine import nearest, waives

        assert context.spec is not None
        for number, waiver in enumerate(context.spec.waive, 1):
            on = f" on {', '.join(waiver.parts)}" if waiver.parts else ""
            count = sum(waives(waiver, finding) for finding in context.findings)
            fault = None
            if waiver.rule not in context.known_rules:
                near = nearest(waiver.rule, context.known_rules)
                fault = Fault(
                    f"a waiver names the rule {waiver.rule!r}, which does not exist",
                    "it waives nothing, so the finding that was meant still stands",
                    f"write {near!r}" if near else "take a name from the list that 'modgen rules' prints",
                )
            else:
                fault = self._left_over(context, waiver, count, f"the waiver of {waiver.rule}{on}")
            yield Measurement(
                parts=waiver.parts,
                what=f"waiver of {waiver.rule}{on}: {count} finding{'' if count == 1 else 's'}",
                fault=fault,
                key=f"waive[{number}]",
            )

    def _left_over(self, context: Context, waiver: Waiver, count: int, called: str) -> Fault | None:
        """What of a waiver answers for nothing: all of it, or some of its parts."""
        hit = {ref for f in context.findings if f.rule == waiver.rule for ref in f.parts}
        parts = tuple(dict.fromkeys(waiver.parts))
        ran = waiver.rule in (*context.ran, self.name)
        # a rule may fault a part for not being there
        gone = [ref for ref in parts if ref not in context.board.refs and ref not in hit]
        idle = [ref for ref in parts if ref not in hit and ref not in gone] if ran else []
        nothing = "waives nothing" if ran and not count else ""
        if count and idle:
            nothing = f"waives nothing on {listed(idle)}"
        absent = f"{'is' if len(gone) == 1 else 'are'} not on the board"
        if nothing:
            said = f"{nothing}, and {listed(gone)} {absent}" if gone else nothing
        elif gone:
            said = f"names {listed(gone)}, which {absent}"
        else:
            return None
        whole = (ran and not count) or len(gone) == len(parts)
        return Fault(
            f"{called} {said}",
            "left in the spec it would hide the next finding of that kind",
            "take it out of the spec" if whole else f"take {listed(p for p in parts if p in (*idle, *gone))} out of it",
        )
