"""The circuit is the design, by the conventions that layout and scripts rely on."""

from __future__ import annotations

import importlib
import re
from collections.abc import Callable
from dataclasses import replace

import pytest

from modgen.catalogue.records import PinDef, Switch
from modgen.circuit import Built, CircuitMismatch, build
from modgen.design.model import Design, Placed
from modgen.netlist import Net, Part, parse_netlist

build_module = importlib.import_module("modgen.circuit.build")


@pytest.fixture(scope="module")
def built(design: Design) -> Built:
    return build(design)


@pytest.fixture(scope="module")
def built_two(two: Design) -> Built:
    return build(two)


def changed(design: Design, ref: str, /, **changes: object) -> Design:
    """The design with one part changed."""
    parts = tuple(replace(p, **changes) if p.ref == ref else p for p in design.parts)
    assert parts != design.parts
    return replace(design, parts=parts)


def test_every_part_and_pin_of_the_design(design: Design, built: Built) -> None:
    netlist = built.netlist
    assert sorted(p.ref for p in netlist.parts) == sorted(p.ref for p in design.parts)
    for placed in design.parts:
        part = netlist.by_ref[placed.ref]
        assert part.value == placed.value
        assert part.land_pattern == placed.record.land_pattern
        assert part.field("part") == placed.record.key
        assert part.field("role") == placed.role
        assert part.field("channel") == (str(placed.channel) if placed.channel else "")
        assert part.field("serves") == placed.serves
        assert part.sheet == (f"/CH{placed.channel}/" if placed.channel else "/")
        for pin, net in placed.pins:
            assert netlist.net_of.get((placed.ref, pin), "") == net
    assert sum(len(net.pins) for net in netlist.nets) == sum(
        1 for placed in design.parts for _, net in placed.pins if net
    )


def test_the_good_designs_leave_the_library_nothing_to_say(built: Built) -> None:
    assert built.netlist.library_messages == ()


def test_the_text_read_again_is_the_same_netlist(built: Built) -> None:
    assert parse_netlist(built.netlist_text) == replace(built.netlist, library_messages=None)


def test_whole_parts(built_two: Built) -> None:
    found = built_two.netlist.by_ref
    assert found["R3"] == Part(
        ref="R3",
        value="2.2k",
        land_pattern="LP-2.2k",
        fields=(
            ("channel", "1"),
            ("part", "2.2k"),
            ("power", "0.25W"),
            ("role", "isolating"),
            ("tolerance", "1%"),
            ("voltage", "250V"),
        ),
        sheet="/CH1/",
    )
    # a control is a resistor in IEEE 315: reference class R
    assert found["R4"].fields == (
        ("channel", "1"),
        ("part", "control"),
        ("power", "0.05W"),
        ("role", "glide-control"),
        ("tolerance", "20%"),
        ("voltage", "200V"),
    )
    assert found["C2"].fields == (
        ("channel", "2"),
        ("dielectric", "film-pp"),
        ("part", "1u film"),
        ("role", "glide-capacitor"),
        ("tolerance", "5%"),
        ("voltage", "63V"),
    )
    assert found["C5"].fields == (
        ("dielectric", "x7r"),
        ("part", "100n"),
        ("role", "decoupling"),
        ("serves", "U2"),
        ("tolerance", "5%"),
        ("voltage", "63V"),
    )
    assert found["D1"].fields == (("part", "diode"), ("role", "reverse-polarity"), ("voltage", "40V"))
    assert found["U1"].fields == (("part", "dual"), ("role", "amplifier"))
    assert found["J1"].fields == (("channel", "1"), ("part", "jack"), ("role", "input-jack"))


