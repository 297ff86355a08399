"""Bring-up and bench tests: the figures on the page are the design's own."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from modgen.analysis.model import Term
from modgen.chain import run
from modgen.outputs import benchtest
from modgen.outputs.assembly import assembly_html
from modgen.outputs.boardfacts import loads, records_of, reservoirs, supply_pins
from modgen.outputs.bringup import before_power, current_limit, rails_table
from modgen.outputs.faultfinding import fault_table

SPECS = sorted((Path(__file__).parents[2] / "specs").glob("*.yaml"))


def plain(text) -> str:
    return str(text).replace("\u00a0", " ").replace("\u2212", "-").replace("\u2013", "-")


def cells(table):
    return [tuple(plain(cell) for cell in row if isinstance(cell, str)) for row in table.rows]


@pytest.fixture
def single(job):
    """The small module as if on one rail: what the words depend on, not a circuit."""
    swing = replace(job.analyses.headroom[0], stage="output buffer", subject="swing", can_low=0.025, needed_low=0.0)
    analyses = replace(job.analyses, rails=job.analyses.rails[:1], headroom=(swing,))
    spec = replace(
        job.spec,
        rails=replace(job.spec.rails, negative=0.0),
        signal=replace(job.spec.signal, low=0.0, high=4.0),
    )
    return replace(job, spec=spec, analyses=analyses)


@pytest.mark.parametrize(
    ("current", "limit"), [(0.0, 0.01), (9.9e-3, 0.01), (10e-3, 0.02), (20.2e-3, 0.03), (0.119, 0.12)]
)
def test_limit_is_the_next_ten_milliamperes_above(current, limit):
    assert current_limit(current) == pytest.approx(limit)


def test_reservoirs_are_what_the_netlist_has_on_a_rail(job):
    records = records_of(job)
    refs, total = reservoirs(job, records, job.analyses.rails[0])
    assert refs == ("C2", "C5", "C7")
    assert total == pytest.approx(10.2e-6)
    refs, total = reservoirs(job, records, job.analyses.rails[1])
    assert refs == ("C3", "C6", "C8")
    assert total == pytest.approx(10.2e-6)


def test_no_resistor_loads_a_rail_of_this_circuit_and_one_that_does_is_named(job):
    records = records_of(job)
    rail = job.analyses.rails[0]
    assert loads(job, records, rail) == ()
    nets = tuple(replace(net, pins=(*net.pins, ("R1", "9"))) if net.name == "V+" else net for net in job.netlist.nets)
    loaded = replace(job, netlist=replace(job.netlist, nets=nets))
    assert loads(loaded, records, rail) == ("R1",)
    row = cells(before_power(loaded, records))[4]
    assert row[2].endswith("R1 load the rail: no less than they make together")


def test_supply_pins_are_grouped(job):
    records = records_of(job)
    assert plain(supply_pins(job, records, "V+")) == "U1, U2 pin 8"
    assert plain(supply_pins(job, records, "V-")) == "U1, U2 pin 4"
    assert supply_pins(job, records, "0V") == ""


def test_before_power(job):
    assert cells(before_power(job, records_of(job)))[1:] == [
        ("0 V through, ohms", "J5 pins 3 to 8 to the sleeve of J1-J4", "less than 1 Ω"),
        (
            "D1 the right way round, diode range",
            "red lead on BUS+, black on V+; BUS+ is J5 pins 9, 10",
            "one drop (a good part drops 200 mV, at most 300 mV, at 10 mA; the meter sends about 1 mA); "
            "with the leads exchanged, open",
        ),
        (
            "D2 the right way round, diode range",
            "red lead on V-, black on BUS-; BUS- is J5 pins 1, 2",
            "one drop (a good part drops 200 mV, at most 300 mV, at 10 mA; the meter sends about 1 mA); "
            "with the leads exchanged, open",
        ),
        (
            "V+ to 0 V, ohms, packages out",
            "U1, U2 pin 8; red lead on the rail, black on 0 V",
            "starts low and rises past 1 kΩ while C2, C5, C7 (10.2 µF together) charge from the meter; "
            "no resistor of this design is on the rail",
        ),
        (
            "V- to 0 V, ohms, packages out",
            "U1, U2 pin 4; red lead on 0 V, black on the rail",
            "starts low and rises past 1 kΩ while C3, C6, C8 (10.2 µF together) charge from the meter; "
            "no resistor of this design is on the rail",
        ),
        ("Rail to rail, ohms, packages out", "red lead on V+, black on V-", "rises past 1 kΩ too, into 5.1 µF"),
    ]


def test_packages_that_cannot_be_left_out_change_the_limit(job):
    flat = tuple(
        replace(p, record=replace(p.record, mount="surface")) if p.role == "amplifier" else p for p in job.design.parts
    )
    flat_job = replace(job, design=replace(job.design, parts=flat))
    row = cells(before_power(flat_job, records_of(flat_job)))[4]
    assert row[0] == "V+ to 0 V, ohms, packages on the board"
    assert "rises past 100 Ω" in row[2]
    page = assembly_html(flat_job).decode()
    assert "The packages are soldered already" in page
    assert "Packages out: once" not in page


def test_rails_are_those_of_the_analyses(job):
    assert cells(rails_table(job, records_of(job))) == [
        ("V+", "+12 V", "20 mA", "U1, U2 pin 8", "+11.8 V (+11.1 V to +12.4 V)", "5.6 mA, at most 10 mA"),
        ("V-", "-12 V", "20 mA", "U1, U2 pin 4", "-11.8 V (-11.1 V to -12.4 V)", "5.6 mA, at most 10 mA"),
    ]


def test_offset_limit_is_the_worst_case_of_the_budget(job):
    assert benchtest.output_bounds(job) == (-0.02, 0.02)
    assert cells(benchtest.path_table(job))[1] == ("2", "J3", "J4", "-20 mV to +20 mV")
    assert plain(benchtest.offset_words(job)) == (
        "Every output stays within ±20 mV of 0 V, the worst case of this design; the offset is at most ±20 mV at 25 °C "
        "(budget ±200 mV; at 65 °C up to ±30 mV)."
    )


def test_single_supply_outputs_stop_where_the_swing_begins(single):
    assert benchtest.output_bounds(single) == (0.0, 0.025)
    assert plain(benchtest.offset_words(single)).startswith(
        "Every output stays between 0 V and 25 mV, the worst of its offset and of where its swing begins;"
    )


def test_scale_is_measured_where_the_outputs_reach(job, single):
    assert benchtest.scale_levels(job) == (-5.0, 5.0)
    assert benchtest.scale_levels(single) == pytest.approx((0.4, 4.0))


def test_shared_inputs_are_named(job):
    shared = replace(job, spec=replace(job.spec, jacks=replace(job.spec.jacks, inputs=1)))
    assert cells(benchtest.path_table(shared))[1][1] == "J1 (shared with channel 1)"


def test_glide_limits_are_those_of_the_analyses(job):
    channel = job.analyses.glide[1]
    assert cells(benchtest.glide_table(job))[3:] == [
        ("2, fully anticlockwise", channel.control, "4.84 ms", "4.5 ms", "5.2 ms"),
        ("2, middle", channel.control, "334 ms", "250 ms", "420 ms"),
        ("2, fully clockwise", channel.control, "2.2 s", "1.67 s", "2.77 s"),
    ]


def test_wave_lasts_five_of_the_longest_time_constants(job):
    # 5 x 1.0022 s, and the slowest board of the tolerance is 2.77/2.2 slower
    assert benchtest.hold_time(job) == pytest.approx(5 * 1.0022 * 2.77 / 2.2)


def test_settling_that_takes_longer_than_that_sets_the_wave(job):
    slow = replace(job.analyses.glide[0], longest=replace(job.analyses.glide[0].longest, nominal=7.0, high=8.8))
    changed = replace(job, analyses=replace(job.analyses, glide=(slow,)))
    assert benchtest.hold_time(changed) == pytest.approx(1.5 * 8.8)


@pytest.mark.parametrize(
    ("measure", "words"),
    [
        ("rise", "from 10 % to 90 % of the step"),
        ("time-constant", "from the start of the step until 63.2 % of it is done"),
        (
            "settle",
            "from the start of a step of 1 V until the output stays within 50 mV of where it ends",
        ),
    ],
)
def test_measure_in_words(job, measure, words):
    glide = replace(job.spec.glide, measure=measure, step=1.0, within=0.05)
    changed = replace(job, spec=replace(job.spec, glide=glide))
    assert plain(benchtest.measure_words(changed)) == words
    assert benchtest.wave_levels(changed) == ((0.0, 1.0) if measure == "settle" else (-5.0, 5.0))


def test_step_that_does_not_fit_above_0v_starts_at_the_low_end(job):
    glide = replace(job.spec.glide, measure="settle", step=8.0)
    assert benchtest.wave_levels(replace(job, spec=replace(job.spec, glide=glide))) == (-5.0, 3.0)


def with_terms(job, *terms, worst):
    """The job with these scale terms; ``worst`` is their sum."""
    budget = replace(
        job.analyses.accuracy,
        terms=tuple(Term("scale", name, size, "", "", "") for name, size in terms),
        scale_worst=worst,
    )
    return replace(job, analyses=replace(job.analyses, accuracy=budget))


def test_scale_expects_what_source_and_load_take(job):
    # chain of two, 330 ohm into 100 kilohm; 1 kilohm into 1 megohm, and into two of them from the first input
    job = with_terms(job, ("source into terminator", 0.002), ("common-mode rejection, input buffer", 3e-4),
                     ("output resistor into load", 0.0033), worst=0.0056)  # fmt: skip
    loaded = 1 - 330 / 100_330
    first, second = (benchtest.scale_reading(job, channel) for channel in (1, 2))
    assert first.expected == pytest.approx(10 * loaded * (1 - 1e3 / 501e3))
    assert second.expected == pytest.approx(10 * loaded * (1 - 1e3 / 1001e3))
    # with everything at its worst, and with a source of nothing, a resistor 1 % low and rejection the other way
    assert (first.low, second.low) == pytest.approx((10 * 0.9944, 10 * 0.9944))
    assert first.high == second.high == pytest.approx(10 * (1 - 326.7 / 100_326.7 + 3e-4))


def test_a_missing_load_is_over_the_limit(job):
    job = with_terms(job, ("common-mode rejection, output buffer", 3e-4), worst=0.0056)
    reading = benchtest.scale_reading(job, 2)
    unloaded = 10 * (1 - 1e3 / 1001e3)
    assert unloaded > reading.high > reading.expected > reading.low


def test_inside_the_loop_the_load_takes_nothing(job):
    inside = replace(job, design=replace(job.design, values=replace(job.design.values, inside_loop=True)))
    inside = with_terms(inside, ("common-mode rejection, input buffer", 6e-4), worst=0.0026)
    reading = benchtest.scale_reading(inside, 2)
    assert reading.expected == pytest.approx(10 * (1 - 1e3 / 1001e3))
    assert reading.high == pytest.approx(10.006)
    note = plain(benchtest.scale_table(inside).note)
    assert note.endswith("The load counts for nothing here: the output resistor stands inside the feedback loop.")


def test_grounded_inputs_load_the_source_alone(job):
    ground = replace(job, spec=replace(job.spec, normalling="ground"))
    assert benchtest.scale_reading(ground, 1).expected == benchtest.scale_reading(job, 2).expected


def test_no_limit_is_nearer_than_a_meter_can_tell(job):
    exact = replace(job.design.values, inside_loop=True)
    exact = replace(job, design=replace(job.design, values=exact))
    exact = replace(exact, spec=replace(exact.spec, signal=replace(exact.spec.signal, source=0.0)))
    reading = benchtest.scale_reading(with_terms(exact, worst=0.0), 1)
    assert (reading.low, reading.expected, reading.high) == pytest.approx((9.999, 10.0, 10.001))
    accurate = replace(job.analyses.accuracy, offset_worst=0.2e-3)
    accurate = replace(job, analyses=replace(job.analyses, accuracy=accurate))
    assert benchtest.output_bounds(accurate) == (-1e-3, 1e-3)
    assert plain(benchtest.offset_words(accurate)).startswith(
        "Every output stays within ±1 mV of 0 V, which is as near as most meters can tell; "
        "the offset is at most ±200 µV at 25 °C"
    )


def test_scale_limits_have_four_digits_rounded_outwards(job):
    table = benchtest.scale_table(with_terms(job, worst=0.00561))
    assert cells(table)[1] == ("2", "10 V", "9.957 V", "9.943 V", "9.968 V")
    assert plain(table.note) == (
        "Expected with a source of 1 kΩ, a load of 100 kΩ and nominal parts. Scale error at most 0.561 % (6.73 cents "
        "per octave), budget 2 % (24 cents per octave). When a reading is over its limit, see first that the load "
        "is there."
    )
    words = benchtest.reading_words(benchtest.ScaleReading(3.9, 3.89999, 4.0))
    assert [plain(text) for text in words] == ["3.900 V", "3.899 V", "4.000 V"]
    words = benchtest.reading_words(benchtest.ScaleReading(11.0, 10.901, 11.0))
    assert [plain(text) for text in words] == ["11.00 V", "10.90 V", "11.00 V"]


def test_scale_errors_are_in_cents_for_pitch_and_in_both_otherwise(job):
    assert plain(benchtest.scale_words(job, 0.0033)) == "0.33 % (3.96 cents per octave)"
    pitch = replace(job, spec=replace(job.spec, signal=replace(job.spec.signal, pitch=True)))
    assert plain(benchtest.scale_words(pitch, 0.0033)) == "3.96 cents per octave"


@pytest.mark.parametrize("path", SPECS, ids=lambda path: path.stem)
def test_expected_readings_of_shipped_specs_lie_within_their_limits(path):
    job = run(path)
    terms = [term for term in job.analyses.accuracy.terms if term.kind == "scale"]
    # both buffers have a term of either sign, and nothing else has
    assert sum(term.name.startswith(benchtest.TWO_SIDED) for term in terms) == 2
    for channel in range(1, job.spec.channels + 1):
        reading = benchtest.scale_reading(job, channel)
        assert reading.low < reading.expected < reading.high


def test_faults_name_the_parts_of_this_board(job):
    rows = {row[0]: row[1:] for row in cells(fault_table(job, records_of(job)))}
    assert rows["A rail is missing behind its diode"][1] == "D1, D2, J5"
    assert rows["Glide is out at both ends by the same factor"][1] == "C1, C4"
    assert rows["The control works backwards"][1] == "R4, R9"
    assert rows["Offset over 20 mV"][1] == "C1, C4, U1, U2"
    assert "A channel does not follow the input before it with nothing plugged in" in rows
    assert all(look for _, look in rows.values())


def test_faults_this_design_cannot_have_are_left_out(job):
    pair = replace(job, design=replace(job.design, values=replace(job.design.values, back_to_back=True)))
    twice = "Glide is twice as long, and electrolytics get warm or drift"
    assert twice not in [row[0] for row in cells(fault_table(job, records_of(job)))]
    assert twice in [row[0] for row in cells(fault_table(pair, records_of(pair)))]
    rings = "An output rings or whistles with a long cable"
    assert rings not in [row[0] for row in cells(fault_table(job, records_of(job)))]


def test_page_of_a_single_supply_module_names_no_negative_rail(single):
    page = assembly_html(single).decode()
    assert "a pin that this single-supply module leaves open" in page
    assert "Rail to rail" not in page
