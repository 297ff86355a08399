"""What a finished board must do on the bench, with limits from the tolerance analysis."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

from modgen.formulas.loading import loading_error
from modgen.outputs.pages import BLANK, TICK, Table, columns
from modgen.outputs.wording import NOTHING, percent, quantity, short_ranges, signed

if TYPE_CHECKING:
    from collections.abc import Sequence

    from modgen.analysis.model import ChannelGlide, RangeGlide
    from modgen.outputs.model import Job

#: Time constants after which a step is over for the eye: e**-5 is 0.7 %. [-]
SETTLED = 5.0

#: How far from an end that the outputs cannot reach the scale is measured, as a share of the span [-].
CLEAR_OF_END = 0.1


#: The least limit that is worth giving [V]: a hand-held meter is not sure of less. Common practice, no source.
LEAST_LIMIT = 1e-3

#: Terms of the scale budget that can go either way begin with this; every other one only takes something away.
TWO_SIDED = "common-mode rejection"

#: Significant digits of what a scale reading may be.
READING_DIGITS = 4


def output_bounds(job: Job) -> tuple[float, float]:
    """What an output may show with 0 V at its input [V].

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    tuple of float
        Low and high; on a single supply not below 0 V, and up to where the amplifier's swing begins. Never less
        than :data:`LEAST_LIMIT` from 0 V. [V]
    """
    offset = max(job.analyses.accuracy.offset_worst, LEAST_LIMIT)
    if not job.spec.rails.single:
        return -offset, offset
    swings = [h.can_low for h in job.analyses.headroom if h.subject == "swing" and "output" in h.stage]
    return 0.0, max([offset, *swings])


def offset_words(job: Job) -> str:
    """What the outputs may show at 0 V in, and what of it is the budget.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    str
        One sentence.
    """
    budget = job.analyses.accuracy
    low, high = output_bounds(job)
    if high == LEAST_LIMIT:
        why = "which is as near as most meters can tell"
    elif low < 0:
        why = "the worst case of this design"
    else:
        why = "the worst of its offset and of where its swing begins"
    limits = (
        f"within ±{quantity(high, 'voltage')} of 0 V" if low < 0 else f"between 0 V and {quantity(high, 'voltage')}"
    )
    return (
        f"Every output stays {limits}, {why}; the offset is at most ±{quantity(budget.offset_worst, 'voltage')} "
        f"at 25 °C (budget ±{quantity(budget.offset_budget, 'voltage')}; at {budget.hot:g} °C up to "
        f"±{quantity(budget.offset_hot, 'voltage')})."
    )


def path_table(job: Job) -> Table:
    """Which input drives which outputs, and the offset of each output.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    Table
        One row a channel.
    """
    low, high = output_bounds(job)
    jacks: dict[tuple[str, int], list[str]] = {}
    for part in job.netlist.parts:
        role, owner = part.field("role"), part.field("channel")
        if role in ("input-jack", "output-jack") and owner.isdecimal():
            jacks.setdefault((role, int(owner)), []).append(part.ref)
    rows = []
    for channel in range(1, job.spec.channels + 1):
        fed = job.spec.input_of(channel)
        own = short_ranges(jacks.get(("input-jack", fed), ())) or NOTHING
        rows.append(
            (
                str(channel),
                own if fed == channel else f"{own} (shared with channel {fed})",
                short_ranges(jacks.get(("output-jack", channel), ())) or NOTHING,
                f"{signed(low, 'voltage')} to {signed(high, 'voltage')}",
                BLANK,
                TICK,
            )
        )
    return Table(
        "Outputs with nothing plugged in",
        columns("!Channel", "Input", "Outputs", "#Expect at 0 V in", "_Found", ""),
        tuple(rows),
    )


def measure_words(job: Job) -> str:
    """How a glide time is read off, in words.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    str
        For the measure that the spec asks for.
    """
    glide = job.spec.glide
    if glide.measure == "time-constant":
        return "from the start of the step until 63.2 % of it is done"
    if glide.measure == "settle":
        return (
            f"from the start of a step of {quantity(glide.step, 'voltage')} until the output stays within "
            f"{quantity(glide.within, 'voltage')} of where it ends"
        )
    return "from 10 % to 90 % of the step"


def wave_levels(job: Job) -> tuple[float, float]:
    """The two levels of the square wave that glides are measured with [V].

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    tuple of float
        The ends of the span; for a settling time the step the spec names, from 0 V where the span allows. [V]
    """
    signal, glide = job.spec.signal, job.spec.glide
    if glide.measure != "settle":
        return signal.low, signal.high
    base = 0.0 if signal.low <= 0.0 <= signal.high - glide.step else signal.low
    return base, base + glide.step


def hold_time(job: Job) -> float:
    """How long each half of the test wave must last at the slow end [s].

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    float
        Five of the greatest time constants, or half as long again as the greatest glide if that is more. [s]
    """
    longest = 0.0
    for channel in job.analyses.glide:
        spread = channel.longest.high / channel.longest.nominal
        longest = max(longest, SETTLED * channel.time_constant_longest * spread, 1.5 * channel.longest.high)
    return longest


def glide_table(job: Job) -> Table:
    """Glide times with their limits, and room to write what was measured.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    Table
        One row a channel and position of the control; with a range switch in each of its ranges.
    """
    rows = []
    for channel in job.analyses.glide:
        ranges: Sequence[tuple[str, ChannelGlide | RangeGlide]] = [(f"{r.name} range, ", r) for r in channel.ranges]
        for where, interval in (
            (before + position, interval)
            for before, times in ranges or [("", channel)]
            for position, interval in (
                ("fully anticlockwise", times.shortest),
                ("middle", times.middle),
                ("fully clockwise", times.longest),
            )
        ):
            rows.append(
                (
                    f"{channel.channel}, {where}",
                    channel.control,
                    quantity(interval.nominal, "time"),
                    quantity(interval.low, "time"),
                    quantity(interval.high, "time"),
                    BLANK,
                    TICK,
                )
            )
    return Table(
        "Glide times and their limits",
        columns("!Channel and control", "Part", "#Nominal", "#Not below", "#Not above", "_Found", ""),
        tuple(rows),
    )


def scale_levels(job: Job) -> tuple[float, float]:
    """The two voltages between which the scale is measured [V].

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    tuple of float
        The ends of the span; the low one a tenth of the span higher when the outputs cannot reach it. [V]
    """
    signal = job.spec.signal
    low = signal.low
    if any(h.can_low > low for h in job.analyses.headroom if h.subject == "swing"):
        low += CLEAR_OF_END * (signal.high - signal.low)
    return low, signal.high


@dataclass(frozen=True)
class ScaleReading:
    """What the output of one channel makes of the change at the input [V]."""

    expected: float
    low: float
    high: float


def scale_reading(job: Job, channel: int) -> ScaleReading:
    """What a good channel shows between the two levels of the scale test, with the source and load of the spec.

    Parameters
    ----------
    job
        The module. [-]
    channel
        Which one; nothing is plugged into any other input. [-]

    Returns
    -------
    ScaleReading
        Expected with the spec's own source and load and nominal parts; ``low`` with everything that takes
        something away at its worst; ``high`` with a source of 0 ohm and a load that is there. No limit is nearer
        than :data:`LEAST_LIMIT` to what is expected. [V]

    Notes
    -----
    Source and load make dividers, so they, the open-loop gain and the insulation of the glide capacitor only ever
    lower a reading; common-mode rejection alone has no sign. So a load that is missing shows, as soon as the
    output resistor stands outside the loop: the reading is then over ``high``.
    """
    values, spec, budget = job.design.values, job.spec, job.analyses.accuracy
    low_level, high_level = scale_levels(job)
    span = high_level - low_level
    either = math.fsum(t.worst for t in budget.terms if t.kind == "scale" and t.name.startswith(TWO_SIDED))
    series, load = values.output_series, spec.signal.load
    loaded = least_loaded = 0.0
    if not values.inside_loop:
        loaded = loading_error(series.resistance, load)
        least_loaded = loading_error(series.resistance * (1 - series.tolerance), load)
    # a source in a chain also drives the terminators of the empty sockets after it
    fed = spec.input_of(channel)
    terminators = spec.jacks.inputs - fed + 1 if spec.normalling == "chain" else 1
    sourced = loading_error(spec.signal.source, values.terminator.resistance / terminators)
    expected = span * (1 - sourced) * (1 - loaded)
    return ScaleReading(
        expected,
        min(span * (1 - budget.scale_worst), expected - LEAST_LIMIT),
        max(span * (1 - least_loaded + either), expected + LEAST_LIMIT),
    )


def scale_table(job: Job) -> Table:
    """Scale of every channel between the ends of the signal's span.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    Table
        One row a channel: what to expect, and the limits of :func:`scale_reading`, rounded outwards.
    """
    low, high = scale_levels(job)
    rows = []
    for channel in range(1, job.spec.channels + 1):
        reading = scale_reading(job, channel)
        rows.append((str(channel), quantity(high - low, "voltage"), *reading_words(reading), BLANK, BLANK, TICK))
    worst, budget = job.analyses.accuracy.scale_worst, job.analyses.accuracy.scale_budget
    return Table(
        "What the output makes of a change at the input",
        columns(
            "!Channel", "#Change in", "#Expect", "#Not below", "#Not above", "_At the low end", "_At the high end", ""
        ),
        tuple(rows),
        note=f"Expected with a source of {quantity(job.spec.signal.source, 'resistance')}, a load of "
        f"{quantity(job.spec.signal.load, 'resistance')} and nominal parts. Scale error at most "
        f"{scale_words(job, worst)}, budget {scale_words(job, budget)}. "
        + (
            "The load counts for nothing here: the output resistor stands inside the feedback loop."
            if job.design.values.inside_loop
            else "When a reading is over its limit, see first that the load is there."
        ),
    )


def reading_words(reading: ScaleReading) -> tuple[str, str, str]:
    """Expected reading and limits as a meter shows them, all with the same decimals.

    Parameters
    ----------
    reading
        In volts. [V]

    Returns
    -------
    tuple of str
        Expected, low and high: the low one has four digits; the limits are rounded away from the expected one.

    Examples
    --------
    >>> [text.replace("\u00a0", " ") for text in reading_words(ScaleReading(9.89, 9.8123, 9.99691))]
    ['9.890 V', '9.812 V', '9.997 V']
    """
    decimals = max(0, READING_DIGITS - 1 - math.floor(math.log10(reading.low))) if reading.low > 0 else READING_DIGITS
    step = 10.0**-decimals
    low = math.floor(round(reading.low / step, 6)) * step
    high = math.ceil(round(reading.high / step, 6)) * step
    expected, low_text, high_text = (f"{value:.{decimals}f}\u00a0V" for value in (reading.expected, low, high))
    return expected, low_text, high_text


def scale_words(job: Job, share: float) -> str:
    """A scale error as the spec's user thinks of it: cents per octave for pitch, else per cent and cents beside.

    Parameters
    ----------
    job
        The module. [-]
    share
        Error as a fraction of the signal. [-]

    Returns
    -------
    str
        ``2.4 cents per octave`` or ``0.2 % (2.4 cents per octave)``.
    """
    cents = f"{quantity(share, 'pitch')} per octave"
    return cents if job.spec.signal.pitch else f"{percent(share)} ({cents})"
