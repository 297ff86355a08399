"""Assembly notes: every part once, in rising height, and nothing that hurts left unsaid."""

from __future__ import annotations

import re
from collections import Counter
from dataclasses import replace
from pathlib import Path

import pytest

from modgen.catalogue.records import Body
from modgen.chain import run
from modgen.outputs.assembly import assembly_html, cautions
from modgen.outputs.steps import step_table, steps
from modgen.outputs.wording import prose

SPECS = sorted((Path(__file__).parents[2] / "specs").glob("*.yaml"))
HEIGHTS = {
    "r-1m": 2.5, "r-100k": 2.5, "r-2k2": 2.5, "r-330": 2.5, "1n5819": 2.7, "tl072c": 4.5, "c-100n": 5.0,
    "header-2x5": 9.1, "c-10u-el": 11.0, "c-1u-pp": 18.0, "jack-3.5": 10.0, "p-1m-log": 8.0,
}  # fmt: skip


@pytest.fixture
def tall(make):
    """The small module with a height for every part; the controls are lower than much of the board."""

    def built(channels: int = 2, **changes):
        job = make(channels, **changes)
        parts = []
        for part in job.design.parts:
            height = HEIGHTS[part.record.key] * 1e-3
            parts.append(replace(part, record=replace(part.record, body=Body("x", 6e-3, 3e-3, height, pitch=1e-2))))
        return replace(job, design=replace(job.design, parts=tuple(parts)))

    return built


@pytest.fixture(scope="module", params=SPECS, ids=lambda path: path.stem)
def shipped(request):
    """Every spec that comes with the package, through the whole chain."""
    return run(request.param)


def assert_each_part_once(job):
    listed = Counter(ref for step in steps(job) for line in step.lines for ref in line.refs)
    assert listed == Counter(part.ref for part in job.netlist.parts)


def assert_rising(made):
    board = [step.height for step in made if not step.panel]
    assert board == sorted(board)
    assert [step.kind for step in made if step.panel] == sorted((s.kind for s in made if s.panel), reverse=True)
    assert not any(step.panel for step in made[: len(board)])
    assert [step.number for step in made] == list(range(1, len(made) + 1))


def test_every_part_of_the_netlist_is_in_one_step(tall):
    assert_each_part_once(tall(5))


def test_steps_rise_and_controls_come_last(tall):
    made = steps(tall())
    assert_rising(made)
    assert [step.title for step in made] == [
        "resistors",
        "diodes",
        "amplifier packages",
        "ceramic capacitors (X7R)",
        "power header",
        "electrolytic capacitors",
        "polypropylene capacitors",
        "jacks",
        "controls",
    ]


def test_shipped_specs_keep_the_same_promises(shipped):
    assert_each_part_once(shipped)
    assert_rising(steps(shipped))
    page = assembly_html(shipped).decode()
    assert f"<dd>{len(shipped.netlist.parts)}</dd>" in page


def test_quantities_are_those_of_the_references(tall):
    job = tall(3)
    for step in steps(job):
        rows = step_table(step).rows
        assert [int(str(row[1])) for row in rows] == [len(line.refs) for line in step.lines]
    assert sum(step.count for step in steps(job)) == len(job.netlist.parts)


def test_reservoirs_of_the_two_rails_are_two_lines(tall):
    (step,) = [s for s in steps(tall()) if s.title == "electrolytic capacitors"]
    ways = {line.refs: (line.orientation.text, line.orientation.more[0]) for line in step.lines}
    assert ways == {
        ("C7",): ("+ = pin 1, to V+", "\u2212 = pin 2, to 0\u00a0V"),
        ("C8",): ("+ = pin 1, to 0\u00a0V", "\u2212 = pin 2, to V\u2212"),
    }


def test_back_to_back_pairs_are_two_lines_with_a_note(tall):
    job = tall()
    netlist = job.netlist
    # C1 and C7 as the pair of channel 1: + outwards, minus ends on CH1_MID
    nets = []
    for net in netlist.nets:
        pins = tuple(pin for pin in net.pins if pin not in {("C7", "1"), ("C7", "2"), ("C8", "1"), ("C8", "2")})
        extra = {"CH1_GLIDE": (("C7", "1"),), "0V": (("C8", "1"),)}.get(net.name, ())
        nets.append(replace(net, pins=(*pins, *extra)))
    nets.append(replace(netlist.nets[0], name="CH1_MID", pins=(("C7", "2"), ("C8", "2"))))
    parts = tuple(
        replace(p, fields=(("role", "glide-capacitor"),)) if p.ref in ("C7", "C8") else p for p in netlist.parts
    )
    job = replace(job, netlist=replace(netlist, nets=tuple(nets), parts=parts))
    (step,) = [s for s in steps(job) if s.title == "electrolytic capacitors"]
    assert [(line.refs, line.orientation.text) for line in step.lines] == [
        (("C7",), "+ = pin 1, to CHk_GLIDE"),
        (("C8",), "+ = pin 1, to 0\u00a0V"),
    ]
    assert step.notes[1].startswith("The glide capacitors are pairs, back to back: minus to minus in the middle")


