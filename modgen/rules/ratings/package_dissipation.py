"""An amplifier package that runs hotter than it may."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.board import Board
from modgen.analysis.model import Dissipation, Short
from modgen.analysis.power import rail_powers
from modgen.analysis.shorts import GROUND, dissipations, shorts
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import left
from modgen.units import format_quantity


class PackageDissipation(Rule):
    """No amplifier package dissipates more than it is rated for, also with an output shorted.

    Checks:
        For each package: the greatest quiescent current of all its sections across both rails at the
        high end of their tolerance, and on top of that the worst single short at its outputs: to 0 V,
        and to another module's output at the opposite rail. Against what the package may dissipate at
        25 degC. Beyond it with a short to another output is a warning, otherwise an error.
    Matters:
        A plug that is half in shorts an output for as long as it stays there; every 10 degC that a
        package runs hotter doubles its bias current and halves its life, and beyond its rating it fails.
    Fails:
        start from: lane
        spec: rails.positive 18 V
        spec: rails.negative -18 V
        U1 ne5532-soic8
    Passes:
        start from: lane
    Limits:
        One short at a time. The rating is that of free air at 25 degC; in a warm case less is allowed,
        which the maker's derating tells.
    References:
        680 mW of a dual in a DIP: ST TL072 datasheet rev 4. Method: common practice.
    """

    name = "package-dissipation"
    subject = "ratings"
    needs_spec = True

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every package with a known type, against 0 V and against another output."""
        board, spec = context.board, context.spec
        assert spec is not None
        powers = rail_powers(board, spec.rails, spec.signal)
        found = shorts(board, powers, spec.signal)
        grounded = tuple(short for short in found if short.against == GROUND)
        to_ground = {d.package: d for d in dissipations(board, powers, grounded)}
        for worst in dissipations(board, powers, found):
            at_ground = to_ground[worst.package]
            yield _judged(board, at_ground, grounded, "error")
            # what is over with a short to 0 V is over with any
            if worst.against not in ("", GROUND) and left(at_ground.measured, at_ground.limit) >= 0:
                yield _judged(board, worst, found, "warning")


def _judged(board: Board, found: Dissipation, every: tuple[Short, ...], level: str) -> Measurement:
    ref = found.package
    sections = {section.name for section in board.sections if section.package == ref}
    mine = [short for short in every if short.section in sections and short.against == found.against]
    worst = max(mine, key=lambda short: short.package, default=None)
    watts, most = format_quantity(found.measured, "power"), format_quantity(found.limit, "power")
    rest = format_quantity(found.quiescent, "power")
    margin = left(found.measured, found.limit)
    at_rest = left(found.quiescent, found.limit) < 0 or worst is None
    when = "at rest" if at_rest else f"with {worst.net} shorted to {found.against}" if worst else ""
    fault = None
    if margin < 0:
        fix = "lower rails, or a type that draws less or whose package may dissipate more"
        if not at_rest:
            fix = f"a larger output resistor, {fix}"
        fault = Fault(
            f"{ref} may dissipate {most} and takes {rest} at rest" + ("" if at_rest else f", {watts} {when}"),
            "its junctions get hotter than their rating, and bias currents rise with them",
            fix,
            level=level,
        )
    resistor = (worst.resistor,) if worst and worst.resistor and not at_rest else ()
    return Measurement(
        parts=(ref, *resistor),
        what=f"{ref}: {rest if at_rest else watts} of {most} {when}",
        measured=found.quiescent if at_rest else found.measured,
        limit=found.limit,
        unit="W",
        margin=left(found.quiescent, found.limit) if at_rest else margin,
        fault=fault,
        key="rails.positive",
    )
