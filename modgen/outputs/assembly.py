"""Assembly notes for the bench: what goes where in which order, then bring-up with this design's own figures."""

from __future__ import annotations

from typing import TYPE_CHECKING

from modgen.catalogue.records import Capacitor, Control
from modgen.outputs import benchtest, bringup
from modgen.outputs.boardfacts import rail_net, range_words, records_of, soldered_flat
from modgen.outputs.faultfinding import fault_table
from modgen.outputs.pages import render
from modgen.outputs.steps import step_table, steps
from modgen.outputs.wording import chosen, quantity, short_ranges, signed

if TYPE_CHECKING:
    from modgen.outputs.model import Job


def cautions(job: Job) -> tuple[tuple[str, str], ...]:
    """What can hurt somebody or the module.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    tuple
        Pairs of subject and words; the references are this board's.
    """
    records = records_of(job)
    polar = [r for r, part in records.items() if isinstance(part, Capacitor) and part.polarised]
    header = short_ranges(r for r, part in records.items() if part.kind == "header")
    controls = [part for part in records.values() if isinstance(part, Control)]
    stripe = "a pin that this single-supply module leaves open" if job.spec.rails.single else "the negative rail"
    found = [
        (
            "Heat",
            "An iron burns at a touch and sets fire to what it lies on. Use a stand, and switch it off when you leave.",
        ),
        (
            "Fumes",
            "Flux smoke irritates and can make you allergic for good. Draw it off or ventilate, keep your head out of "
            "it, and wash your hands before you eat.",
        ),
        ("Eyes", "Wear eye protection when you cut leads, when you solder, and the first time power is on."),
        (
            "Static",
            "Amplifiers are damaged by charges that nobody feels. Wear an earthed wrist strap, work on a "
            "dissipative mat (IEC 61340-5-1), and leave packages in their foam until they are needed.",
        ),
    ]
    if polar:
        found.append(
            (
                "Electrolytics",
                f"Reversed, they burst, hot and without warning: {short_ranges(polar)}. Keep your face "
                "away when power first comes on.",
            )
        )
    found.append(
        (
            "Power header",
            f"{header} has pin 1 and the cable's coloured stripe on {stripe}. Cables and shrouds are often made "
            "the other way round: check with a meter, whatever the key says.",
        )
    )
    if controls:
        worst = min(controls, key=lambda part: (part.solder_temperature, part.solder_time))
        found.append(
            (
                "Controls",
                f"They stand {worst.solder_temperature:g} °C for {worst.solder_time:g} s at most. They come last.",
            )
        )
    found.append(
        (
            "Mains",
            "Nothing here is made for the mains. Power it only from a ready-made, approved supply with an isolated "
            "low-voltage output. Work on anything connected to the mains is for licensed people, under the "
            "local codes.",
        )
    )
    found.append(("Local rules", "Where the rules of your workplace or country ask for more, they hold."))
    return tuple(found)


def assembly_html(job: Job) -> bytes:
    """The assembly notes as one page that needs nothing else.

    Parameters
    ----------
    job
        The module, computed, built and judged. [-]

    Returns
    -------
    bytes
        HTML, UTF-8; the same bytes for the same job.
    """
    records = records_of(job)
    rails = job.analyses.rails
    made = steps(job)
    spec = job.spec
    feed = chosen(
        [
            f"{rail_net(r)} {quantity(bringup.current_limit(r.current_peak), 'current')}"
            for r in rails
            if bringup.current_limit(r.current_peak) > bringup.current_limit(r.current_max)
        ]
    )
    values: dict[str, object] = {
        "title": f"{spec.module}: assembly notes",
        "module": spec.module,
        "facts": (
            ("Channels", str(spec.channels)),
            ("Jacks", f"{spec.jacks.inputs} in, {spec.jacks.outputs} out"),
            ("Rails", chosen([signed(r.bus_nominal, "voltage") for r in rails])),
            ("Mounting", spec.build.mount),
            ("Parts on a board", str(len(job.netlist.parts))),
            ("Steps", str(len(made))),
        ),
        "cautions": cautions(job),
        "steps": tuple((step, step_table(step)) for step in made),
        "banded": any(line.printed.bands for step in made for line in step.lines),
        "flat": soldered_flat(job, records),
        "before": bringup.before_power(job, records),
        "rails": bringup.rails_table(job, records),
        "paths": benchtest.path_table(job),
        "offset": benchtest.offset_words(job),
        "glide": benchtest.glide_table(job),
        "ranges": range_words(job),
        "measure": benchtest.measure_words(job),
        "wave": benchtest.wave_levels(job),
        "hold": benchtest.hold_time(job),
        "feed": feed,
        "scale": benchtest.scale_table(job),
        "digits": benchtest.READING_DIGITS,
        "levels": benchtest.scale_levels(job),
        "signal": spec.signal,
        "chain": spec.normalling == "chain" and spec.jacks.inputs > 1,
        "faults": fault_table(job, records),
    }
    return render("assembly.html.j2", values=values, report=job.report)
