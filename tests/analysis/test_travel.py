"""Time against rotation, and what a taper makes of a range."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from modgen.analysis.glide import channel_glides
from modgen.analysis.travel import TAPERS, tapers, travel, travels
from modgen.spec.model import Glide

LN9 = math.log(9)
ASKED = Glide(5e-3, 2.0)


def of(bench, asked=ASKED, **more):
    board = bench.board()
    return travel(board, board.channels[0], asked, **more)


def nominal(found):
    return [point.time.nominal for point in found.points]


def test_eleven_positions_of_a_linear_control(lanes):
    found = of(lanes(), taper="linear")
    assert [point.rotation for point in found.points] == pytest.approx([n / 10 for n in range(11)])
    # 2.2 kohm and n tenths of 1 Mohm, but the 2 ohm that are left at the end
    expected = [LN9 * (2200 + max(2.0, n * 1e5)) * 1e-6 for n in range(11)]
    assert nominal(found) == pytest.approx(expected)


def test_log_and_its_mirror_image(lanes):
    log, mirrored = of(lanes()), of(lanes(), taper="reverse-log")
    assert (log.taper, log.channel, log.control) == ("log", 1, "R13")
    # 15 % and 85 % at half travel; (b^x - 1)/(b - 1) with sqrt(b) = 1/0.15 - 1 at a tenth is 0.013329
    assert nominal(log)[5] == pytest.approx(LN9 * (2200 + 150e3) * 1e-6)
    assert nominal(mirrored)[5] == pytest.approx(LN9 * (2200 + 850e3) * 1e-6)
    assert nominal(log)[1] == pytest.approx(LN9 * (2200 + 13329) * 1e-6, rel=1e-4)
    for one, other in zip(nominal(log)[1:-1], reversed(nominal(mirrored)[1:-1]), strict=True):
        assert one + other == pytest.approx(LN9 * (2 * 2200 + 1e6) * 1e-6)


def test_ends_and_middle_are_those_of_the_channel(lanes):
    (channel,) = channel_glides(lanes().board(), ASKED)
    found = of(lanes())
    ends = [found.points[n].time for n in (0, 5, 10)]
    assert ends == [channel.shortest, channel.middle, channel.longest]


def test_the_band_is_that_of_the_corners(lanes):
    point = of(lanes(), taper="linear").points[3]
    assert point.time.low == pytest.approx(LN9 * (2200 * 0.99 + 0.3 * 0.8e6) * 0.95e-6)
    assert point.time.high == pytest.approx(LN9 * (2200 * 1.01 + 0.3 * 1.2e6) * 1.05e-6)


def test_shares_of_a_linear_rotation_by_hand(lanes):
    found = of(lanes(), taper="linear")

    def at(seconds):
        return (seconds / LN9 / 1e-6 - 2200) / 1e6

    assert found.faster == pytest.approx(at(5e-3))
    assert found.lowest_decade == pytest.approx(at(50e-3) - at(5e-3))
    assert found.lowest_decade == pytest.approx(0.0205, abs=5e-5)
    assert found.asked == pytest.approx(at(2.0) - at(5e-3))
    assert found.slower == pytest.approx(1 - at(2.0))


def test_a_log_control_gives_the_fast_decade_seven_times_the_room(lanes):
    found = {one.taper: one for one in tapers(lanes().board(), ASKED)}
    assert list(found) == list(TAPERS)
    # share s of the track is reached at ln(1 + s (b - 1)) / ln b
    base = (1 / 0.15 - 1) ** 2

    def at(seconds):
        return math.log(1 + (seconds / LN9 / 1e-6 - 2200) / 1e6 * (base - 1)) / math.log(base)

    assert found["log"].lowest_decade == pytest.approx(at(50e-3) - at(5e-3))
    shares = [found[taper].lowest_decade for taper in ("reverse-log", "linear", "log")]
    assert [round(100 * share, 1) for share in shares] == [0.6, 2.0, 14.2]


def test_asked_faster_and_slower_are_all_of_it(lanes):
    ranges = [ASKED, Glide(1e-3, 10.0), Glide(0.1, 0.2), Glide(1e-4, 1e-3), Glide(50.0, 60.0)]
    for asked in ranges:
        for found in tapers(lanes().board(), asked):
            assert found.asked + found.faster + found.slower == pytest.approx(1.0)
            assert 0.0 <= found.lowest_decade <= found.asked
    assert of(lanes(), ranges[1]).asked == 1.0
    assert of(lanes(), ranges[3]).slower == 1.0
    assert of(lanes(), ranges[4]).faster == 1.0


def test_a_range_of_less_than_a_decade_is_its_own_lowest(lanes):
    found = of(lanes(), Glide(0.1, 0.2))
    assert found.lowest_decade == found.asked > 0.0


def test_end_resistance_hides_a_part_of_the_travel(lanes):
    bench = lanes()
    bench.shelf = bench.shelf.changed("pot", end_share=0.01)
    # 12.2 kohm from the start; a linear control leaves that after one hundredth of its travel
    start = LN9 * 12.2e-3
    at_once = of(bench, Glide(start, 2.0), taper="linear")
    assert (at_once.faster, at_once.lowest_decade) == pytest.approx((0.0, 0.01 + (10 * 12.2e3 - 12.2e3) / 1e6))
    assert of(bench, Glide(start * 1.0001, 2.0), taper="linear").faster == pytest.approx(0.01, abs=1e-4)


def test_ends_that_are_met_exactly_belong_to_the_range(lanes):
    shortest, longest = (nominal(of(lanes()))[n] for n in (0, -1))
    assert of(lanes(), Glide(shortest, longest)).asked == 1.0


def test_a_reversed_control_counts_from_its_other_end(lanes):
    plain, turned = of(lanes()), of(lanes().move("R13", "2", "CH1_CTL"))
    assert nominal(turned) == sorted(nominal(turned), reverse=True)
    # clockwise is fast, and a log law crowds the fast times into the last of the travel
    mirrored = of(lanes(), taper="reverse-log")
    assert nominal(turned) == pytest.approx(nominal(mirrored)[::-1])
    assert turned.lowest_decade == pytest.approx(mirrored.lowest_decade)
    assert turned.lowest_decade < plain.lowest_decade


def test_a_control_that_turns_nothing(lanes):
    bench = lanes().move("R13", "2", "")
    assert tapers(bench.board(), ASKED) == ()
    found = of(bench)
    assert len(set(nominal(found))) == 1
    assert (found.asked, found.slower) == (0.0, 1.0)


def test_every_channel_has_its_own(lanes):
    found = travels(lanes(3).value("C20", "470n").board(), ASKED)
    assert [one.channel for one in found] == [1, 2, 3]
    assert nominal(found[1]) == pytest.approx([0.47 * t for t in nominal(found[0])])
    empty = lanes().move("C10", "2", "").board()
    assert travels(empty, ASKED) == tapers(empty, ASKED) == ()


def test_a_linear_control_is_compared_with_the_customary_log(lanes):
    bench = lanes()
    bench.shelf = bench.shelf.changed("pot", taper="linear", middle=0.5)
    found = {one.taper: one for one in tapers(bench.board(), ASKED)}
    assert nominal(found["log"])[5] == pytest.approx(LN9 * (2200 + 150e3) * 1e-6)
    bench.shelf = bench.shelf.changed("pot", taper="reverse-log", middle=0.9)
    found = {one.taper: one for one in tapers(bench.board(), ASKED)}
    assert nominal(found["log"])[5] == pytest.approx(LN9 * (2200 + 100e3) * 1e-6)
    assert nominal(found["reverse-log"])[5] == pytest.approx(LN9 * (2200 + 900e3) * 1e-6)


def test_measures_scale_the_times_and_move_the_shares(lanes):
    plain, settled = of(lanes()), of(lanes(), replace(ASKED, measure="time-constant"))
    assert nominal(settled) == pytest.approx([t / LN9 for t in nominal(plain)])
    assert settled.lowest_decade > plain.lowest_decade


def test_what_cannot_be_drawn(lanes):
    with pytest.raises(ValueError, match=r"^1 positions: a travel has two ends$"):
        of(lanes(), positions=1)
    with pytest.raises(ValueError, match=r"^unknown taper 'audio': it is linear, log or reverse-log$"):
        of(lanes(), taper="audio")
