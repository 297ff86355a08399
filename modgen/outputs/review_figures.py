"""The computed figures of the review page: glide, accuracy, headroom and rails, each with what is left."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from typing import TYPE_CHECKING

from modgen.analysis.model import Interval
from modgen.analysis.montecarlo import DISTRIBUTIONS
from modgen.outputs.benchtest import scale_words
from modgen.outputs.marking import net_words
from modgen.outputs.pages import Cell, Table, columns
from modgen.outputs.wording import (
    NOTHING,
    channel_words,
    grouped,
    number_words,
    percent,
    quantity,
    short_ranges,
    signed,
)

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
    if margin == -math.inf:
        return Cell("none", tone="stop")
    return Cell(percent(margin), tone="stop") if margin < 0 else percent(margin)


def _times(interval: Interval) -> tuple[str, str]:
    return (
        quantity(interval.nominal, "time"),
        f"{quantity(interval.low, 'time')} to {quantity(interval.high, 'time')}",
    )


def _share(share: float, low: float, high: float) -> tuple[str, str]:
    return percent(share), f"{percent(low, 4)} to {percent(high, 4)}"


def glide_tables(job: Job) -> tuple[Table, ...]:
    """Glide of every channel: times, and the share of channels and of whole boards that cover the range.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    tuple of Table
        Times, in every range where a switch makes two, then shares.
    """
    glide = job.spec.glide
    times: list[tuple[str, ...]] = []
    alike: dict[tuple[str, ...], list[str]] = {}
    for c in job.analyses.glide:
        parts = short_ranges((c.isolating, c.control, *c.capacitors))
        times.append((str(c.channel), parts, *_times(c.shortest), *_times(c.middle), *_times(c.longest)))
        share = (*_share(c.inside, c.inside_low, c.inside_high), grouped(c.boards))
        alike.setdefault(share, []).append(str(c.channel))
    shares = [(f"{number_words(numbers)}, each", *share) for share, numbers in alike.items()]
    a = job.analyses
    whole = _share(a.boards_inside, a.boards_inside_low, a.boards_inside_high)
    shares.append((f"all {len(a.glide)} of a board", *whole, NOTHING))
    asked = f"{quantity(glide.shortest, 'time')} to {quantity(glide.longest, 'time')}"
    ranged = any(c.ranges for c in a.glide)
    return (
        Table(
            f"Glide times ({glide.measure}); asked {asked}, {glide.cover}"
            + (": shortest in the fast range, middle and longest in the slow one" if ranged else ""),
            columns(
                "!Channel", "Parts", "#Shortest", "#Worst case", "#Middle", "#Worst case", "#Longest", "#Worst case"
            ),
            tuple(times),
        ),
        *_range_tables(job),
        Table(
            f"How many such channels, and how many whole boards, cover the whole of {asked}",
            columns("!Channels", "#Share", "#95 % interval (Wilson)", "#Channels simulated"),
            tuple(shares),
            note=f"Of channels like these {percent(min(c.inside for c in a.glide))} cover the range; of boards, on "
            f"which every channel must, {percent(a.boards_inside)}, if their parts differ independently. Parts of one "
            "lot are alike, so the true share of boards lies between the two. Drawn with a fixed seed: "
            f"{DISTRIBUTIONS}."
            if a.glide
            else "",
        ),
    )


def _range_tables(job: Job) -> tuple[Table, ...]:
    """Times in each range of every channel that has two, and how far they overlap; none without a range switch."""
    rows: list[tuple[str | Cell, ...]] = []
    for c in job.analyses.glide:
        for r in c.ranges:
            words = (f"{c.channel}, {r.name}", f"pins {r.position}")
            rows.append((*words, *_times(r.shortest), *_times(r.middle), *_times(r.longest)))
    if not rows:
        return ()
    meet: dict[str, list[str]] = {}
    for c in job.analyses.glide:
        if c.ranges:
            fast, slow = c.ranges
            ends = f"{quantity(slow.shortest.nominal, 'time')} to {quantity(fast.longest.nominal, 'time')}"
            meet.setdefault(ends, []).append(str(c.channel))
    notes = [f"{channel_words(channels)} from {ends}" for ends, channels in meet.items()]
    return (
        Table(
            "Glide times in both positions of the range switch",
            columns(
                "!Channel, range",
                "Joined",
                "#Shortest",
                "#Worst case",
                "#Middle",
                "#Worst case",
                "#Longest",
                "#Worst case",
            ),
            tuple(rows),
            note=f"The ranges overlap, nominally: {'; '.join(notes)}.",
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
        Sums, offset over temperature, the largest terms, then all terms of scale, offset and drift.
    """
    a = job.analyses.accuracy

    def scale(share: float) -> str | Cell:
        words = scale_words(job, share)
        plain, _, beside = words.partition(" (")
        return Cell(plain, more=(beside.removesuffix(")"),)) if beside else words

    def volts(value: float) -> str | Cell:
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
        note="An offset can be tuned out; a scale error cannot.",
    )
    made = [sums, _over_temperature(job), *_largest(job, {"scale": scale, "offset": volts, "drift": volts})]
    headings = {
        "scale": "Scale terms, worst first",
        "offset": "Offset terms at 25 °C, worst first",
        "drift": f"What moves the offset between {a.cold:g} °C and {a.hot:g} °C, worst first",
    }
    for kind, show in (("scale", scale), ("offset", volts), ("drift", volts)):
        held = a.drift if kind == "drift" else tuple(t for t in a.terms if t.kind == kind)
        terms = sorted(held, key=lambda t: (-t.worst, t.name))
        rows = [(t.name, show(t.worst), t.formula, t.source, t.remedy or NOTHING) for t in terms]
        if rows:
            made.append(
                Table(headings[kind], columns("!Term", "#Worst", "Formula", "From", "What would help"), tuple(rows))
            )
    return tuple(made)


