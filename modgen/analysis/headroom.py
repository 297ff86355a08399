"""Common mode and swing of both buffers against what the signal needs, rails at their low end."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from modgen.analysis.board import Board, Lane
from modgen.analysis.model import Headroom, RailPower
from modgen.analysis.offset import FLOOR, offset_terms
from modgen.analysis.parts import Section, reference_order
from modgen.formulas.amplifier import reach
from modgen.spec.model import Accuracy, Signal

_INPUT = "input buffer"
_OUTPUT = "output buffer"


def headrooms(board: Board, powers: Sequence[RailPower], signal: Signal, accuracy: Accuracy) -> tuple[Headroom, ...]:
    """Headroom of each kind of stage.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    powers
        The rails, from :func:`modgen.analysis.power.rail_powers`.
    signal
        What has to pass.
    accuracy
        Its offset budget is what a single supply may miss at 0 V.

    Returns
    -------
    tuple of Headroom
        Common mode and swing of the input buffers, then of the output buffers; one of each for every type
        of amplifier that serves there, the neediest lane deciding.

    Raises
    ------
    InputError
        When a value in a lane is not a number.

    Notes
    -----
    Guaranteed limits move with the rails: the headroom that the maker states at one supply is taken at
    every supply. The swing is the one into 10 kohm; a lighter load does no worse.

    An output inside whose loop the output resistor stands also has to make up for the load current
    through it: ``v (1 + R/RL)``.

    No part driven from a single supply reaches 0 V exactly. What it misses there is an offset at that end of
    the span, so the low end of the swing gets the offset budget as :attr:`Headroom.allowance`.
    """
    top = next((p.protected_low for p in powers if p.name == "V+"), 0.0)
    bottom = next((p.protected_low for p in powers if p.name == "V-"), 0.0)
    single = not any(p.name == "V-" for p in powers)
    allowance = accuracy.offset if single else 0.0
    wanted: dict[tuple[str, str, str], list[tuple[Section, float, float]]] = {}
    for lane in board.channels:
        for stage, subject, section, low, high in _needs(board, lane, signal, single):
            wanted.setdefault((stage, subject, section.record.type), []).append((section, low, high))
    order = {(_INPUT, "common mode"): 0, (_INPUT, "swing"): 1, (_OUTPUT, "common mode"): 2, (_OUTPUT, "swing"): 3}
    out = []
    for key in sorted(wanted, key=lambda k: (order[k[:2]], k[2])):
        stage, subject, _ = key
        found = wanted[key]
        # one type may stand in dual and quad form; take the worse figure should they differ
        records = [section.record for section, _, _ in found]
        if subject == "swing":
            low, high = max(r.swing_low for r in records), max(r.swing_high for r in records)
        else:
            low, high = max(r.common_mode_low for r in records), max(r.common_mode_high for r in records)
        can_low, can_high = reach(bottom, top, low, high)
        out.append(
            Headroom(
                stage=stage,
                subject=subject,
                parts=_packages(section for section, _, _ in found),
                needed_low=min(need for _, need, _ in found),
                needed_high=max(need for _, _, need in found),
                can_low=can_low,
                can_high=can_high,
                allowance=allowance if subject == "swing" else 0.0,
            )
        )
    return tuple(out)


def _packages(sections: Iterable[Section]) -> tuple[str, ...]:
    return tuple(sorted({section.package for section in sections}, key=reference_order))


def _needs(board: Board, lane: Lane, signal: Signal, single: bool) -> Iterable[tuple[str, str, Section, float, float]]:
    """(stage, subject, section, lowest, highest) that a lane asks of its buffers [V]."""
    terms = offset_terms(board, lane, signal)
    first = sum(term.worst for term in terms if _INPUT in term.name)
    # the floor of a single supply stands at the low end only, and is what is measured here
    whole = sum(term.worst for term in terms if term.name != FLOOR)

    def need(offset: float, stretch: float = 1.0) -> tuple[float, float]:
        low = signal.low - offset
        # on a single supply what lies below 0 V cannot be followed; it is part of the allowance
        return (max(0.0, low) if single else low) * stretch, (signal.high + offset) * stretch

    def with_rest(low: float, high: float) -> tuple[float, float]:
        # an empty socket puts 0 V on the input, whatever the span is
        return min(low, 0.0), max(high, 0.0)

    stretch = 1.0
    if lane.inside_loop:
        highest = max((board.resistance(ref).high for ref in lane.output_series), default=0.0)
        stretch += highest / signal.load
    yield _INPUT, "common mode", lane.first, *with_rest(signal.low, signal.high)
    yield _INPUT, "swing", lane.first, *need(first)
    yield _OUTPUT, "common mode", lane.second, *with_rest(*need(first))
    yield _OUTPUT, "swing", lane.second, *need(whole, stretch)
