"""Reversed header, a missing rail and a module that is off, by hand on the bench: ±12 V at 5 %."""

from __future__ import annotations

import math

import pytest

from modgen.analysis.power import rail_powers
from modgen.analysis.supply_states import missing_rails, powered_off, reversed_supply
from modgen.spec.model import Rails, Signal

RAILS = Rails(12.0, -12.0, 0.05)
SIGNAL = Signal(-5.0, 5.0, 1e3, 100e3)


def missing(bench, rails=RAILS):
    board = bench.board()
    return missing_rails(board, rails, rail_powers(board, rails, SIGNAL))


def off(bench, rails=RAILS):
    return {(b.subject, b.name): b for b in powered_off(bench.board(), rails)}


# --- reversed header ---------------------------------------------------------------------------------


def test_reversed_header_by_hand(lanes):
    positive, negative = reversed_supply(lanes().board(), RAILS)
    assert (positive.rail, positive.diode, positive.blocked) == ("V+", "D1", True)
    assert (positive.bus, negative.bus) == pytest.approx((-12.6, 12.6))
    # the bus alone, and the bus on top of a reservoir that still has its charge
    assert (positive.settled, positive.measured) == pytest.approx((12.6, 25.2))
    assert (negative.settled, negative.measured) == pytest.approx((12.6, 25.2))
    assert (positive.limit, positive.margin) == pytest.approx((40.0, 1 - 25.2 / 40))
    assert positive.leakage == 1e-3
    # leakage can turn the supply pins round by a junction and no more
    assert positive.amplifiers == -0.6


def test_a_20_v_diode_holds_the_bus_but_not_the_charge_on_top(lanes):
    bench = lanes()
    bench.shelf = bench.shelf.changed("schottky", reverse_voltage=20.0)
    positive, _ = reversed_supply(bench.board(), RAILS)
    assert positive.settled < positive.limit < positive.measured
    assert positive.margin == pytest.approx(-0.26)


def test_without_a_diode_the_amplifiers_get_the_rails_reversed(lanes):
    bench = lanes()
    del bench.parts["D1"], bench.parts["D2"]
    for pin in ("9", "10"):
        bench.move("J1", pin, "V+")
    for pin in ("1", "2"):
        bench.move("J1", pin, "V-")
    positive, negative = reversed_supply(bench.board(), RAILS)
    assert (positive.blocked, positive.bus, positive.margin) == (False, pytest.approx(-12.6), -1.0)
    assert (negative.blocked, negative.bus, negative.margin) == (False, pytest.approx(12.6), -1.0)
    assert positive.amplifiers == pytest.approx(-25.2)


@pytest.mark.parametrize("way", ["turned", "bridged", "doubled"])
def test_a_diode_that_is_turned_or_bypassed_blocks_nothing(lanes, way):
    bench = lanes()
    if way == "turned":
        bench.move("D1", "1", "BUS+").move("D1", "2", "V+")
    elif way == "bridged":
        bench.add("R99", "0", "r", {"1": "BUS+", "2": "V+"})
    else:
        bench.add("D9", "D", "schottky", {"1": "BUS+", "2": "V+"})
    positive, negative = reversed_supply(bench.board(), RAILS)
    assert (positive.blocked, positive.margin) == (False, -1.0)
    assert negative.blocked
    assert positive.amplifiers == pytest.approx(-12.6)


def test_a_single_supply_only_has_its_charge_to_hold(lanes):
    (only,) = reversed_supply(lanes(single=True).board(), Rails(12.0, 0.0, 0.05))
    # pins 9 and 10 then meet pins 1 and 2, on which this supply has nothing
    assert (only.bus, only.settled, only.leakage) == (0.0, 0.0, 0.0)
    assert only.measured == pytest.approx(12.6)


def test_without_a_header_there_is_nothing_to_reverse(lanes):
    bench = lanes()
    del bench.parts["J1"]
    assert reversed_supply(bench.board(), RAILS) == ()


# --- one rail missing --------------------------------------------------------------------------------


def test_missing_rail_by_hand(lanes):
    positive, negative = missing(lanes())
    # the amplifiers' current flows on through the missing rail's diode: 0.3 V on the wrong side of 0 V
    assert (positive.rail, positive.low, positive.high) == ("V+", pytest.approx(-12.6), pytest.approx(-0.3))
    assert (negative.rail, negative.low, negative.high) == ("V-", pytest.approx(0.3), pytest.approx(12.6))
    assert (positive.capacitor, negative.capacitor) == ("C1", "C2")
    assert (negative.measured, negative.limit, negative.margin) == pytest.approx((0.3, 1.0, 0.7))
    # a neighbour at -12.6 V meets a supply pin at 0.3 V: one junction less, over 9.9 kohm
    assert negative.input_current == pytest.approx((12.6 + 0.3 - 0.6) / 9900)
    assert negative.broken == pytest.approx(12.6)


