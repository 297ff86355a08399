"""The one screen a build prints, and the text form of a report."""

from __future__ import annotations

import shutil
from collections.abc import Iterable, Sequence
from pathlib import Path

from modgen.analysis.model import AccuracyBudget, ChannelGlide, Interval
from modgen.formulas.pitch import scale_to_cents
from modgen.outputs.bom import short_ranges
from modgen.outputs.model import Job
from modgen.rules import Finding, Report, subjects
from modgen.units import format_quantity

#: Roles in the order in which a signal meets them, then the supply.
_ROLES = (
    "amplifier",
    "terminator",
    "input-series",
    "isolating",
    "glide-control",
    "glide-capacitor",
    "range-switch",
    "range-capacitor",
    "range-keeper",
    "output-series",
    "feedback",
    "compensation",
    "reverse-polarity",
    "reservoir",
    "decoupling",
    "power-header",
    "input-jack",
    "output-jack",
)


def summary(job: Job, folder: Path) -> str:
    """Everything a person needs after a build: values, glide, margins, findings, verdict, where the files are."""
    spec = job.spec
    rails = (
        f"{_volts(spec.rails.positive)}"
        if spec.rails.single
        else (f"{_volts(spec.rails.positive)} and {_volts(spec.rails.negative)}")
    )
    lines = [
        f"{spec.module}: {spec.channels} channel{'s' * (spec.channels > 1)}, {spec.jacks.inputs} in and "
        f"{spec.jacks.outputs} out, {rails}, {spec.build.mount}",
        "",
        *_glide(job),
        *_errors(job),
        "",
        *_values(job),
        "",
        *_margins(job.report),
        "",
        *_findings(job.report.findings),
        verdict(job.report),
        f"written to {folder}",
    ]
    return "\n".join(lines) + "\n"


def report_text(report: Report, spec: bool = True) -> str:
    """A report without its module: every rule, then the findings, then the verdict; ``spec``: whether there was one."""
    rows = [("rule", "checks", "least margin", "where")]
    for checked in report.checked:
        margin = "" if checked.worst_margin is None else _share(round(checked.worst_margin, 2))
        where = checked.worst if checked.judged else f"not judged: {checked.not_judged}"
        rows.append((checked.rule, str(checked.instances), margin, where))
    return "\n".join([*_table(rows), "", *_findings(report.findings), verdict(report, spec)]) + "\n"


def verdict(report: Report, spec: bool = True) -> str:
    """Cleared or not, with the counts; without a spec nothing is cleared, as half of the rules need one."""
    counts = {
        level: sum(f.level == level and not f.waived for f in report.findings) for level in ("error", "warning", "note")
    }
    waived = sum(bool(f.waived) for f in report.findings)
    said = [f"{n} {level}{'s' * (n > 1)}" for level, n in counts.items() if n]
    if waived:
        said.append(f"{waived} waived")
    fine = "cleared for ordering" if spec else "no error found, as far as that can be judged without a spec"
    state = fine if report.cleared else "NOT CLEARED FOR ORDERING"
    return f"{state}: {', '.join(said) if said else 'no findings'}"


def _glide(job: Job) -> list[str]:
    glide = job.spec.glide
    lines = [f"glide ({glide.measure}), asked {_time(glide.shortest)} to {_time(glide.longest)}, {glide.cover}"]
    by_values: dict[tuple[Interval, Interval, float], list[ChannelGlide]] = {}
    for channel in job.analyses.glide:
        by_values.setdefault((channel.shortest, channel.longest, channel.inside), []).append(channel)
    for (shortest, longest, inside), channels in by_values.items():
        name = f"channels {_runs([c.channel for c in channels])}" if len(by_values) > 1 else "every channel"
        lines += [
            f"  {name}: fast end {_spread(shortest)}, slow end {_spread(longest)}",
            *(
                f"  {' ' * len(name)}  {r.name} range (pins {r.position}): {_time(r.shortest.nominal)} to "
                f"{_time(r.longest.nominal)}"
                for r in channels[0].ranges
            ),
            f"  {' ' * len(name)}  {_share(inside)} of such channels cover what is asked",
        ]
    return [*lines, f"  {_share(job.analyses.boards_inside)} of boards cover it on every channel"]


def _errors(job: Job) -> list[str]:
    budget = job.analyses.accuracy
    return [
        f"scale {_scale(budget, job.spec.signal.pitch)}, offset "
        f"{format_quantity(budget.offset_worst, 'voltage')} of {format_quantity(budget.offset_budget, 'voltage')}, "
        "worst case at 25 °C",
        *(
            f"{rail.name} {format_quantity(rail.current_typical, 'current')} typical, "
            f"{format_quantity(rail.current_max, 'current')} at most"
            for rail in job.analyses.rails
        ),
    ]


def _values(job: Job) -> list[str]:
    rows = [("role", "value", "part", "references")]
    for role in _ROLES:
        keys: dict[str, list[str]] = {}
        for part in job.netlist.parts:
            if part.field("role") == role:
                keys.setdefault(part.field("part"), []).append(part.ref)
        for key, refs in keys.items():
            value = job.netlist.by_ref[refs[0]].value
            rows.append((role, value if value != key else "", key, short_ranges(refs)))
    return _table(rows)


def _margins(report: Report) -> list[str]:
    rows = [("subject", "checks", "least margin", "where")]
    of = subjects()
    for subject in dict.fromkeys(of.values()):
        mine = [c for c in report.checked if of.get(c.rule) == subject]
        rated = [(c.worst_margin, c.rule, c.worst) for c in mine if c.worst_margin is not None]
        margin, rule, worst = min(rated, default=(None, "", ""))
        seen = str(sum(c.instances for c in mine))
        left = "" if margin is None else _share(round(margin, 2))
        rows.append((subject, seen, left, f"{rule}: {worst}" if rule else ""))
    return _table(rows)


def _findings(findings: Iterable[Finding]) -> list[str]:
    lines: list[str] = []
    for finding in findings:
        level = f"{finding.level}, waived" if finding.waived else finding.level
        lines.append(f"{level}: {finding.message} [{finding.rule}]")
        lines.append(f"    waived: {finding.waived}" if finding.waived else f"    why: {finding.why}")
        if not finding.waived:
            lines.append(f"    fix: {finding.fix}")
    return lines


def _table(rows: Sequence[tuple[str, ...]]) -> list[str]:
    """Columns as wide as what they hold; the last one is cut at the width of the screen."""
    room = max(shutil.get_terminal_size((120, 40)).columns, 60)
    widths = [max(len(row[n]) for row in rows) for n in range(len(rows[0]) - 1)]
    lines = []
    for row in rows:
        text = "  " + "  ".join(cell.ljust(width) for cell, width in zip(row, [*widths, 0], strict=True)).rstrip()
        lines.append(text if len(text) <= room else text[: room - 1] + "…")
    return lines


def _spread(interval: Interval) -> str:
    return f"{_time(interval.nominal)} ({_time(interval.low)} to {_time(interval.high)})"


def _share(share: float) -> str:
    return format_quantity(share, "ratio")


def _scale(budget: AccuracyBudget, pitch: bool) -> str:
    if pitch:
        return f"{scale_to_cents(budget.scale_worst):.3g} of {scale_to_cents(budget.scale_budget):.3g} cents per octave"
    return f"{_share(budget.scale_worst)} of {_share(budget.scale_budget)}"


def _runs(numbers: Sequence[int]) -> str:
    return short_ranges([f"{n}" for n in numbers])


def _time(value: float) -> str:
    return format_quantity(value, "time")


def _volts(value: float) -> str:
    return format_quantity(value, "voltage")
