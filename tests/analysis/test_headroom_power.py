"""Rails, their current, and what is left for the signal: design section 11."""

from __future__ import annotations

from dataclasses import replace

import pytest

from modgen.analysis.headroom import headrooms
from modgen.analysis.power import charging_current, drop, rail_powers
from modgen.spec.model import Accuracy, Rails, Signal

RAILS = Rails(12.0, -12.0, 0.05)
SIGNAL = Signal(-5.0, 5.0, 1e3, 100e3)
BUDGET = Accuracy(5 / 1200, 30e-3)


def powers_of(bench, rails=RAILS, signal=SIGNAL):
    return rail_powers(bench.board(), rails, signal)


def headroom_of(bench, rails=RAILS, signal=SIGNAL):
    board = bench.board()
    found = headrooms(board, rail_powers(board, rails, signal), signal, BUDGET)
    return {(h.stage, h.subject): h for h in found}


def test_rails_by_hand(lanes):
    positive, negative = powers_of(lanes())
    assert (positive.name, positive.diode, negative.name, negative.diode) == ("V+", "D1", "V-", "D2")
    assert (positive.bus_nominal, positive.bus_low, positive.bus_high) == pytest.approx((12.0, 11.4, 12.6))
    assert (negative.bus_nominal, negative.bus_low, negative.bus_high) == pytest.approx((-12.0, -11.4, -12.6))
    # 0.2 V typical and 0.3 V greatest at this current; none at all at the high end
    assert positive.protected_nominal == pytest.approx(11.8)
    assert positive.protected_low == pytest.approx(11.1)
    assert positive.protected_high == pytest.approx(12.6)
    assert negative.protected_low == pytest.approx(-11.1)


def test_current_at_rest_and_with_the_outputs_at_the_end_of_the_span(lanes):
    positive, negative = powers_of(lanes(4))
    assert positive.current_typical == pytest.approx(8 * 1.4e-3)
    # 5 V into 990 ohm and 100 kohm from each of four outputs
    assert positive.current_max == pytest.approx(8 * 2.5e-3 + 4 * 5 / 100_990)
    assert negative.current_max == pytest.approx(positive.current_max)


def test_extra_outputs_draw_too_and_a_one_sided_signal_only_from_its_side(lanes):
    positive, negative = powers_of(lanes(outputs=3), signal=replace(SIGNAL, low=0.0))
    assert positive.current_max == pytest.approx(5e-3 + 3 * 5 / 100_990)
    assert negative.current_max == pytest.approx(5e-3)


def test_idle_sections_draw_and_a_package_on_other_rails_does_not(lanes):
    bench = lanes()
    pins = {"1": "IDLE", "2": "IDLE", "3": "0V", "4": "V-", "8": "V+"}
    bench.add("U9", "TL072", "tl072", pins)
    assert powers_of(bench)[0].current_typical == pytest.approx(4 * 1.4e-3)
    bench.move("U9", "8", "OTHER")
    assert powers_of(bench)[0].current_typical == pytest.approx(2 * 1.4e-3)
    assert powers_of(bench)[1].current_typical == pytest.approx(4 * 1.4e-3)


def test_peak_charges_every_glide_capacitor_at_once(lanes):
    board = lanes(2).board()
    # 10 V across 2.2 kohm less 1 %
    assert charging_current(board, board.channels[0], SIGNAL) == pytest.approx(10 / 2178)
    positive = powers_of(lanes(2))[0]
    assert positive.current_peak == pytest.approx(positive.current_max + 2 * 10 / 2178)


def test_peak_is_limited_by_the_amplifier(lanes):
    for value in ("100", "0"):
        board = lanes().value("R12", value).board()
        assert charging_current(board, board.channels[0], SIGNAL) == 60e-3


def test_single_supply_has_one_rail(lanes):
    (only,) = powers_of(lanes(single=True), Rails(12.0, 0.0, 0.05))
    assert (only.name, only.diode) == ("V+", "D1")


def test_a_diode_the_wrong_way_round_or_missing_is_no_diode(lanes):
    bench = lanes().move("D1", "1", "BUS+").move("D1", "2", "V+")
    positive, _ = powers_of(bench)
    assert positive.diode == ""
    assert positive.protected_low == pytest.approx(11.4)


def test_a_clamp_to_ground_is_not_the_rail_diode(lanes):
    bench = lanes()
    bench.add("D0", "D", "schottky", {"1": "V+", "2": "0V"})
    assert powers_of(bench)[0].diode == "D1"


def test_the_rail_is_judged_at_the_greatest_current_that_stays(lanes):
    bench = lanes()
    bench.shelf = bench.shelf.changed("schottky", forward=((1e-3, 0.2, 0.3), (10e-3, 0.3, 0.5)))
    positive = powers_of(bench)[0]
    # 5.05 mA: 0.3 V + 0.2 V of log10(5.05); 2.8 mA typical: 0.2 V + 0.1 V of log10(2.8)
    assert positive.protected_low == pytest.approx(11.4 - 0.3 - 0.2 * 0.7033, abs=1e-4)
    assert positive.protected_nominal == pytest.approx(12.0 - 0.2 - 0.1 * 0.4472, abs=1e-4)


