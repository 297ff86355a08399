"""A waiver that answers for nothing."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.rules.contract import Context, Fault, Measurement, Rule


class StaleWaiver(Rule):
    """Every waiver of the spec waives something, and names a rule that exists.

    Checks:
        Each entry under ``waive``: its rule exists, and at least one finding of that rule is on its
        parts (or anywhere, when it names none). Runs after all other rules.
    Matters:
        A waiver left behind hides the next fault of that kind before anybody has looked at it.
    Fails:
        start from: lane
        spec: waive idle-amplifier U1
    Passes:
        start from: lane
        J2 TN=
        spec: waive unconnected-pin J2
    Limits:
        A waiver of a rule that was not run is not judged. A stale waiver cannot be waived.
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
            elif waiver.rule in (*context.ran, self.name) and not count:
                fault = Fault(
                    f"the waiver of {waiver.rule}{on} waives nothing",
                    "left in the spec it would hide the next finding of that kind",
                    "take it out of the spec",
                )
            yield Measurement(
                parts=waiver.parts,
                what=f"waiver of {waiver.rule}{on}: {count} finding{'' if count == 1 else 's'}",
                fault=fault,
                key=f"waive[{number}]",
            )
