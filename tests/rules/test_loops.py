"""Feedback shares that one can work out by hand."""

from __future__ import annotations

import pytest

from modgen.analysis.board import Board
from modgen.rules.loops import feedback_of, loop_through_others


@pytest.fixture
def first(example, catalogue):
    """The first section of a board, with what comes back to its inputs."""

    def found(text: str):
        board = Board.of(example(text).netlist, catalogue)
        return feedback_of(board, board.sections[0])

    return found


def test_a_follower_takes_all_of_it_back(first):
    found = first("start from: lane")
    assert (found.inverting, found.noninverting, found.positive) == (1.0, 0.0, False)


def test_a_divider_takes_its_share(first):
    # 30 kohm from the output, 10 kohm to 0 V: a quarter
    found = first("start from: lane\nU1 2=FB\nR8 metal-film-0207-30k 1=CH1_BUF 2=FB\nR9 metal-film-0207-10k 1=FB 2=0V")
    assert found.inverting == pytest.approx(0.25)


def test_a_bridged_ladder(first):
    # Output - 1k - N - 1k - 0V, and N - 1k - FB - 1k - 0V: N sees 1k parallel 2k, so N = 0.4 and FB = 0.2
    found = first(
        "start from: lane\nU1 2=FB\nR8 metal-film-0207-1k0 1=CH1_BUF 2=N\nR9 metal-film-0207-1k0 1=N 2=0V\n"
        "R10 metal-film-0207-1k0 1=N 2=FB\nR11 metal-film-0207-1k0 1=FB 2=0V"
    )
    assert found.inverting == pytest.approx(0.2)


def test_exchanged_inputs(first):
    found = first("start from: lane\nU1 2=CH1_A 3=CH1_BUF")
    assert (found.inverting, found.noninverting) == (0.0, 1.0)
    assert found.positive
    assert found.exchanged


def test_as_much_to_both_is_positive(first):
    assert first("start from: lane\nU1 3=CH1_BUF").positive


def test_some_to_the_other_input_is_not(first):
    # 100 kohm against 10 kohm and 1 Mohm: 1.01 / 1.11 of it, less than all
    found = first("start from: lane\nR9 metal-film-0207-100k 1=CH1_BUF 2=CH1_A")
    assert found.noninverting == pytest.approx(1010 / 1110)
    assert not found.positive


def test_a_loop_through_another_amplifier(example, catalogue):
    text = (
        "start from: lane\nU1 6=CH1_FB\nR7 metal-film-0207-10k 1=CH1_FB 2=0V\n"
        "U2 tl072-dip8 1=ROUND 2=ROUND 3=CH1_DRIVE 4=V- 8=V+"
    )
    for more, closed in (("", False), ("\nR6 metal-film-0207-10k 1=ROUND 2=CH1_FB", True)):
        board = Board.of(example(text + more).netlist, catalogue)
        assert loop_through_others(board, board.sections[1]) is closed
