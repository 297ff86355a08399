"""A module with range switches, through the whole chain: what every output says of them."""

from __future__ import annotations

import html
import json
import re

import pytest

from modgen.analysis.board import Board
from modgen.chain import run
from modgen.cli.screen import summary
from modgen.netlist import parse_netlist
from modgen.outputs.assembly import assembly_html
from modgen.outputs.benchtest import glide_table, hold_time
from modgen.outputs.boardfacts import range_words
from modgen.outputs.bom import bom_lines
from modgen.outputs.design_json import design_json
from modgen.outputs.review import review_html
from modgen.outputs.review_figures import glide_tables
from modgen.outputs.spice import CLOSED, OPEN, spice_deck
from modgen.outputs.steps import steps

SPEC = """\
module: Two-range lag
channels: 2
jacks: 4
rails: {positive: 12 V, negative: -12 V}
glide: {shortest: 1 ms, longest: 12 s, ranges: 2, cover: worst-case}
"""


@pytest.fixture(scope="module")
def job(tmp_path_factory):
    path = tmp_path_factory.mktemp("ranges") / "two-range-lag.yaml"
    path.write_text(SPEC, encoding="utf-8")
    return run(path)


def words(page: bytes) -> str:
    text = re.sub(r"<style.*?</style>|<[^>]+>", " ", page.decode("utf-8"), flags=re.DOTALL)
    return re.sub(r"\s+", " ", html.unescape(text))


def test_it_is_cleared_with_nothing_said(job):
    assert [(f.rule, f.message) for f in job.report.findings] == []


def test_design_json_has_both_ranges(job):
    channel = json.loads(design_json(job))["channels"][0]
    assert [(r["name"], r["position"]) for r in channel["ranges"]] == [("fast", "2-3"), ("slow", "1-2")]
    fast, slow = channel["ranges"]
    assert (fast["shortest"], slow["longest"]) == (channel["shortest"], channel["longest"])
    assert set(fast["middle"]) == {"nominal", "low", "high"}
    # the second capacitor stands beside the first: both ends move by the same factor
    assert slow["longest"]["nominal"] / fast["longest"]["nominal"] == pytest.approx(
        slow["shortest"]["nominal"] / fast["shortest"]["nominal"]
    )


def test_design_json_of_a_module_without_a_switch_has_no_ranges(make):
    assert [channel["ranges"] for channel in json.loads(design_json(make(2)))["channels"]] == [[], []]


def test_every_part_of_it_has_its_reason(job):
    reasons = {part["role"]: part["reason"] for part in json.loads(design_json(job))["parts"]}
    assert reasons["range-switch"].startswith("asked for by glide.ranges; a step over the whole span puts 10 V across")
    assert reasons["range-capacitor"].startswith("switched in beside film-pet-")
    assert reasons["range-keeper"].startswith("keeps the waiting capacitor at the output's voltage")


def test_the_deck_sets_both_contacts_in_every_run(job):
    deck = spice_deck(job).decode("ascii")
    assert f"RS1_A nch1_range nch1_glide {CLOSED:g}  ; closed in position 1-2" in deck
    assert f"RS1_B nch1_range nch1_keep {OPEN:g}  ; closed in position 2-3" in deck
    contacts = re.findall(r"^alter RS1_([AB]) = (\S+)$", deck, re.MULTILINE)
    fast, slow = [("A", "1e+12"), ("B", "0.01")], [("A", "0.01"), ("B", "1e+12")]
    assert contacts == [*fast, *fast, *slow, *slow, *slow]
    told = re.findall(r"^echo CH1 (\w+)", deck, re.MULTILINE)
    assert told == ["shortest", "fast_longest", "slow_shortest", "middle", "longest", "error"]
    assert "* The control at its longest in the fast range\n" in deck


def test_the_deck_of_a_module_without_a_switch_tells_three_times(make):
    deck = spice_deck(make(1)).decode("ascii")
    assert re.findall(r"^echo CH1 (\w+)", deck, re.MULTILINE) == ["shortest", "middle", "longest", "error"]
    assert "range" not in deck