def test_whole_nets(built_two: Built) -> None:
    nets = built_two.netlist.by_net
    assert list(nets) == [
        *("0V", "BUS+", "BUS-"),
        *(f"CH{k}_{name}" for k in (1, 2) for name in ("A", "BUF", "CTL", "DRIVE", "GLIDE", "IN", "OUT")),
        *("V+", "V-"),
    ]
    # wiper on pin 2, tied to the end on pin 3: a lifted wiper leaves the whole resistance
    assert nets["CH1_GLIDE"] == Net("CH1_GLIDE", (("C1", "1"), ("R4", "2"), ("R4", "3"), ("U1", "5")))
    assert nets["CH1_IN"].pins == (("J1", "T"), ("J3", "TN"), ("R1", "1"), ("R2", "1"))
    assert nets["CH2_DRIVE"].pins == (("R10", "1"), ("U2", "6"), ("U2", "7"))
    assert nets["BUS-"].pins == (("D2", "1"), ("J5", "1"), ("J5", "2"))
    assert nets["V+"].pins == (("C3", "1"), ("C5", "1"), ("C7", "1"), ("D1", "1"), ("U1", "8"), ("U2", "8"))
    assert nets["V-"].pins == (("C4", "1"), ("C6", "1"), ("C8", "2"), ("D2", "2"), ("U1", "4"), ("U2", "4"))


def test_open_pins_are_on_no_net_and_raise_no_complaint(design_of: Callable[..., Design]) -> None:
    netlist = build(design_of(channels=1, single=True)).netlist
    assert ("J2", "TN") not in netlist.net_of
    assert [("J3", n) in netlist.net_of for n in ("1", "2", "3")] == [False, False, True]
    assert "V-" not in netlist.by_net
    assert netlist.net_of["U1", "4"] == "0V"
    assert netlist.library_messages == ()


def test_idle_sections_keep_a_net_of_their_own(design_of: Callable[..., Design]) -> None:
    netlist = build(design_of(channels=3, kind="quad")).netlist
    assert netlist.by_net["IDLE2C"].pins == (("U2", "8"), ("U2", "9"))
    assert netlist.net_of["U2", "10"] == "0V"


def test_output_resistor_inside_the_loop(design_of: Callable[..., Design]) -> None:
    netlist = build(design_of(inside=True)).netlist
    assert netlist.by_net["CH1_FB"].pins == (("C2", "2"), ("R6", "2"), ("U1", "6"))
    assert netlist.by_net["CH1_DRIVE"].pins == (("C2", "1"), ("R5", "1"), ("U1", "7"))
    assert netlist.by_ref["C2"].field("role") == "compensation"


def test_a_panel_switch(two: Design) -> None:
    pins = tuple(PinDef(number, name, "passive") for number, name in (("1", "1"), ("2", "common"), ("3", "3")))
    shared = {"mount": "panel", "body": two.parts[0].record.body, "land_pattern": "LP-S", "description": "toggle"}
    toggle = Switch(
        key="toggle", family="toggle", kind="switch", pins=pins, voltage=28.0, current=2.0, panel_hole=6e-3, **shared
    )
    capacitor = next(p for p in two.parts if p.role == "glide-capacitor")
    added = (
        Placed("S1", toggle, "range-switch", "toggle", (("1", "CH1_GLIDE"), ("2", "CH1_RANGE"), ("3", "CH1_KEEP")), 1),
        replace(capacitor, ref="C90", role="range-capacitor", pins=(("1", "CH1_RANGE"), ("2", "0V"))),
        Placed("R90", two.values.isolating, "range-keeper", "2.2k", (("1", "CH1_DRIVE"), ("2", "CH1_KEEP")), 1),
    )
    built = build(replace(two, parts=(*two.parts, *added)))
    switch = parse_netlist(built.netlist_text).by_ref["S1"]
    assert (switch.letters, switch.value, switch.land_pattern, switch.sheet) == ("S", "toggle", "LP-S", "/CH1/")
    assert switch.fields == (("channel", "1"), ("part", "toggle"), ("role", "range-switch"))
    assert built.netlist.by_net["CH1_RANGE"].pins == (("C90", "1"), ("S1", "2"))
    assert built.netlist.by_net["CH1_KEEP"].pins == (("R90", "2"), ("S1", "3"))
    assert built.netlist.library_messages == ()


def test_land_patterns_of_ones_own_library(two: Design) -> None:
    netlist = build(two, {"LP-2.2k": "Mine:R_Axial", "LP-nothing": "x"}).netlist
    assert netlist.by_ref["R3"].land_pattern == "Mine:R_Axial"
    assert netlist.by_ref["R2"].land_pattern == "LP-100k"


