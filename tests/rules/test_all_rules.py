"""What holds for every rule there is: names, docstrings, and examples that are run."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

import modgen.rules
from modgen.rules.contract import HEADINGS, LEVELS
from modgen.rules.engine import SUBJECTS, discover
from modgen.rules.examples import headings, rule_page, rule_table

RULES = discover()
EXPECTED = {
    "wiring": {
        "control-wiper",
        "floating-input",
        "idle-amplifier",
        "input-on-rail",
        "island",
        "jack-contacts",
        "library-erc",
        "lone-net",
        "mixed-signals",
        "open-loop-amplifier",
        "output-on-rail",
        "part-shorted-on-itself",
        "positive-feedback",
        "rail-not-named",
        "rails-shorted",
        "swapped-supply",
        "tied-outputs",
        "unconnected-pin",
        "unheld-capacitor",
    },
    "supply": {
        "decoupling-per-package",
        "miswired-header",
        "rail-current",
        "reservoir",
        "reverse-polarity",
        "supply-range",
    },
    "ratings": {
        "capacitor-polarity",
        "capacitor-voltage",
        "control-rating",
        "diode-rating",
        "package-dissipation",
        "resistor-power",
        "resistor-voltage",
    },
    "signal": {
        "capacitive-load",
        "common-mode",
        "input-clamp",
        "output-short",
        "output-swing",
        "phase-reversal",
    },
    "function": {
        "broken-lane",
        "channel-without-socket",
        "channels-differ",
        "excess-glide",
        "glide-dielectric",
        "glide-range",
        "offset-error",
        "scale-error",
    },
    "ordering": {
        "duplicate-reference",
        "no-land-pattern",
        "not-in-catalogue",
        "odd-value",
        "stale-waiver",
        "value-differs-from-part",
    },
    "spec": {"differs-from-spec"},
}


def test_discover_finds_every_module_sorted_by_subject_and_name():
    files = {
        path.stem.replace("_", "-")
        for subject in SUBJECTS
        for path in (Path(modgen.rules.__file__).parent / subject).glob("*.py")
        if path.stem != "__init__"
    }
    assert files == {rule.name for rule in RULES}
    assert [(rule.subject, rule.name) for rule in RULES] == [
        (subject, name) for subject in SUBJECTS for name in sorted(EXPECTED[subject])
    ]


@pytest.mark.parametrize("rule", RULES, ids=lambda rule: rule.name)
class TestEveryRule:
    def test_name_is_unique(self, rule):
        assert [other.name for other in RULES].count(rule.name) == 1

    def test_level_is_known(self, rule):
        assert rule.level in LEVELS

    def test_headings_are_all_there_and_say_something(self, rule):
        found = headings(rule)
        assert list(found) == ["", *HEADINGS]
        for heading, text in found.items():
            assert text, f"{rule.name}: nothing under {heading or 'the summary'}"

    def test_summary_is_one_sentence(self, rule):
        assert re.fullmatch(r"[^.]+\.", headings(rule)[""].replace("\n", " "))

    def test_references_name_a_source(self, rule):
        text = headings(rule)["References"]
        assert re.search(
            r"datasheet|IEC|IEEE|IPC|SLOA|SBOS|DS\d|document|Common practice|common practice|documentation", text
        )

    def test_failing_example_fires(self, rule, judged):
        assert judged(rule.name, headings(rule)["Fails"]).findings

    def test_passing_example_is_quiet(self, rule, judged):
        found = judged(rule.name, headings(rule)["Passes"])
        assert not found.messages
        assert found.checked.judged

    def test_findings_say_what_why_and_how_to_mend_it(self, rule, judged):
        for finding in judged(rule.name, headings(rule)["Fails"]).findings:
            assert finding.message
            assert finding.why
            assert finding.fix
            assert not re.search(r"[{}]|None|\bnan\b", finding.message + finding.why + finding.fix)

    def test_a_failing_margin_is_negative_and_a_passing_one_is_not(self, rule, measured):
        if rule.runs_last:
            return
        for text in (headings(rule)["Fails"], headings(rule)["Passes"]):
            for measurement in measured(rule.name, text):
                if measurement.margin is not None:
                    assert (measurement.margin < 0) == (measurement.fault is not None), measurement

    def test_it_looks_at_something_on_a_good_board(self, rule, judged):
        if rule.name != "stale-waiver":
            assert judged(rule.name, "start from: lane").checked.instances > 0

    def test_page_and_table_name_it(self, rule):
        assert rule.name in rule_table()
        page = rule_page(rule.name)
        for heading in HEADINGS:
            assert f"\n{heading}\n    " in page


@pytest.mark.parametrize("board", ["lane", "single", "pair"])
def test_good_boards_pass_all_rules(board, catalogue, example):
    from modgen.rules.engine import judge

    found = example(f"start from: {board}")
    report = judge(found.netlist, catalogue, found.spec, intended=found.start)
    assert [f.message for f in report.findings] == []
    assert report.cleared
    assert all(entry.judged for entry in report.checked)
    margins = {entry.rule: entry.worst_margin for entry in report.checked if entry.worst_margin is not None}
    assert all(margin > 0 for margin in margins.values())
    assert set(margins) == {
        "decoupling-per-package",
        "rail-current",
        "reservoir",
        "reverse-polarity",
        "supply-range",
        "capacitor-voltage",
        "diode-rating",
        "control-rating",
        "package-dissipation",
        "resistor-power",
        "resistor-voltage",
        "capacitive-load",
        "common-mode",
        "input-clamp",
        "output-short",
        "output-swing",
        "excess-glide",
        "glide-range",
        "offset-error",
        "scale-error",
        # a single supply has no rail to miss
        *(() if board == "single" else ("capacitor-polarity",)),
    }


def test_an_unknown_page_names_the_nearest_rule():
    with pytest.raises(KeyError, match=r"there is no rule 'floating-inputs'; did you mean 'floating-input'\?"):
        rule_page("floating-inputs")
