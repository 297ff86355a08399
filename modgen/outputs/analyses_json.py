"""The analyses as ``design.json`` holds them: every field, under the name it has in :mod:`modgen.analysis.model`."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import fields, is_dataclass
from typing import TYPE_CHECKING, Any

from modgen.analysis.accuracy import LEFT_OUT
from modgen.analysis.montecarlo import BOARDS, DISTRIBUTIONS, SEED

if TYPE_CHECKING:
    from modgen.analysis.model import AccuracyBudget, Analyses, Stability, Term

#: what an analysis works out from its fields, and is worth having in the file
_DERIVED = ("shortfall", "cents", "margin")


def analyses_json(analyses: Analyses) -> dict[str, Any]:
    """Everything that was computed beside glide times, rails, accuracy, headroom and voltages.

    Parameters
    ----------
    analyses : Analyses
        Of one netlist against one spec.

    Returns
    -------
    dict
        Base SI units, angles in degrees, temperatures in degC; what has no bound is still infinite.
    """
    return {
        "monte_carlo": {
            "distributions": DISTRIBUTIONS,
            "seed": SEED,
            "boards": max((glide.boards for glide in analyses.glide), default=BOARDS),
        },
        "matching": _records(analyses.matching),
        "travel": _records(analyses.travel),
        "tapers": _records(analyses.tapers),
        "stability": [_stability(stage) for stage in analyses.stability],
        "noise": _records(analyses.noise),
        "shorts": _records(analyses.shorts),
        "dissipation": _records(analyses.dissipation),
        "supply_states": {
            "reversed": _records(analyses.reversed_supply),
            "missing_rails": _records(analyses.missing_rails),
            "powered_off": _records(analyses.powered_off),
        },
    }


def accuracy_json(budget: AccuracyBudget) -> dict[str, Any]:
    """The accuracy budget: sums, the largest terms, and every term with formula, source and remedy.

    Parameters
    ----------
    budget : AccuracyBudget
        Scale, offset and drift of the worst lane.

    Returns
    -------
    dict
        Scale as a fraction [-], offset and drift in volts, temperatures in degC. ``largest`` names the term that
        costs most of each kind, null where there is none.
    """
    return {
        "scale": {"worst": budget.scale_worst, "rss": budget.scale_rss, "budget": budget.scale_budget},
        "offset": {
            "worst": budget.offset_worst,
            "rss": budget.offset_rss,
            "budget": budget.offset_budget,
            "cold": budget.offset_cold,
            "cold_temperature": budget.cold,
            "hot": budget.offset_hot,
            "hot_temperature": budget.hot,
        },
        "drift": {"worst": budget.drift_worst, "rss": budget.drift_rss},
        "largest": {
            "scale": _name(budget.largest_scale),
            "offset": _name(budget.largest_offset),
            "drift": _name(budget.largest_drift),
        },
        "terms": _records((*budget.terms, *budget.drift)),
        "left_out": list(LEFT_OUT),
    }


def record(value: Any) -> Any:
    """A frozen value of the analyses as a mapping: its fields in their order, then what it works out of them.

    Parameters
    ----------
    value : Any
        A dataclass, a tuple of them, or a plain value.

    Returns
    -------
    Any
        Mappings, lists and plain values.
    """
    if is_dataclass(value):
        held = {field.name: record(getattr(value, field.name)) for field in fields(value)}
        return held | {name: getattr(value, name) for name in _DERIVED if hasattr(value, name)}
    if isinstance(value, tuple):
        return [record(item) for item in value]
    return value


def _records(values: Iterable[Any]) -> list[Any]:
    return [record(value) for value in values]


def _stability(stage: Stability) -> dict[str, Any]:
    """The sweep's pairs by name: a load is a resistance [ohm] or a cable's capacitance [F]."""
    held: dict[str, Any] = record(stage)
    unit = "ohm" if stage.stage.startswith("input") else "F"
    return held | {
        "load_unit": unit,
        "sweep": [{"load": load, "phase_margin": margin} for load, margin in stage.sweep],
    }


def _name(term: Term | None) -> str | None:
    return term.name if term else None
