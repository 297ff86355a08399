"""Find the rules, run them, and make findings of what they measured.

Every rule is run, even after another has crashed; a crash is never "no findings": when all have run,
:class:`InternalError` names the rules that did not finish, and carries the report of those that did.
"""

from __future__ import annotations

import difflib
import importlib
import pkgutil
import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from functools import cache

from modgen.analysis.board import Board
from modgen.catalogue import Catalogue
from modgen.netlist.model import Netlist
from modgen.problems import InputError, Place, Problem
from modgen.rules.contract import LEVELS, Checked, Context, Finding, Measurement, Report, Rule
from modgen.rules.lost import restored
from modgen.rules.supplies import blind
from modgen.spec.model import Spec, Waiver

#: The folders that hold rules, one a subject, in the order in which people read them.
SUBJECTS = ("wiring", "supply", "ratings", "signal", "function", "ordering", "spec")

NO_SPEC = "needs the spec, and none was given"
NO_INTENDED = "needs the netlist that the spec asks for, and none was given"
NO_LIBRARY = "the circuit library checks a circuit while it builds it, not a file"


@dataclass(frozen=True)
class RuleCrash:
    """One rule that raised instead of measuring."""

    rule: str
    error: str

    def __str__(self) -> str:
        """One line: the rule and what it raised."""
        return f"rule {self.rule} crashed: {self.error}"


class InternalError(Exception):
    """Some rules did not finish, so the netlist is not judged; ``report`` holds what the others found."""

    def __init__(self, crashes: Sequence[RuleCrash], report: Report) -> None:
        self.crashes = tuple(crashes)
        self.report = report
        super().__init__("\n".join(str(crash) for crash in self.crashes))


@cache
def discover() -> tuple[Rule, ...]:
    """Every rule of the package, one of each, sorted by subject and name.

    Returns
    -------
    tuple of Rule
        Found by walking the subject folders: there is no list to forget.

    Raises
    ------
    TypeError
        When a module does not hold exactly one rule, or the rule's subject is not its folder.
    """
    found: list[Rule] = []
    for subject in SUBJECTS:
        package = importlib.import_module(f"modgen.rules.{subject}")
        for entry in pkgutil.iter_modules(package.__path__):
            module = importlib.import_module(f"modgen.rules.{subject}.{entry.name}")
            rules = [
                value
                for value in vars(module).values()
                if isinstance(value, type) and issubclass(value, Rule) and value.__module__ == module.__name__
            ]
            if len(rules) != 1:
                raise TypeError(f"{module.__name__} holds {len(rules)} rules; a rule module holds one")
            if rules[0].subject != subject:
                raise TypeError(f"rule {rules[0].name!r} has subject {rules[0].subject!r} but lives in {subject}/")
            found.append(rules[0]())
    return tuple(sorted(found, key=lambda rule: (SUBJECTS.index(rule.subject), rule.name)))


def rule_names() -> tuple[str, ...]:
    """The name of every rule, sorted."""
    return tuple(sorted(rule.name for rule in discover()))


def subjects() -> dict[str, str]:
    """The subject of every rule, by its name."""
    return {rule.name: rule.subject for rule in discover()}


def natural(text: str) -> tuple[tuple[int, int | str], ...]:
    """A sort key under which ``R2`` comes before ``R10``."""
    return tuple((0, int(piece)) if piece.isdigit() else (1, piece) for piece in re.findall(r"\d+|\D+", text))


def _order(finding: Finding) -> tuple[object, ...]:
    return (
        LEVELS.index(finding.level),
        finding.rule,
        tuple(natural(part) for part in finding.parts),
        tuple(natural(net) for net in finding.nets),
        finding.message,
    )


def _finding(rule: Rule, measurement: Measurement) -> Finding:
    fault = measurement.fault
    assert fault is not None
    return Finding(
        rule=rule.name,
        level=fault.level or rule.level,
        parts=tuple(sorted(measurement.parts, key=natural)),
        message=fault.message,
        why=fault.why,
        fix=fault.fix,
        measured=measurement.measured,
        limit=measurement.limit,
        unit=measurement.unit,
        nets=measurement.nets,
        key=measurement.key,
        margin=measurement.margin,
    )


def _checked(rule: Rule, measured: Sequence[Measurement]) -> Checked:
    with_margin = [m for m in measured if m.margin is not None]
    if with_margin:
        worst = min(with_margin, key=lambda m: (m.margin, natural(m.what)))
        return Checked(rule.name, len(measured), worst.margin, worst.what)
    faulty = next((m for m in measured if m.fault is not None), None)
    return Checked(rule.name, len(measured), None, faulty.what if faulty else "")


