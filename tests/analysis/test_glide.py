"""Times of a lane by hand (design section 11), corners, shares of boards, and how alike channels are."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from modgen.analysis.glide import LaneValues, boards_inside, channel_glides, matchings, time_at
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


def test_interval_of_the_share_holds_it(lanes):
    found = glide_of(lanes())
    assert found.boards == 1_000_000
    assert found.inside_low < found.inside < found.inside_high
    # 1.96 sqrt(p (1 - p) / n) to either side
    half = 1.96 * math.sqrt(found.inside * (1 - found.inside) / 1e6)
    assert found.inside_high - found.inside_low == pytest.approx(2 * half, rel=1e-3)


def test_channels_of_equal_values_have_one_share_and_a_narrower_interval(lanes):
    found = channel_glides(lanes(4).board(), ASKED)
    (alone,) = channel_glides(lanes().board(), ASKED)
    assert len({(one.inside, one.inside_low, one.inside_high) for one in found}) == 1
    width, lone = (one.inside_high - one.inside_low for one in (found[0], alone))
    assert width == pytest.approx(lone / 2, rel=0.01)
    assert found[0].inside == pytest.approx(alone.inside, abs=0.002)


def test_share_of_boards(lanes):
    assert boards_inside(lanes().move("C10", "2", "").board(), ASKED) == (0.0, 0.0, 0.0)
    (alone,) = channel_glides(lanes().board(), ASKED)
    assert boards_inside(lanes().board(), ASKED) == (alone.inside, alone.inside_low, alone.inside_high)
    share, low, high = boards_inside(lanes(3).board(), ASKED)
    (first, _, _) = channel_glides(lanes(3).board(), ASKED)
    # drawn together, not multiplied; independent parts make both the same
    assert share == pytest.approx(first.inside**3, abs=0.002)
    assert low < share < high


def test_one_slow_channel_fails_every_board(lanes):
    bench = lanes(2).value("R23", "470k")
    assert boards_inside(bench.board(), ASKED)[0] == 0.0
    first, second = channel_glides(bench.board(), ASKED)
    assert first.inside > 0.5
    assert second.inside == 0.0


def test_matching_of_two_channels_by_hand(lanes):
    # only the controls vary, from a = 0.8 to b = 1.2: the share of pairs further apart than r is
    # (b - r a)^2 / (r (b - a)^2), which is 5 % at r = 1.416 and a half at r = 1.135
    bench = lanes(2).exact().value("R12", "0").value("R22", "0")
    for control in ("R13", "R23"):
        bench.parts[control][3]["tolerance"] = "20%"
    (middle, whole) = matchings(bench.board(), ASKED)
    assert (middle.rotation, whole.rotation, whole.boards) == (0.5, 1.0, 1_000_000)
    for found in (middle, whole):
        assert found.nominal == pytest.approx(0.0)
        assert found.worst == pytest.approx(0.5)
        for share, within in ((0.05, found.most), (0.5, found.half)):
            ratio = 1 + within
            assert (1.2 - 0.8 * ratio) ** 2 / (0.16 * ratio) == pytest.approx(share, abs=0.002)


def test_matching_is_better_where_fixed_resistors_decide(lanes):
    ends = {found.rotation: found for found in matchings(lanes(2).board(), ASKED)}
    assert sorted(ends) == [0.0, 0.5, 1.0]
    # 1 % resistors, 5 % capacitors and at most 2 ohm left at one end; a 20 % control at the other
    assert ends[0.0].worst == pytest.approx(((2200 * 1.01 + 2) * 1.05) / (2200 * 0.99 * 0.95) - 1)
    assert ends[1.0].worst == pytest.approx((1.2e6 + 2222) * 1.05 / ((0.8e6 + 2178) * 0.95) - 1)
    assert ends[0.0].most < 0.11 < 0.35 < ends[1.0].most < ends[1.0].worst


def test_matching_counts_what_differs_by_design_and_by_number(lanes):
    bench = lanes(2).exact().value("C20", "470n")
    for found in matchings(bench.board(), ASKED):
        if found.rotation:
            assert found.nominal == found.worst == pytest.approx(1 / 0.47 - 1)
            assert found.half == found.most == pytest.approx(1 / 0.47 - 1)
    two, eight = matchings(lanes(2).board(), ASKED), matchings(lanes(8).board(), ASKED)
    assert all(few.most < many.most < many.worst for few, many in zip(two, eight, strict=True))


def test_one_channel_or_none_matches_nothing(lanes):
    assert matchings(lanes().board(), ASKED) == ()
    assert matchings(lanes().move("C10", "2", "").board(), ASKED) == ()


def test_matching_does_not_depend_on_the_measure(lanes):
    board = lanes(2).board()
    other = replace(ASKED, measure="settle", step=1.0, within=5 / 1200)
    plain, settled = matchings(board, ASKED), matchings(board, other)
    assert [found.most for found in plain] == [found.most for found in settled]
