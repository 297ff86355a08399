"""Travel, matching, noise and stability on the review page."""

from __future__ import annotations

from dataclasses import replace

from modgen.outputs.pages import Cell
from modgen.outputs.review_signal import degrees, noise_tables, stability_tables, travel_tables


def plain(text) -> str:
    text = text.text if isinstance(text, Cell) else text
    return str(text).replace("\u00a0", " ").replace("\u2212", "-").replace("\u2013", "-")


def cells(table):
    return [tuple(plain(cell) for cell in row) for row in table.rows]


def changed(job, **analyses):
    return replace(job, analyses=replace(job.analyses, **analyses))


def test_channels_that_travel_alike_share_a_table(make):
    times, shares, matching = travel_tables(make(8))
    assert times.caption == "Time against rotation, channels 1 to 8: log control on a scale of 0 to 10, clockwise"
    assert [column.label for column in times.columns] == ["Scale mark", "Time", "Worst case", "Were it linear"]
    assert cells(times) == [
        ("0", "5 ms", "4 ms to 6 ms", "45 ms"),
        ("10", "2.2 s", "1.7 s to 2.8 s", "19.8 s"),
    ]
    assert cells(shares) == [
        ("channels 1 to 8, log", "25 %", "90 %", "1 %", "9 %"),
        ("were it linear", "4 %", "70 %", "10 %", "20 %"),
    ]
    assert cells(matching) == [("middle", "0 %", "10 %", "20 %", "50 %")]
    assert plain(matching.note).startswith("10 000 boards drawn at random: ")


def test_channel_that_travels_otherwise_has_its_own(make):
    job = make(3)
    first, second, third = job.analyses.travel
    other = replace(second, taper="linear")
    one, two, shares, _ = travel_tables(changed(job, travel=(first, other, third)))
    assert "channels 1, 3: log" in one.caption
    assert "channel 2: linear" in two.caption
    assert [column.label for column in two.columns] == ["Scale mark", "Time", "Worst case"]
    assert [row[0] for row in cells(shares)] == ["channels 1, 3, log", "channel 2, linear"]


def test_noise_is_one_row_an_end_and_its_sources(make):
    sums, sources = noise_tables(make(4))
    assert cells(sums) == [
        (
            "channels 1 to 4",
            f"{end} end",
            "2.6 µV",
            "0.00312 cents",
            "voltage noise, output buffer",
            "631 µV",
            "99.6 %",
        )
        for end in ("fast", "slow")
    ]
    assert cells(sources) == [
        ("glide resistance (2.2 kΩ)", "60 nV", "60 nV"),
        ("voltage noise, output buffer (U1B)", "2.5 µV", "2.5 µV"),
    ]


def test_noise_too_small_to_count_is_not_numbered(job):
    found = job.analyses.noise[0]
    small = replace(found, terms=(replace(found.terms[0], rms=3e-12), *found.terms[1:]))
    sources = noise_tables(changed(job, noise=(small,)))[1]
    assert cells(sources)[0] == ("glide resistance (2.2 kΩ)", "under 1 nV")


def test_stability_of_each_stage_and_by_cable(make):
    worst, cables = stability_tables(make(3))
    assert plain(worst.caption).endswith("the limit is 45°")
    assert cells(worst) == [
        (
            "channels 1 to 3",
            "R3, R8, R13, U1-U3",
            "input buffer",
            "72.8°",
            "2 Ω left in the control",
            "100 Ω",
            "3.7 MHz",
            "0.32 %",
            "61.8 %",
        ),
        (
            "channels 1 to 3",
            "R5, R10, R15, U1-U3",
            "output buffer, resistor outside the loop",
            "40.5°",
            "100 pF of cable",
            "400 Ω",
            "2.4 MHz",
            "25 %",
            "-10 %",
        ),
    ]
    assert worst.rows[1][3] == Cell("40.5°", tone="stop")
    assert cells(cables) == [("channels 1 to 3", "output buffer, resistor outside the loop", "72.4°", "40.5°")]
    assert [plain(column.label) for column in cables.columns][2:] == ["no cable", "100 pF"]


def test_angle_on_its_limit_does_not_stand_out():
    assert degrees(45.0, 45.0) == "45°"
    assert degrees(-5.0, 45.0) == Cell("\u22125°", tone="stop")


def test_nothing_computed_makes_no_tables(job):
    empty = changed(job, travel=(), matching=(), noise=(), stability=())
    assert (travel_tables(empty), noise_tables(empty), stability_tables(empty)) == ((), (), ())
