"""The SARIF log: rules, results, places, waivers, evidence, and nothing of the machine."""

from __future__ import annotations

import json
from dataclasses import replace

import pytest

from modgen import __version__
from modgen.outputs.sarif import file_uri, sarif_log
from modgen.problems import Place
from modgen.rules.contract import Checked, Finding, Report
from modgen.rules.engine import discover
from modgen.spec.model import Waiver

OVER = Finding(
    "capacitor-voltage", "error", ("C7", "C9"), "C7 is rated 10 V and can see 12.6 V", "it will short", "take 25 V",
    12.6, 10.0, "V", "", ("V+",), "rails.positive", -0.26,
)  # fmt: skip
LOOSE = Finding("lone-net", "warning", ("R3",), "R3 pin 2 is alone", "nothing is there", "connect it", nets=("CH1_X",))
SHARE = Finding("glide-range", "note", (), "few boards", "", "ask for glide: {cover: worst-case}", key="glide.cover")
CHECKED = (
    Checked("capacitor-voltage", 8, -0.26, "C7 at 126 %"),
    Checked("lone-net", 20, None, ""),
    Checked("scale-error", 0, None, "", judged=False, not_judged="needs the spec, and none was given"),
)


@pytest.fixture
def spec(job):
    """A page that states the rails but not its glide cover."""
    places = (
        ("rails.positive", Place("/home/somebody/quad lag.yaml", 4, 9)),
        ("glide", Place("/home/somebody/quad lag.yaml", 5, 1)),
        ("waive[1]", Place("/home/somebody/quad lag.yaml", 7, 5)),
    )
    waive = (Waiver("lone-net", ("R3",), "a test point {TP1}", Place("/home/somebody/quad lag.yaml", 7, 5)),)
    return replace(job.spec, file="/home/somebody/quad lag.yaml", places=places, waive=waive)


def run_of(*findings, spec, **more):
    log = json.loads(sarif_log(Report(findings, CHECKED), spec, **more))
    (run,) = log["runs"]
    return run


class TestRules:
    def test_every_rule_is_described_in_the_words_of_its_page(self, spec):
        driver = run_of(spec=spec)["tool"]["driver"]
        assert (driver["name"], driver["version"]) == ("modgen", __version__)
        assert [(r["id"], r["defaultConfiguration"]["level"]) for r in driver["rules"]] == [
            (rule.name, rule.level) for rule in discover()
        ]
        stale = next(r for r in driver["rules"] if r["id"] == "stale-waiver")
        assert stale["shortDescription"]["text"] == (
            "Every waiver of the spec names a rule that exists and parts that are there, and waives something."
        )
        assert stale["fullDescription"]["text"].startswith("Each entry under ``waive``: its rule exists, every part")
        text, marked = stale["help"]["text"], stale["help"]["markdown"]
        for heading in ("Matters", "Fails", "Passes", "Limits", "References"):
            assert f"{heading}:\n" in text
            assert f"**{heading}**\n" in marked
        assert "**Fails**\n\n```text\nstart from: lane\nspec: waive idle-amplifier U1\n```" in marked
        assert stale["properties"] == {"tags": ["ordering"], "needsSpec": True}

    def test_nothing_of_a_description_is_empty(self, spec):
        for rule in run_of(spec=spec)["tool"]["driver"]["rules"]:
            for name in ("shortDescription", "fullDescription", "help"):
                assert rule[name]["text"].strip(), (rule["id"], name)


class TestResults:
    def test_a_whole_one(self, spec):
        run = run_of(OVER, spec=spec)
        (result,) = run["results"]
        assert run["tool"]["driver"]["rules"][result.pop("ruleIndex")]["id"] == "capacitor-voltage"
        assert result == {
            "ruleId": "capacitor-voltage",
            "kind": "fail",
            "level": "error",
            "message": {"text": "C7 is rated 10 V and can see 12.6 V\nwhy: it will short\nfix: take 25 V"},
            "locations": [
                {
                    "physicalLocation": {
                        "artifactLocation": {"uri": "quad%20lag.yaml"},
                        "region": {"startLine": 4, "startColumn": 9},
                    },
                    "logicalLocations": [
                        {"name": "C7", "fullyQualifiedName": "part C7", "kind": "part"},
                        {"name": "C9", "fullyQualifiedName": "part C9", "kind": "part"},
                        {"name": "V+", "fullyQualifiedName": "net V+", "kind": "net"},
                    ],
                }
            ],
            "suppressions": [],
            "properties": {
                "parts": ["C7", "C9"],
                "nets": ["V+"],
                "key": "rails.positive",
                "measured": 12.6,
                "limit": 10.0,
                "unit": "V",
                "margin": -0.26,
            },
        }

    def test_a_default_is_where_the_nearest_key_above_stands(self, spec):
        (result,) = run_of(SHARE, spec=spec)["results"]
        assert result["level"] == "note"
        (location,) = result["locations"]
        assert location["physicalLocation"]["region"] == {"startLine": 5, "startColumn": 1}
        assert "logicalLocations" not in location
        # braces are placeholders in a message string
        assert result["message"]["text"] == "few boards\nfix: ask for glide: {{cover: worst-case}}"

    def test_what_no_key_caused_is_at_the_top_of_the_spec_or_in_the_netlist(self, spec):
        (ours,) = run_of(LOOSE, spec=spec)["results"]
        assert ours["locations"][0]["physicalLocation"] == {
            "artifactLocation": {"uri": "quad%20lag.yaml"},
            "region": {"startLine": 1, "startColumn": 1},
        }
        over, theirs = run_of(OVER, LOOSE, spec=spec, netlist="/home/somebody/back.net")["results"]
        assert over["locations"][0]["physicalLocation"]["artifactLocation"] == {"uri": "quad%20lag.yaml"}
        assert theirs["locations"][0]["physicalLocation"] == {
            "artifactLocation": {"uri": "back.net"},
            "region": {"startLine": 1},
        }

    def test_a_measured_value_without_bound_is_left_out(self, spec):
        (result,) = run_of(replace(OVER, measured=float("inf"), margin=None), spec=spec)["results"]
        assert "measured" not in result["properties"]
        assert "margin" not in result["properties"]
        assert result["properties"]["limit"] == 10.0

    def test_without_a_spec(self):
        run = run_of(LOOSE, spec=None, netlist="back.net")
        assert run["artifacts"] == [{"location": {"uri": "back.net"}, "roles": ["analysisTarget"]}]
        assert run["results"][0]["locations"][0]["physicalLocation"]["artifactLocation"] == {"uri": "back.net"}
        assert "automationDetails" not in run


