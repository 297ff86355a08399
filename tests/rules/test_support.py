"""What the rules share: margins, DC paths, rails; and figures with an answer one can work out by hand."""

from __future__ import annotations

import math

import pytest

from modgen.analysis.board import Board
from modgen.analysis.model import Headroom
from modgen.rules.contract import Fault
from modgen.rules.ratings.control_rating import power_in_track
from modgen.rules.support import (
    above,
    closed_contacts,
    ground_nets,
    groups,
    headroom_measurement,
    is_input,
    least_path,
    left,
    listed,
    may_stay_open,
    rails,
)


@pytest.fixture
def board(example, catalogue):
    return lambda text: Board.of(example(text).netlist, catalogue)


class TestMargins:
    @pytest.mark.parametrize(
        ("measured", "limit", "margin"),
        [(0.0, 10.0, 1.0), (5.0, 10.0, 0.5), (10.0, 10.0, 0.0), (15.0, 10.0, -0.5), (1.0, 0.0, -1.0), (0.0, 0.0, 0.0)],
    )
    def test_left(self, measured, limit, margin):
        assert left(measured, limit) == margin

    @pytest.mark.parametrize(
        ("measured", "limit", "margin"), [(0.0, 10.0, -1.0), (5.0, 10.0, -0.5), (10.0, 10.0, 0.0), (30.0, 10.0, 2.0)]
    )
    def test_above(self, measured, limit, margin):
        assert above(measured, limit) == margin

    def test_rounding_is_no_fault(self):
        assert left(0.1 + 0.2, 0.3) == 0.0
        assert above(0.3, 0.1 + 0.2) == 0.0
        assert left(1 + 1e-8, 1.0) < 0
        assert above(1 - 1e-8, 1.0) < 0


class TestHeadroom:
    FAULT = Fault("takes {way} {can}, reaches {needed}", "w", "f")

    def stage(self, **changes):
        values = {"needed_low": -5.0, "needed_high": 5.0, "can_low": -7.1, "can_high": 7.1, **changes}
        return headroom_measurement(
            Headroom(stage="input buffer", subject="swing", parts=("U1",), **values), self.FAULT
        )

    def test_margin_is_the_share_of_the_limit_about_0_v(self):
        found = self.stage()
        assert found.fault is None
        assert found.margin == pytest.approx(2.1 / 7.1)
        assert (found.measured, found.limit) == (5.0, 7.1)

    def test_the_tighter_end_is_reported(self):
        found = self.stage(needed_low=-8.0)
        assert (found.measured, found.limit) == (-8.0, -7.1)
        assert found.fault is not None
        assert found.fault.message == "takes down to -7.1 V, reaches -8 V"
        assert self.stage(needed_high=8.0).fault.message == "takes up to 7.1 V, reaches 8 V"

    def test_the_allowance_counts_at_the_low_end_only(self):
        assert self.stage(needed_low=-7.2, allowance=0.2).fault is None
        assert self.stage(needed_low=-7.2, allowance=0.05).fault is not None
        assert self.stage(needed_high=7.2, allowance=0.2).fault is not None

    def test_exactly_on_the_limit_fits(self):
        assert self.stage(needed_high=7.1).fault is None

    def test_no_range_at_all(self):
        found = self.stage(can_low=1.0, can_high=-1.0)
        assert found.margin == -1.0
        assert found.fault is not None


class TestPaths:
    def test_the_least_resistance_wins(self, board):
        found = least_path(board("start from: lane\nR9 metal-film-0207-100k 1=CH1_IN 2=0V"), "CH1_A", ["0V"])
        assert found == (110e3, "0V", ("R2", "R9"))

    def test_through_the_control(self, board):
        found = least_path(board("start from: lane"), "CH1_GLIDE", ["CH1_BUF"])
        assert found == (1.0022e6, "CH1_BUF", ("R4", "R3"))

    def test_nets_that_may_not_be_passed(self, board):
        lane = board("start from: lane")
        assert least_path(lane, "CH1_GLIDE", ["CH1_BUF"], around=["CH1_CTL"]) is None
        assert least_path(lane, "CH1_GLIDE", ["CH1_BUF"], around=["CH1_BUF", "CH1_GLIDE"]) is not None

    def test_a_closed_contact_costs_nothing(self, board):
        lane = board("start from: lane\nwithout R1")
        assert least_path(lane, "CH1_A", ["0V"]) is None
        assert least_path(lane, "CH1_A", ["0V"], closed_contacts(lane)) == (10e3, "0V", ("R2", "J2"))

    def test_groups_take_the_first_name(self):
        find = groups([("C", "B"), ("B", "A"), ("X", "Y")])
        assert [find(net) for net in "ABCXYZ"] == ["A", "A", "A", "X", "X", "Z"]


