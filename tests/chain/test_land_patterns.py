"""Land-pattern names of one's own reach the netlist; a line that maps nothing is a mistake, not silence."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from modgen import run

RESISTOR = "RESAD1016W60L630D250"


@pytest.fixture
def mapped(tmp_path: Path, write_spec: Callable) -> Callable[[str], Path]:
    def write(page: str) -> Path:
        (tmp_path / "names.yaml").write_text(page, encoding="utf-8")
        return write_spec("build: {land_patterns: names.yaml}")

    return write


def test_names_reach_the_netlist(mapped: Callable) -> None:
    job = run(mapped(f"{RESISTOR}: my-0207\n"))
    patterns = {part.ref: part.land_pattern for part in job.netlist.parts}
    assert patterns["R1"] == "my-0207"
    assert RESISTOR not in patterns.values()
    assert "my-0207" in job.netlist_text
    assert job.report.cleared


def test_every_mistake_with_its_place(mapped: Callable, modgen: Callable, tmp_path: Path) -> None:
    mapped('RESAD1016W60L630D251: mine\nDIOAD1016W79L521D272:\nDIP762W53P254L959H508Q8: "a\\\\b"\n')
    assert modgen("check", "spec.yaml").err == (
        "names.yaml:1:1: error: no part in the catalogue has the land pattern 'RESAD1016W60L630D251'\n"
        "    fix: did you mean 'RESAD1016W60L630D250'?\n"
        "names.yaml:2:22: error: the name for DIOAD1016W79L521D272 is missing\n"
        "    fix: write your layout library's name\n"
        "names.yaml:3:26: error: the name for DIP762W53P254L959H508Q8 holds a backslash or a control character, "
        "which a netlist cannot carry\n"
        "    fix: write your layout library's name\n"
    )


def test_a_list_is_no_mapping(mapped: Callable, modgen: Callable) -> None:
    mapped("- one\n")
    assert modgen("check", "spec.yaml").err == (
        "names.yaml:1:1: error: a list where names were expected\n    fix: write lines like 'RESC2012X60N: my-0805'\n"
    )