class TestWaivers:
    def test_a_waived_finding_is_a_result_with_its_suppression(self, spec):
        (result,) = run_of(replace(LOOSE, waived="a test point {TP1}"), spec=spec)["results"]
        assert (result["kind"], result["level"]) == ("fail", "warning")
        assert result["suppressions"] == [
            {
                "kind": "inSource",
                "status": "accepted",
                "justification": "a test point {TP1}",
                "location": {
                    "physicalLocation": {
                        "artifactLocation": {"uri": "quad%20lag.yaml"},
                        "region": {"startLine": 7, "startColumn": 5},
                    }
                },
            }
        ]

    @pytest.mark.parametrize("finding", [OVER, LOOSE])
    def test_a_waiver_that_is_not_in_the_spec_is_external(self, spec, finding):
        (result,) = run_of(replace(finding, waived="the buyer's word"), spec=spec)["results"]
        assert result["suppressions"] == [
            {"kind": "external", "status": "accepted", "justification": "the buyer's word"}
        ]


class TestEvidence:
    def test_what_every_rule_looked_at_faulted_or_not(self, spec):
        run = run_of(OVER, spec=spec)
        assert run["properties"] == {
            "cleared": False,
            "checked": [
                {
                    "rule": "capacitor-voltage",
                    "judged": True,
                    "instances": 8,
                    "worstMargin": -0.26,
                    "worst": "C7 at 126 %",
                    "notJudged": None,
                },
                {
                    "rule": "lone-net",
                    "judged": True,
                    "instances": 20,
                    "worstMargin": None,
                    "worst": None,
                    "notJudged": None,
                },
                {
                    "rule": "scale-error",
                    "judged": False,
                    "instances": 0,
                    "worstMargin": None,
                    "worst": None,
                    "notJudged": "needs the spec, and none was given",
                },
            ],
        }

    def test_what_could_not_be_judged_is_a_notification(self, spec):
        (invocation,) = run_of(spec=spec)["invocations"]
        (said,) = invocation["toolExecutionNotifications"]
        assert said["message"] == {"text": "scale-error was not judged: needs the spec, and none was given"}
        assert said["associatedRule"]["id"] == "scale-error"

    def test_a_clean_module_has_no_result(self, spec):
        run = run_of(spec=spec)
        assert run["results"] == []
        assert run["properties"]["cleared"] is True


class TestBytes:
    def test_the_same_wherever_the_spec_lies(self, spec):
        report = Report((OVER, SHARE, LOOSE), CHECKED)
        there = replace(
            spec,
            file="specs/quad lag.yaml",
            places=tuple((key, replace(place, file="specs/quad lag.yaml")) for key, place in spec.places),
        )
        log = sarif_log(report, spec)
        assert log == sarif_log(report, there)
        assert log.endswith(b"}\n")
        assert b"/home" not in log
        assert b"somebody" not in log

    @pytest.mark.parametrize(
        ("path", "name", "with_folders"),
        [
            ("quad.yaml", "quad.yaml", "quad.yaml"),
            ("./specs/quad.yaml", "quad.yaml", "specs/quad.yaml"),
            ("specs/µ lag#1.yaml", "%C2%B5%20lag%231.yaml", "specs/%C2%B5%20lag%231.yaml"),
            ("a:b.yaml", "a%3Ab.yaml", "a%3Ab.yaml"),
            ("/home/somebody/quad.yaml", "quad.yaml", "quad.yaml"),
            ("../somebody/quad.yaml", "quad.yaml", "quad.yaml"),
        ],
    )
    def test_a_path_is_a_relative_uri(self, path, name, with_folders):
        assert file_uri(path) == name
        assert file_uri(path, folders=True) == with_folders
