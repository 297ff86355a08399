"""A netlist that came back is judged by the same rules; problems of both files come together."""

from __future__ import annotations

import re
from collections.abc import Callable
from pathlib import Path

import pytest

from modgen import check_netlist, run


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
