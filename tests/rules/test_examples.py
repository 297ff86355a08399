"""The notation of the rules' examples."""

from __future__ import annotations

import pytest

from modgen.netlist.model import Part
from modgen.rules.engine import discover
from modgen.rules.examples import EXAMPLE_SPEC, ExampleError, headings, rule_page, rule_table


def test_a_part_gets_value_and_fields_of_its_record(example, catalogue):
    netlist = example("R1 metal-film-0207-4k7 1=A 2=B role=terminator\nC2 film-pet-5mm-63v-100n 1=A 2=B").netlist
    assert netlist.by_ref["R1"] == Part(
        "R1",
        "4.7k",
        catalogue.get("metal-film-0207-4k7").land_pattern,
        (
            ("part", "metal-film-0207-4k7"),
            ("power", "0.6W"),
            ("role", "terminator"),
            ("tolerance", "1%"),
            ("voltage", "350V"),
        ),
    )
    assert netlist.by_ref["C2"].field("dielectric") == "film-pet"
    assert [(net.name, net.pins) for net in netlist.nets] == [
        ("A", (("C2", "1"), ("R1", "1"))),
        ("B", (("C2", "2"), ("R1", "2"))),
    ]


def test_pins_move_and_open(example):
    netlist = example("start from: lane\nC1 1=X 2=").netlist
    assert netlist.net_of[("C1", "1")] == "X"
    assert ("C1", "2") not in netlist.net_of


def test_another_part_keeps_pins_role_and_channel(example):
    netlist = example("start from: lane\nC1 film-pet-5mm-63v-470n").netlist
    part = netlist.by_ref["C1"]
    assert (part.value, part.field("role"), part.field("channel")) == ("470n", "glide-capacitor", "1")
    assert netlist.net_of[("C1", "1")] == "CH1_GLIDE"


def test_value_land_pattern_and_fields_can_be_changed(example):
    part = example("start from: lane\nR1 value=3k land= part=x").netlist.by_ref["R1"]
    assert (part.value, part.land_pattern, part.field("part")) == ("3k", "", "x")


def test_parts_come_and_go(example):
    netlist = example("start from: lane\nwithout R1 C1\nadd R2 metal-film-0207-1k0 1=X").netlist
    assert "R1" not in netlist.by_ref
    assert [part.value for part in netlist.parts if part.ref == "R2"] == ["10k", "1k"]
    assert all(ref not in ("R1", "C1") for net in netlist.nets for ref, _ in net.pins)


def test_the_spec_can_be_changed(example):
    spec = example(
        "spec: rails.positive 15 V\nspec: glide.cover worst-case\nspec: signal.span 0 V to 5 V\n"
        "spec: signal.pitch true\nspec: channels 3\nspec: waive lone-net R1 R2\nspec: accuracy.scale 5 %"
    ).spec
    assert (spec.rails.positive, spec.rails.negative) == (15.0, EXAMPLE_SPEC.rails.negative)
    assert (spec.glide.cover, spec.channels, spec.signal.pitch) == ("worst-case", 3, True)
    assert (spec.jacks.inputs, spec.jacks.outputs) == (3, 3)
    assert (spec.signal.low, spec.signal.high, spec.accuracy.scale) == (0.0, 5.0, 0.05)
    assert (spec.waive[0].rule, spec.waive[0].parts) == ("lone-net", ("R1", "R2"))


def test_library_messages_and_comments(example):
    found = example("# nothing to see\nlibrary: warning No drivers for net X").netlist
    assert found.library_messages == (("warning", "No drivers for net X"),)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("start from: nowhere", "no board 'nowhere' in line 'start from: nowhere'; there are lane, pair, single"),
        ("without R1", "no part R1 to take out in line 'without R1'"),
        ("R1 1=A", "R1 names no part in line 'R1 1=A'"),
        ("R1 metal-film-0207-1k0 A", "'A' is neither pin=net nor field=text in line 'R1 metal-film-0207-1k0 A'"),
        ("spec: colour blue", "spec key 'colour' cannot be changed in an example"),
    ],
)
def test_lines_that_cannot_be_read_are_quoted(example, text, message):
    with pytest.raises(ExampleError) as caught:
        example(text)
    assert str(caught.value) == message


def test_a_page_in_full(by_name):
    rule = by_name["no-land-pattern"]
    assert rule_page("no-land-pattern") == (
        "no-land-pattern (ordering, error)\n\n"
        "Every part names a land pattern.\n\n"
        "Checks\n    The land pattern of every part is stated.\n\n"
        "Matters\n    A layout editor drops or refuses a part without one, and the board comes back without it.\n\n"
        "Fails\n    start from: lane\n    R1 land=\n\n"
        "Passes\n    start from: lane\n\n"
        "Limits\n    Does not open the layout library: a name that is misspelt there is not seen here.\n\n"
        "References\n    IPC-7351B, land pattern naming (from memory); common practice.\n"
    )
    assert rule_page("no-land-pattern", [rule]) == rule_page("no-land-pattern")


def test_a_page_says_whether_it_needs_the_spec():
    assert rule_page("glide-range").startswith("glide-range (function, error; needs the spec)\n")


def test_the_table_has_a_line_a_rule_under_its_subject():
    lines = rule_table().splitlines()
    assert lines[0] == "wiring"
    assert "  floating-input           error    " in "\n".join(lines)
    assert len([line for line in lines if line.startswith("  ")]) == len(discover())


def test_headings_are_split(by_name):
    found = headings(by_name["glide-range"])
    assert found["Fails"].splitlines()[0] == "start from: lane"
    assert found[""] == "Every channel's control covers the whole glide range of the spec."
