"""Scale and offset of the worst lane of a board against the budgets.

Kept apart because a constant shift can be tuned out and a scale error cannot. Every term is the
worst case of its parts.
"""

from __future__ import annotations

import math
from collections.abc import Iterable

from modgen.analysis.board import Board
from modgen.analysis.model import AccuracyBudget, Term
from modgen.analysis.offset import drift_terms, offset_terms
from modgen.analysis.scale import scale_terms
from modgen.formulas.tolerance import root_sum_square
from modgen.spec.model import Accuracy, Signal

__all__ = ["LEFT_OUT", "accuracy_budget", "drift_terms", "offset_terms", "scale_terms"]

#: what the budget leaves out, for whoever reads it
LEFT_OUT = (
    "temperature coefficients of resistors, which the catalogue does not hold: between the resistors of a divider they "
    "cost some hundredths of a cent per octave",
    "leakage and insulation of capacitors away from room temperature, for which makers state no limit",
    "the rise of a bipolar input's bias current in the cold",
)


def accuracy_budget(board: Board, signal: Signal, accuracy: Accuracy) -> AccuracyBudget:
    """Scale and offset of the worst lane against the budgets.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    signal
        Source, load and span.
    accuracy
        The budgets, and the span of temperatures.

    Returns
    -------
    AccuracyBudget
        Scale terms of the lane with the greatest scale error, offset terms of the lane with the greatest
        offset, drift of the lane that drifts most (the same lane unless lanes differ). No terms when the board
        has no lane.

    Raises
    ------
    InputError
        When a value in a lane is not a number.

    Notes
    -----
    ``offset_cold`` and ``offset_hot`` are at the ends of the span: offsets moved by the drift, bias currents doubled
    as often as the amplifier's record says and in the cold no less than at 25 degC. The leakage and insulation of
    capacitors are taken as they are at room temperature, since makers state no other limit. Temperature coefficients of
    resistors are not in the catalogue, so that scale is the same at every temperature of the span.

    A term's sign is not known before a part is measured, so that all are added as if they pulled one way; the root
    of the sum of squares takes them as independent.
    """
    scale: tuple[Term, ...] = ()
    offset: tuple[Term, ...] = ()
    drift: tuple[Term, ...] = ()
    cold, hot = accuracy.temperature
    offset_cold = offset_hot = 0.0
    for lane in board.channels:
        scale = _greater(scale, scale_terms(board, lane, signal))
        offset = _greater(offset, offset_terms(board, lane, signal))
        drift = _greater(drift, drift_terms(board, lane, signal, cold, hot))
        offset_cold = max(offset_cold, _sum(offset_terms(board, lane, signal, cold)))
        offset_hot = max(offset_hot, _sum(offset_terms(board, lane, signal, hot)))
    return AccuracyBudget(
        terms=scale + offset,
        scale_worst=_sum(scale),
        scale_rss=_root(scale),
        scale_budget=accuracy.scale,
        offset_worst=_sum(offset),
        offset_rss=_root(offset),
        offset_budget=accuracy.offset,
        offset_hot=offset_hot,
        hot=hot,
        offset_cold=offset_cold,
        cold=cold,
        drift=drift,
        drift_worst=_sum(drift),
        drift_rss=_root(drift),
    )


def _greater(kept: tuple[Term, ...], found: tuple[Term, ...]) -> tuple[Term, ...]:
    """The terms of the lane with the greater sum, the first one's when they are equal."""
    return found if not kept or _sum(found) > _sum(kept) else kept


def _sum(terms: Iterable[Term]) -> float:
    return math.fsum(term.worst for term in terms)


def _root(terms: Iterable[Term]) -> float:
    return root_sum_square([term.worst for term in terms])
