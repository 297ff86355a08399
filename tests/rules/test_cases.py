"""Run every case in cases/<rule>.yaml: the whole findings, and the worst margin with what stood there."""

from __future__ import annotations

from pathlib import Path

import pytest
import yaml

from modgen.rules.engine import discover

FOLDER = Path(__file__).parent / "cases"
FILES = sorted(FOLDER.glob("*.yaml"))
CASES = [
    pytest.param(page["rule"], case, id=f"{page['rule']}: {case['name']}")
    for page in (yaml.safe_load(path.read_text(encoding="utf-8")) for path in FILES)
    for case in page["cases"]
]
KEYS = {"name", "netlist", "findings", "parts", "worst", "margin", "instances", "without_spec", "keys"}


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_file_is_named_for_its_rule_and_has_both_kinds_of_case(path):
    page = yaml.safe_load(path.read_text(encoding="utf-8"))
    assert page["rule"] == path.stem
    assert any(case["findings"] for case in page["cases"])
    assert any(not case["findings"] for case in page["cases"])
    names = [case["name"] for case in page["cases"]]
    assert len(names) == len(set(names))


def test_every_rule_has_cases():
    assert {path.stem for path in FILES} == {rule.name for rule in discover()}


@pytest.mark.parametrize(("rule", "case"), CASES)
def test_case(rule, case, judged):
    assert set(case) <= KEYS
    found = judged(rule, case["netlist"], with_spec=not case.get("without_spec", False))
    assert found.messages == case["findings"]
    if "parts" in case:
        assert [list(f.parts) for f in found.findings] == case["parts"]
    if "keys" in case:
        assert [f.key for f in found.findings] == case["keys"]
    if "instances" in case:
        assert found.checked.instances == case["instances"]
    if "worst" in case:
        assert found.checked.worst == case["worst"]
    if "margin" in case:
        assert found.checked.worst_margin == pytest.approx(case["margin"], abs=5e-4)
