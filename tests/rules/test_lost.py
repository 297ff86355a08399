"""Fields that a netlist lost on its way."""

from __future__ import annotations

from dataclasses import replace

from modgen.netlist.model import Netlist
from modgen.rules.engine import judge
from modgen.rules.lost import TOLD, restored


def bare(netlist: Netlist, *refs: str, keep: tuple[str, ...] = ()) -> Netlist:
    """The netlist with all fields of some parts, or of all, lost."""
    parts = [
        replace(p, fields=tuple(f for f in p.fields if f[0] in keep)) if not refs or p.ref in refs else p
        for p in netlist.parts
    ]
    return replace(netlist, parts=tuple(parts))


def test_nothing_lost_is_the_same_netlist(example, catalogue):
    netlist = example("start from: lane").netlist
    assert restored(netlist, catalogue) is netlist
    assert restored(netlist, catalogue, netlist) is netlist


def test_a_value_that_one_part_of_the_spec_has(example, catalogue):
    netlist = example("start from: lane").netlist
    part = restored(bare(netlist, "R2", keep=("channel",)), catalogue, netlist).by_ref["R2"]
    assert part.fields == (("channel", "1"), ("part", "metal-film-0207-10k"), (TOLD, "value"))


def test_of_two_parts_of_one_value_the_place_tells(example, catalogue):
    netlist = example("start from: lane\nR5 chip-0603-10k").netlist
    found = restored(bare(netlist, "R2", "R5"), catalogue, netlist)
    assert found.by_ref["R2"].field("part") == "metal-film-0207-10k"
    assert found.by_ref["R5"].field("part") == "chip-0603-10k"


def test_in_the_same_place_another_value_tells_nothing(example, catalogue):
    netlist = example("start from: lane").netlist
    bared = bare(example("start from: lane\nR2 value=12k").netlist, "R2")
    assert restored(bared, catalogue, netlist).by_ref["R2"].field("part") == ""


def test_a_value_of_another_reference_class_tells_nothing(example, catalogue):
    netlist = example("start from: lane").netlist
    bared = bare(example("start from: lane\nC1 value=10k").netlist, "C1")
    assert restored(bared, catalogue, netlist).by_ref["C1"].field("part") == ""


def test_an_order_code_tells_the_part_without_a_spec(example, catalogue):
    record = catalogue.parts["tl072-dip8"]
    netlist = example(f"start from: lane\nU1 value={record.order_code}").netlist
    fields = restored(bare(netlist, "U1"), catalogue).by_ref["U1"].fields
    assert fields == (("part", "tl072-dip8"), (TOLD, "value"))


def test_the_channel_by_the_place_in_the_circuit(example, catalogue):
    netlist = example("start from: pair").netlist
    found = restored(bare(netlist, keep=("part",)), catalogue, netlist)
    assert {p.ref: p.field("channel") for p in found.parts} == {p.ref: p.field("channel") for p in netlist.parts}


def test_a_module_without_fields_is_judged_and_the_report_says_so(example, catalogue):
    found = example("start from: pair")
    report = judge(bare(found.netlist), catalogue, found.spec, intended=found.start)
    assert report.cleared
    assert {(f.rule, f.level) for f in report.findings} == {("not-in-catalogue", "note")}
    said = [f.message for f in report.findings]
    assert "R2, R6, R12 and R16 name no catalogue part; taken for metal-film-0207-10k" in said


def test_without_a_spec_what_cannot_be_told_is_an_error(example, catalogue):
    report = judge(bare(example("start from: lane").netlist), catalogue)
    lost = {f.parts[0] for f in report.findings if f.rule == "not-in-catalogue" and f.level == "error"}
    assert {"R1", "R2", "C1"} <= lost
    assert not report.cleared
