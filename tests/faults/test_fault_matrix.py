"""How much of what can go wrong the checker sees.

Every single fault of every kind, on modules that are right, is judged three ways. **By rules alone**: every rule is
run, with the spec, but nothing is compared with the netlist that the spec would give; what is seen is seen by
its effect. **Only with the spec**: what rules miss is compared with that netlist. **Missed**: neither sees it.
A finding counts only if it is an error and names the faulty part or net.

What rules alone miss is listed fault by fault in ``missed_by_rules.yaml``, each with the reason. A miss that is not
listed fails, and so does a listed one that is found by now.
"""

from __future__ import annotations

import re
from collections import Counter
from pathlib import Path

import pytest
import yaml

from modgen.rules.engine import discover, judge

COMPARISON = "differs-from-spec"
#: shares that must be caught [-]
LEAST_BY_RULES, LEAST_WITH_SPEC = 0.95, 1.0
#: how many faults there are at least, so that the matrix cannot shrink unseen
LEAST_FAULTS, LEAST_KINDS = 1200, 20
PAGE = yaml.safe_load((Path(__file__).parent / "missed_by_rules.yaml").read_text(encoding="utf-8"))
WORD = re.compile(r"[A-Za-z0-9_+\-]+")


def counts(fault, report) -> bool:
    """Whether a report has an error that names the faulty part or net."""
    faulty = {*fault.parts, *fault.nets}
    return any(
        faulty & {*finding.parts, *finding.nets, *WORD.findall(finding.message)}
        for finding in report.findings
        if finding.level == "error"
    )


def table(rows: dict[str, Counter]) -> str:
    """The matrix as text, one line a kind and one for all."""
    heads = ("faults", "rules alone", "only with spec", "missed")
    total = sum(rows.values(), Counter())
    lines = [f"{'kind':34}" + "".join(f"{head:>16}" for head in heads)]
    for kind, row in [*sorted(rows.items()), ("all", total)]:
        lines.append(f"{kind:34}" + "".join(f"{row[head]:>16}" for head in heads))
    lines.append(f"by rules alone {100 * total['rules alone'] / total['faults']:.2f} %")
    return "\n".join(lines)


@pytest.fixture(scope="session")
def matrix(module_of, faults_of, shelf):
    """Judge every fault of some modules: the table's rows, and the names of what rules alone missed."""
    rules = tuple(rule for rule in discover() if rule.name != COMPARISON)

    def run(names, *, alike: bool = False):
        rows: dict[str, Counter] = {}
        missed: dict[str, list[str]] = {}
        lost: list[str] = []
        for name in names:
            module = module_of(name)
            right = judge(module.netlist, shelf({}), module.spec, intended=module.netlist)
            assert [f.message for f in right.findings if f.level == "error"] == []
            for fault in faults_of(module, alike=alike):
                row = rows.setdefault(fault.kind, Counter())
                row["faults"] += 1
                records = shelf(fault.records)
                if counts(fault, judge(fault.netlist, records, module.spec, rules)):
                    row["rules alone"] += 1
                    continue
                missed.setdefault(name, []).append(f"{fault.kind}: {fault.name}")
                if counts(fault, judge(fault.netlist, records, module.spec, intended=module.netlist)):
                    row["only with spec"] += 1
                else:
                    row["missed"] += 1
                    lost.append(f"{name}: {fault.kind}: {fault.name}")
        return rows, missed, lost

    return run


def test_every_fault_is_caught_and_nearly_all_by_rules_alone(matrix, module_names, capsys):
    rows, missed, lost = matrix(module_names[0])
    total = sum(rows.values(), Counter())
    with capsys.disabled():
        print(f"\n{table(rows)}")
    assert total["faults"] >= LEAST_FAULTS
    assert len(rows) >= LEAST_KINDS
    assert lost == []
    assert (total["faults"] - total["missed"]) / total["faults"] >= LEAST_WITH_SPEC
    assert total["rules alone"] / total["faults"] >= LEAST_BY_RULES
    listed = {name: sorted(faults) for name, faults in PAGE["missed"].items()}
    assert {name: sorted(faults) for name, faults in missed.items()} == listed


def test_every_miss_has_its_reason(module_names):
    faults = {f"{name}: {fault}": reason for name, found in PAGE["missed"].items() for fault, reason in found.items()}
    assert set(PAGE["missed"]) <= set(module_names[0])
    assert set(faults.values()) == set(PAGE["reasons"])
    assert all(len(text.split()) > 8 for text in PAGE["reasons"].values())


@pytest.mark.slow
def test_the_whole_matrix(matrix, module_names, capsys):
    """Every channel, and modules more: eight channels, two ranges, the worst case."""
    rows, _, lost = matrix((*module_names[0], *module_names[1]), alike=True)
    total = sum(rows.values(), Counter())
    with capsys.disabled():
        print(f"\n{table(rows)}")
    assert lost == []
    assert total["rules alone"] / total["faults"] >= LEAST_BY_RULES


@pytest.mark.slow
def test_most_faults_show_with_no_spec_at_all(module_names, module_of, faults_of, shelf, capsys):
    """A netlist that comes from nowhere: values and ratings need a spec, wiring does not."""
    rows: dict[str, list[int]] = {}
    for name in module_names[0]:
        for fault in faults_of(module_of(name)):
            row = rows.setdefault(fault.kind, [0, 0])
            row[0] += 1
            row[1] += counts(fault, judge(fault.netlist, shelf(fault.records)))
    with capsys.disabled():
        print("\n" + "\n".join(f"{kind:34}{found:>6} of {all_}" for kind, (all_, found) in sorted(rows.items())))
    wiring = [
        row for kind, row in rows.items() if not kind.startswith(("value", "capacitor rating", "bipolar", "low-"))
    ]
    assert sum(found for _, found in wiring) / sum(all_ for all_, _ in wiring) >= 0.95
