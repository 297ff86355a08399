"""Boards drawn at random: areas by hand, corners, the same numbers again, and what it takes."""

from __future__ import annotations

import math
import time
import tracemalloc

import pytest

from modgen.analysis.glide import COMPARED, LaneValues
from modgen.analysis.montecarlo import BOARDS, CHUNK, draw_boards

LN9 = math.log(9)


def values_of(bench):
    board = bench.board()
    return tuple(LaneValues.of(board, lane) for lane in board.channels)


def share(bench, factor, shortest, longest):
    found = draw_boards(values_of(bench), factor, shortest, longest)
    assert found.boards == BOARDS
    return found.inside / found.boards


def test_every_draw_stays_within_the_corners(lanes):
    bench = lanes()
    (values,) = values_of(bench)
    slow, fast = values.interval(1.0, LN9), values.interval(0.0, LN9)
    anything = 1e9
    assert share(bench, LN9, anything, slow.low) == 1.0
    assert share(bench, LN9, anything, slow.high) == 0.0
    assert share(bench, LN9, fast.high, 0.0) == 1.0
    assert share(bench, LN9, fast.low, 0.0) == 0.0


def test_the_share_of_one_tolerance_is_its_length(lanes):
    # only the control varies, 0.8 to 1.2 Mohm: the longest is enough in three quarters of its range
    bench = lanes().exact()
    bench.parts["R13"][3]["tolerance"] = "20%"
    assert share(bench, LN9, 1.0, LN9 * (2200 + 0.9e6) * 1e-6) == pytest.approx(0.75, abs=0.002)


def test_the_share_of_two_tolerances_is_their_area(lanes):
    # R 0.8 to 1.2, C 0.95 to 1.05: RC above 95 % of its greatest, 1.197, has the area
    # (1.05 * 0.06 - 1.197 ln(1.2 / 1.14)) / (0.4 * 0.1)
    found = share(lanes().value("R12", "0"), 1.0, 1e9, 1.197)
    assert found == pytest.approx((1.05 * 0.06 - 1.197 * math.log(1.2 / 1.14)) / 0.04, abs=0.001)


def test_capacitors_back_to_back_and_side_by_side(lanes):
    # x and y from 8 to 12 uF, in series 5 uF or more where y >= 5x/(x - 5) = 5 + 25/(x - 5): from x = 60/7 on,
    # 7 (12 - 60/7) - 25 ln(49/25) of 16
    bench = lanes(back_to_back=True).exact()
    for capacitor in ("C10", "C11"):
        bench.parts[capacitor][3]["tolerance"] = "20%"
    expected = (7 * (12 - 60 / 7) - 25 * math.log(49 / 25)) / 16
    assert share(bench, 1.0, 1e9, 1.0022e6 * 5e-6) == pytest.approx(expected, abs=0.002)
    bench = lanes().exact()
    bench.parts["C10"][3]["tolerance"] = "5%"
    bench.add("C60", "1u", "c-pp", {"1": "CH1_GLIDE", "2": "0V"}, tolerance="5%")
    # the sum of two uniform ones is a triangle: above a quarter of its base from the low end lie 7/8
    assert share(bench, 1.0, 1e9, 1.0022e6 * 1.95e-6) == pytest.approx(7 / 8, abs=0.002)


def test_end_resistance_is_drawn_from_nothing_to_its_greatest(lanes):
    bench = lanes().exact()
    bench.shelf = bench.shelf.changed("pot", end_share=0.01)
    # 2.2 kohm and up to 10 kohm left; asked for what 2.2 kohm and 4 kohm give
    assert share(bench, LN9, LN9 * 6200e-6, 0.0) == pytest.approx(0.4, abs=0.002)


def test_a_control_has_no_more_left_than_it_has(lanes):
    bench = lanes().exact().value("R13", "10")
    bench.shelf = bench.shelf.changed("pot", end_resistance=1000.0)
    assert share(bench, 1.0, 2210e-6, 0.0) == 1.0


def test_a_wiper_that_is_not_wired_has_one_time(lanes):
    bench = lanes().move("R13", "2", "")
    assert share(bench, LN9, 1e9, 1.0) == 1.0
    assert share(bench, LN9, 1.0, 1e-9) == 0.0


def test_the_channels_of_a_board_are_drawn_apart(lanes):
    found = draw_boards(values_of(lanes(2)), LN9, 5e-3, 2.0)
    (inside, drawn), again = found.channels_inside
    assert again == (inside, drawn)
    assert drawn == 2 * BOARDS
    assert found.inside / BOARDS == pytest.approx((inside / drawn) ** 2, abs=0.002)


def test_numbers_are_the_same_again_and_do_not_depend_on_what_is_compared(lanes):
    values = values_of(lanes(2))
    first = draw_boards(values, LN9, 5e-3, 2.0, COMPARED)
    draw_boards.cache_clear()
    assert draw_boards(values, LN9, 5e-3, 2.0, COMPARED) == first
    assert draw_boards(values, LN9, 5e-3, 2.0).inside == first.inside


def test_these_very_boards():
    # changes only when the draws do, which changes the share of every design that was ever printed
    values = LaneValues(((2200.0, 0.01),), (1e6, 0.2), (2.0, 0.0), "log", 0.15, True, True, (((1e-6, 0.1),),))
    assert draw_boards((values,), LN9, 5e-3, 2.0).inside == 433_824


@pytest.mark.parametrize("boards", [1, CHUNK - 1, CHUNK, CHUNK + 1, 3 * CHUNK])
def test_every_board_is_counted_once(lanes, boards):
    values = values_of(lanes(2))
    found = draw_boards(values, LN9, 1e9, 0.0, COMPARED, boards)
    assert (found.boards, found.inside, found.channels_inside[0]) == (boards, boards, (2 * boards, 2 * boards))
    assert all(0.0 <= spread.half <= spread.most for spread in found.spreads)


def test_quantiles_are_the_least_values_that_so_many_do_not_exceed(lanes):
    # of one board half and 95 % are that board
    (spread, _, _) = draw_boards(values_of(lanes(2)), LN9, 1e9, 0.0, COMPARED, 1).spreads
    assert spread.half == spread.most > 0.0


def test_boards_of_many_channels_are_fewer(lanes):
    (values,) = values_of(lanes())
    assert draw_boards((values,) * 32, LN9, 5e-3, 2.0).boards == 1_000_000
    assert draw_boards((values,) * 64, LN9, 5e-3, 2.0).boards == 500_000


def test_a_million_boards_take_about_a_second_and_little_memory(lanes):
    values = values_of(lanes(8))
    draw_boards(values, LN9, 5e-3, 2.0, COMPARED, 1000)  # numpy is loaded
    draw_boards.cache_clear()
    start = time.perf_counter()
    draw_boards(values, LN9, 5e-3, 2.0, COMPARED)
    # a third of a second on an idle core
    assert time.perf_counter() - start < 2.0
    draw_boards.cache_clear()
    tracemalloc.start()
    draw_boards(values, LN9, 5e-3, 2.0, COMPARED)
    _, peak = tracemalloc.get_traced_memory()
    tracemalloc.stop()
    # 8 bytes for each board and rotation that is compared, and the chunk in hand
    assert peak < 40e6
