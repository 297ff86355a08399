"""``modgen check --format``: the fields that programs rely on, SARIF, and waivers in all of them."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

from modgen import run
from modgen.outputs import pack_files
from modgen.rules import discover
from modgen.rules.wiring.floating_input import FloatingInput

WAIVE = "waive: [{rule: glide-range, reason: measured on the prototype}]"
NOMINAL = "glide: {shortest: 5 ms, longest: 2 s, cover: nominal}"
FINDING = ["rule", "level", "parts", "message", "why", "fix", "measured", "limit", "unit", "waived"]


def test_json_has_exactly_the_fields_that_were_promised(modgen: Callable, write_spec: Callable) -> None:
    write_spec(NOMINAL, WAIVE)
    ran = modgen("check", "spec.yaml", "--format", "json")
    assert (ran.status, ran.err) == (0, "")
    page = json.loads(ran.out)
    assert list(page) == ["cleared", "findings", "checked"]
    assert page["cleared"] is True
    (finding,) = page["findings"]
    assert list(finding) == FINDING
    assert (finding["rule"], finding["waived"]) == ("glide-range", "measured on the prototype")
    assert all(list(checked) == ["rule", "instances", "worst_margin"] for checked in page["checked"])
    assert [checked["rule"] for checked in page["checked"]] == [rule.name for rule in discover()]


def test_what_nobody_answers_for_has_null_for_a_reason(modgen: Callable, write_spec: Callable) -> None:
    write_spec(NOMINAL)
    (finding,) = json.loads(modgen("check", "spec.yaml", "--format", "json").out)["findings"]
    assert list(finding) == FINDING
    assert finding["waived"] is None


def test_sarif_points_at_the_line_and_the_waiver(modgen: Callable, write_spec: Callable) -> None:
    path = write_spec(NOMINAL, WAIVE)
    ran = modgen("check", "spec.yaml", "--format", "sarif")
    assert (ran.status, ran.err) == (0, "")
    (result,) = json.loads(ran.out)["runs"][0]["results"]
    lines = path.read_text("utf-8").splitlines()
    region = result["locations"][0]["physicalLocation"]["region"]
    assert lines[region["startLine"] - 1][region["startColumn"] - 1 :].startswith("cover: nominal")
    (suppression,) = result["suppressions"]
    assert suppression["justification"] == "measured on the prototype"
    region = suppression["location"]["physicalLocation"]["region"]
    assert lines[region["startLine"] - 1][region["startColumn"] - 1 :].startswith("{rule: glide-range")
    assert ran.out.encode() == pack_files(run("spec.yaml"))["review.sarif"]


def test_sarif_of_a_netlist_and_of_a_spec_in_a_folder(modgen: Callable, write_spec: Callable, tmp_path: Path) -> None:
    path = write_spec()
    (tmp_path / "specs").mkdir()
    path.rename(tmp_path / "specs" / "spec.yaml")
    text = run(tmp_path / "specs" / "spec.yaml").netlist_text
    (tmp_path / "back.net").write_text(text, encoding="utf-8")
    ran = modgen("check", "specs/spec.yaml", "--netlist", str(tmp_path / "back.net"), "--format", "sarif")
    assert ran.status == 0
    (page,) = json.loads(ran.out)["runs"]
    assert [a["location"]["uri"] for a in page["artifacts"]] == ["specs/spec.yaml", "back.net"]
    assert str(tmp_path) not in ran.out


def test_sarif_is_utf_8_whatever_the_output_can_take(write_spec: Callable) -> None:
    path = write_spec(NOMINAL, WAIVE.replace("prototype", "prototype with 4.7 kΩ"))
    environment = os.environ | {"PYTHONIOENCODING": "ascii"}
    ran = subprocess.run(
        [sys.executable, "-m", "modgen", "check", str(path), "--format", "sarif"],
        env=environment,
        capture_output=True,
        check=False,
    )
    assert (ran.returncode, ran.stderr) == (0, b"")
    (result,) = json.loads(ran.stdout.decode("utf-8"))["runs"][0]["results"]
    assert result["suppressions"][0]["justification"] == "measured on the prototype with 4.7 kΩ"


@pytest.mark.parametrize("form", ["text", "json", "sarif"])
def test_no_waiver_answers_for_an_internal_error(
    form: str, write_spec: Callable, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture
) -> None:
    from modgen.cli import main

    def broken(self, context):
        raise ZeroDivisionError("division by zero")

    monkeypatch.setattr(FloatingInput, "measure", broken)
    path = write_spec("waive: [{rule: floating-input, reason: never mind}]")
    assert main(["check", str(path), "--format", form]) == 3
    out, err = capsys.readouterr()
    assert out == ""
    assert "modgen: internal error: rule floating-input crashed: ZeroDivisionError: division by zero\n" in err