def test_switches_are_fitted_between_jacks_and_controls(job):
    panel = [step for step in steps(job) if step.panel]
    assert [step.kind for step in panel] == ["jack", "switch", "control"]
    switches = panel[1]
    assert switches.title == "switches"
    assert [(line.refs, line.value) for line in switches.lines] == [(("S1", "S2"), "toggle switch, on-on")]
    assert switches.notes[0].startswith(
        "The slow range is with pins 1 and 2 joined, the fast one with pins 2 and 3. The lever of a toggle points away"
    )


def test_without_a_switch_nothing_is_said_of_ranges(make):
    assert range_words(make(2)) == ""
    assert "range switch" not in words(assembly_html(make(2))).lower()


def test_every_range_is_measured(job):
    rows = [row[0] for row in glide_table(job).rows]
    assert rows[:6] == [
        "1, fast range, fully anticlockwise",
        "1, fast range, middle",
        "1, fast range, fully clockwise",
        "1, slow range, fully anticlockwise",
        "1, slow range, middle",
        "1, slow range, fully clockwise",
    ]
    assert len(rows) == 12
    # the wave lasts as long as the slow range wants
    assert hold_time(job) > job.analyses.glide[0].longest.high


def test_the_notes_say_how_to_set_and_to_try_the_switch(job):
    text = words(assembly_html(job))
    assert "Controls fully anticlockwise, range switches at fast; wait a few seconds." in text
    assert "go from one range to the other and back: the output stays where it is." in text
    assert "The output jumps when the slow range is chosen" in text
    assert "jacks, switches and controls last" in text


def test_the_review_shows_both_ranges_and_where_they_meet(job):
    summary_table, both, _ = glide_tables(job)
    assert summary_table.caption.endswith(": shortest in the fast range, middle and longest in the slow one")
    assert [row[:2] for row in both.rows] == [
        ("1, fast", "pins 2-3"),
        ("1, slow", "pins 1-2"),
        ("2, fast", "pins 2-3"),
        ("2, slow", "pins 1-2"),
    ]
    fast, slow = job.analyses.glide[0].ranges
    assert slow.shortest.nominal < fast.longest.nominal
    assert re.fullmatch(r"The ranges overlap, nominally: channels 1, 2 from 60\.3\sms to 330\sms\.", both.note)
    text = words(review_html(job))
    assert "fast range: log control on a scale of 0 to 10" in text
    assert "slow range: log control on a scale of 0 to 10" in text
    assert "Range switch: toggle switch, on-on, S1, S2" in text


def test_the_parts_list_names_the_switch(job):
    (line,) = [line for line in bom_lines(job.netlist, job.catalogue) if line.kind == "switch"]
    assert (line.refs, line.quantity, line.value) == (("S1", "S2"), 2, "toggle switch, on-on")
    assert (line.rating, line.package) == ("28 V, 2 A", "panel, 12.7 x 6.9 mm")


def test_the_screen_shows_both_ranges_and_the_parts(job, tmp_path):
    text = summary(job, tmp_path)
    assert "fast range (pins 2-3): 891 µs to 330 ms\n" in text
    assert "slow range (pins 1-2): 60.3 ms to 22.4 s\n" in text
    assert re.search(r"^  range-switch +switch-toggle-spdt +S1, S2$", text, re.MULTILINE)
    assert re.search(r"^  range-capacitor +10u +film-pet-5mm-50v-10u +C2, C4$", text, re.MULTILINE)
    assert re.search(r"^  range-keeper +10k +metal-film-0207-10k +R5, R11$", text, re.MULTILINE)


def test_the_netlist_read_again_has_the_same_lanes(job):
    def lanes(netlist):
        return Board.of(netlist, job.catalogue).channels

    again = parse_netlist(job.netlist_text)
    assert lanes(again) == lanes(job.netlist)
    assert [lane.switch.ref for lane in lanes(again)] == ["S1", "S2"]
