"""Scale and offset of the worst lane of a board against the budgets.

Kept apart because a constant shift can be tuned out and a scale error cannot. Every term is the
worst case of its parts.
"""

from __future__ import annotations

import math
from collections.abc import Iterable

from modgen.analysis.board import Board
from modgen.analysis.model import AccuracyBudget, Term
from modgen.analysis.offset import offset_terms
from modgen.analysis.scale import scale_terms
from modgen.formulas.tolerance import root_sum_square
from modgen.spec.model import Accuracy, Signal

__all__ = ["HOT", "accuracy_budget", "offset_terms", "scale_terms"]

#: inside of a closed case on a warm day [degC]
HOT = 65.0


def accuracy_budget(board: Board, signal: Signal, accuracy: Accuracy) -> AccuracyBudget:
    """Scale and offset of the worst lane against the budgets.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    signal
        Source, load and span.
    accuracy
        The budgets.

    Returns
    -------
    AccuracyBudget
        Scale terms of the lane with the greatest scale error, offset terms of the lane with the greatest
        offset (the same lane unless lanes differ). No terms when the board has no lane.

    Raises
    ------
    InputError
        When a value in a lane is not a number.

    Notes
    -----
    ``offset_hot`` is at 65 degC: bias currents doubled as often as the amplifier's record says, offsets
    moved by the drift over 40 K. The leakage of capacitors is taken as it is at room temperature, since
    makers state no other limit.
    """
    scale: tuple[Term, ...] = ()
    offset: tuple[Term, ...] = ()
    hot = 0.0
    for lane in board.channels:
        found = scale_terms(board, lane, signal)
        if _sum(found) > _sum(scale) or not scale:
            scale = found
        found = offset_terms(board, lane, signal)
        if _sum(found) > _sum(offset) or not offset:
            offset = found
        hot = max(hot, _sum(offset_terms(board, lane, signal, HOT)))
    return AccuracyBudget(
        terms=scale + offset,
        scale_worst=_sum(scale),
        scale_rss=root_sum_square([term.worst for term in scale]),
        scale_budget=accuracy.scale,
        offset_worst=_sum(offset),
        offset_rss=root_sum_square([term.worst for term in offset]),
        offset_budget=accuracy.offset,
        offset_hot=hot,
        hot=HOT,
    )


def _sum(terms: Iterable[Term]) -> float:
    return math.fsum(term.worst for term in terms)
