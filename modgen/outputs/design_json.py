"""``design.json``: everything that was decided, computed and checked, for programs.

Keys stand in a fixed order, numbers are finite (what has no bound is null) and carry nine digits, so that the
last bits of a library's arithmetic do not change the file.
"""

from __future__ import annotations

import json
import math
from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from modgen.outputs.analyses_json import accuracy_json, analyses_json, record
from modgen.spec import resolved

if TYPE_CHECKING:
    from modgen.analysis.model import Analyses, Interval
    from modgen.design.model import Choice, Design
    from modgen.netlist.model import Netlist
    from modgen.outputs.model import Job
    from modgen.rules.contract import Report

DIGITS = 9


def design_json(job: Job) -> bytes:
    """The whole module as JSON.

    Parameters
    ----------
    job : Job
        The module, built and judged.

    Returns
    -------
    bytes
        UTF-8, indented, a line end at the end; base SI units throughout.

    Notes
    -----
    ``channels[].inside`` is the share of such channels whose control covers the asked range, ``boards_inside`` the
    share of boards on which every channel does; each with its 95 % interval. With a range switch ``shortest`` is of
    the fast range, ``middle`` and ``longest`` are of the slow one, and ``ranges`` has all of both; else it is empty.
    Voltages of ``rails`` carry their
    sign and are named by magnitude: ``least`` and ``greatest`` of a negative rail are -11.4 V and -12.6 V. All
    other pairs of ``low`` and ``high`` are in order of value.
    """
    data = {
        "module": job.spec.module,
        **findings_json(job.report),
        "spec": resolved(job.spec),
        "channels": _channels(job.analyses),
        "boards_inside": {
            "share": job.analyses.boards_inside,
            "low": job.analyses.boards_inside_low,
            "high": job.analyses.boards_inside_high,
        },
        "choices": [_choice(choice) for choice in job.design.choices],
        "parts": _parts(job.netlist, job.design),
        "rails": _rails(job.analyses),
        "accuracy": accuracy_json(job.analyses.accuracy),
        "headroom": _headroom(job.analyses),
        **analyses_json(job.analyses),
        "bounds": [{"net": b.net, "low": b.low, "high": b.high} for b in job.analyses.bounds],
    }
    text = json.dumps(tidy(data), indent=2, ensure_ascii=False, allow_nan=False)
    return (text + "\n").encode("utf-8", "replace")


def findings_json(report: Report) -> dict[str, Any]:
    """The verdict, with the fields that every program-readable output of it has.

    Parameters
    ----------
    report : Report
        What the rules found and what they looked at.

    Returns
    -------
    dict
        ``cleared``, ``findings`` and ``checked``; ``waived`` is the reason, or null when nobody answers for it.
    """
    return tidy(  # type: ignore[no-any-return]
        {
            "cleared": report.cleared,
            "findings": [
                {
                    "rule": f.rule,
                    "level": f.level,
                    "parts": list(f.parts),
                    "message": f.message,
                    "why": f.why,
                    "fix": f.fix,
                    "measured": f.measured,
                    "limit": f.limit,
                    "unit": f.unit,
                    "waived": f.waived or None,
                }
                for f in report.findings
            ],
            "checked": [
                {"rule": c.rule, "instances": c.instances, "worst_margin": c.worst_margin} for c in report.checked
            ],
        }
    )


def tidy(value: Any) -> Any:
    """Numbers to nine digits, those without a bound to null; containers all the way down."""
    if isinstance(value, bool) or value is None or isinstance(value, str | int):
        return value
    if isinstance(value, float):
        return float(f"{value:.{DIGITS}g}") if math.isfinite(value) else None
    if isinstance(value, Mapping):
        return {str(key): tidy(held) for key, held in value.items()}
    if isinstance(value, list | tuple):
        return [tidy(held) for held in value]
    raise TypeError(f"{type(value).__name__} has no place in design.json")


def _interval(interval: Interval) -> dict[str, float]:
    return {"nominal": interval.nominal, "low": interval.low, "high": interval.high}


def _channels(analyses: Analyses) -> list[dict[str, Any]]:
    return [
        {
            "channel": glide.channel,
            "isolating": glide.isolating,
            "control": glide.control,
            "capacitors": list(glide.capacitors),
            "shortest": _interval(glide.shortest),
            "middle": _interval(glide.middle),
            "longest": _interval(glide.longest),
            "time_constant_longest": glide.time_constant_longest,
            "inside": {
                "share": glide.inside,
                "low": glide.inside_low,
                "high": glide.inside_high,
                "boards": glide.boards,
            },
            "ranges": [record(times) for times in glide.ranges],
        }
        for glide in analyses.glide
    ]


def _choice(choice: Choice) -> dict[str, Any]:
    return {
        "subject": choice.subject,
        "chosen": choice.chosen,
        "reason": choice.reason,
        "binding": choice.binding,
        "margin": choice.margin,
        "runners_up": [{"what": what, "why": why} for what, why in choice.runners_up],
    }


def _parts(netlist: Netlist, design: Design) -> list[dict[str, Any]]:
    """The netlist's parts; why each is there comes from the design, where it knows the reference."""
    reasons = {placed.ref: placed.reason for placed in design.parts}
    out = []
    for part in netlist.parts:
        channel = part.field("channel")
        out.append(
            {
                "ref": part.ref,
                "part": part.field("part"),
                "value": part.value,
                "channel": int(channel) if channel.isascii() and channel.isdigit() else None,
                "role": part.field("role"),
                "serves": part.field("serves") or None,
                "land_pattern": part.land_pattern,
                "reason": reasons.get(part.ref, ""),
            }
        )
    return out


def _rails(analyses: Analyses) -> list[dict[str, Any]]:
    """Rails at the bus and behind their diodes: signed, ``least`` and ``greatest`` by magnitude."""
    return [
        {
            "name": rail.name,
            "diode": rail.diode,
            "bus": {"nominal": rail.bus_nominal, "least": rail.bus_low, "greatest": rail.bus_high},
            "protected": {
                "nominal": rail.protected_nominal,
                "least": rail.protected_low,
                "greatest": rail.protected_high,
            },
            "current": {
                "typical": rail.current_typical,
                "max": rail.current_max,
                "peak": rail.current_peak,
            },
        }
        for rail in analyses.rails
    ]


def _headroom(analyses: Analyses) -> list[dict[str, Any]]:
    return [
        {
            "stage": room.stage,
            "subject": room.subject,
            "parts": list(room.parts),
            "needed": {"low": room.needed_low, "high": room.needed_high},
            "can": {"low": room.can_low, "high": room.can_high},
            "allowance": room.allowance,
            "shortfall": room.shortfall,
            "margin": room.margin,
        }
        for room in analyses.headroom
    ]
