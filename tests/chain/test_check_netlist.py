"""A netlist that came back is judged by the same rules; problems of both files come together."""

from __future__ import annotations

import re
import time
from collections.abc import Callable
from pathlib import Path
from random import Random

import pytest

from modgen import check_netlist, run
from modgen.catalogue import load_catalogue
from modgen.circuit.plan import plan_of
from modgen.design import make_design
from modgen.netlist import Net, Netlist, parse_netlist
from modgen.netlist.order import sorted_nets
from modgen.rules.engine import discover, judge
from modgen.spec import read_spec


@pytest.fixture
def netlist(tmp_path: Path, write_spec: Callable) -> Path:
    path = tmp_path / "back.net"
    path.write_text(run(write_spec()).netlist_text, encoding="utf-8")
    return path


def test_our_own_netlist_is_judged_as_the_build_was(netlist: Path, tmp_path: Path) -> None:
    _, report = check_netlist(tmp_path / "spec.yaml", netlist)
    built = run(tmp_path / "spec.yaml").report
    assert report.cleared
    assert {c.rule for c in report.checked} == {c.rule for c in built.checked}
    # the library that checked the build never saw this file
    same = [c for c in report.checked if c.rule != "library-erc"]
    assert same == [c for c in built.checked if c.rule != "library-erc"]
    (library,) = (c for c in report.checked if c.rule == "library-erc")
    assert (library.judged, library.not_judged) == (
        False,
        "the circuit library checks a circuit while it builds it, not a file",
    )


def test_a_reversed_diode_is_found(netlist: Path, modgen: Callable) -> None:
    text = netlist.read_text("utf-8")
    swapped = re.sub(
        r'(\(ref "?D1"?\)\s*\(pin "?)([12])("?)', lambda m: m[1] + ("2" if m[2] == "1" else "1") + m[3], text
    )
    assert swapped != text
    netlist.write_text(swapped, encoding="utf-8")
    ran = modgen("check", "spec.yaml", "--netlist", "back.net")
    assert ran.status == 1
    assert "error: " in ran.out
    assert "reverse-polarity" in ran.out
    assert "NOT CLEARED FOR ORDERING" in ran.out


def test_problems_of_both_files(netlist: Path, tmp_path: Path, modgen: Callable) -> None:
    netlist.write_text("(export (version", encoding="utf-8")
    (tmp_path / "spec.yaml").write_text("module: x\n", encoding="utf-8")
    ran = modgen("check", "spec.yaml", "--netlist", "back.net")
    assert ran.status == 2
    assert ran.out == ""
    assert "back.net:1:" in ran.err
    assert "spec.yaml" in ran.err


def moved_about(text: str) -> str:
    """The netlist as a layout editor may hand it back: references and net names given anew, everything mixed."""
    read = parse_netlist(text)
    random = Random(11)
    new = {}
    for letters in sorted({p.letters for p in read.parts}):
        mine = [p.ref for p in read.parts if p.letters == letters]
        new |= dict(zip(mine, random.sample(mine, len(mine)), strict=True))
    parts = [
        f'(comp (ref "{new[p.ref]}") (value "{p.value}") (footprint "{p.land_pattern}") (fields '
        + " ".join(f'(field (name "{k}") "{new.get(v, v)}")' for k, v in random.sample(p.fields, len(p.fields)))
        + "))"
        for p in read.parts
    ]
    parts += [f'(comp (ref "H{n}") (value "hole") (footprint "MH"))' for n in (1, 2)]
    parts += ['(comp (ref "TP1") (value "point") (footprint "TP"))', '(comp (ref "LOGO1") (value "logo"))']
    nets = []
    for n, net in enumerate(random.sample(read.nets, len(read.nets))):
        nodes = [f'(node (ref "{new[ref]}") (pin "{pin}"))' for ref, pin in random.sample(net.pins, len(net.pins))]
        if net.name == "CH1_GLIDE":
            nodes.append('(node (ref "TP1") (pin "1"))')
        nets.append(f'(net (code {n}) (name "N{n}") {" ".join(nodes)})')
    random.shuffle(parts)
    return f"(export (version D) (components {' '.join(parts)}) (nets {' '.join(nets)}))"


