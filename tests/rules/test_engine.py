"""The engine: crashes, waivers, what was checked, the order and the text of findings."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

import pytest

from modgen.netlist.model import Netlist
from modgen.problems import InputError, Place, Problem
from modgen.rules.contract import Context, Fault, Finding, Measurement, Rule
from modgen.rules.engine import (
    InternalError,
    RuleCrash,
    discover,
    finding_text,
    judge,
    natural,
    nearest,
    rule_names,
    subjects,
    waives,
)
from modgen.spec.model import Waiver

DOC = """Summary.

    Checks:
        a
    Matters:
        b
    Fails:
        c
    Passes:
        d
    Limits:
        e
    References:
        f
    """


def make(name: str, measurements, *, level: str = "error", needs_spec: bool = False, doc: str = DOC) -> Rule:
    """A rule of our own that measures what it is given, or raises it."""

    def measure(self: Rule, context: Context) -> Iterator[Measurement]:
        if isinstance(measurements, Exception):
            raise measurements
        yield from measurements

    members = {
        "__module__": f"modgen.rules.wiring.{name.replace('-', '_')}",
        "__doc__": doc,
        "name": name,
        "subject": "wiring",
        "level": level,
        "needs_spec": needs_spec,
        "measure": measure,
    }
    return type("Made", (Rule,), members)()


def fault(message: str = "wrong", level: str = "") -> Fault:
    return Fault(message, "because", "mend it", level)


EMPTY = Netlist("Empty", (), ())


class TestCrash:
    def test_the_others_run_and_the_crashed_ones_are_named(self, catalogue):
        broken = make("broken", ZeroDivisionError("division by zero"))
        other = make("also-broken", KeyError("U7"))
        good = make("good", [Measurement(("R1",), "R1", fault=fault())])
        with pytest.raises(InternalError) as caught:
            judge(EMPTY, catalogue, rules=[broken, good, other])
        assert str(caught.value) == (
            "rule broken crashed: ZeroDivisionError: division by zero\nrule also-broken crashed: KeyError: 'U7'"
        )
        assert caught.value.crashes[0] == RuleCrash("broken", "ZeroDivisionError: division by zero")
        assert [f.rule for f in caught.value.report.findings] == ["good"]
        assert [(c.rule, c.judged, c.not_judged) for c in caught.value.report.checked] == [
            ("broken", False, "it crashed"),
            ("good", True, ""),
            ("also-broken", False, "it crashed"),
        ]

    def test_a_crash_halfway_keeps_nothing_of_that_rule(self, catalogue):
        def halfway():
            yield Measurement(("R1",), "R1", fault=fault())
            raise RuntimeError("half way")

        with pytest.raises(InternalError) as caught:
            judge(EMPTY, catalogue, rules=[make("broken", halfway())])
        assert caught.value.report.findings == ()

    def test_a_value_nobody_can_read_is_the_input_s_fault(self, catalogue):
        problem = Problem(Place("board.net"), "R1 has the value 'lots'")
        rules = [make("one", InputError([problem])), make("two", InputError([problem])), make("three", [])]
        with pytest.raises(InputError) as caught:
            judge(EMPTY, catalogue, rules=rules)
        assert caught.value.problems == (problem,)

    def test_a_crash_weighs_more_than_a_bad_value(self, catalogue):
        rules = [make("one", InputError([Problem(Place("x"), "y")])), make("two", RuntimeError("z"))]
        with pytest.raises(InternalError, match=r"^rule two crashed: RuntimeError: z$"):
            judge(EMPTY, catalogue, rules=rules)


class TestChecked:
    def test_counts_and_the_worst_margin_with_what_stood_there(self, catalogue):
        rule = make(
            "some",
            [
                Measurement(("C1",), "C1 at 20 %", margin=0.8),
                Measurement(("C2",), "C2 at 70 %", margin=0.3),
                Measurement(("C3",), "C3 unknown"),
            ],
        )
        (entry,) = judge(EMPTY, catalogue, rules=[rule]).checked
        assert (entry.rule, entry.instances, entry.worst_margin, entry.worst) == ("some", 3, 0.3, "C2 at 70 %")

    def test_equal_margins_go_in_the_order_in_which_people_count(self, catalogue):
        parts = ("R10", "R9", "R20")
        rule = make("some", [Measurement((ref,), f"{ref}: half", margin=0.5) for ref in parts])
        (entry,) = judge(EMPTY, catalogue, rules=[rule]).checked
        assert entry.worst == "R9: half"

    @pytest.mark.parametrize(
        ("changes", "why"),
        [
            ("U1 8=VCC\nD1 1=BUS+ 2=VCC\nC2 1=VCC\nC4 1=VCC", "there is no net named V+"),
            ("U1 8=0V\nD1 1=0V\nC2 1=0V\nC4 1=0V", "net 0V carries 0V and V+"),
        ],
    )
    def test_without_rails_what_follows_currents_is_not_judged(self, catalogue, example, changes, why):
        found = example(f"start from: lane\n{changes}")
        report = judge(found.netlist, catalogue, found.spec, intended=found.start)
        assert not report.cleared
        not_judged = {c.rule: c.not_judged for c in report.checked if not c.judged}
        assert not_judged == {rule.name: why for rule in discover() if rule.needs_rails}
        assert {f.rule for f in report.findings} <= {
            "rail-not-named",
            "rails-shorted",
            "part-shorted-on-itself",
            "differs-from-spec",
        }

    def test_without_margins_the_first_fault_is_named(self, catalogue):
        rule = make("some", [Measurement((), "fine"), Measurement((), "not fine", fault=fault())])
        (entry,) = judge(EMPTY, catalogue, rules=[rule]).checked
        assert (entry.worst_margin, entry.worst) == (None, "not fine")

    def test_rules_that_need_the_spec_are_listed_as_not_judged(self, catalogue, example):
        report = judge(example("start from: lane").netlist, catalogue)
        not_judged = {c.rule: c.not_judged for c in report.checked if not c.judged}
        assert not_judged == {rule.name: "needs the spec, and none was given" for rule in discover() if rule.needs_spec}
        assert {"glide-range", "common-mode", "capacitor-voltage"} <= set(not_judged)
        assert "floating-input" not in not_judged
        # without a spec nobody says what a neighbour sends
        assert [f.rule for f in report.findings] == ["phase-reversal"]

    def test_every_rule_is_listed_in_order(self, catalogue, example):
        report = judge(example("start from: lane").netlist, catalogue)
        assert [c.rule for c in report.checked] == [rule.name for rule in discover()]


class TestFindings:
    def test_sorted_by_level_rule_and_parts_with_numbers_as_numbers(self, catalogue):
        rules = [
            make("b-rule", [Measurement(("R10",), "", fault=fault()), Measurement(("R2",), "", fault=fault())]),
            make("a-rule", [Measurement(("R1",), "", fault=fault())], level="warning"),
            make("c-rule", [Measurement(("R1",), "", fault=fault(level="note"))]),
            make("a-late", [Measurement(("U1", "C10", "C9"), "", fault=fault())]),
        ]
        found = judge(EMPTY, catalogue, rules=rules).findings
        assert [(f.level, f.rule, f.parts) for f in found] == [
            ("error", "a-late", ("C9", "C10", "U1")),
            ("error", "b-rule", ("R2",)),
            ("error", "b-rule", ("R10",)),
            ("warning", "a-rule", ("R1",)),
            ("note", "c-rule", ("R1",)),
        ]

    def test_what_was_measured_goes_along(self, catalogue):
        m = Measurement(("R1",), "w", 2.0, 1.0, "W", -1.0, fault("hot"), ("A",), "rails.positive")
        (finding,) = judge(EMPTY, catalogue, rules=[make("hot", [m])]).findings
        assert finding == Finding(
            "hot", "error", ("R1",), "hot", "because", "mend it", 2.0, 1.0, "W", "", ("A",), "rails.positive", -1.0
        )

    def test_text_with_and_without_a_place(self):
        finding = Finding("capacitor-voltage", "error", ("C4",), "C4 is rated 10 V and can see 12.6 V", "so", "do")
        assert finding_text(finding) == (
            "error: C4 is rated 10 V and can see 12.6 V [capacitor-voltage]\n    why: so\n    fix: do"
        )
        waived = replace(finding, waived="measured on the prototype")
        assert finding_text(waived, Place("quad.yaml", 14, 7)) == (
            "quad.yaml:14:7: error (waived): C4 is rated 10 V and can see 12.6 V [capacitor-voltage]\n"
            "    why: so\n    fix: do\n    waived: measured on the prototype"
        )

    def test_only_errors_that_nobody_answers_for_stand_in_the_way(self, catalogue):
        warning = make("mild", [Measurement(("R1",), "", fault=fault())], level="warning")
        assert judge(EMPTY, catalogue, rules=[warning]).cleared
        assert not judge(EMPTY, catalogue, rules=[make("bad", [Measurement((), "", fault=fault())])]).cleared


def waiver(rule: str, *parts: str) -> Waiver:
    return Waiver(rule, parts, "measured on the prototype", Place("quad.yaml", 9, 3))


class TestWaivers:
    @pytest.mark.parametrize(
        ("entry", "covers"),
        [
            (waiver("some"), True),
            (waiver("some", "C2"), True),
            (waiver("some", "C9", "U1"), True),
            (waiver("some", "C9"), False),
            (waiver("other"), False),
            (waiver("other", "C2"), False),
        ],
    )
    def test_rule_and_parts_must_fit(self, entry, covers):
        assert waives(entry, Finding("some", "error", ("C2", "U1"), "m", "w", "f")) is covers

    def test_a_waived_finding_stays_with_its_level_and_the_reason(self, catalogue, example):
        found = example("start from: lane\nJ2 TN=\nspec: waive unconnected-pin J2")
        report = judge(found.netlist, catalogue, found.spec)
        (finding,) = report.findings
        assert (finding.rule, finding.level, finding.waived) == ("unconnected-pin", "error", "for the example")
        assert report.cleared

    def test_others_of_the_same_rule_stand(self, catalogue, example):
        found = example("start from: lane\nJ2 TN=\nC1 2=\nspec: waive unconnected-pin J2")
        report = judge(found.netlist, catalogue, found.spec)
        assert {f.parts: f.waived for f in report.findings if f.rule == "unconnected-pin"} == {
            ("C1",): "",
            ("J2",): "for the example",
        }
        assert not report.cleared

    def test_the_whole_message_of_a_stale_one(self, catalogue, example):
        found = example("start from: lane\nspec: waive idle-amplifier U1 D1")
        (finding,) = judge(found.netlist, catalogue, found.spec).findings
        assert finding_text(finding) == (
            "warning: the waiver of idle-amplifier on U1, D1 waives nothing [stale-waiver]\n"
            "    why: left in the spec it would hide the next finding of that kind\n"
            "    fix: take it out of the spec"
        )

    @pytest.mark.parametrize(
        ("changes", "message", "fix"),
        [
            (
                "spec: waive idle-amplifier U2",
                "the waiver of idle-amplifier on U2 waives nothing, and U2 is not on the board",
                "take it out of the spec",
            ),
            (
                "spec: waive idle-amplifier U1 U2 U3",
                "the waiver of idle-amplifier on U1, U2, U3 waives nothing, and U2 and U3 are not on the board",
                "take it out of the spec",
            ),
            (
                "J2 TN=\nspec: waive unconnected-pin J2 J9",
                "the waiver of unconnected-pin on J2, J9 names J9, which is not on the board",
                "take J9 out of it",
            ),
            (
                "J2 TN=\nspec: waive unconnected-pin J2 J3 R5",
                "the waiver of unconnected-pin on J2, J3, R5 waives nothing on J3 and R5",
                "take J3 and R5 out of it",
            ),
            (
                "J2 TN=\nspec: waive unconnected-pin J9 J3 J2",
                "the waiver of unconnected-pin on J9, J3, J2 waives nothing on J3, and J9 is not on the board",
                "take J9 and J3 out of it",
            ),
        ],
    )
    def test_parts_that_are_gone_or_have_no_such_fault_any_more(self, catalogue, example, changes, message, fix):
        found = example(f"start from: lane\n{changes}")
        report = judge(found.netlist, catalogue, found.spec)
        (finding,) = (f for f in report.findings if f.rule == "stale-waiver")
        assert finding_text(finding) == (
            f"warning: {message} [stale-waiver]\n"
            "    why: left in the spec it would hide the next finding of that kind\n"
            f"    fix: {fix}"
        )
        # what the waiver does cover it still covers
        assert all(f.waived for f in report.findings if f.rule == "unconnected-pin")

    def test_a_part_that_is_gone_is_told_though_the_rule_was_not_run(self, catalogue, example, by_name):
        found = example("start from: lane\nspec: waive idle-amplifier U1 U9")
        (finding,) = judge(found.netlist, catalogue, found.spec, [by_name["stale-waiver"]]).findings
        assert finding.message == "the waiver of idle-amplifier on U1, U9 names U9, which is not on the board"
        assert finding.fix == "take U9 out of it"

    def test_a_part_that_is_faulted_for_not_being_there_can_be_waived(self, catalogue, example, by_name):
        found = example("start from: lane\nspec: waive missing J9")
        missing = make("missing", [Measurement(("J9",), "J9", fault=fault())])
        (finding,) = judge(found.netlist, catalogue, found.spec, [missing, by_name["stale-waiver"]]).findings
        assert (finding.rule, finding.waived) == ("missing", "for the example")

    def test_an_internal_error_cannot_be_waived(self, catalogue, example, by_name):
        found = example("start from: lane\nspec: waive broken\nspec: waive internal-error")
        rules = [make("broken", ZeroDivisionError("division by zero")), by_name["stale-waiver"]]
        with pytest.raises(InternalError, match=r"^rule broken crashed: ZeroDivisionError: division by zero$") as error:
            judge(found.netlist, catalogue, found.spec, rules)
        # nothing is said of the waiver of the crashed rule; the other is of a rule that does not exist
        assert [f.message for f in error.value.report.findings] == [
            "a waiver names the rule 'internal-error', which does not exist"
        ]

    def test_the_whole_message_of_a_misspelt_one(self, catalogue, example):
        found = example("start from: lane\nspec: waive idle-amplifer")
        (finding,) = judge(found.netlist, catalogue, found.spec).findings
        assert finding_text(finding) == (
            "warning: a waiver names the rule 'idle-amplifer', which does not exist [stale-waiver]\n"
            "    why: it waives nothing, so the finding that was meant still stands\n"
            "    fix: write 'idle-amplifier'"
        )

    def test_a_stale_waiver_is_not_waived_away(self, catalogue, example):
        found = example("start from: lane\nspec: waive stale-waiver")
        (finding,) = judge(found.netlist, catalogue, found.spec).findings
        assert (finding.rule, finding.level, finding.waived) == ("stale-waiver", "warning", "")

    def test_a_waiver_of_a_rule_that_was_not_run_is_not_judged(self, catalogue, example, by_name):
        found = example("start from: lane\nspec: waive idle-amplifier")
        report = judge(found.netlist, catalogue, found.spec, [by_name["stale-waiver"]])
        assert report.findings == ()


class TestContract:
    @pytest.mark.parametrize(
        ("name", "changes", "message"),
        [
            ("R2D2", {}, "name 'R2D2' must be lower-case words joined by hyphens"),
            ("some", {"level": "fatal"}, "level 'fatal' is none of error, warning, note"),
            ("some", {"doc": DOC.replace("Limits:", "Limit:")}, "docstring headings must be"),
            ("some", {"doc": DOC.replace("Checks:", "Matters:").replace("Matters:", "Checks:")}, "headings must be"),
        ],
    )
    def test_a_malformed_rule_is_refused_when_it_is_defined(self, name, changes, message):
        with pytest.raises(TypeError, match=message):
            make(name, [], **changes)

    def test_a_rule_in_the_wrong_module_is_refused(self):
        with pytest.raises(TypeError, match="rule 'some' must live in a module called some"):
            type("Made", (Rule,), {"__module__": "modgen.rules.wiring.other", "__doc__": DOC, "name": "some"})


def test_numbers_in_references_sort_as_numbers():
    assert sorted(["R10", "R2", "C3", "R1"], key=natural) == ["C3", "R1", "R2", "R10"]


def test_nearest_name():
    assert nearest("capacitor-voltages", rule_names()) == "capacitor-voltage"
    assert nearest("zzz", rule_names()) == ""


def test_names_and_subjects_are_those_of_all_rules():
    assert rule_names() == tuple(sorted(rule.name for rule in discover()))
    assert subjects()["glide-range"] == "function"
    assert list(dict.fromkeys(subjects().values())) == [
        "wiring",
        "supply",
        "ratings",
        "signal",
        "function",
        "ordering",
        "spec",
    ]


def test_the_same_netlist_gives_the_same_report(catalogue, example):
    text = "start from: lane\nwithout R1 C3\nC4 voltage=10V\nJ3 TN=CH1_BUF\nR5 value=220"
    first, second = (judge(example(text).netlist, catalogue, example(text).spec) for _ in range(2))
    assert first == second