def _over_temperature(job: Job) -> Table:
    """The offset at both ends of the span of temperatures, and what it moves by between them."""
    a = job.analyses.accuracy
    rows = [
        (f"Offset at {a.cold:g} °C", quantity(a.offset_cold, "voltage"), NOTHING),
        ("Offset at 25 °C", quantity(a.offset_worst, "voltage"), quantity(a.offset_rss, "voltage")),
        (f"Offset at {a.hot:g} °C", quantity(a.offset_hot, "voltage"), NOTHING),
        (
            f"Drift from {a.cold:g} °C to {a.hot:g} °C",
            quantity(a.drift_worst, "voltage"),
            quantity(a.drift_rss, "voltage"),
        ),
    ]
    return Table(
        "Offset over the temperatures of the specification",
        columns("!Figure", "#Worst case", "#Root sum of squares"),
        tuple(rows),
        note="The budgets are judged at 25 °C. Drift is what remains of an offset that has been tuned out; at 1 V per "
        f"octave the worst case of it is {quantity(a.drift_worst, 'pitch')}.",
    )


def _largest(job: Job, shown: Mapping[str, Callable[[float], str | Cell]]) -> list[Table]:
    """The term of each kind that costs most, and what would reduce it."""
    a = job.analyses.accuracy
    found = (
        ("scale", a.largest_scale, a.scale_worst),
        ("offset", a.largest_offset, a.offset_worst),
        ("drift", a.largest_drift, a.drift_worst),
    )
    rows = [
        (
            kind.capitalize(),
            term.name,
            shown[kind](term.worst),
            percent(term.worst / whole) if whole > 0 else NOTHING,
            term.remedy or NOTHING,
        )
        for kind, term, whole in found
        if term is not None
    ]
    heads = columns("!Error", "Largest term", "#Worst", "#Of the sum", "What would reduce it")
    return [Table("The largest term of each", heads, tuple(rows))] if rows else []


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