def test_a_part_without_land_pattern_is_built_for_the_rule_to_see(two: Design) -> None:
    bare = replace(two.parts[0].record, land_pattern="")
    built = build(changed(two, "J1", record=bare))
    assert built.netlist.by_ref["J1"].land_pattern == ""
    assert parse_netlist(built.netlist_text).by_ref["J1"].land_pattern == ""


def test_head_of_the_text(built_two: Built) -> None:
    text = built_two.netlist_text
    assert text.startswith('(export \n  (version "D")\n  (design\n    (source "modgen")\n    (date "")\n')
    assert text.count('(title "Two-lane test lag")') == text.count("(sheet\n") == 3
    assert re.findall(r'\(sheet\n +\(number (\d)\)\n +\(name "(.*)"\)', text) == [
        ("1", "/"),
        ("2", "/CH1/"),
        ("3", "/CH2/"),
    ]
    assert text.endswith(")\n")
    assert "SKiDL Line" not in text
    assert "interactive" not in text


@pytest.mark.parametrize("title", ['A "quoted" lag', "Größe µ Ω 単", "(components", "it's (title)", "50 %"])
def test_titles_survive(two: Design, title: str) -> None:
    built = build(replace(two, title=title))
    assert built.netlist.title == title
    assert parse_netlist(built.netlist_text).title == title


@pytest.mark.parametrize("value", ['3/8"', '"', "it's", "a b", "(x)", "0x10", "1e3", "007", "4.7kΩ"])
def test_values_survive(two: Design, value: str) -> None:
    built = build(changed(two, "R1", value=value))
    assert built.netlist.by_ref["R1"].value == value
    assert parse_netlist(built.netlist_text).by_ref["R1"].value == value


def identities(text: str) -> dict[tuple[str, str], str]:
    """What the layout editor knows each part by, by block and tag."""
    out = {}
    for comp in text.partition("(components")[2].partition("(nets")[0].split("(comp\n")[1:]:
        tag = re.search(r'\(name "SKiDL Tag"\) "([^"]*)"', comp)
        sheet = re.search(r'\(names "([^"]*)"', comp)
        assert tag
        assert sheet
        out[sheet[1], tag[1]] = re.findall(r'\(tstamps "([^"]*)"\)', comp)[-1]
    return out


def test_a_part_stays_the_same_part_when_a_channel_is_added(two: Design, design_of: Callable[..., Design]) -> None:
    before, after = identities(build(two).netlist_text), identities(build(design_of(channels=3)).netlist_text)
    assert len(before) == len(two.parts) == len(set(before.values()))
    assert ("/CH2/", "glide-capacitor-1") in before
    assert ("/", "decoupling-U1-2") in before
    assert {key: after[key] for key in before} == before
    assert len(after) > len(before)


def test_the_librarys_own_check_is_reported(two: Design) -> None:
    def moved(placed: Placed, pin: str, net: str) -> Design:
        pins = tuple((n, net if n == pin else old) for n, old in placed.pins)
        return changed(two, placed.ref, pins=pins)

    u1 = next(p for p in two.parts if p.ref == "U1")
    assert build(moved(u1, "1", "CH2_BUF")).netlist.library_messages == (
        (
            "error",
            "Pin conflict on net CH2_BUF, OUTPUT pin 1/A out of dual/U1 <==> OUTPUT pin 1/A out of dual/U2 "
            "(OUTPUT connected to OUTPUT)",
        ),
    )
    assert build(moved(u1, "3", "LONELY")).netlist.library_messages == (
        ("warning", "Insufficient drive current on net LONELY for pin INPUT pin 3/A + of dual/U1."),
        ("warning", "No drivers for net LONELY."),
        ("warning", "Only one pin (INPUT pin 3/A + of dual/U1) attached to net LONELY."),
        ("warning", "Only one pin (PASSIVE pin 2/2 of 100k/R2) attached to net CH1_A."),
    )


def test_messages_do_not_depend_on_chance(design_of: Callable[..., Design]) -> None:
    """Which of two pins a message names first would be the order of a set of objects in memory."""
    quad = design_of(channels=4, kind="quad")
    outputs = {"1", "7", "8", "14"}
    tied = tuple(
        replace(p, pins=tuple((n, "TIED" if n in outputs else net) for n, net in p.pins)) if p.ref[0] == "U" else p
        for p in quad.parts
    )
    messages = build(replace(quad, parts=tied)).netlist.library_messages
    conflicts = [re.findall(r"pin (\d+)/. out of quad/(U\d)", text) for level, text in messages if level == "error"]
    pins = [(n, u) for u in ("U1", "U2") for n in ("1", "14", "7", "8")]
    assert sorted(conflicts) == sorted([a, b] for i, a in enumerate(pins) for b in pins[i + 1 :])


