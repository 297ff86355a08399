"""A panel switch that gives a lane two ranges: found by structure, and counted by hand."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from modgen.analysis.accuracy import scale_terms
from modgen.analysis.glide import LaneValues, boards_inside, channel_glides, matchings
from modgen.analysis.montecarlo import draw_boards
from modgen.analysis.noise import noises
from modgen.analysis.power import rail_powers
from modgen.analysis.stability import stabilities
from modgen.analysis.travel import tapers, travels
from modgen.analysis.voltage import net_bounds, span_across
from modgen.spec.model import Glide, Rails

LN9 = math.log(9)
#: 2.2 kohm, 1 Mohm +-20 % leaving 2 ohm, 1 uF in the fast range and 10 uF in the slow one, all +-5 %
ASKED = Glide(6e-3, 15.0, ranges=2)


def lane_of(bench):
    (lane,) = bench.board().channels
    return lane


class TestFound:
    def test_the_switch_of_the_channel_circuit(self, lanes):
        lane = lane_of(lanes(ranged=True))
        switch = lane.switch
        assert (switch.ref, switch.slow, switch.fast) == ("S1", "1-2", "2-3")
        assert (switch.waiting, switch.keepers) == ("CH1_RANGE", ("R18",))
        assert [branch.refs for branch in lane.branches] == [("C10",)]
        assert [branch.refs for branch in lane.slow_branches] == [("C10",), ("C15",)]
        assert (lane.capacitors, lane.slow_capacitors) == (("C10", "C15"), ("C10", "C15"))
        assert lane.wiring.form == "rheostat"

    def test_every_channel_has_its_own(self, lanes):
        assert [lane.switch.ref for lane in lanes(3, ranged=True).board().channels] == ["S1", "S2", "S3"]

    def test_turned_round(self, lanes):
        bench = lanes(ranged=True).move("S1", "1", "CH1_KEEP").move("S1", "3", "CH1_GLIDE")
        switch = lane_of(bench).switch
        assert (switch.slow, switch.fast, switch.keepers) == ("2-3", "1-2", ("R18",))

    def test_common_on_the_glide_net(self, lanes):
        bench = lanes(ranged=True).move("S1", "2", "CH1_GLIDE").move("S1", "1", "CH1_RANGE").move("S1", "3", "")
        switch = lane_of(bench).switch
        assert (switch.slow, switch.fast, switch.waiting, switch.keepers) == ("1-2", "2-3", "CH1_RANGE", ())

    def test_two_capacitors_that_take_turns(self, lanes):
        bench = lanes(ranged=True).move("S1", "2", "CH1_GLIDE").move("S1", "1", "CH1_RANGE")
        bench.move("S1", "3", "CH1_SMALL").move("C10", "1", "CH1_SMALL")
        lane = lane_of(bench)
        assert [b.refs for b in lane.branches] == [("C10",)]
        assert [b.refs for b in lane.slow_branches] == [("C15",)]
        values = LaneValues.of(bench.board(), lane)
        assert (values.capacitance(0), values.capacitance(0, slow=True)) == pytest.approx((1e-6, 9e-6))

    def test_nothing_keeps_it_when_the_throw_is_open(self, lanes):
        assert lane_of(lanes(ranged=True).move("S1", "3", "")).switch.keepers == ()

    def test_a_switch_of_something_else_makes_no_range(self, lanes):
        bench = lanes(ranged=True).move("C15", "1", "")
        lane = lane_of(bench)
        assert lane.switch is None
        assert lane.slow_branches == lane.branches

    def test_a_switch_to_0_v_makes_no_range(self, lanes):
        assert lane_of(lanes(ranged=True).move("S1", "2", "0V")).switch is None

    def test_a_lane_without_a_capacitor_in_one_position_is_none(self, lanes):
        assert lanes(ranged=True).move("C10", "1", "").board().channels == ()

    def test_a_switch_without_a_record_is_told_by_its_class(self, lanes):
        bench = lanes(ranged=True)
        value, _, pins, fields = bench.parts["S1"]
        bench.parts["S1"] = (value, "", pins, fields)
        board = bench.board()
        assert board.kind("S1") == "switch"
        assert board.channels[0].switch.slow == "1-2"

    def test_contacts_and_states(self, lanes):
        board = lanes(ranged=True).board()
        assert [(c.ref, c.position, c.common, c.throw) for c in board.contacts] == [
            ("S1", "1-2", "CH1_RANGE", "CH1_GLIDE"),
            ("S1", "2-3", "CH1_RANGE", "CH1_KEEP"),
        ]
        assert [[c.position for c in state] for state in board.switch_states(["S1"])] == [["1-2"], ["2-3"]]


class TestTimes:
    def test_by_hand(self, lanes):
        (glide,) = channel_glides(lanes(ranged=True).board(), ASKED)
        fast, slow = glide.ranges
        assert [(r.name, r.position) for r in glide.ranges] == [("fast", "2-3"), ("slow", "1-2")]
        assert fast.shortest.nominal == pytest.approx(LN9 * 2202 * 1e-6)
        assert fast.middle.nominal == pytest.approx(LN9 * 152_200 * 1e-6)
        assert fast.longest.nominal == pytest.approx(LN9 * 1_002_200 * 1e-6)
        assert slow.shortest.nominal == pytest.approx(LN9 * 2202 * 10e-6)
        assert slow.longest.low == pytest.approx(LN9 * (2200 * 0.99 + 0.8e6) * 10e-6 * 0.95)
        assert slow.longest.high == pytest.approx(LN9 * (2200 * 1.01 + 1.2e6) * 10e-6 * 1.05)
        assert (glide.shortest, glide.middle, glide.longest) == (fast.shortest, slow.middle, slow.longest)
        assert glide.time_constant_longest == pytest.approx(1_002_200 * 10e-6)

    def test_without_a_switch_there_are_no_ranges(self, lanes):
        (glide,) = channel_glides(lanes().board(), ASKED)
        assert glide.ranges == ()

    def test_the_keeper_has_no_part_in_it(self, lanes):
        plain, heavy = (channel_glides(lanes(ranged=True).value("R18", v).board(), ASKED)[0] for v in ("10k", "100"))
        assert plain.ranges == heavy.ranges

    def test_travel_of_each_range(self, lanes):
        found = travels(lanes(2, ranged=True).board(), ASKED)
        assert [(t.channel, t.range) for t in found] == [(1, "fast"), (1, "slow"), (2, "fast"), (2, "slow")]
        assert found[0].points[10].time.nominal == pytest.approx(LN9 * 1.0022)
        assert found[1].points[10].time.nominal == pytest.approx(LN9 * 10.022)
        # 6 ms is passed soon after the fast end of the fast range, and never in the slow one
        assert found[0].faster > 0
        assert (found[1].faster, found[1].lowest_decade > 0) == (0.0, True)
        assert found[1].slower > 0
        assert len(tapers(lanes(ranged=True).board(), ASKED)) == 6

    def test_without_a_switch_travel_has_no_name(self, lanes):
        assert [t.range for t in travels(lanes().board(), ASKED)] == [""]


class TestShares:
    def share(self, bench, **asked):
        return boards_inside(bench.board(), replace(ASKED, **asked))[0]

    def test_both_ends_count(self, lanes):
        assert self.share(lanes(ranged=True)) == 1.0
        # 4.5 ms is less than any board's fast end; 27.8 s more than any board's slow end
        assert self.share(lanes(ranged=True), shortest=4.5e-3) == 0.0
        assert self.share(lanes(ranged=True), longest=27.9) == 0.0
        assert 0.3 < self.share(lanes(ranged=True), longest=22.0) < 0.7

    def test_a_gap_between_the_ranges_counts(self, lanes):
        """2.2 kohm to 12.2 kohm with 1 uF, and with 10 uF: 26.8 ms to 48.4 ms are missing."""
        bench = lanes(ranged=True).value("R13", "10k")
        assert self.share(bench, longest=0.1) == 0.0
        # with 4.4 uF more, 5.4 uF x 2.2 kohm reaches down to about 1 uF x 12.2 kohm: some boards have a gap
        assert 0.1 < self.share(lanes(ranged=True).value("R13", "10k").value("C15", "4.4u"), longest=0.04) < 0.9
        assert self.share(lanes(ranged=True).value("R13", "10k").value("C15", "2u"), longest=0.04) > 0.99

    def test_the_fast_capacitor_is_one_part_in_both_ranges(self, lanes):
        """Drawn once a board: beside a part that is off by half, an added 1 pF leaves no gap on any."""
        exact = {"isolating": ((0.0, 0.0),), "control": (1e3, 0.0), "end": (0.0, 0.0)}
        lane = LaneValues(
            **exact, taper="linear", middle=0.5, rising=True, adjustable=False,
            branches=(((1e-6, 0.5),),), added=(((1e-12, 0.0),),),
        )  # fmt: skip
        # without a control that turns, the ranges are two times and never meet
        assert draw_boards((lane,), 1.0, 1.0, 0.0, boards=1000).inside == 0
        lane = replace(lane, adjustable=True, isolating=((1e3, 0.0),), control=(1.0, 0.0))
        assert draw_boards((lane,), 1.0, 1.0, 0.0, boards=1000).inside == 1000

    def test_matching_of_both_ranges(self, lanes):
        bench = lanes(2, ranged=True).value("C25", "18u")
        first, middle, last = matchings(bench.board(), ASKED)
        # alike in the fast range; 19 uF against 10 uF in the slow one
        assert first.nominal == 0.0
        assert (middle.nominal, last.nominal) == pytest.approx((0.9, 0.9))


class TestElsewhere:
    def test_insulation_of_both_capacitors(self, lanes, spec):
        board = lanes(ranged=True).board()
        term = next(t for t in scale_terms(board, board.channels[0], spec.signal) if t.name.startswith("insulation"))
        # 30 000 s of 1 uF and of 9 uF: 30 Gohm beside 3.33 Gohm are 3 Gohm
        resistance = 2200 * 1.01 + 1.2e6
        assert term.worst == pytest.approx(resistance / (resistance + 3e9), rel=1e-6)
        assert term.source.startswith("C10, C15: 3 GΩ")

    def test_noise_at_the_fast_end_of_the_fast_range_and_the_slow_end_of_the_slow_one(self, lanes, spec):
        fast, slow = noises(lanes(ranged=True).board(), spec.signal)
        assert fast.capacitor == pytest.approx(math.sqrt(1.380649e-23 * 300 / 1e-6))
        assert slow.capacitor == pytest.approx(math.sqrt(1.380649e-23 * 300 / 10e-6))

    def test_stability_is_that_of_the_fast_capacitor(self, lanes, spec):
        ranged, plain = (stabilities(lanes(ranged=r).board(), spec.signal) for r in (True, False))
        assert [s.measured for s in ranged] == [s.measured for s in plain]
        assert ranged[0].parts == ("U1", "R12", "R13", "C10")
        # ten times the capacitor changes the margin by less than a hundredth of a degree
        larger = stabilities(lanes().value("C10", "10u").board(), spec.signal)
        assert larger[0].measured == pytest.approx(plain[0].measured, abs=0.01)

    def test_the_keeper_draws_from_the_rails_at_a_step(self, lanes, spec):
        rails = Rails(12.0, -12.0, 0.05)
        with_it, without = (
            rail_powers(lanes(ranged=ranged).board(), rails, spec.signal)[0].current_peak for ranged in (True, False)
        )
        # 10 V across 10 kohm at the low end of its tolerance
        assert with_it - without == pytest.approx(10 / 9900)

    def test_what_waits_sees_the_rails(self, lanes):
        board = lanes(ranged=True).board()
        bounds = net_bounds(board, Rails(12.0, -12.0, 0.05))
        for net in ("CH1_RANGE", "CH1_KEEP", "CH1_GLIDE"):
            assert (bounds[net].low, bounds[net].high) == pytest.approx((-12.6, 12.6))
        assert span_across(board, bounds, "C15") == pytest.approx((-12.6, 12.6))

    def test_a_contact_is_a_path(self, lanes):
        """The throw of a switch on 0 V, its common on nothing else: held at 0 V, not anywhere."""
        bench = lanes()
        bench.add("S1", "S", "toggle", {"1": "0V", "2": "ARM", "3": ""})
        bench.add("C80", "1n", "c-pp", {"1": "ARM", "2": "0V"})
        bounds = net_bounds(bench.board(), Rails(12.0, -12.0, 0.05))
        assert (bounds["ARM"].low, bounds["ARM"].high) == (0.0, 0.0)
