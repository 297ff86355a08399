"""Supply nets under names of their own: found by header, supply pins and diodes, or left alone."""

from __future__ import annotations

import pytest

from modgen.analysis.board import Board
from modgen.catalogue import load_catalogue
from modgen.netlist.model import Net, Netlist
from modgen.netlist.order import sorted_nets
from modgen.rules.examples import read_example

CATALOGUE = load_catalogue()
ALL = (("0V", "GND"), ("BUS+", "P12"), ("BUS-", "N12"), ("V+", "VCC"), ("V-", "VEE"))


def board(text: str, names: dict[str, str]) -> Board:
    netlist = read_example(text, CATALOGUE).netlist
    nets = sorted_nets(Net(names.get(net.name, net.name), net.pins) for net in netlist.nets)
    return Board.of(Netlist(netlist.title, netlist.parts, nets), CATALOGUE)


def test_names_as_they_should_be_are_left_alone():
    assert board("start from: lane", {}).own_names == ()


def test_every_supply_under_another_name():
    named, usual = board("start from: lane", dict(ALL)), board("start from: lane", {})
    assert named.own_names == ALL
    assert named.netlist.nets == usual.netlist.nets


def test_a_single_supply_has_no_negative_rail():
    found = board("start from: single", dict(ALL))
    assert found.own_names == (("0V", "GND"), ("BUS+", "P12"), ("V+", "VCC"))
    assert found.single


@pytest.mark.parametrize("pair", ALL)
def test_one_supply_under_another_name(pair):
    assert board("start from: lane", dict([pair])).own_names == (pair,)


def test_a_header_turned_round_does_not_turn_the_rails():
    turned = "start from: lane\nJ1 1=BUS+ 2=BUS+ 9=BUS- 10=BUS-"
    assert board(turned, dict(ALL)).own_names == ALL


@pytest.mark.parametrize(
    ("change", "left"),
    [
        # which of them is wrong cannot be told, so neither rail gets a name
        ("D1 1=BUS+ 2=V+", {"V+", "V-"}),
        ("U1 4=V+ 8=V-", {"V+", "V-"}),
        ("without J1", {"0V", "BUS+", "BUS-"}),
        ("J1 3= 4= 5= 6=BUS+ 7=BUS+ 8=", {"0V"}),
    ],
)
def test_where_the_pins_disagree_the_names_stay(change, left):
    found = board(f"start from: lane\n{change}", dict(ALL))
    assert {name for name, own in ALL if own in found.netlist.by_net} == left


def test_a_net_that_has_a_name_of_another_supply_keeps_it():
    shorted = board("start from: lane\nwithout D1\nU1 8=BUS+\nC2 1=BUS+\nC4 1=BUS+", {"0V": "GND"})
    assert shorted.own_names == (("0V", "GND"),)