def waives(waiver: Waiver, finding: Finding) -> bool:
    """Whether a waiver covers a finding: the same rule, and all parts or one of the finding's parts."""
    if waiver.rule != finding.rule:
        return False
    return not waiver.parts or bool(set(waiver.parts) & set(finding.parts))


def _waived(finding: Finding, waivers: Iterable[Waiver]) -> Finding:
    for waiver in waivers:
        if waives(waiver, finding):
            return replace(finding, waived=waiver.reason)
    return finding


def nearest(name: str, known: Iterable[str]) -> str:
    """The known name that is spelt most like one that is not known, or ``""``."""
    close = difflib.get_close_matches(name, sorted(known), n=1)
    return close[0] if close else ""


def judge(
    netlist: Netlist,
    catalogue: Catalogue,
    spec: Spec | None = None,
    rules: Sequence[Rule] | None = None,
    intended: Netlist | None = None,
) -> Report:
    """Run every rule on a netlist.

    Parameters
    ----------
    netlist
        The circuit, ours or one that came back from layout.
    catalogue
        Where the parts' figures are.
    spec
        The intent, when there is one; rules that need it are listed as not judged without it.
    rules
        The rules to run; all of :func:`discover` by default.
    intended
        The circuit that the spec asks for, which the netlist is compared with.

    Returns
    -------
    Report
        Findings sorted by level, rule and parts; and for every rule what it looked at.

    Raises
    ------
    InternalError
        When a rule crashed; the others have run by then.
    InputError
        When a value of the netlist that a rule computes with is not a number; all such values, once each.
    """
    chosen = discover() if rules is None else tuple(rules)
    context = Context(
        board=Board.of(restored(netlist, catalogue, intended), catalogue),
        spec=spec,
        intended=Board.of(intended, catalogue) if intended is not None else None,
        library_messages=netlist.library_messages,
        known_rules=tuple(sorted({rule.name for rule in discover()} | {rule.name for rule in chosen})),
    )
    checked: dict[str, Checked] = {}
    findings: list[Finding] = []
    crashes: list[RuleCrash] = []
    waivers = spec.waive if spec is not None else ()
    ran: list[str] = []
    problems: set[Problem] = set()
    without_rails = blind(context.board)
    for rule in sorted(chosen, key=lambda rule: rule.runs_last):
        if rule.needs_spec and spec is None:
            checked[rule.name] = Checked(rule.name, 0, None, "", judged=False, not_judged=NO_SPEC)
            continue
        if rule.needs_intended and intended is None:
            checked[rule.name] = Checked(rule.name, 0, None, "", judged=False, not_judged=NO_INTENDED)
            continue
        if rule.needs_rails and without_rails:
            checked[rule.name] = Checked(rule.name, 0, None, "", judged=False, not_judged=without_rails)
            continue
        if rule.needs_library and context.library_messages is None:
            checked[rule.name] = Checked(rule.name, 0, None, "", judged=False, not_judged=NO_LIBRARY)
            continue
        seen = replace(context, findings=tuple(findings), ran=tuple(ran)) if rule.runs_last else context
        try:
            measured = tuple(rule.measure(seen))
            new = [_finding(rule, m) for m in measured if m.fault is not None]
            checked[rule.name] = _checked(rule, measured)
        except InputError as error:
            # a value that nobody can read is the netlist's fault, not the rule's
            problems.update(error.problems)
            continue
        except Exception as error:
            crashes.append(RuleCrash(rule.name, f"{type(error).__name__}: {error}"))
            checked[rule.name] = Checked(rule.name, 0, None, "", judged=False, not_judged="it crashed")
            continue
        ran.append(rule.name)
        # What judges the waivers is not itself waived: a stale line is mended by taking it out.
        findings.extend(new if rule.runs_last else [_waived(finding, waivers) for finding in new])
    report = Report(
        findings=tuple(sorted(findings, key=_order)),
        checked=tuple(checked[rule.name] for rule in chosen if rule.name in checked),
    )
    if crashes:
        raise InternalError(crashes, report)
    if problems:
        raise InputError(sorted(problems))
    return report


def finding_text(finding: Finding, place: Place | None = None) -> str:
    """A finding as it is printed: level, message and rule; then why, fix and waiver, indented.

    Parameters
    ----------
    finding
        What was found.
    place
        Where the spec key stands that caused it; left out when there is none.
    """
    where = f"{place}: " if place is not None else ""
    level = f"{finding.level} (waived)" if finding.waived else finding.level
    lines = [f"{where}{level}: {finding.message} [{finding.rule}]"]
    if finding.why:
        lines.append(f"    why: {finding.why}")
    if finding.fix:
        lines.append(f"    fix: {finding.fix}")
    if finding.waived:
        lines.append(f"    waived: {finding.waived}")
    return "\n".join(lines)