def test_drop_is_read_at_the_current(lanes):
    bench = lanes()
    bench.shelf = bench.shelf.changed("schottky", forward=((1e-3, 0.2, 0.3), (100e-3, 0.4, 0.6)))
    board = bench.board()
    assert drop(board, "D1", 1e-3, worst=False) == pytest.approx(0.2)
    # half way in the logarithm
    assert drop(board, "D1", 10e-3, worst=True) == pytest.approx(0.45)
    assert drop(board, "", 10e-3, worst=True) == 0.0


def test_headroom_by_hand(lanes):
    found = headroom_of(lanes())
    assert list(found) == [
        ("input buffer", "common mode"),
        ("input buffer", "swing"),
        ("output buffer", "common mode"),
        ("output buffer", "swing"),
    ]
    common = found["input buffer", "common mode"]
    assert (common.can_low, common.can_high) == pytest.approx((-7.1, 7.1))
    assert common.margin == pytest.approx(2.1)
    swing = found["output buffer", "swing"]
    assert (swing.can_low, swing.can_high) == pytest.approx((-8.1, 8.1))
    # both offsets and both bias terms stand on top of the span
    assert swing.needed_high == pytest.approx(5.0 + 20e-3 + 200e-12 * 1_213_321, rel=1e-6)
    assert found["output buffer", "common mode"].needed_high == pytest.approx(5.01, abs=1e-5)
    assert common.parts == ("U1",)
    # a split supply passes 0 V and gets no allowance
    assert {h.allowance for h in found.values()} == {0.0}


def test_ten_volts_do_not_fit(lanes):
    found = headroom_of(lanes(), signal=replace(SIGNAL, low=-10.0, high=10.0))
    assert all(h.margin < 0 for h in found.values())


def test_lopsided_rails_bind_on_their_own_side(lanes):
    found = headroom_of(lanes(), Rails(15.0, -9.0, 0.0))
    common = found["input buffer", "common mode"]
    assert (common.can_low, common.can_high) == pytest.approx((-4.7, 10.7))
    assert common.margin == pytest.approx(-0.3)


def test_inside_the_loop_the_amplifier_makes_up_for_the_resistor(lanes):
    plain = headroom_of(lanes())["output buffer", "swing"].needed_high
    # 1.01 kohm into 100 kohm; the feedback resistor's bias adds 2 uV
    inside = headroom_of(lanes(inside=True))["output buffer", "swing"]
    assert inside.needed_high == pytest.approx((plain + 200e-12 * 10.1e3) * 1.0101, rel=1e-9)
    assert inside.needed_low == pytest.approx(-inside.needed_high)


def test_a_single_supply_may_miss_the_offset_budget_at_0_v(lanes):
    bench = lanes(single=True, amplifier_key="lm358")
    found = headroom_of(bench, Rails(12.0, 0.0, 0.05), replace(SIGNAL, low=0.0))
    swing = found["output buffer", "swing"]
    assert (swing.needed_low, swing.can_low, swing.allowance) == pytest.approx((0.0, 0.02, 30e-3))
    assert swing.shortfall == pytest.approx(0.02)
    assert swing.margin == pytest.approx(0.01)
    # the common mode gets no such allowance
    assert found["input buffer", "common mode"].allowance == 0.0
    assert found["input buffer", "common mode"].margin == pytest.approx(0.0)


def test_a_jfet_part_on_a_single_supply_fails_at_the_bottom(lanes):
    found = headroom_of(lanes(single=True), Rails(12.0, 0.0, 0.05), replace(SIGNAL, low=0.0))
    assert found["input buffer", "common mode"].margin == pytest.approx(-4.0)
    assert found["output buffer", "swing"].margin == pytest.approx(-2.97)


def test_of_two_forms_of_one_type_the_worse_figure_counts(lanes):
    bench = lanes(2)
    bench.shelf.records["other"] = replace(bench.shelf.records["tl072"], swing_low=3.5, common_mode_high=4.5)
    value, _, pins, fields = bench.parts["U2"]
    bench.parts["U2"] = (value, "other", pins, fields)
    found = headroom_of(bench)
    assert found["output buffer", "swing"].can_low == pytest.approx(-7.6)
    assert found["input buffer", "common mode"].can_high == pytest.approx(6.6)
    assert found["input buffer", "common mode"].parts == ("U1", "U2")


def test_two_types_are_judged_apart(lanes):
    bench = lanes(2)
    value, _, pins, fields = bench.parts["U2"]
    bench.parts["U2"] = (value, "lm358", pins, fields)
    board = bench.board()
    found = headrooms(board, rail_powers(board, RAILS, SIGNAL), SIGNAL, BUDGET)
    common = [(h.parts, round(h.can_high, 6)) for h in found if h.subject == "common mode"]
    assert common == [(("U2",), 9.6), (("U1",), 7.1), (("U2",), 9.6), (("U1",), 7.1)]
