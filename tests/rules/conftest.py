"""The shipped catalogue, and a judge for small netlists in words."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import pytest

from modgen.rules.contract import Checked, Finding, Measurement, Report, Rule
from modgen.rules.engine import discover, finding_text, judge
from modgen.rules.examples import Example, read_example


@dataclass(frozen=True)
class Judged:
    """What one rule made of one example."""

    report: Report
    name: str

    @property
    def findings(self) -> tuple[Finding, ...]:
        return tuple(f for f in self.report.findings if f.rule == self.name)

    @property
    def messages(self) -> list[str]:
        return [finding_text(f) for f in self.findings]

    @property
    def checked(self) -> Checked:
        return next(c for c in self.report.checked if c.rule == self.name)


@pytest.fixture(scope="session")
def catalogue():
    from modgen.catalogue import load_catalogue

    return load_catalogue()


@pytest.fixture(scope="session")
def by_name() -> dict[str, Rule]:
    return {rule.name: rule for rule in discover()}


@pytest.fixture(scope="session")
def example(catalogue) -> Callable[[str], Example]:
    return lambda text: read_example(text, catalogue)


@pytest.fixture(scope="session")
def judged(catalogue, by_name) -> Callable[..., Judged]:
    """Judge an example by one rule; rules that run last see what all others found."""

    def run(name: str, text: str, *, with_spec: bool = True) -> Judged:
        found = read_example(text, catalogue)
        rule = by_name[name]
        rules = discover() if rule.runs_last else (rule,)
        intended = found.start if with_spec and rule.needs_intended else None
        return Judged(judge(found.netlist, catalogue, found.spec if with_spec else None, rules, intended), name)

    return run


@pytest.fixture(scope="session")
def measured(catalogue, by_name) -> Callable[..., list[Measurement]]:
    """All that one rule measures on an example."""
    from modgen.analysis.board import Board
    from modgen.rules.contract import Context

    def run(name: str, text: str, *, with_spec: bool = True) -> list[Measurement]:
        found = read_example(text, catalogue)
        context = Context(
            Board.of(found.netlist, catalogue),
            found.spec if with_spec else None,
            found.netlist.library_messages,
            intended=Board.of(found.start, catalogue) if with_spec and found.start else None,
        )
        return list(by_name[name].measure(context))

    return run
