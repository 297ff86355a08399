"""The computed figures of the review page: glide, accuracy, headroom and rails, each with what is left."""

from __future__ import annotations

from typing import TYPE_CHECKING

from modgen.analysis.model import Interval
from modgen.outputs.benchtest import scale_words
from modgen.outputs.marking import net_words
from modgen.outputs.pages import Cell, Table, columns
from modgen.outputs.wording import NOTHING, percent, quantity, short_ranges, signed

if TYPE_CHECKING:
    from modgen.outputs.model import Job


def margin_cell(margin: float | None) -> str | Cell:
    """A margin as per cent of its limit; negative ones stand out.

    Parameters
    ----------
    margin
        Share of the limit that is left; None where there is no limit. [-]

    Returns
    -------
    str or Cell
        ``63 %``.
    """
    if margin is None:
        return NOTHING
    return Cell(percent(margin), tone="stop") if margin < 0 else percent(margin)


def _times(interval: Interval) -> tuple[str, str]:
    return (
        quantity(interval.nominal, "time"),
        f"{quantity(interval.low, 'time')} to {quantity(interval.high, 'time')}",
    )


def glide_tables(job: Job) -> tuple[Table, ...]:
    """Glide of every channel: times, and the share of boards that cover the range.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    tuple of Table
        Times, then shares.
    """
    glide = job.spec.glide
    times: list[tuple[str, ...]] = []
    shares: list[tuple[str, ...]] = []
    for c in job.analyses.glide:
        parts = short_ranges((c.isolating, c.control, *c.capacitors))
        times.append((str(c.channel), parts, *_times(c.shortest), *_times(c.middle), *_times(c.longest)))
        shares.append(
            (
                str(c.channel),
                percent(c.inside, 4),
                f"{percent(c.inside_low, 4)} to {percent(c.inside_high, 4)}",
                f"{c.boards:,}".replace(",", "\u00a0"),
            )
        )
    asked = f"{quantity(glide.shortest, 'time')} to {quantity(glide.longest, 'time')}"
    return (
        Table(
            f"Glide times ({glide.measure}); asked {asked}, {glide.cover}",
            columns(
                "!Channel", "Parts", "#Shortest", "#Worst case", "#Middle", "#Worst case", "#Longest", "#Worst case"
            ),
            tuple(times),
        ),
        Table(
            f"Share of boards whose control covers the whole of {asked}",
            columns("!Channel", "#Share", "#95 % interval (Wilson)", "#Boards simulated"),
            tuple(shares),
            note="Every part is drawn from its tolerance, with a fixed seed.",
        ),
    )


def accuracy_tables(job: Job) -> tuple[Table, ...]:
    """The terms of both budgets, and their sums against them.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    tuple of Table
        Sums, scale terms, offset terms.
    """
    a = job.analyses.accuracy

    def scale(share: float) -> str:
        return scale_words(job, share)

    def volts(value: float) -> str:
        return quantity(value, "voltage")

    def left(worst: float, budget: float) -> str | Cell:
        return margin_cell(1 - worst / budget) if budget > 0 else NOTHING

    sums = Table(
        "Sums at 25 °C against their budgets",
        columns("!Error", "#Worst case", "#Root sum of squares", "#Budget", "#Left"),
        (
            (
                "Scale",
                scale(a.scale_worst),
                scale(a.scale_rss),
                scale(a.scale_budget),
                left(a.scale_worst, a.scale_budget),
            ),
            (
                "Offset",
                volts(a.offset_worst),
                volts(a.offset_rss),
                volts(a.offset_budget),
                left(a.offset_worst, a.offset_budget),
            ),
        ),
        note=f"At {a.hot:g} °C the offset is up to {volts(a.offset_hot)}. An offset can be "
        "tuned out; a scale error cannot.",
    )
    made = [sums]
    for kind, show in (("scale", scale), ("offset", volts)):
        terms = sorted((t for t in a.terms if t.kind == kind), key=lambda t: (-t.worst, t.name))
        rows = [(t.name, show(t.worst), t.formula, t.source, t.remedy or NOTHING) for t in terms]
        if rows:
            made.append(
                Table(
                    f"{kind.capitalize()} terms, worst first",
                    columns("!Term", "#Worst", "Formula", "From", "What would help"),
                    tuple(rows),
                )
            )
    return tuple(made)


def headroom_table(job: Job) -> Table:
    """What the signal needs and what the amplifiers can do.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    Table
        One row a stage and subject.
    """
    rows = [
        (
            f"{h.stage}, {h.subject}",
            short_ranges(h.parts),
            f"{signed(h.needed_low, 'voltage')} to {signed(h.needed_high, 'voltage')}",
            f"{signed(h.can_low, 'voltage')} to {signed(h.can_high, 'voltage')}",
            Cell(signed(h.margin, "voltage"), tone="stop") if h.margin < 0 else quantity(h.margin, "voltage"),
        )
        for h in job.analyses.headroom
    ]
    return Table(
        "Headroom with the rails at the low end of their tolerance, behind the diodes",
        columns("!Stage", "Parts", "#Needed", "#Guaranteed", "#Left"),
        tuple(rows),
    )


def rails_table(job: Job) -> Table:
    """Rails behind their diodes and what they draw.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    Table
        One row a rail.
    """
    rows = [
        (
            net_words(r.name),
            r.diode,
            f"{signed(r.bus_nominal, 'voltage')} ({signed(r.bus_low, 'voltage')} to {signed(r.bus_high, 'voltage')})",
            f"{signed(r.protected_nominal, 'voltage')} ({signed(r.protected_low, 'voltage')} to "
            f"{signed(r.protected_high, 'voltage')})",
            quantity(r.current_typical, "current"),
            quantity(r.current_max, "current"),
            quantity(r.current_peak, "current"),
        )
        for r in job.analyses.rails
    ]
    return Table(
        "Rails, and the module's current",
        columns("!Rail", "Diode", "#At the header", "#Behind the diode", "#Typical", "#Most", "#Peak, all slewing"),
        tuple(rows),
    )
