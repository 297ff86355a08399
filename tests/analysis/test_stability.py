"""Phase margins of the bench's lanes: which case is the worst, and what mends and breaks them."""

from __future__ import annotations

import math

import pytest

from modgen.analysis.model import Stability
from modgen.analysis.stability import CABLES, LEAST_MARGIN, SECOND_POLE, SPREAD, stabilities
from modgen.formulas.stability import loaded_feedback, phase_margin
from modgen.spec.model import Signal

SIGNAL = Signal(-5.0, 5.0, 1e3, 100e3)


def found(bench):
    return stabilities(bench.board(), SIGNAL)


def test_assumptions_stand_as_they_are_stated():
    assert (LEAST_MARGIN, SECOND_POLE, SPREAD) == (45.0, 3.0, (0.5, 1.0, 2.0))
    assert (min(CABLES), max(CABLES)) == (0.0, 10e-9)


def test_two_results_of_each_lane(lanes):
    results = found(lanes(2))
    assert [(r.stage, r.channel, r.section) for r in results] == [
        ("input buffer", 1, "U1A"),
        ("output buffer, resistor outside the loop", 1, "U1B"),
        ("input buffer", 2, "U2A"),
        ("output buffer, resistor outside the loop", 2, "U2B"),
    ]
    assert results[0].parts == ("U1", "R12", "R13", "C10")
    assert results[1].parts == ("U1", "R14")


def test_the_isolating_resistor_by_hand(lanes):
    first = found(lanes())[0]
    # 2178 ohm is all the load there is at megahertz: |T| = 0.956 GBW/f, so 72 degrees from the second pole alone
    assert first.measured == pytest.approx(73.0, abs=0.2)
    assert first.output_resistance == 100.0
    assert [load for load, _ in first.sweep] == [0.0, 2.0]
    assert first.margin == pytest.approx(first.measured / 45 - 1)
    # nearly critical damping: next to no overshoot
    assert 0.001 < first.overshoot < 0.005


def test_without_isolation_the_glide_capacitor_leaves_next_to_nothing(lanes):
    first = found(lanes().value("R12", "0"))[0]
    assert first.load == 0.0
    assert first.output_resistance == 400.0
    assert first.measured < 1.0
    assert first.margin < -0.97
    assert first.overshoot > 0.95
    # 2 ohm, which the control may leave or not: a zero at 80 kHz, too late for crossovers at 40 to 80 kHz
    assert 25.0 < dict(first.sweep)[2.0] < LEAST_MARGIN


def test_the_end_of_the_control_isolates_only_where_it_is_guaranteed(lanes):
    bench = lanes().value("R12", "0")
    bench.shelf = bench.shelf.changed("pot", end_resistance=10e3)
    first = found(bench)[0]
    assert dict(first.sweep)[10e3] > 70.0
    assert first.measured < 1.0


def test_the_output_into_a_cable_is_the_worst_of_its_loads_and_resistances(lanes):
    second = found(lanes())[1]
    cases = [
        (
            phase_margin(lambda f, o=ohm, c=cable: loaded_feedback(f, o, [(990.0, c, 100e3)]), 25e3, 4e6, 12e6)[1],
            cable,
            ohm,
        )
        for cable in CABLES
        for ohm in (100.0, 200.0, 400.0)
    ]
    worst = min(cases)
    assert (second.measured, second.load, second.output_resistance) == pytest.approx(worst)
    assert dict(second.sweep)[10e-9] == pytest.approx(min(m for m, c, _ in cases if c == 10e-9))
    assert second.measured > 60.0


def test_an_output_without_a_resistor_cannot_drive_a_cable(lanes):
    bench = lanes()
    bench.move("J11", "T", "CH1_DRIVE")
    second = found(bench)[1]
    assert second.load == 10e-9
    assert second.measured < 10.0
    assert second.parts == ("U1",)


def test_more_outputs_load_more(lanes):
    one, three = found(lanes())[1], found(lanes(outputs=3))[1]
    assert three.measured < one.measured - 3.0
    assert three.parts == ("U1", "R14", "R15", "R16")


def test_inside_the_loop_the_compensation_decides(lanes):
    good = found(lanes(inside=True))[1]
    assert good.stage == "output buffer, resistor inside the loop"
    assert good.parts == ("U1", "R14", "R19", "C19")
    assert good.measured > 60.0
    bench = lanes(inside=True)
    del bench.parts["C19"]
    bad = found(bench)[1]
    # 10 kohm into the input's own 10 pF on top of the cable: it oscillates
    assert bad.measured < 0.0
    assert (bad.overshoot, bad.margin) == pytest.approx((1.0, bad.measured / 45 - 1))


def test_inside_the_loop_without_a_feedback_resistor_or_a_series_resistance(lanes):
    bench = lanes(inside=True).value("R14", "0").value("R19", "0")
    assert math.isfinite(found(bench)[1].measured)
    assert found(bench)[1].measured < 15.0


def test_margin_is_a_share_of_the_limit():
    at = Stability("input buffer", 1, "U1A", ("U1",), 0.0, 1.0, 1.0, 0.0, 45.0, 45.0, ())
    assert at.margin == 0.0