def test_colour_bands_are_drawn_and_named(tall):
    page = assembly_html(tall()).decode()
    # 2.2 kilohm, 1 %
    assert "</span> red, red, black, brown, brown</span>" in page
    drawn = page.partition("</span> red, red, black, brown, brown</span>")[0].rpartition("<svg")[2]
    fills = re.findall(r'fill="(#[0-9a-f]{6})" stroke="#4a4a4a"', drawn)
    assert fills == ["#c9241f", "#c9241f", "#1b1b1b", "#7a4420", "#7a4420"]


def test_cautions_name_what_can_hurt(tall):
    said = dict(cautions(tall()))
    assert list(said) == [
        "Heat",
        "Fumes",
        "Eyes",
        "Static",
        "Electrolytics",
        "Power header",
        "Controls",
        "Mains",
        "Local rules",
    ]
    assert "Reversed, they burst, hot and without warning: C7, C8." in said["Electrolytics"]
    assert said["Controls"] == "They stand 300 °C for 3 s at most. They come last."
    assert said["Power header"].startswith("J5 has pin 1 and the cable's coloured stripe on the negative rail.")
    assert "ready-made, approved supply" in said["Mains"]
    assert "is for licensed people, under the local codes" in said["Mains"]


def test_cautions_stand_before_the_first_step(tall):
    page = assembly_html(tall()).decode()
    assert page.index('class="caution"') < page.index('class="step')
    for subject, words in cautions(tall()):
        assert f"<dt>{subject}</dt>" in page
        assert prose(words).replace("'", "&#39;") in page


def test_soldering_limit_of_the_controls_is_their_record(tall):
    (step,) = [s for s in steps(tall()) if s.kind == "control"]
    assert step.notes[0].startswith("Soldering limit: 300 °C for 3 s a pin")


def test_sketches_are_beside_what_can_be_turned(tall):
    page = assembly_html(tall()).decode()
    # two diodes, two reservoirs, one line of packages, one header
    assert page.count('<span class="sketch">') == 6


def test_not_cleared_notes_say_not_to_build(faulty):
    assert "Do not order or build from these notes: see the review page." in assembly_html(faulty).decode()


def test_heights_keep_what_a_board_needs_of_them(tall):
    job = tall()
    high = [replace(p, record=replace(p.record, body=replace(p.record.body, height=13.5e-3))) for p in job.design.parts]
    made = steps(replace(job, design=replace(job.design, parts=tuple(high))))
    assert {step.facts.split(", ")[1].replace("\u00a0", " ") for step in made} == {"13.5 mm high"}


def test_values_are_words_and_no_catalogue_keys(shipped):
    keys = {part.record.key for part in shipped.design.parts}
    values = {line.value for step in steps(shipped) for line in step.lines}
    assert values.isdisjoint(keys)
    assert {"2 x 5 header", "3.5 mm socket"} <= values


def test_references_of_many_channels_stay_on_a_line(tall):
    (step,) = [s for s in steps(tall(64)) if s.title == "resistors"]
    column = [str(row[0]) for row in step_table(step).rows]
    assert column == [
        "R5 to R320 (every 5th)",
        "R3 to R318 (every 5th)",
        "R2 to R317 (every 5th)",
        "R1 to R316 (every 5th)",
    ]


def test_supply_limit_is_raised_only_where_it_changes(job):
    # 10 mA at most and 20 mA at the peak: limits of 20 mA and 30 mA
    said = "Raise the supply's current limit to V+ 30\u00a0mA and V\u2212 30\u00a0mA for this"
    assert said in assembly_html(job).decode()
    still = tuple(replace(rail, current_peak=15e-3) for rail in job.analyses.rails)
    assert "Raise the supply" not in assembly_html(replace(job, analyses=replace(job.analyses, rails=still))).decode()
    one = (job.analyses.rails[0], still[1])
    page = assembly_html(replace(job, analyses=replace(job.analyses, rails=one))).decode()
    assert "Raise the supply's current limit to V+ 30\u00a0mA for this" in page


def test_no_forced_page_breaks(tall):
    page = assembly_html(tall()).decode()
    assert "break-before: page" not in page
