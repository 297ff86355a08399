"""Shorted outputs of the bench's lanes by hand: ±12 V at 5 %, 1 kohm, 10 to 60 mA."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from modgen.analysis.power import rail_powers
from modgen.analysis.shorts import dissipations, rail_tops, shorts
from modgen.spec.model import Rails, Signal

RAILS = Rails(12.0, -12.0, 0.05)
SIGNAL = Signal(-5.0, 5.0, 1e3, 100e3)


def found(bench, rails=RAILS, signal=SIGNAL):
    board = bench.board()
    powers = rail_powers(board, rails, signal)
    results = shorts(board, powers, signal)
    return results, dissipations(board, powers, results)


def test_to_0_v_by_hand(lanes):
    ground, _ = found(lanes())[0]
    assert (ground.channel, ground.section, ground.net, ground.resistor) == (1, "U1B", "CH1_OUT", "R14")
    assert (ground.against, ground.voltage) == ("0 V", pytest.approx(12.6))
    # 12.6 mA, unless the amplifier stops at 10 mA
    assert (ground.current_least, ground.current_most) == pytest.approx((10e-3, 12.6e-3))
    assert ground.measured == pytest.approx(12.6e-3**2 * 1e3)
    assert (ground.limit, ground.margin) == pytest.approx((0.25, 1 - 0.15876 / 0.25))
    assert ground.package == pytest.approx(12.6**2 / 4e3)


def test_to_another_output_by_hand(lanes):
    _, other = found(lanes())[0]
    assert (other.against, other.voltage) == ("another output", pytest.approx(25.2))
    # through our 1 kohm and the neighbour's
    assert other.current_most == pytest.approx(12.6e-3)
    assert other.measured == pytest.approx(0.15876)
    assert other.package == pytest.approx(25.2**2 / 8e3)


def test_a_neighbour_without_a_resistor_burns_ours(lanes):
    _, other = found(lanes(), signal=replace(SIGNAL, source=0.0))[0]
    assert other.current_most == pytest.approx(25.2e-3)
    assert other.measured == pytest.approx(0.635, rel=1e-3)
    assert other.margin < -1.5


def test_the_limit_of_the_amplifier_stops_a_small_resistor(lanes):
    ground, other = found(lanes().value("R14", "100"))[0]
    assert (ground.current_least, ground.current_most) == (10e-3, 60e-3)
    assert ground.measured == pytest.approx(0.36)
    assert ground.package == pytest.approx(60e-3 * (12.6 - 6.0))
    # 25.2 V over 1.1 kohm stays below 60 mA
    assert other.current_most == pytest.approx(25.2 / 1100)


def test_no_resistor_is_only_the_amplifier(lanes):
    ground, _ = found(lanes().move("J11", "T", "CH1_DRIVE"))[0]
    assert (ground.resistor, ground.measured, ground.limit, ground.margin) == ("", 0.0, math.inf, 1.0)
    assert ground.package == pytest.approx(60e-3 * 12.6)


def test_every_output_is_looked_at(lanes):
    results, _ = found(lanes(2, outputs=3))
    assert [(r.channel, r.resistor) for r in results[::2]] == [
        (1, "R14"), (1, "R15"), (1, "R16"), (2, "R24"), (2, "R25"), (2, "R26"),
    ]  # fmt: skip


def test_package_by_hand(lanes):
    (package,) = found(lanes())[1]
    # two sections at 2.5 mA across 25.2 V
    assert package.quiescent == pytest.approx(0.126)
    assert (package.short, package.against) == (pytest.approx(79.38e-3), "another output")
    assert package.measured == pytest.approx(0.20538)
    assert (package.limit, package.margin) == pytest.approx((0.68, 1 - 0.20538 / 0.68))


def test_a_bare_output_burns_the_package(lanes):
    (package,) = found(lanes().move("J11", "T", "CH1_DRIVE"))[1]
    # 60 mA from 12.6 V straight into 0 V; the neighbour's 1 kohm would leave 0.159 W
    assert (package.against, package.short) == ("0 V", pytest.approx(0.756))
    assert package.measured == pytest.approx(0.882)
    assert package.margin == pytest.approx(1 - 0.882 / 0.68)


def test_a_package_without_outputs_only_rests(lanes):
    bench = lanes()
    pins = {"1": "IDLE", "2": "IDLE", "3": "0V", "4": "V-", "8": "V+"}
    bench.add("U9", "TL072", "tl072", pins)
    idle = found(bench)[1][1]
    assert (idle.package, idle.short, idle.against, idle.measured) == ("U9", 0.0, "", pytest.approx(0.126))


def test_single_supply(lanes):
    bench = lanes(single=True)
    rails = Rails(12.0, 0.0, 0.05)
    ground, other = found(bench, rails)[0]
    assert rail_tops(rail_powers(bench.board(), rails, SIGNAL)) == pytest.approx((12.6, 0.0))
    assert (ground.voltage, other.voltage) == pytest.approx((12.6, 12.6))
    assert other.current_most == pytest.approx(6.3e-3)
    assert found(bench, rails)[1][0].quiescent == pytest.approx(0.063)


def test_lopsided_rails_count_by_the_higher(lanes):
    ground, other = found(lanes(), Rails(9.0, -15.0, 0.0))[0]
    assert (ground.voltage, other.voltage) == (15.0, 24.0)