SINGLE = (
    "channels: 1",
    "jacks: 4",
    "rails: {positive: 12 V, negative: 0 V}",
    "signal: {span: 0 V to 5 V}",
    "glide: {shortest: 20 ms, longest: 1 s}",
)


@pytest.mark.parametrize(
    "lines",
    [
        (),
        ("channels: 4", "jacks: 8", "normalling: chain"),
        ("channels: 3", "jacks: 8"),
        SINGLE,
        ("channels: 2", "jacks: 4", "signal: {pitch: true}"),
        ("channels: 2", "jacks: 4", "glide: {shortest: 5 ms, longest: 10 s, ranges: 2}"),
    ],
)
def test_a_netlist_under_other_names_is_cleared(lines: tuple[str, ...], tmp_path: Path, write_spec: Callable) -> None:
    spec = write_spec(*lines)
    path = tmp_path / "back.net"
    path.write_text(moved_about(run(spec).netlist_text), encoding="utf-8")
    _, report = check_netlist(spec, path)
    assert [f.message for f in report.findings if f.level != "note"] == []
    notes = {f.message for f in report.findings if f.rule == "differs-from-spec"}
    assert notes == {"H1, H2, LOGO1 and TP1 are not part of the circuit, and not compared"}
    assert [c.rule for c in report.checked if not c.judged] == ["library-erc"]


def test_a_change_under_other_names_is_named_by_the_files_reference(tmp_path: Path, write_spec: Callable) -> None:
    spec = write_spec("channels: 4", "jacks: 8")
    text = moved_about(run(spec).netlist_text)
    part = next(p for p in parse_netlist(text).parts if p.field("role") == "isolating")
    path = tmp_path / "back.net"
    assert f'(ref "{part.ref}") (value "{part.value}")' in text
    path.write_text(text.replace(f'(ref "{part.ref}") (value "{part.value}")', f'(ref "{part.ref}") (value "47k")'))
    _, report = check_netlist(spec, path)
    (found,) = (f for f in report.findings if f.rule == "differs-from-spec" and f.level == "error")
    assert found.parts == (part.ref,)
    assert found.message.startswith(f"{part.ref} is 47k, the spec wants {part.value}")
    assert not report.cleared


def test_the_build_is_compared_too(write_spec: Callable) -> None:
    (checked,) = (c for c in run(write_spec()).report.checked if c.rule == "differs-from-spec")
    assert (checked.judged, checked.instances) == (True, len(run(write_spec()).netlist.parts))


def test_without_a_spec_the_rest_is_listed_as_not_judged(netlist: Path) -> None:
    spec, report = check_netlist(None, netlist)
    assert spec is None
    assert report.cleared
    not_judged = {c.rule: c.not_judged for c in report.checked if not c.judged}
    assert not_judged["differs-from-spec"] == "needs the spec, and none was given"
    assert not_judged["glide-range"] == "needs the spec, and none was given"
    assert {"floating-input", "capacitor-polarity", "tied-outputs"} <= {c.rule for c in report.checked if c.judged}


def test_64_channels_in_under_five_seconds(tmp_path: Path, write_spec: Callable) -> None:
    spec = write_spec("channels: 64", "jacks: 128", "normalling: chain")
    design = make_design(read_spec(spec), load_catalogue())
    planned = plan_of(design, {}).netlist
    gone = planned.parts[200].ref
    kept = [p for p in planned.parts if p.ref != gone]
    nets = [Net(f"N{n}", tuple(p for p in net.pins if p[0] != gone)) for n, net in enumerate(planned.nets)]
    back = Netlist("back", tuple(kept), sorted_nets(nets))
    (rule,) = (rule for rule in discover() if rule.name == "differs-from-spec")
    start = time.process_time()
    report = judge(back, load_catalogue(), read_spec(spec), [rule], intended=planned)
    assert time.process_time() - start < 5
    (found,) = (f for f in report.findings if f.level == "error")
    assert found.message.endswith(f"is missing: {gone} of the spec")