def test_a_pin_that_the_design_forgot_is_reported(two: Design) -> None:
    r1 = next(p for p in two.parts if p.ref == "R1")
    built = build(changed(two, "R1", pins=r1.pins[:1]))
    assert ("R1", "2") not in built.netlist.net_of
    assert built.netlist.library_messages == (("warning", "Unconnected pin: PASSIVE pin 2/2 of 1M/R1."),)


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"ref": "R2"}, "the circuit differs from the design: R2 stands for 2 parts"),
        (
            {"pins": (("1", "0V"), ("3", "0V"))},
            "the circuit differs from the design: R1 has no pin 3 (1M)",
        ),
        (
            {"pins": (("1", "0V"), ("1", "V+"))},
            "the circuit differs from the design: R1 pin 1 is connected 2 times",
        ),
        (
            {"value": "1\\"},
            "the circuit differs from the design: the netlist cannot hold the text '1\\\\'",
        ),
        (
            {"value": "1\nM"},
            "the circuit differs from the design: the netlist cannot hold the text '1\\nM'",
        ),
    ],
    ids=["reference twice", "no such pin", "pin twice", "backslash", "line break"],
)
def test_a_design_that_contradicts_itself(two: Design, change: dict[str, object], message: str) -> None:
    with pytest.raises(CircuitMismatch) as caught:
        build(changed(two, "R1", **change))
    assert str(caught.value) == message


def sabotage(monkeypatch: pytest.MonkeyPatch, spoil: Callable[[object], None]) -> None:
    """Have something go wrong inside the library while the circuit is made."""
    make = build_module._make

    def spoiled(*args: object) -> object:
        circuit = make(*args)
        spoil(circuit)
        return circuit

    monkeypatch.setattr(build_module, "_make", spoiled)


def part(circuit: object, ref: str) -> object:
    return next(p for p in circuit.parts if p.ref == ref)  # type: ignore[attr-defined]


@pytest.mark.parametrize(
    ("spoil", "message"),
    [
        (lambda c: setattr(part(c, "R2"), "ref", "R1"), "R1_1 was not designed"),
        (lambda c: setattr(part(c, "R2"), "value", "1k"), "R2 is Part(ref='R2', value='1k'"),
        (lambda c: part(c, "R2").fields.update(role="x"), "('role', 'x')"),
        (lambda c: setattr(part(c, "R2"), "footprint", "x"), "land_pattern='x'"),
        (lambda c: c.parts.remove(part(c, "R2")), "R2 is missing"),
        (lambda c: c.nets[1].disconnect(c.nets[1].pins[0]), " is on nothing, not on 0V"),
        (lambda c: c.NC.disconnect(c.NC.pins[0]), "the open pins are "),
        (lambda c: setattr(c.nets[2], "name", "V+"), "D1 pin 2 is on V+1, not on BUS+"),
    ],
    ids=["reference", "value", "field", "land pattern", "part gone", "pin off", "open pin", "net renamed"],
)
def test_a_circuit_that_came_out_otherwise(
    two: Design, monkeypatch: pytest.MonkeyPatch, spoil: Callable[[object], None], message: str
) -> None:
    sabotage(monkeypatch, spoil)
    with pytest.raises(CircuitMismatch) as caught:
        build(two)
    assert message in str(caught.value)


def test_a_warning_while_building_is_a_fault(two: Design, monkeypatch: pytest.MonkeyPatch) -> None:
    def complain(circuit: object) -> None:
        part(circuit, "R2").tag = None  # type: ignore[attr-defined]

    sabotage(monkeypatch, complain)
    with pytest.raises(CircuitMismatch, match="the circuit differs from the design: Missing tag on 100k"):
        build(two)


def test_building_again_after_a_fault(two: Design, built_two: Built) -> None:
    with pytest.raises(CircuitMismatch):
        build(changed(two, "R1", ref="R2"))
    assert build(two) == built_two
