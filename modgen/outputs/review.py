"""The review page: what somebody wants to know before ordering, with the margins that are left."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import TYPE_CHECKING, Any

from modgen.analysis.accuracy import LEFT_OUT
from modgen.outputs.bom import bom_lines
from modgen.outputs.choicewords import choice_words
from modgen.outputs.pages import Cell, Table, columns, render
from modgen.outputs.review_faults import short_tables, supply_state_tables
from modgen.outputs.review_figures import accuracy_tables, glide_tables, headroom_table, margin_cell, rails_table
from modgen.outputs.review_signal import noise_tables, stability_tables, travel_tables
from modgen.outputs.wording import NOTHING, chosen, plural, quantity, short_ranges, signed
from modgen.spec import resolved
from modgen.units import UNITS

if TYPE_CHECKING:
    from modgen.outputs.model import Job
    from modgen.rules.contract import Checked, Finding

#: Unit to the kind of quantity that is written in it.
_KINDS = {unit: kind for kind, unit in UNITS.items()}

#: Kinds of evidence from the firmest to none, with the heading of each; a file of one's own only where there is one.
_EVIDENCE = {
    "published document": "#Published",
    "own file": "#Own file",
    "common practice": "#Practice",
    "memory": "#Memory",
    "invented": "#Invented",
}


def review_html(job: Job) -> bytes:
    """The review page: one file that needs nothing else, readable without scripts and in print.

    Parameters
    ----------
    job
        The module, computed, built and judged. [-]

    Returns
    -------
    bytes
        HTML, UTF-8; the same bytes for the same job.
    """
    spec = job.spec
    values: dict[str, object] = {
        "title": f"{spec.module}: review before ordering",
        "module": spec.module,
        "facts": (
            ("Channels", str(spec.channels)),
            ("Jacks", f"{spec.jacks.inputs} in, {spec.jacks.outputs} out"),
            ("Rails", chosen([signed(r.bus_nominal, "voltage") for r in job.analyses.rails])),
            ("Glide", f"{quantity(spec.glide.shortest, 'time')} to {quantity(spec.glide.longest, 'time')}"),
            ("Mounting", spec.build.mount),
            ("Parts on a board", str(len(job.netlist.parts))),
        ),
        "spec": spec_table(job),
        "choices": tuple(choice_words(job, choice) for choice in job.design.choices),
        "findings": tuple((f, _measure(f)) for f in job.report.findings if not f.waived),
        "rules": rules_table(job.report.checked),
        "glide": glide_tables(job),
        "travel": travel_tables(job),
        "accuracy": accuracy_tables(job),
        "left_out": LEFT_OUT,
        "noise": noise_tables(job),
        "stability": stability_tables(job),
        "headroom": headroom_table(job),
        "rails": rails_table(job),
        "shorts": short_tables(job),
        "supply_states": supply_state_tables(job),
        "waivers": waiver_table(job),
        "bom": bom_table(job),
        "evidence": evidence_table(job),
    }
    return render("review.html.j2", values=values, report=job.report)


def spec_table(job: Job) -> Table:
    """Every key of the spec with the value that holds, and whether the page states it.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    Table
        One row a key. Waivers have a section of their own.
    """
    stated = {key for key, _ in job.spec.places}
    # what is a section on the page has its keys below it; only the key itself counts as stated
    rows = []
    for key, text in _flat(resolved(job.spec)):
        if key == "waive":
            continue
        known = key in stated or (key.startswith("jacks.") and "jacks" in stated)
        rows.append((key, text or NOTHING, "stated" if known else "default"))
    return Table("Everything the module was computed from", columns("!Key", "Value", "From"), tuple(rows))


def _flat(section: Mapping[str, Any], before: str = "") -> Iterable[tuple[str, str]]:
    for name, value in section.items():
        if isinstance(value, Mapping):
            yield from _flat(value, f"{before}{name}.")
        elif isinstance(value, bool):
            yield before + name, "yes" if value else "no"
        elif isinstance(value, list):
            yield before + name, ", ".join(str(item) for item in value)
        else:
            yield before + name, str(value)


def _measure(finding: Finding) -> str:
    """What a finding measured against its limit, in the finding's own unit."""
    if finding.measured is None:
        return ""
    words = _with_unit(finding.measured, finding.unit)
    return words if finding.limit is None else f"{words}, limit {_with_unit(finding.limit, finding.unit)}"


def _with_unit(value: float, unit: str) -> str:
    kind = _KINDS.get(unit)
    if kind is not None and kind not in ("ratio", "pitch"):
        return quantity(value, kind)
    return f"{value:.4g} {unit}".strip().replace("-", "\u2212")


def rules_table(checked: Iterable[Checked]) -> Table:
    """Every rule with what it looked at and where the least margin was.

    Parameters
    ----------
    checked
        From the report. [-]

    Returns
    -------
    Table
        One row a rule.
    """
    rows: list[tuple[str | Cell, ...]] = [
        (c.rule, str(c.instances), margin_cell(c.worst_margin), c.worst or NOTHING)
        if c.judged
        else (c.rule, NOTHING, Cell("not judged", tone="warn"), c.not_judged)
        for c in checked
    ]
    return Table("Rules that were run", columns("!Rule", "#Looked at", "#Least margin", "Where"), tuple(rows))


def waiver_table(job: Job) -> Table:
    """Findings that somebody answers for.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    Table
        One row a waived finding; no rows when nothing is waived.
    """
    rows = [
        (f.rule, f.level, short_ranges(f.parts) or NOTHING, f.message, f.waived)
        for f in job.report.findings
        if f.waived
    ]
    return Table("Waived findings", columns("!Rule", "Level", "Parts", "Finding", "Reason given"), tuple(rows))


def bom_table(job: Job) -> Table:
    """The parts list of one board.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    Table
        One row an orderable part; quantities are counted on the netlist.
    """
    rows = [
        (
            short_ranges(line.refs),
            str(line.quantity),
            line.value,
            ", ".join(text for text in (line.rating, line.tolerance) if text) or NOTHING,
            line.package or NOTHING,
            line.description,
            line.order_code or ", ".join(line.alternates) or NOTHING,
        )
        for line in bom_lines(job.netlist, job.catalogue)
    ]
    return Table(
        f"Parts of one board: {plural(len(job.netlist.parts), 'part')} on {plural(len(rows), 'line')}",
        columns("!References", "#Quantity", "Value", "Rating and tolerance", "Package", "Description", "Part number"),
        tuple(rows),
    )


def evidence_table(job: Job) -> Table:
    """On what the figures of every record rest, and which rest on memory alone.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    Table
        One row a record that the module uses.
    """
    used = {part.ref for part in job.netlist.parts}
    records = {part.record.key: part.record for part in job.design.parts if part.ref in used}
    found = {evidence.kind for record in records.values() for _, evidence in record.evidence}
    kinds = [kind for kind in _EVIDENCE if kind != "own file" or kind in found]
    rows = []
    for key in sorted(records):
        by_kind: dict[str, list[str]] = {}
        for figure, evidence in records[key].evidence:
            by_kind.setdefault(evidence.kind, []).append(figure)
        counts = tuple(str(len(by_kind.get(kind, ())) or NOTHING) for kind in kinds)
        memory = ", ".join(sorted(figure.replace("_", " ") for figure in by_kind.get("memory", ())))
        rows.append((key, *counts, memory or "none"))
    return Table(
        "Figures by what they rest on",
        columns("!Record", *(_EVIDENCE[kind] for kind in kinds), "Figures from memory"),
        tuple(rows),
        note="Invented figures are example prices. Check figures from memory against the maker's sheet "
        "before a large order.",
    )
