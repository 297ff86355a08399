"""The netlist seen as electronics; lanes found without looking at a role or a net's name."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from modgen.analysis.board import Board
from modgen.analysis.parts import field_number, reference_order
from modgen.netlist.model import Net, Netlist
from modgen.problems import InputError


def renamed(netlist: Netlist, keep: tuple[str, ...]) -> Netlist:
    """Every net under another name, and no field but part, tolerance and channel."""
    nets = tuple(Net(n.name if n.name in keep else f"N${i}", n.pins) for i, n in enumerate(netlist.nets))
    parts = tuple(
        replace(p, fields=tuple(f for f in p.fields if f[0] in ("part", "tolerance", "channel"))) for p in netlist.parts
    )
    return Netlist(netlist.title, parts, tuple(sorted(nets, key=lambda n: n.name)))


def test_a_lane_is_found_with_all_its_parts(lanes):
    (lane,) = lanes().board().channels
    assert (lane.channel, lane.input_net, lane.input_jacks) == (1, "CH1_IN", ("J10",))
    assert (lane.terminators, lane.input_series, lane.isolating) == (("R10",), ("R11",), ("R12",))
    assert (lane.control, lane.wiring.form, lane.wiring.near, lane.wiring.far) == (
        "R13",
        "rheostat",
        "CH1_CTL",
        "CH1_GLIDE",
    )
    assert (lane.glide_net, lane.capacitors) == ("CH1_GLIDE", ("C10",))
    assert (lane.first.name, lane.second.name) == ("U1A", "U1B")
    assert [(f.resistor, f.net, f.jacks) for f in lane.feeds] == [("R14", "CH1_OUT", ("J11",))]
    assert (lane.inside_loop, lane.feedback, lane.compensation) == (False, None, None)


def test_net_names_and_roles_decide_nothing(lanes):
    bench = lanes(3, inputs=2, chain=True, inside=True)
    before = bench.board()
    after = Board.of(renamed(bench.netlist(), before.supply_nets), bench.shelf)

    def shape(board):
        plain = ("channel", "input_jacks", "terminators", "isolating", "control", "capacitors", "output_series")
        loop = ("inside_loop", "feedback", "compensation", "output_jacks")
        return [[getattr(lane, name) for name in plain + loop] for lane in board.channels]

    assert shape(after) == shape(before)
    assert len(after.channels) == 3


def test_a_channel_without_a_socket_takes_the_one_it_shares(lanes):
    board = lanes(3, inputs=1).board()
    assert [lane.input_net for lane in board.channels] == ["CH1_IN"] * 3
    assert [lane.input_series for lane in board.channels] == [("R11",), ("R21",), ("R31",)]


def test_inside_the_loop(lanes):
    (lane,) = lanes(inside=True).board().channels
    assert (lane.inside_loop, lane.feedback, lane.compensation) == (True, "R19", "C19")
    assert lane.output_series == ("R14",)


def test_every_output_socket_has_its_resistor(lanes):
    (lane,) = lanes(outputs=3).board().channels
    assert lane.output_series == ("R14", "R15", "R16")
    assert lane.output_nets == ("CH1_OUT", "CH1_OUT2", "CH1_OUT3")
    assert lane.output_jacks == ("J11", "J12", "J13")


def test_back_to_back_is_one_branch_of_two(lanes):
    board = lanes(back_to_back=True).board()
    (lane,) = board.channels
    assert [branch.refs for branch in lane.branches] == [("C10", "C11")]
    assert (board.partner("C10"), board.partner("C11"), board.partner("C1")) == ("C11", "C10", None)


def test_a_net_between_capacitors_that_does_more_is_no_branch(lanes):
    bench = lanes(back_to_back=True)
    bench.add("U9", "TL072", "tl072", {"3": "CH1_MID"})
    assert bench.board().channels == ()


def test_an_inverting_input_on_the_socket_itself_closes_the_loop_too(lanes):
    (lane,) = lanes().move("U1", "6", "CH1_OUT").board().channels
    assert (lane.inside_loop, lane.feedback) == (True, None)


def test_unlike_ends_together_are_not_back_to_back(lanes):
    bench = lanes(back_to_back=True).move("C11", "1", "CH1_MID").move("C11", "2", "0V")
    assert bench.board().partner("C10") is None


def test_parallel_capacitors_are_two_branches(lanes):
    bench = lanes()
    bench.add("C20", "220n", "c-pp", {"1": "0V", "2": "CH1_GLIDE"})
    assert [branch.refs for branch in bench.board().channels[0].branches] == [("C10",), ("C20",)]


def test_isolating_resistors_in_series_on_either_side_of_the_control(lanes):
    bench = lanes().move("R13", "1", "X").move("R13", "2", "Y").move("R13", "3", "Y")
    bench.add("R50", "1k", "r", {"1": "CH1_CTL", "2": "X"})
    bench.add("R51", "3.3k", "r", {"1": "CH1_GLIDE", "2": "Y"})
    (lane,) = bench.board().channels
    assert lane.isolating == ("R12", "R50", "R51")
    assert (lane.wiring.near, lane.wiring.far) == ("X", "Y")


@pytest.mark.parametrize(
    ("one", "wiper", "three", "form", "rising", "fails_open"),
    [
        ("CH1_CTL", "CH1_GLIDE", "CH1_GLIDE", "rheostat", True, False),
        ("CH1_CTL", "CH1_CTL", "CH1_GLIDE", "reversed", False, False),
        ("CH1_GLIDE", "CH1_GLIDE", "CH1_CTL", "reversed", False, False),
        ("CH1_CTL", "CH1_GLIDE", "", "loose", True, True),
        ("CH1_CTL", "CH1_GLIDE", "LONE", "loose", True, True),
        ("", "CH1_GLIDE", "CH1_CTL", "loose-reversed", False, True),
        ("CH1_CTL", "", "CH1_GLIDE", "fixed", False, False),
        ("CH1_CTL", "CH1_GLIDE", "0V", "divider", True, True),
    ],
)
def test_how_the_control_is_wired(lanes, one, wiper, three, form, rising, fails_open):
    bench = lanes()
    for pin, net in (("1", one), ("2", wiper), ("3", three)):
        bench.move("R13", pin, net)
    (lane,) = bench.board().channels
    assert (lane.wiring.form, lane.wiring.rising, lane.wiring.fails_open) == (form, rising, fails_open)


def test_no_capacitor_or_no_way_back_is_no_lane(lanes):
    assert lanes().move("C10", "2", "").board().channels == ()
    assert lanes().move("R12", "1", "").board().channels == ()
    # back to its own output is a feedback network, not a lane
    assert lanes().move("R12", "1", "CH1_DRIVE").board().channels == ()


def test_lanes_without_a_usable_channel_get_the_free_numbers(lanes):
    bench = lanes(3)
    bench.parts["R13"][3]["channel"] = "2"
    bench.parts["R33"][3].pop("channel")
    # R23 says 2 as well; the first by reference keeps it
    assert [(lane.channel, lane.control) for lane in bench.board().channels] == [
        (1, "R23"),
        (2, "R13"),
        (3, "R33"),
    ]


def test_values_come_from_the_netlist_and_ratings_from_its_fields_first(lanes):
    bench = lanes().value("R12", "4.7k")
    assert bench.board().resistance("R12").nominal == 4700.0
    assert bench.board().resistance("R12").low == pytest.approx(4653.0)
    bench.parts["R12"][3].update(tolerance="5%", power="0.1W")
    board = bench.board()
    assert board.resistance("R12").high == pytest.approx(4935.0)
    assert (board.rating("R12", "power"), board.rating("R12", "voltage")) == (0.1, 200.0)
    assert board.rating("R12", "dielectric") is None


def test_a_value_that_is_not_a_number_is_an_input_error(lanes):
    board = lanes().value("R12", "DNP").value("C10", "0").board()
    with pytest.raises(InputError) as caught:
        board.resistance("R12")
    assert str(caught.value) == (
        "netlist: error: R12 has the value 'DNP', which is not a resistance\n"
        "    why: every analysis of the netlist reads the values that stand in it\n"
        "    fix: give R12 a plain number with one SI prefix and no unit, such as 4.7k"
    )
    assert [p.what for p in board.unreadable] == [
        "R12 has the value 'DNP', which is not a resistance",
        "C10 has the value '0', which is not a capacitance",
    ]


def test_a_tolerance_of_everything_is_an_input_error(lanes):
    bench = lanes()
    bench.parts["C10"][3]["tolerance"] = "100%"
    assert [str(p) for p in bench.board().unreadable] == [
        "netlist: error: C10 has a tolerance of 100 %\n"
        "    why: a part that may be nothing at all has no least value to reckon with\n"
        "    fix: give C10 a tolerance below 100 %"
    ]


def test_many_resistors_between_the_same_nets_do_not_slow_the_search(lanes):
    bench = lanes()
    for n in range(300):
        bench.add(f"R{1000 + n}", "1M", "r", {"1": "CH1_CTL", "2": f"X{n % 7}"})
        bench.add(f"R{2000 + n}", "1M", "r", {"1": f"X{n % 5}", "2": f"X{n % 7}"})
    assert bench.board().channels[0].isolating == ("R12",)


def test_a_part_without_a_record_is_unknown_but_still_a_resistor(lanes):
    bench = lanes()
    bench.add("H1", "hole", "", {"1": "0V"})
    bench.add("R60", "47k", "gone", {"1": "CH1_IN", "2": "0V"})
    board = bench.board()
    assert board.unknown == ("H1", "R60")
    assert (board.kind("H1"), board.kind("R60")) == ("", "resistor")
    assert board.channels[0].terminators == ("R10", "R60")


def test_single_supply_has_no_negative_net(lanes):
    board = lanes(single=True).board()
    assert (board.single, board.negative) == (True, "0V")
    assert board.supply_nets == ("0V", "V+", "BUS+")
    assert lanes().board().negative == "V-"


def test_neighbours_of_a_net(lanes):
    board = lanes().board()
    assert [(n.ref, n.pin, n.net) for n in board.between("CH1_CTL")] == [
        ("R12", "2", "CH1_BUF"),
        ("R13", "1", "CH1_GLIDE"),
    ]
    assert [n.ref for n in board.between("CH1_GLIDE", "capacitor")] == ["C10"]
    assert board.between("nowhere") == ()


def test_jacks_and_sections(lanes):
    board = lanes(2, chain=True).board()
    assert [(j.ref, j.tip, j.switch, j.sleeve) for j in board.jacks if j.ref == "J20"] == [
        ("J20", "CH2_IN", "CH1_IN", "0V")
    ]
    assert board.jacks[1].switch is None
    assert [s.name for s in board.sections] == ["U1A", "U1B", "U2A", "U2B"]
    assert (board.sections[0].positive, board.sections[0].negative) == ("V+", "V-")
    assert board.sections[0].follower


def test_parallel_resistors_at_their_low_end(lanes):
    board = lanes(2).board()
    assert board.least_parallel(("R10", "R20")) == pytest.approx(495e3)
    assert board.least_parallel(()) == math.inf


@pytest.mark.parametrize(
    ("text", "number"),
    [
        ("63V", 63.0),
        ("0.25W", 0.25),
        ("125mW", 0.125),
        ("1%", 0.01),
        ("±5%", 0.05),
        ("100n", 1e-7),
        ("", None),
        ("film-pp", None),
        ("1..2V", None),
    ],
)
def test_numbers_in_fields(text, number):
    assert field_number(text) == (None if number is None else pytest.approx(number))


def test_references_sort_as_people_count():
    assert sorted(["R10", "R2", "C3"], key=reference_order) == ["C3", "R2", "R10"]
