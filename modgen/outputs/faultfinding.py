"""What to suspect when a measurement on a new board is off: causes of this circuit, by the parts of this board."""

from __future__ import annotations

from typing import TYPE_CHECKING

from modgen.outputs.benchtest import scale_words
from modgen.outputs.boardfacts import Records, by_role, reservoirs, soldered_flat
from modgen.outputs.pages import Table, columns
from modgen.outputs.wording import quantity, short_ranges

if TYPE_CHECKING:
    from modgen.outputs.model import Job


def fault_table(job: Job, records: Records) -> Table:
    """Symptoms, likely causes and where to look.

    Parameters
    ----------
    job
        The module. [-]
    records
        Catalogue record by reference. [-]

    Returns
    -------
    Table
        One row a symptom; only causes that this design can have.
    """
    rows = [*_supply(job, records), *_output(job), *_glide(job), *_accuracy(job)]
    return Table("What to suspect when it is off", columns("!What you see", "Suspect", "Look at"), tuple(rows))


def _supply(job: Job, records: Records) -> list[tuple[str, str, str]]:
    roles = by_role(job.netlist)
    diodes = short_ranges(rail.diode for rail in job.analyses.rails)
    bulk = short_ranges(ref for rail in job.analyses.rails for ref in reservoirs(job, records, rail)[0])
    electrolytic = short_ranges(roles.get("reservoir", ()))
    packages = short_ranges(roles.get("amplifier", ()))
    idle = short_ranges(roles.get("idle-tie", ()))
    rows = [
        (
            "A rail is missing behind its diode",
            "the diode the wrong way round, the header or its cable turned round, an open joint",
            f"{diodes}, {short_ranges(roles.get('power-header', ()))}",
        ),
        (
            "The supply limits at once, or a rail reads near 0 Ω",
            "a reservoir the wrong way round (switch off and keep away until it is cold), a solder bridge, "
            "a package turned round",
            f"{bulk}, {packages}",
        ),
        (
            "Rails are right but a package is hot",
            "the package turned round"
            + ("" if soldered_flat(job, records) else " or one pin off in its socket")
            + ", an output bridged to a rail",
            packages,
        ),
        (
            "More current than the maximum, no package hot",
            "an amplifier that oscillates: a decoupling capacitor missing or of the wrong value"
            + (", an idle section that is not tied off" if idle else ""),
            ", ".join(x for x in (short_ranges(roles.get("decoupling", ())), idle) if x),
        ),
    ]
    if electrolytic:
        rows.append(
            (
                "Hum or steps on every output together",
                "a reservoir that is open or of the wrong value",
                electrolytic,
            )
        )
    return rows


def _output(job: Job) -> list[tuple[str, str, str]]:
    roles = by_role(job.netlist)
    refs = {role: short_ranges(found) for role, found in roles.items()}
    rows = [
        (
            "An output sits near a rail",
            "an open joint at an amplifier's input or in its feedback, so that nothing holds it",
            ", ".join(refs[r] for r in ("amplifier", "input-series", "feedback") if r in refs),
        ),
        (
            "An output stays at 0 V",
            "the input not reaching the buffer, the output resistor or jack open, or the glide node bridged to 0 V",
            ", ".join(refs[r] for r in ("input-jack", "input-series", "output-series", "glide-capacitor") if r in refs),
        ),
    ]
    if job.spec.normalling == "chain" and job.spec.jacks.inputs > 1:
        rows.append(
            (
                "A channel does not follow the input before it with nothing plugged in",
                "the switched contact (TN) of its jack, or its joint",
                refs.get("input-jack", ""),
            )
        )
    else:
        rows.append(
            (
                "A channel moves with another one's input, nothing plugged in",
                "the switched contact (TN) of its jack not on 0 V, or a bridge between two channels",
                refs.get("input-jack", ""),
            )
        )
    return rows


def _glide(job: Job) -> list[tuple[str, str, str]]:
    refs = {role: short_ranges(found) for role, found in by_role(job.netlist).items()}
    control, capacitor, isolating = (refs.get(role, "") for role in ("glide-control", "glide-capacitor", "isolating"))
    rows = [
        ("Glide is out at both ends by the same factor", "a glide capacitor of the wrong value", capacitor),
        (
            "Glide is right fast and out slow",
            "a control of the wrong value",
            control,
        ),
        ("Glide is right slow and out fast", "an isolating resistor of the wrong value: read its marking", isolating),
        ("The control does nothing and the glide is always slow", "the wiper (pin 2) is open", control),
        ("The control works backwards", "the control's outer pins exchanged (1 is the buffer's side)", control),
        ("The output follows at once at every setting", "the glide capacitor is open, or its end to 0 V", capacitor),
    ]
    if "range-switch" in refs:
        switch, added, keeper = (refs.get(role, "") for role in ("range-switch", "range-capacitor", "range-keeper"))
        rows += [
            (
                "Glide is right in the fast range and out in the slow one",
                "an added capacitor of the wrong value",
                added,
            ),
            (
                "Both ranges glide alike, and fast",
                "an added capacitor or its contact open",
                f"{added}, {switch}",
            ),
            ("Fast and slow are exchanged", "the switch turned round (its outer pins exchanged)", switch),
            (
                "The output jumps when the slow range is chosen",
                "its resistor or a contact of the switch is open, so that nothing keeps the waiting capacitor",
                f"{keeper}, {switch}",
            ),
        ]
    if job.design.values.back_to_back:
        rows.append(
            (
                "Glide is twice as long, and electrolytics get warm or drift",
                "one of a back-to-back pair bridged, or both the same way round",
                capacitor,
            )
        )
    return rows


def _accuracy(job: Job) -> list[tuple[str, str, str]]:
    refs = {role: short_ranges(found) for role, found in by_role(job.netlist).items()}
    budget = job.analyses.accuracy
    rows = [
        (
            f"Offset over {quantity(budget.offset_worst, 'voltage')}",
            "dirt or flux on the glide node, a leaky glide capacitor, a package of another type",
            ", ".join(refs[r] for r in ("glide-capacitor", "amplifier") if r in refs),
        ),
        (
            f"Scale error over {scale_words(job, budget.scale_worst)}",
            "a terminator or output resistor of the wrong value, a source or load outside what the spec says "
            f"({quantity(job.spec.signal.source, 'resistance')} and {quantity(job.spec.signal.load, 'resistance')})",
            ", ".join(refs[r] for r in ("terminator", "output-series", "feedback") if r in refs),
        ),
    ]
    if job.design.values.inside_loop:
        rows.append(
            (
                "An output rings or whistles with a long cable",
                "a compensation capacitor missing, or of the wrong value",
                refs.get("compensation", ""),
            )
        )
    return rows
