"""Budgets of the lane worked by hand in design section 11, term by term, and what makes each one move."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from modgen.analysis.accuracy import accuracy_budget, drift_terms, offset_terms, scale_terms
from modgen.analysis.offset import section_bias
from modgen.analysis.scale import terminators_seen
from modgen.spec.model import Accuracy, Signal

SIGNAL = Signal(-5.0, 5.0, 1e3, 100e3, pitch=True)
BUDGET = Accuracy(5 / 1200, 30e-3)
CENTS = 1200.0


def scale_of(bench, signal=SIGNAL, lane=0):
    board = bench.board()
    return {t.name: t.worst for t in scale_terms(board, board.channels[lane], signal)}


def offset_of(bench, temperature=25.0, signal=SIGNAL):
    board = bench.board()
    return {t.name: t.worst for t in offset_terms(board, board.channels[0], signal, temperature)}


def test_scale_by_hand_in_cents_per_octave(lanes):
    # parts without tolerance, as the sums by hand have them
    found = {name: CENTS * worst for name, worst in scale_of(lanes().exact()).items()}
    assert found["source into terminator"] == pytest.approx(1.20, abs=0.005)
    both = ("input buffer", "output buffer")
    assert sum(found[f"common-mode rejection, {b}"] for b in both) == pytest.approx(0.76, abs=0.005)
    assert sum(found[f"open-loop gain, {b}"] for b in both) == pytest.approx(0.10, abs=0.005)
    assert found["insulation of the glide capacitor"] == pytest.approx(0.04, abs=0.005)
    assert found["output resistor into load"] == pytest.approx(11.88, abs=0.005)


@pytest.mark.parametrize(("value", "cents"), [("220", 2.63), ("330", 3.95), ("1k", 11.88)])
def test_output_resistor_into_100_kohm(lanes, value, cents):
    found = scale_of(lanes().exact().value("R14", value))
    assert CENTS * found["output resistor into load"] == pytest.approx(cents, abs=0.005)


def test_worst_case_takes_the_bad_end_of_each_tolerance(lanes):
    found = scale_of(lanes())
    assert found["source into terminator"] == pytest.approx(1e3 / (1e3 + 0.99e6))
    assert found["output resistor into load"] == pytest.approx(1010 / 101_010)
    resistance = 1.2e6 + 2222
    assert found["insulation of the glide capacitor"] == pytest.approx(resistance / (resistance + 3e10))


def test_the_largest_of_several_output_resistors_counts(lanes):
    found = scale_of(lanes(outputs=2).exact().value("R15", "2.2k"))
    assert found["output resistor into load"] == pytest.approx(2200 / 102_200)


def test_inside_the_loop_the_output_resistor_costs_next_to_nothing(lanes):
    found = scale_of(lanes(inside=True).exact())
    # (1 kohm + 200 ohm) / 100 kohm / 25 V/mV
    assert found["output resistor into load"] == pytest.approx(4.8e-7)


def test_a_chain_puts_every_terminator_downstream_on_one_source(lanes):
    bench = lanes(4, chain=True)
    board = bench.board()
    assert terminators_seen(board, "CH1_IN") == ("R10", "R20", "R30", "R40")
    assert terminators_seen(board, "CH3_IN") == ("R30", "R40")
    # every lane can be fed from the first socket, so every lane has the whole error
    expected = 1e3 / (1e3 + 0.99e6 / 4)
    for lane in range(4):
        assert scale_of(bench, lane=lane)["source into terminator"] == pytest.approx(expected)


def test_ground_normalling_and_shared_inputs_see_one_terminator(lanes):
    for bench in (lanes(3), lanes(3, inputs=1, chain=True)):
        for lane in range(3):
            found = scale_of(bench, lane=lane)["source into terminator"]
            assert found == pytest.approx(1e3 / (1e3 + 0.99e6))


def test_insulation_is_the_lower_of_both_limits(lanes):
    bench = lanes().exact()
    bench.shelf = bench.shelf.changed("c-pp", insulation_resistance=1e9)
    found = scale_of(bench)["insulation of the glide capacitor"]
    assert found == pytest.approx(1.0022e6 / (1.0022e6 + 1e9))
    # at a tenth of the capacitance the time constant allows ten times the resistance
    bench = lanes().exact().value("C10", "100n")
    assert scale_of(bench)["insulation of the glide capacitor"] == pytest.approx(1.0022e6 / (1.0022e6 + 3e11))


def test_offset_by_hand(lanes):
    found = offset_of(lanes().exact())
    assert found["offset voltage, input buffer"] == found["offset voltage, output buffer"] == 10e-3
    assert found["bias current, output buffer"] == pytest.approx(0.2e-3, abs=0.005e-3)
    # 1 kohm beside 1 Mohm, and 10 kohm
    assert found["bias current, input buffer"] == pytest.approx(200e-12 * (1e9 / 1.001e6 + 10e3))
    assert 1e3 * sum(found.values()) == pytest.approx(20.2, abs=0.05)


def test_hot_the_bias_is_sixteen_times_as_much_and_offsets_have_drifted(lanes):
    cold, hot = offset_of(lanes().exact()), offset_of(lanes().exact(), 65.0)
    assert hot["bias current, output buffer"] == pytest.approx(16 * cold["bias current, output buffer"])
    assert 1e3 * hot["bias current, output buffer"] == pytest.approx(3.2, abs=0.05)
    assert hot["offset voltage, input buffer"] == pytest.approx(10.4e-3)


def test_bias_that_does_not_double_stays(lanes):
    section = lanes(amplifier_key="lm358").board().sections[0]
    assert section_bias(section, 65.0) == section_bias(section, 25.0) == 250e-9
    jfet = lanes().board().sections[0]
    assert section_bias(jfet, 35.0) == pytest.approx(400e-12)
    # a limit at 25 degC is not improved on in the cold
    assert section_bias(jfet, 0.0) == pytest.approx(200e-12)


def test_feedback_resistor_carries_bias_too(lanes):
    found = offset_of(lanes(inside=True).exact())
    assert found["bias current, feedback resistor"] == pytest.approx(200e-12 * 10e3)
    assert "bias current, feedback resistor" not in offset_of(lanes())


def test_bipolar_bias_behind_a_megohm_is_a_quarter_volt(lanes):
    found = offset_of(lanes(amplifier_key="lm358").exact())
    assert found["bias current, output buffer"] == pytest.approx(250e-9 * 1.0022e6)


def test_an_electrolytic_leaks_through_the_control(lanes):
    # 10 uF 25 V leaks 3 uA by the floor; through 1.0022 Mohm that is 3 V
    found = offset_of(lanes(back_to_back=True).exact())
    assert found["leakage of the glide capacitor"] == pytest.approx(3e-6 * 1.0022e6)
    assert "insulation of the glide capacitor" not in scale_of(lanes(back_to_back=True))
    # 0.01 CV rules at 22 uF and 25 V
    bench = lanes(back_to_back=True).exact().value("C10", "22u").value("C11", "22u")
    assert offset_of(bench)["leakage of the glide capacitor"] == pytest.approx(5.5e-6 * 1.0022e6)
    # and the rating that the netlist states rules over the record's
    bench.parts["C10"][3]["voltage"] = "50V"
    assert offset_of(bench)["leakage of the glide capacitor"] == pytest.approx(11e-6 * 1.0022e6)


def test_sums_and_roots_are_of_the_terms(lanes):
    found = accuracy_budget(lanes().board(), SIGNAL, BUDGET)
    scale = [t.worst for t in found.terms if t.kind == "scale"]
    offset = [t.worst for t in found.terms if t.kind == "offset"]
    assert len(scale) == 7
    assert len(offset) == 4
    assert found.scale_worst == pytest.approx(sum(scale))
    assert found.scale_rss == pytest.approx(math.sqrt(sum(x * x for x in scale)))
    assert found.offset_worst == pytest.approx(sum(offset))
    assert found.offset_rss == pytest.approx(math.sqrt(sum(x * x for x in offset)))
    assert (found.scale_budget, found.offset_budget, found.hot) == (5 / 1200, 30e-3, 65.0)
    # 2 x (10 + 0.4) mV, and sixteen times 200 pA through 1 202 222 and 11 099 ohm
    assert found.offset_hot == pytest.approx(20.8e-3 + 3.2e-9 * 1_213_321, rel=1e-5)


def test_the_worst_lane_is_the_one_that_is_reported(lanes):
    found = accuracy_budget(lanes(3).value("R24", "2.2k").board(), SIGNAL, BUDGET)
    (term,) = [t for t in found.terms if t.name == "output resistor into load"]
    assert term.source == "R24 into 100 kΩ"
    assert term.worst == pytest.approx(2222 / 102_222)
    assert accuracy_budget(lanes(3).board(), SIGNAL, BUDGET).scale_worst < found.scale_worst


def test_every_term_says_where_it_comes_from_and_what_would_help(lanes):
    for term in accuracy_budget(lanes(inside=True).board(), SIGNAL, BUDGET).terms:
        assert term.formula
        assert term.source
        assert term.remedy


def test_a_board_without_lanes_has_no_terms(lanes):
    found = accuracy_budget(lanes().move("C10", "2", "").board(), SIGNAL, BUDGET)
    assert (found.terms, found.scale_worst, found.offset_hot) == ((), 0.0, 0.0)


def test_a_source_without_resistance_loses_nothing(lanes):
    assert scale_of(lanes(), replace(SIGNAL, source=0.0))["source into terminator"] == 0.0


def test_both_ends_of_the_stated_span(lanes):
    budget = replace(BUDGET, temperature=(5.0, 45.0))
    found = accuracy_budget(lanes().exact().board(), SIGNAL, budget)
    assert (found.cold, found.hot) == (5.0, 45.0)
    resistance = 1.0022e6 + 1e9 / 1.001e6 + 10e3
    # either way the offsets drift by 20 K; the bias doubles twice one way and stays the other
    assert found.offset_cold == pytest.approx(2 * 10.2e-3 + 200e-12 * resistance, rel=1e-6)
    assert found.offset_hot == pytest.approx(2 * 10.2e-3 + 800e-12 * resistance, rel=1e-6)
    # what is judged is at 25 degC, whatever the span
    assert found.offset_worst == accuracy_budget(lanes().exact().board(), SIGNAL, BUDGET).offset_worst


def test_the_span_may_lie_on_one_side_of_room_temperature(lanes):
    found = accuracy_budget(lanes().exact().board(), SIGNAL, replace(BUDGET, temperature=(-20.0, 0.0)))
    assert found.offset_cold - found.offset_hot == pytest.approx(2 * 10e-6 * 20)
    assert found.offset_hot == pytest.approx(found.offset_worst + 2 * 10e-6 * 25)


def drift_of(bench, cold=15.0, hot=65.0):
    board = bench.board()
    return {t.name: t for t in drift_terms(board, board.channels[0], SIGNAL, cold, hot)}


def test_drift_between_the_ends_by_hand(lanes):
    found = drift_of(lanes(inside=True).exact())
    # 10 uV/K over 50 K; 200 pA is 100 pA at 15 degC and 3.2 nA at 65 degC
    assert found["offset voltage, input buffer"].worst == pytest.approx(0.5e-3)
    assert found["offset voltage, output buffer"].worst == pytest.approx(0.5e-3)
    assert found["bias current, output buffer"].worst == pytest.approx(3.1e-9 * 1.0022e6)
    assert found["bias current, input buffer"].worst == pytest.approx(3.1e-9 * (1e9 / 1.001e6 + 10e3))
    assert found["bias current, feedback resistor"].worst == pytest.approx(3.1e-9 * 10e3)
    assert found["bias current, output buffer"].source == ("U1B: 100 pA at 15 °C, 3.2 nA at 65 °C, through 1 MΩ")
    budget = accuracy_budget(lanes(inside=True).exact().board(), SIGNAL, BUDGET)
    assert budget.drift == tuple(found.values())
    assert {term.kind for term in budget.drift} == {"drift"}
    assert budget.drift_worst == pytest.approx(sum(t.worst for t in found.values()))
    assert budget.drift_rss == pytest.approx(math.sqrt(sum(t.worst**2 for t in found.values())))


def test_inputs_on_one_source_drift_together(lanes):
    found = drift_of(lanes(3, inputs=1).exact())
    assert found["bias current, inputs that share the source"].worst == pytest.approx(2 * 3.1e-9 * 1e9 / 1.001e6)


def test_what_does_not_move_is_not_listed(lanes):
    assert list(drift_of(lanes(amplifier_key="lm358"))) == [
        "offset voltage, input buffer",
        "offset voltage, output buffer",
    ]
    assert drift_of(lanes(), 30.0, 30.0) == {}
    with pytest.raises(ValueError, match=r"^from 65 degC to 15 degC: the colder end comes first$"):
        drift_of(lanes(), 65.0, 15.0)


def test_the_lane_that_drifts_most_is_the_one_that_is_reported(lanes):
    found = accuracy_budget(lanes(3).value("R23", "2.2M").board(), SIGNAL, BUDGET)
    assert found.largest_drift.source.startswith("U2B: ")
    assert found.largest_drift.worst == pytest.approx(3.1e-9 * (2.64e6 + 2222))


def test_the_largest_terms_are_named_with_what_would_reduce_them(lanes):
    found = accuracy_budget(lanes().board(), SIGNAL, BUDGET)
    assert (found.largest_scale.name, found.largest_scale.remedy) == (
        "output resistor into load",
        "the output resistor inside the feedback loop, or a smaller one",
    )
    assert (found.largest_offset.name, found.largest_offset.remedy) == (
        "offset voltage, input buffer",
        "an amplifier with less offset",
    )
    assert (found.largest_drift.name, found.largest_drift.remedy) == (
        "bias current, output buffer",
        "an amplifier with less bias current, or a smaller control with a larger capacitor",
    )
    inside = accuracy_budget(lanes(inside=True).board(), SIGNAL, BUDGET)
    assert inside.largest_scale.name == "source into terminator"


def test_nothing_is_largest_of_nothing(lanes):
    found = accuracy_budget(lanes().move("C10", "2", "").board(), SIGNAL, BUDGET)
    assert (found.largest_scale, found.largest_offset, found.largest_drift) == (None, None, None)
    assert (found.drift, found.drift_worst, found.offset_cold) == ((), 0.0, 0.0)


def test_a_smaller_input_resistor_is_what_helps_the_input(lanes):
    board = lanes(inside=True).board()
    remedies = {t.name: t.remedy for t in offset_terms(board, board.channels[0], SIGNAL)}
    assert remedies["bias current, input buffer"] == (
        "an amplifier with less bias current, or a smaller resistor before its input"
    )
    assert remedies["bias current, feedback resistor"] == (
        "an amplifier with less bias current, or a smaller feedback resistor"
    )
