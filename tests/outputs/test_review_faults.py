"""Shorts, dissipation and states of the supply on the review page."""

from __future__ import annotations

import math
from dataclasses import replace

from modgen.outputs.pages import Cell
from modgen.outputs.review_faults import short_tables, supply_state_tables


def plain(text) -> str:
    text = text.text if isinstance(text, Cell) else text
    return str(text).replace("\u00a0", " ").replace("\u2212", "-").replace("\u2013", "-")


def cells(table):
    return [tuple(plain(cell) for cell in row) for row in table.rows]


def changed(job, **analyses):
    return replace(job, analyses=replace(job.analyses, **analyses))


def test_shorts_of_like_channels_are_one_row(make):
    shorts, packages = short_tables(make(3))
    assert cells(shorts) == [
        ("channels 1 to 3", "R5, R10, R15", "0 V", "12.6 V", "10 mA to 60 mA", "200 mW", "500 mW", "60 %"),
        ("channels 1 to 3", "R5, R10, R15", "another output", "25.2 V", "10 mA to 60 mA", "600 mW", "500 mW", "-20 %"),
    ]
    assert cells(packages) == [("U1-U3", "120 mW", "400 mW, to 0 V", "520 mW", "680 mW", "23.5 %")]


def test_output_without_a_resistor_stands_out_and_a_rating_nobody_states_is_no_margin(job):
    first, second = job.analyses.shorts[:2]
    bare = replace(first, resistor="", measured=0.0, limit=math.inf)
    shorts, _ = short_tables(changed(job, shorts=(bare, replace(second, limit=math.inf))))
    assert shorts.rows[0][5] == Cell("no resistor", tone="stop")
    assert cells(shorts)[0][-2:] == ("not stated", "-")
    assert cells(shorts)[1][-2:] == ("not stated", "-")


def test_reversed_header(job):
    table = supply_state_tables(job)[0]
    assert cells(table) == [
        ("V+", "D1", "-12.6 V", "12.6 V", "25.2 V", "40 V", "37 %", "1 mA"),
        ("V-", "D2", "+12.6 V", "12.6 V", "25.2 V", "40 V", "37 %", "1 mA"),
    ]
    assert plain(table.note) == "The amplifiers' supply pins see at most 600 mV the wrong way round."


def test_reversed_header_that_nothing_blocks(job):
    first, second = job.analyses.reversed_supply
    bare = replace(first, blocked=False, amplifiers=-12.6)
    table = supply_state_tables(changed(job, reversed_supply=(bare, second)))[0]
    assert table.rows[0][1] == Cell("nothing blocks", tone="stop")
    assert cells(table)[0][-3:-1] == ("-", "-100 %")
    assert plain(table.note) == "Down to -12.6 V can stand across the amplifiers' supply pins."


def test_missing_rail(job):
    table = supply_state_tables(job)[1]
    assert cells(table) == [
        ("V+", "-12.6 V to -400 mV", "1.2 mA", "C7", "400 mV", "1 V", "60 %"),
        ("V-", "+400 mV to +12.6 V", "1.2 mA", "-", "-", "-", "-"),
    ]
    assert "up to 12.6 V the wrong way round: not judged." in plain(table.note)


def test_module_off_among_neighbours(make):
    table = supply_state_tables(make(2))[2]
    assert plain(table.caption) == "Module without power among neighbours that drive 12.6 V, of either sign"
    assert cells(table) == [
        ("one amplifier input", "R2, R7, U1, U2", "1.2 mA", "5 mA", "76 %"),
        ("one amplifier output", "U1", "no resistor limits it", "60 mA", "none"),
        ("one rail, from all sockets", "V+, V-", "3 mA", "2 mA", "-50 %"),
    ]
    assert [getattr(row[-1], "tone", "") for row in table.rows] == ["", "stop", "warn"]


def test_single_supply_has_no_rail_to_miss(job):
    tables = supply_state_tables(changed(job, missing_rails=()))
    assert [plain(table.caption).split(" ")[0] for table in tables] == ["Power", "Module"]
