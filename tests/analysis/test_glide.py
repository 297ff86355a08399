"""Times of a lane by hand (design section 11), corners, and the share over tolerance."""

from __future__ import annotations

import math
import time
from dataclasses import replace

import pytest

from modgen.analysis.glide import BOARDS, LaneValues, channel_glides, covering, time_at
from modgen.spec.model import Glide

LN9 = math.log(9)
ASKED = Glide(5e-3, 2.0)


def glide_of(bench, asked=ASKED):
    (found,) = channel_glides(bench.board(), asked)
    return found


def values_of(bench):
    board = bench.board()
    return LaneValues.of(board, board.channels[0])


def test_the_lane_by_hand(lanes):
    # 1 uF 5 %, 1 Mohm 20 % with 2 ohm left, 2.2 kohm 1 %; rise time is ln 9 RC
    found = glide_of(lanes())
    assert found.shortest.nominal == pytest.approx(4.84e-3, abs=0.005e-3)
    assert found.longest.nominal == pytest.approx(2.20, abs=0.005)
    assert found.longest.low == pytest.approx(1.67, abs=0.005)
    assert found.longest.high == pytest.approx(2.77, abs=0.005)
    assert found.shortest.nominal == pytest.approx(LN9 * 2202 * 1e-6)
    # the low corner trusts no end resistance
    assert found.shortest.low == pytest.approx(LN9 * 2200 * 0.99 * 0.95e-6)
    assert found.shortest.high == pytest.approx(LN9 * (2200 * 1.01 + 2) * 1.05e-6)
    assert found.middle.nominal == pytest.approx(LN9 * (2200 + 0.15e6) * 1e-6)
    assert found.time_constant_longest == pytest.approx(1.0022)
    assert (found.channel, found.isolating, found.control, found.capacitors) == (1, "R12", "R13", ("C10",))


def test_the_kind_of_control_decides_the_short_end(lanes):
    bench = lanes()
    bench.shelf = bench.shelf.changed("pot", end_share=0.01)
    found = glide_of(bench)
    assert found.shortest.nominal == pytest.approx(27e-3, abs=0.5e-3)
    # 1 % of a control at the top of its tolerance
    assert found.shortest.high == pytest.approx(LN9 * (2222 + 12e3) * 1.05e-6)


def test_the_netlist_is_judged_not_the_record(lanes):
    assert glide_of(lanes().value("C10", "470n")).longest.nominal == pytest.approx(2.2021 * 0.47, rel=1e-4)


def test_back_to_back_halves_the_capacitance(lanes):
    assert values_of(lanes(back_to_back=True)).capacitance(0) == pytest.approx(5e-6)


def test_parallel_capacitors_add(lanes):
    bench = lanes()
    bench.add("C60", "220n", "c-pp", {"1": "CH1_GLIDE", "2": "0V"})
    assert values_of(bench).capacitance(0) == pytest.approx(1.22e-6)


def test_measures(lanes):
    assert glide_of(lanes(), replace(ASKED, measure="time-constant")).longest.nominal == pytest.approx(1.0022)
    # to within 5 cents of a step of 1 V is ln 240 time constants
    settle = replace(ASKED, measure="settle", step=1.0, within=5 / 1200)
    assert glide_of(lanes(), settle).longest.nominal == pytest.approx(1.0022 * 5.4806, rel=1e-4)


def test_a_reversed_control_has_its_ends_swapped(lanes):
    bench = lanes().move("R13", "2", "CH1_CTL")
    board = bench.board()
    plain = glide_of(lanes())
    turned = glide_of(bench)
    assert (turned.shortest, turned.longest) == (plain.shortest, plain.longest)
    assert turned.middle.nominal == pytest.approx(LN9 * (2200 + 0.85e6) * 1e-6)
    assert time_at(board, board.channels[0], ASKED, 1.0).nominal == plain.shortest.nominal


def test_a_wiper_that_is_not_wired_leaves_one_time(lanes):
    found = glide_of(lanes().move("R13", "2", ""))
    assert found.shortest == found.middle == found.longest
    assert found.longest.nominal == pytest.approx(2.2021, rel=1e-4)
    assert found.inside == 0.0


def test_time_rises_with_rotation_and_meets_the_ends(lanes):
    board = lanes().board()
    (lane,) = board.channels
    times = [time_at(board, lane, ASKED, turn / 20).nominal for turn in range(21)]
    assert times == sorted(times)
    found = glide_of(lanes())
    assert (times[0], times[10], times[20]) == pytest.approx(
        (found.shortest.nominal, found.middle.nominal, found.longest.nominal)
    )


def test_every_draw_stays_within_the_corners(lanes):
    values = values_of(lanes())
    low, high = values.interval(1.0, LN9).low, values.interval(1.0, LN9).high
    anything = 1e9
    assert covering(values, LN9, anything, low) == BOARDS
    assert covering(values, LN9, anything, high) == 0
    assert covering(values, LN9, values.interval(0.0, LN9).high, 0.0) == BOARDS
    assert covering(values, LN9, values.interval(0.0, LN9).low, 0.0) == 0


def test_the_share_of_one_tolerance_is_its_length(lanes):
    # only the control varies, 0.8 to 1.2 Mohm: the longest is enough in three quarters of its range
    bench = lanes().exact()
    bench.parts["R13"][3]["tolerance"] = "20%"
    values = values_of(bench)
    longest = LN9 * (2200 + 0.9e6) * 1e-6
    assert covering(values, LN9, 1.0, longest) / BOARDS == pytest.approx(0.75, abs=0.004)


def test_the_share_of_two_tolerances_is_their_area(lanes):
    # R 0.8 to 1.2, C 0.95 to 1.05: RC above 95 % of its greatest, 1.197, has the area
    # (1.05 * 0.06 - 1.197 ln(1.2 / 1.14)) / (0.4 * 0.1)
    bench = lanes().value("R12", "0")
    share = covering(values_of(bench), 1.0, 1e9, 1.197) / BOARDS
    assert share == pytest.approx((1.05 * 0.06 - 1.197 * math.log(1.2 / 1.14)) / 0.04, abs=0.002)


def test_end_resistance_is_drawn_from_nothing_to_its_greatest(lanes):
    bench = lanes().exact()
    bench.shelf = bench.shelf.changed("pot", end_share=0.01)
    # 2.2 kohm and up to 10 kohm left; asked for what 2.2 kohm and 4 kohm give
    share = covering(values_of(bench), LN9, LN9 * 6200e-6, 0.0) / BOARDS
    assert share == pytest.approx(0.4, abs=0.004)


def test_interval_of_the_share_holds_it(lanes):
    found = glide_of(lanes())
    assert found.boards == BOARDS
    assert found.inside_low < found.inside < found.inside_high
    assert found.inside_high - found.inside_low < 0.005


def test_equal_lanes_are_drawn_once_and_quickly(lanes):
    board = lanes(16).board()
    covering.cache_clear()
    channel_glides(lanes().board(), replace(ASKED, longest=1.0))  # numpy is loaded
    covering.cache_clear()
    start = time.perf_counter()
    found = channel_glides(board, ASKED)
    assert time.perf_counter() - start < 1.0
    assert (covering.cache_info().misses, covering.cache_info().hits) == (1, 15)
    assert len({one.inside for one in found}) == 1


def test_the_same_board_gives_the_same_share(lanes):
    first = glide_of(lanes()).inside
    covering.cache_clear()
    assert glide_of(lanes()).inside == first
