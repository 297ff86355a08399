"""What a finished board must do on the bench, with limits from the tolerance analysis."""

from __future__ import annotations

from typing import TYPE_CHECKING

from modgen.outputs.pages import BLANK, TICK, Table, columns
from modgen.outputs.wording import NOTHING, percent, quantity, short_ranges, signed

if TYPE_CHECKING:
    from modgen.outputs.model import Job

#: Time constants after which a step is over for the eye: e**-5 is 0.7 %. [-]
SETTLED = 5.0

#: How far from an end that the outputs cannot reach the scale is measured, as a share of the span [-].
CLEAR_OF_END = 0.1


def output_bounds(job: Job) -> tuple[float, float]:
    """What an output may show with 0 V at its input [V].

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    tuple of float
        Low and high; on a single supply not below 0 V, and up to where the amplifier's swing begins. [V]
    """
    offset = job.analyses.accuracy.offset_worst
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
    limits = (
        f"within ±{quantity(high, 'voltage')} of 0 V, the worst case of this design"
        if low < 0
        else f"between 0 V and {quantity(high, 'voltage')}: the worst of its offset and of where its swing begins"
    )
    return (
        f"Every output stays {limits}; the offset is at most ±{quantity(budget.offset_worst, 'voltage')} at 25 °C "
        f"(budget ±{quantity(budget.offset_budget, 'voltage')}; at {budget.hot:g} °C up to ±"
        f"{quantity(budget.offset_hot, 'voltage')})."
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
        One row a channel and position of the control.
    """
    rows = []
    for channel in job.analyses.glide:
        for where, interval in (
            ("fully anticlockwise", channel.shortest),
            ("middle", channel.middle),
            ("fully clockwise", channel.longest),
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


def scale_table(job: Job) -> Table:
    """Scale of every channel between the ends of the signal's span.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    Table
        One row a channel; the limits are the worst case of the accuracy budget over the span.
    """
    low, high = scale_levels(job)
    span = high - low
    worst = job.analyses.accuracy.scale_worst
    rows = [
        (
            str(channel),
            quantity(span, "voltage"),
            f"{quantity(span * (1 - worst), 'voltage', 6)} to {quantity(span * (1 + worst), 'voltage', 6)}",
            BLANK,
            BLANK,
            TICK,
        )
        for channel in range(1, job.spec.channels + 1)
    ]
    return Table(
        "What the output makes of a change at the input",
        columns("!Channel", "#Change at the input", "#Change at the output", "_At the low end", "_At the high end", ""),
        tuple(rows),
        note=f"Predicted at most {scale_words(job, worst)}, "
        f"budget {scale_words(job, job.analyses.accuracy.scale_budget)}.",
    )


def scale_words(job: Job, share: float) -> str:
    """A scale error as the spec's user thinks of it: cents per octave for pitch, else per cent.

    Parameters
    ----------
    job
        The module. [-]
    share
        Error as a fraction of the signal. [-]

    Returns
    -------
    str
        ``2.4 cents per octave`` or ``1.2 %``.
    """
    return f"{quantity(share, 'pitch')} per octave" if job.spec.signal.pitch else percent(share)