class TestRails:
    def test_traced_from_the_header(self, board):
        positive, negative = rails(board("start from: lane"))
        assert (positive.bus, positive.diodes, positive.protected) == ("BUS+", ("D1",), ("V+",))
        assert (negative.bus, negative.diodes, negative.protected) == ("BUS-", ("D2",), ("V-",))

    def test_names_do_not_matter(self, board):
        lane = board("start from: lane\nD1 1=SUPPLY 2=FROM-BUS\nJ1 9=FROM-BUS 10=FROM-BUS\nU1 8=SUPPLY")
        assert (rails(lane)[0].bus, rails(lane)[0].protected) == ("BUS+", ("SUPPLY",))

    def test_by_name_without_a_header(self, board):
        assert [rail.nets for rail in rails(board("start from: lane\nwithout J1"))] == [("BUS+", "V+"), ("BUS-", "V-")]

    def test_one_rail_on_a_single_supply(self, board):
        (only,) = rails(board("start from: single"))
        assert (only.sign, only.nets) == (1, ("BUS+", "V+"))

    def test_ground_is_what_the_header_says_and_what_is_called_so(self, board):
        assert ground_nets(board("start from: lane")) == ("0V",)
        assert ground_nets(board("start from: lane\nJ1 3=AGND")) == ("0V", "AGND")


class TestOpenPins:
    def test_input_and_output_sockets_are_told_apart(self, board):
        lane = board("start from: lane")
        assert is_input(lane, "J2")
        assert not is_input(lane, "J3")

    def test_an_output_socket_inside_the_loop(self, board):
        lane = board(
            "start from: lane\nR5 1=CH1_DRIVE 2=CH1_OUT\nU1 6=CH1_FB\nR6 metal-film-0207-10k 1=CH1_OUT 2=CH1_FB"
        )
        assert not is_input(lane, "J3")

    @pytest.mark.parametrize(
        ("start", "ref", "pin", "why"),
        [
            ("lane", "J3", "TN", "an output socket normals nothing"),
            ("lane", "J3", "T", ""),
            ("lane", "J2", "TN", ""),
            ("lane", "J1", "1", ""),
            ("single", "J1", "1", "the board has no negative rail"),
            ("single", "J1", "2", "the board has no negative rail"),
            ("single", "J1", "9", ""),
            ("single", "U1", "4", ""),
        ],
    )
    def test_which_may_stay_open(self, board, start, ref, pin, why):
        assert may_stay_open(board(f"start from: {start}"), ref, pin) == why


class TestPowerInTrack:
    def test_matched(self):
        # 5 V across 1 kohm and 1 kohm: 2.5 mA, 6.25 mW in each
        assert power_in_track(5.0, 1e3, 1e6, 1.0) == pytest.approx(6.25e-3)

    def test_a_track_shorter_than_the_series_resistor(self):
        assert power_in_track(5.0, 4e3, 1e3, 1.0) == pytest.approx(1e-3)

    def test_the_source_limits(self):
        # 10 mA at most: it ends at 500 ohm in all, 490 of them in the track
        assert power_in_track(5.0, 10.0, 1e6, 10e-3) == pytest.approx(49e-3)

    def test_nothing_drives(self):
        assert power_in_track(0.0, 0.0, 1e6, 10e-3) == 0.0


def test_a_bare_input_has_no_current_that_could_be_written(measured):
    found, *_ = measured("input-clamp", "start from: lane\nJ2 T=CH1_A\nwithout R2")
    assert found.parts == ("U1",)
    assert found.measured is None
    assert math.isfinite(found.margin)


def test_lists_as_people_write_them():
    assert [listed(list("ABC"[:n])) for n in range(4)] == ["", "A", "A and B", "A, B and C"]
