"""What a netlist does: time, accuracy, headroom, supply and voltages, each a pure function of a board."""

from __future__ import annotations

from modgen.analysis.accuracy import accuracy_budget
from modgen.analysis.board import Board, Records
from modgen.analysis.glide import boards_inside, channel_glides, matchings
from modgen.analysis.headroom import headrooms
from modgen.analysis.model import Analyses
from modgen.analysis.noise import noises
from modgen.analysis.power import rail_powers
from modgen.analysis.shorts import dissipations, shorts
from modgen.analysis.stability import stabilities
from modgen.analysis.supply_states import missing_rails, powered_off, reversed_supply
from modgen.analysis.travel import tapers, travels
from modgen.analysis.voltage import net_bounds
from modgen.netlist.model import Netlist
from modgen.problems import InputError
from modgen.spec.model import Spec

__all__ = ["Analyses", "Board", "analyse", "analyse_board"]


def analyse(netlist: Netlist, catalogue: Records, spec: Spec) -> Analyses:
    """Everything that is computed on one netlist against one spec.

    Parameters
    ----------
    netlist
        The circuit, ours or one that came back from layout.
    catalogue
        Where the ``part`` fields are looked up.
    spec
        Supply, signal, range and budgets.

    Returns
    -------
    Analyses
        Glide times, accuracy, headroom, rails and voltages.

    Raises
    ------
    InputError
        When the value of a resistor, control or capacitor is not a number; all of them at once.
    """
    return analyse_board(Board.of(netlist, catalogue), spec)


def analyse_board(board: Board, spec: Spec) -> Analyses:
    """The same for a netlist that is a board already.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    spec
        Supply, signal, range and budgets.

    Returns
    -------
    Analyses
        Glide times, accuracy, headroom, rails and voltages.

    Raises
    ------
    InputError
        When the value of a resistor, control or capacitor is not a number; all of them at once.
    """
    if board.unreadable:
        raise InputError(board.unreadable)
    powers = rail_powers(board, spec.rails, spec.signal)
    share, low, high = boards_inside(board, spec.glide)
    shorted = shorts(board, powers, spec.signal)
    return Analyses(
        glide=channel_glides(board, spec.glide),
        accuracy=accuracy_budget(board, spec.signal, spec.accuracy),
        headroom=headrooms(board, powers, spec.signal, spec.accuracy),
        rails=powers,
        bounds=tuple(net_bounds(board, spec.rails).values()),
        boards_inside=share,
        boards_inside_low=low,
        boards_inside_high=high,
        matching=matchings(board, spec.glide),
        travel=travels(board, spec.glide),
        tapers=tapers(board, spec.glide),
        stability=stabilities(board, spec.signal),
        noise=noises(board, spec.signal),
        shorts=shorted,
        dissipation=dissipations(board, powers, shorted),
        reversed_supply=reversed_supply(board, spec.rails),
        missing_rails=missing_rails(board, spec.rails, powers),
        powered_off=powered_off(board, spec.rails),
    )
