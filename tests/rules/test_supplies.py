"""Supply nets by what they carry, and the header that is the wrong way round."""

from __future__ import annotations

import pytest

from modgen.analysis.board import Board
from modgen.rules.supplies import blind, carried, header_pins, unnamed
from modgen.rules.support import header_turned, pins_text, rails

TURNED = "start from: lane\nJ1 1=BUS+ 2=BUS+ 9=BUS- 10=BUS-"


@pytest.fixture
def board(example, catalogue):
    return lambda text: Board.of(example(text).netlist, catalogue)


@pytest.mark.parametrize(
    ("text", "turned"),
    [
        ("start from: lane", False),
        ("start from: single", False),
        (TURNED, True),
        ("start from: lane\nJ1 1=P 2=P 9=N 10=N\nD1 2=P\nD2 1=N", True),
        ("start from: lane\nwithout D1 D2\nJ1 1=V+ 2=V+ 9=V- 10=V-", True),
        ("start from: single\nJ1 1=BUS+ 2=BUS+ 9= 10=", True),
        ("start from: lane\nD1 1=BUS+ 2=V+\nD2 1=V- 2=BUS-", False),
        ("start from: lane\nU1 4=V+ 8=V-", False),
        ("start from: lane\nJ1 1=BUS+ 2=BUS+\nD2 1=BUS+", False),
    ],
)
def test_a_header_is_turned_when_diodes_and_packages_say_so(board, text, turned):
    assert header_turned(board(text)) is turned


def test_rails_of_a_turned_header_are_those_that_the_board_means(board):
    found = board(TURNED)
    assert [(r.sign, r.bus, r.protected) for r in rails(found)] == [(1, "BUS+", ("V+",)), (-1, "BUS-", ("V-",))]
    assert header_pins(found, "BUS+") == ("1", "2")


def test_what_an_amplifier_drives_is_no_rail(board):
    found = board("start from: lane\nR9 metal-film-0207-10r 1=CH1_DRIVE 2=V+")
    assert rails(found)[0].protected == ("V+",)


def test_each_supply_net_carries_one_supply(board):
    assert carried(board("start from: lane")) == {
        "0V": {"0V": "pins 3 to 8 of J1"},
        "BUS+": {"BUS+": "pins 9 and 10 of J1"},
        "BUS-": {"BUS-": "pins 1 and 2 of J1"},
        "V+": {"V+": "pin 1 of D1"},
        "V-": {"V-": "pin 2 of D2"},
    }


def test_a_short_is_a_net_that_carries_two(board):
    found = board("start from: lane\nD1 1=0V")
    assert carried(found)["0V"] == {"0V": "pins 3 to 8 of J1", "V+": "pin 1 of D1"}
    assert blind(found) == "net 0V carries 0V and V+"


@pytest.mark.parametrize(
    ("text", "names", "reason"),
    [
        ("start from: lane", [], ""),
        ("start from: single", [], ""),
        ("start from: lane\nJ1 9=P12 10=P12\nD1 2=P12", [], ""),
        ("start from: lane\nU1 8=VCC\nD1 1=VCC\nC2 1=VCC\nC4 1=VCC", [], ""),
        ("start from: lane\nU1 8=VCC\nD1 1=BUS+ 2=VCC\nC2 1=VCC\nC4 1=VCC", ["V+"], "there is no net named V+"),
        ("start from: lane\nD1 2=V+\nJ1 9=V+ 10=V+", [], ""),
    ],
)
def test_names_that_are_missing(board, text, names, reason):
    found = board(text)
    assert [supply.name for supply in unnamed(found)] == names
    assert blind(found) == reason


def test_pins_as_people_say_them():
    assert pins_text("J1", ["3"]) == "pin 3 of J1"
    assert pins_text("J1", ["1", "2"]) == "pins 1 and 2 of J1"
    assert pins_text("J1", ["3", "4", "5"]) == "pins 3 to 5 of J1"
    assert pins_text("J1", ["3", "5", "6"]) == "pins 3, 5 and 6 of J1"
