"""Computed figures of the review page that concern the signal: travel, matching, noise and stability."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from modgen.analysis.montecarlo import DISTRIBUTIONS
from modgen.outputs.pages import Cell, Table, collapsed, columns
from modgen.outputs.review_figures import margin_cell
from modgen.outputs.wording import channel_words, grouped, percent, quantity

if TYPE_CHECKING:
    from modgen.analysis.model import Interval, Stability, Travel
    from modgen.outputs.model import Job

#: A source of noise that is worth a number [V].
LEAST_NOISE = 1e-9
#: Where a control is turned to, in words, for the places at which channels are compared.
_PLACES = {0.0: "counter-clockwise end", 0.5: "middle", 1.0: "clockwise end"}


def travel_tables(job: Job) -> tuple[Table, ...]:
    """Time against the rotation of the control, what its travel is spent on, and how alike the channels are.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    tuple of Table
        One of times for each kind of channel, then shares of the travel, then matching.
    """
    alike: dict[tuple[object, ...], list[Travel]] = {}
    for travel in job.analyses.travel:
        alike.setdefault((travel.taper, travel.points), []).append(travel)
    groups = list(alike.values())
    made = [_times(job, group) for group in groups]
    if groups:
        made.append(_shares(job, groups))
    if job.analyses.matching:
        made.append(_matching(job))
    return tuple(made)


def _times(job: Job, group: list[Travel]) -> Table:
    first = group[0]
    others = [
        t
        for t in job.analyses.tapers
        if t.taper != first.taper and t.range == first.range and t.channel in {g.channel for g in group}
    ]
    rows = [
        (
            f"{10 * point.rotation:g}",
            quantity(point.time.nominal, "time"),
            _band(point.time),
            *(quantity(other.points[n].time.nominal, "time") for other in others),
        )
        for n, point in enumerate(first.points)
    ]
    return Table(
        f"Time against rotation, {_channels(group)}{_range(first)}: {first.taper} control on a scale of 0 to 10, "
        "clockwise",
        columns("!Scale mark", "#Time", "#Worst case", *(f"#Were it {other.taper}" for other in others)),
        tuple(rows),
        note="Worst case: all parts of the channel to one side. How closely a control follows its law is not in it; "
        "real tracks stray from it by some 20 % between their ends.",
        narrow=True,
    )


def _shares(job: Job, groups: list[list[Travel]]) -> Table:
    glide = job.spec.glide
    rows = [(f"{_channels(group)}{_range(group[0])}, {group[0].taper}", *_spent(group[0])) for group in groups]
    fitted = {group[0].taper for group in groups}
    rows += [(f"were it {t.taper}{_range(t)}", *_spent(t)) for t in job.analyses.tapers if t.taper not in fitted]
    asked = f"{quantity(glide.shortest, 'time')} to {quantity(glide.longest, 'time')}"
    decade = f"{quantity(glide.shortest, 'time')} to {quantity(min(10 * glide.shortest, glide.longest), 'time')}"
    return Table(
        "What the travel is spent on, as shares of the whole rotation",
        columns("!Control", f"#Lowest decade, {decade}", f"#Range asked, {asked}", "#Faster", "#Slower"),
        tuple(rows),
        note="With little travel for the lowest decade a hair of rotation doubles the time there.",
    )


def _spent(travel: Travel) -> tuple[str, str, str, str]:
    return percent(travel.lowest_decade), percent(travel.asked), percent(travel.faster), percent(travel.slower)


def _matching(job: Job) -> Table:
    found = job.analyses.matching
    ranged = any(glide.ranges for glide in job.analyses.glide)
    rows = [
        (
            _PLACES.get(m.rotation, percent(m.rotation))
            + ((", slow range" if m.rotation else ", fast range") if ranged else ""),
            percent(m.nominal),
            percent(m.half),
            percent(m.most),
            percent(m.worst),
        )
        for m in found
    ]
    return Table(
        "How alike the channels of one board are with their controls alike: slowest over fastest, less one",
        columns("!Control at its", "#By the values", "#Half of boards within", "#95 % within", "#All within"),
        tuple(rows),
        note=f"{grouped(found[0].boards)} boards drawn at random: {DISTRIBUTIONS}. Parts of one lot are more alike.",
    )


def noise_tables(job: Job) -> tuple[Table, ...]:
    """Noise at the outputs, and what it is made of in the noisiest channel.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    tuple of Table
        Sums, then sources; none without channels.
    """
    found = job.analyses.noise
    if not found:
        return ()
    rows = collapsed(
        (
            str(n.channel),
            (),
            (
                f"{n.end} end",
                quantity(n.measured, "voltage"),
                quantity(n.cents / 1200.0, "pitch"),
                max(n.terms, key=lambda term: term.rms).name,
                quantity(n.limit, "voltage"),
                margin_cell(n.margin),
            ),
        )
        for n in found
    )
    worst = max(found, key=lambda n: n.measured)
    ends = {n.end: n for n in found if n.channel == worst.channel}
    sources = [
        (f"{terms[0].name} ({terms[0].source})", *(_rms(term.rms) for term in terms))
        for terms in zip(*(n.terms for n in ends.values()), strict=True)
    ]
    band = f"{quantity(worst.low, 'frequency')} to {quantity(worst.high, 'frequency')}"
    return (
        Table(
            f"Noise at the output from {band}, root mean square",
            columns("!Outputs of", "Control", "#Noise", "#At 1 V per octave", "Largest source", "#Limit", "#Left"),
            tuple((channels, *shown) for channels, _, shown in rows),
            note="The limit is five cents from peak to peak, taken as 6.6 times the root mean square. Noise below some "
            "hundred hertz that rises with falling frequency (1/f) is not in the catalogue and not counted.",
        ),
        Table(
            f"Where the noise of channel {worst.channel} comes from; the parts add as squares",
            columns("!Source", *(f"#At the {end} end" for end in ends)),
            tuple(sources),
            note=f"The glide capacitor alone holds {quantity(worst.capacitor, 'voltage')} over all frequencies (kT/C), "
            "a floor that no resistance changes.",
        ),
    )


def stability_tables(job: Job) -> tuple[Table, ...]:
    """Phase margin of both buffers: the worst of each, and of the output buffers cable by cable.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    tuple of Table
        None without channels.
    """
    found = job.analyses.stability
    if not found:
        return ()
    worst = collapsed(
        (
            str(s.channel),
            s.parts,
            (
                s.stage,
                degrees(s.measured, s.limit),
                _load(s),
                quantity(s.output_resistance, "resistance"),
                quantity(s.crossover, "frequency"),
                percent(s.overshoot),
                margin_cell(s.margin),
            ),
        )
        for s in found
    )
    limit = min(s.limit for s in found)
    made = [
        Table(
            f"Phase margin of the buffers into their worst load; the limit is {degrees(limit)}",
            columns(
                "!Buffers of", "Parts", "Stage", "#Phase margin", "Worst with", "#Amplifier's resistance", "#Crossover",
                "#Overshoot", "#Left",
            ),
            tuple((channels, parts, *shown) for channels, parts, shown in worst),
            note="The amplifier's output resistance is taken from half to double its catalogue figure, and a second "
            "pole at three times its gain-bandwidth: common practice, since makers state neither. At 45° a step "
            "overshoots by a quarter.",
        )
    ]  # fmt: skip
    outputs = [s for s in found if not _is_first(s)]
    cables = sorted({load for s in outputs for load, _ in s.sweep})
    if cables:
        sweeps = collapsed((str(s.channel), (), (s.stage, *(_at(s, cable) for cable in cables))) for s in outputs)
        heads = ["no cable" if not cable else quantity(cable, "capacitance") for cable in cables]
        made.append(
            Table(
                "Phase margin of the output buffers by the capacitance of a cable at every output",
                columns("!Buffers of", "Stage", *(f"#{head}" for head in heads)),
                tuple((channels, *shown) for channels, _, shown in sweeps),
                note="100 pF is about 1 m of patch cable.",
            )
        )
    return tuple(made)


def degrees(angle: float, limit: float = -math.inf) -> str | Cell:
    """An angle with its sign; one under its limit stands out.

    Parameters
    ----------
    angle
        Phase margin. [deg]
    limit
        The least that it should be. [deg]

    Returns
    -------
    str or Cell
        ``72.8°``.
    """
    words = f"{angle:.3g}°".replace("-", "\u2212")
    return Cell(words, tone="stop") if angle < limit else words


def _at(stage: Stability, cable: float) -> str | Cell:
    return degrees(dict(stage.sweep)[cable], stage.limit) if cable in dict(stage.sweep) else ""


def _is_first(stage: Stability) -> bool:
    return stage.stage.startswith("input")


def _load(stage: Stability) -> str:
    if _is_first(stage):
        return f"{quantity(stage.load, 'resistance')} left in the control"
    return f"{quantity(stage.load, 'capacitance')} of cable" if stage.load else "no cable"


def _band(interval: Interval) -> str:
    return f"{quantity(interval.low, 'time')} to {quantity(interval.high, 'time')}"


def _range(travel: Travel) -> str:
    return f", {travel.range} range" if travel.range else ""


def _channels(group: list[Travel]) -> str:
    return channel_words(str(travel.channel) for travel in group)


def _rms(volts: float) -> str:
    return quantity(volts, "voltage") if volts >= LEAST_NOISE else f"under {quantity(LEAST_NOISE, 'voltage')}"