def test_a_diode_that_drops_more_than_a_volt_reverses_the_reservoir(lanes):
    bench = lanes()
    bench.shelf = bench.shelf.changed("schottky", forward=((1e-3, 0.8, 1.1), (1.0, 0.9, 1.2)))
    assert all(rail.margin < 0 for rail in missing(bench))


def test_without_a_polarised_reservoir_nothing_is_reversed(lanes):
    bench = lanes()
    del bench.parts["C2"]
    negative = missing(bench)[1]
    assert (negative.capacitor, negative.measured, negative.broken, negative.margin) == ("", 0.0, 0.0, 1.0)


def test_a_single_supply_has_no_rail_to_miss(lanes):
    assert missing(lanes(single=True), Rails(12.0, 0.0, 0.05)) == ()


# --- powered off -------------------------------------------------------------------------------------


def test_powered_off_by_hand(lanes):
    found = off(lanes())
    assert list(found) == [
        ("input", "U1A"), ("output", "U1B"), ("jack", "J10"), ("jack", "J11"), ("rail", "V+"), ("rail", "V-"),
    ]  # fmt: skip
    inside = found["input", "U1A"]
    # 12 V over 10 kohm less 1 %
    assert (inside.voltage, inside.measured) == pytest.approx((12.6, 12.0 / 9900))
    assert (inside.parts, inside.limit) == (("U1", "R11"), 10e-3)
    assert inside.margin == pytest.approx(1 - 12.0 / 9900 / 10e-3)
    outside = found["output", "U1B"]
    assert (outside.measured, outside.limit) == pytest.approx((12.0 / 990, 60e-3))
    # the terminator takes the whole voltage
    assert found["jack", "J10"].measured == pytest.approx(12.0 / 9900 + 12.6 / 990e3)
    assert found["jack", "J10"].limit == 0.5
    assert found["jack", "J11"].measured == pytest.approx(12.0 / 990)
    assert (found["rail", "V+"].measured, found["rail", "V+"].limit) == pytest.approx((12.0 / 9900, 2.8e-3))


def test_no_resistor_at_the_input_is_no_limit(lanes):
    found = off(lanes().value("R11", "0"))
    assert found["input", "U1A"].measured == math.inf
    assert found["input", "U1A"].margin == -math.inf


def test_a_small_resistor_at_the_input_goes_over_its_limit(lanes):
    found = off(lanes().value("R11", "1.2k"))
    assert found["input", "U1A"].measured == pytest.approx(12.0 / 1188)
    assert found["input", "U1A"].margin == pytest.approx(1 - 10.101 / 10, abs=1e-4)


def test_lanes_that_share_a_socket_add_up_there(lanes):
    found = off(lanes(3, inputs=1))
    assert found["jack", "J10"].measured == pytest.approx(3 * 12.0 / 9900 + 12.6 / 990e3)
    assert found["rail", "V+"].measured == pytest.approx(3 * 12.0 / 9900)
    assert found["input", "U3A"].measured == pytest.approx(12.0 / 9900)


def test_a_chain_adds_up_down_from_the_socket(lanes):
    found = off(lanes(3, chain=True))
    each = 12.0 / 9900 + 12.6 / 990e3
    assert [found["jack", j].measured for j in ("J10", "J20", "J30")] == pytest.approx([3 * each, 2 * each, each])


def test_inside_the_loop_the_inverting_input_sees_the_socket(lanes):
    found = off(lanes(inside=True))
    assert found["input", "U1B"].measured == pytest.approx(12.0 / 9900)
    assert found["input", "U1B"].parts == ("U1", "R19")
    assert found["jack", "J11"].measured == pytest.approx(12.0 / 990 + 12.0 / 9900)
    # it is an output's socket, and not counted among what inputs put into the rails
    assert found["rail", "V+"].measured == pytest.approx(12.0 / 9900)


def test_more_than_the_quiescent_current_powers_the_board(lanes):
    found = off(lanes().value("R11", "3.3k"))
    assert found["rail", "V+"].measured > found["rail", "V+"].limit
    assert found["rail", "V+"].margin < 0


def test_single_supply_has_one_rail(lanes):
    found = off(lanes(single=True), Rails(5.0, 0.0, 0.05))
    assert [name for subject, name in found if subject == "rail"] == ["V+"]
    assert found["input", "U1A"].measured == pytest.approx((5.25 - 0.6) / 9900)
