"""Worst-case voltages: 12 V at 5 % is 12.6 V; nothing is added that cannot happen together."""

from __future__ import annotations

import pytest

from modgen.analysis.voltage import across, net_bounds, span_across
from modgen.spec.model import Rails

DUAL = Rails(12.0, -12.0, 0.05)
SINGLE = Rails(5.0, 0.0, 0.1)


def bounds_of(bench, rails=DUAL):
    board = bench.board()
    return board, net_bounds(board, rails)


def test_nothing_is_inferred_without_rails(lanes):
    assert net_bounds(lanes().board(), None) == {}


@pytest.mark.parametrize(
    ("net", "low", "high"),
    [
        ("0V", 0.0, 0.0),
        ("V+", 0.0, 12.6),
        ("V-", -12.6, 0.0),
        ("BUS+", 0.0, 12.6),
        ("CH1_IN", -12.6, 12.6),
        ("CH1_A", -12.6, 12.6),
        ("CH1_GLIDE", -12.6, 12.6),
        ("CH1_OUT", -12.6, 12.6),
    ],
)
def test_every_net_on_split_rails(lanes, net, low, high):
    _, bounds = bounds_of(lanes())
    assert (bounds[net].low, bounds[net].high) == pytest.approx((low, high))
    assert list(bounds) == sorted(bounds)


def test_a_single_supply_never_goes_below_ground(lanes):
    _, bounds = bounds_of(lanes(single=True), SINGLE)
    assert {b.low for b in bounds.values()} == {0.0}
    assert bounds["CH1_GLIDE"].high == pytest.approx(5.5)


def test_unequal_rails(lanes):
    _, bounds = bounds_of(lanes(), Rails(15.0, -5.0, 0.0))
    assert (bounds["CH1_GLIDE"].low, bounds["CH1_GLIDE"].high) == (-5.0, 15.0)


def test_a_divider_between_a_rail_and_ground_stays_on_that_side(lanes):
    bench = lanes()
    bench.add("R60", "10k", "r", {"1": "V+", "2": "MID"})
    bench.add("R61", "10k", "r", {"1": "MID", "2": "MID2"})
    bench.add("R62", "10k", "r", {"1": "MID2", "2": "0V"})
    board, bounds = bounds_of(bench)
    assert (bounds["MID"].low, bounds["MID"].high) == pytest.approx((0.0, 12.6))
    assert across(board, bounds, "R61") == pytest.approx(12.6)


def test_a_node_behind_an_empty_sockets_switch(lanes):
    bench = lanes(2, chain=True).move("J20", "TN", "NORMAL")
    bench.add("R60", "10k", "r", {"1": "NORMAL", "2": "0V"})
    _, bounds = bounds_of(bench)
    assert bounds["NORMAL"].high == pytest.approx(12.6)


@pytest.mark.parametrize(
    ("ref", "worst"),
    [
        ("C10", 12.6),  # glide capacitor
        ("C110", 12.6),  # decoupling
        ("D1", 12.6),
        ("R10", 12.6),
        ("R12", 25.2),  # the buffer at one rail while the capacitor still holds the other
        ("R13", 25.2),
        ("R14", 25.2),  # an output against a neighbour's
    ],
)
def test_across_parts(lanes, ref, worst):
    board, bounds = bounds_of(lanes())
    assert across(board, bounds, ref) == pytest.approx(worst)


def test_rail_to_rail_is_the_sum(lanes):
    bench = lanes()
    bench.add("C60", "100n", "c-x7r", {"1": "V+", "2": "V-"})
    board, bounds = bounds_of(bench)
    assert across(board, bounds, "C60") == pytest.approx(25.2)


def test_signs_tell_polarity(lanes):
    board, bounds = bounds_of(lanes())
    assert span_across(board, bounds, "C1") == pytest.approx((0.0, 12.6))
    assert span_across(board, bounds, "C2") == pytest.approx((0.0, 12.6))
    board, bounds = bounds_of(lanes().move("C2", "1", "V-").move("C2", "2", "0V"))
    assert span_across(board, bounds, "C2") == pytest.approx((-12.6, 0.0))


def test_back_to_back_each_sees_the_whole_voltage_once_and_the_right_way_round(lanes):
    board, bounds = bounds_of(lanes(back_to_back=True))
    for ref in ("C10", "C11"):
        assert span_across(board, bounds, ref) == pytest.approx((0.0, 12.6))


def test_film_in_series_sees_the_string_in_both_directions(lanes):
    bench = lanes().move("C10", "2", "BETWEEN")
    bench.add("C60", "1u", "c-pp", {"1": "BETWEEN", "2": "0V"})
    board, bounds = bounds_of(bench)
    assert span_across(board, bounds, "C10") == pytest.approx((-12.6, 12.6))
    assert span_across(board, bounds, "C60") == pytest.approx((-12.6, 12.6))


def test_an_open_or_short_part_sees_nothing(lanes):
    board, bounds = bounds_of(lanes().move("C10", "2", "").move("R10", "2", "CH1_IN"))
    assert across(board, bounds, "C10") == 0.0
    assert across(board, bounds, "R10") == 0.0


def test_a_net_that_only_an_unknown_part_holds_may_stand_anywhere(lanes):
    bench = lanes()
    bench.add("X1", "?", "gone", {"1": "ODD", "2": "V+"})
    bench.add("C60", "100n", "c-x7r", {"1": "ODD", "2": "0V"})
    board, bounds = bounds_of(bench)
    assert across(board, bounds, "C60") == pytest.approx(12.6)
    assert bounds["ODD"].low == pytest.approx(-12.6)


def test_amplifier_with_an_open_supply_pin_is_not_trusted(lanes):
    _, bounds = bounds_of(lanes().move("U1", "4", ""))
    assert bounds["CH1_BUF"].low == pytest.approx(-12.6)
