"""``review.sarif``: the findings for code-review tools, as SARIF 2.1.0 (OASIS Standard, errata 01).

One run, one rule descriptor for every rule there is, one result for every finding, waived or not. What passed is
evidence and not a result: a result of kind ``pass`` is shown as an alert by tools that do not look at ``kind``, and
"the rule passed" cannot be said of a rule that looked at twelve parts and faulted one. What every rule looked at, its
least margin and where that was stands in the properties of the run instead, faulted or not; a rule that could not be
judged is a notification of the invocation as well.
"""

from __future__ import annotations

import json
from pathlib import PurePath, PurePosixPath
from typing import TYPE_CHECKING, Any
from urllib.parse import quote

from modgen.outputs.design_json import tidy
from modgen.rules.engine import discover, waives
from modgen.rules.examples import headings
from modgen.version import __version__

if TYPE_CHECKING:
    from modgen.problems import Place
    from modgen.rules.contract import Checked, Finding, Report, Rule
    from modgen.spec.model import Spec

VERSION = "2.1.0"
SCHEMA = "https://docs.oasis-open.org/sarif/sarif/v2.1.0/errata01/os/schemas/sarif-schema-2.1.0.json"
#: Headings of a rule's page that are its help, in order; what it checks is its full description
_HELP = ("Matters", "Fails", "Passes", "Limits", "References")
_EXAMPLES = ("Fails", "Passes")


def sarif_log(report: Report, spec: Spec | None, netlist: str = "", *, folders: bool = False) -> bytes:
    """The verdict on a module as a SARIF log.

    Parameters
    ----------
    report : Report
        What the rules found and what they looked at. [-]
    spec : Spec or None
        The page that findings point at; None when a netlist was judged by itself. [-]
    netlist : str
        Path of the netlist file that was judged, when it was not modgen's own. What no key of the spec caused is
        then located in it. [-]
    folders : bool
        Whether a relative path is kept as it was given, so that a review tool finds the file from where the
        command ran. Without it only the file's name is written: the same spec gives the same bytes wherever it
        lies. An absolute path, or one that goes up, is never written. [-]

    Returns
    -------
    bytes
        UTF-8, indented, a line end at the end; measured values and limits in the unit given beside them.

    Notes
    -----
    A finding points at the line of the spec key that caused it, or of the nearest key above that the page states.
    Where the page states none (a wrong connection, a default) the region is the file's first line: consumers
    that show lines need one, and the property ``key`` says what was meant.

    A waiver is a suppression of kind ``inSource``, with its place, because it stands in the spec that is reviewed.
    """
    rules = discover()
    files = _Files(spec, netlist, folders)
    run: dict[str, Any] = {
        "tool": {
            "driver": {
                "name": "modgen",
                "version": __version__,
                "semanticVersion": __version__,
                "rules": [_descriptor(rule) for rule in rules],
            }
        },
        "invocations": [
            {
                "executionSuccessful": True,
                "toolExecutionNotifications": [_not_judged(c, rules) for c in report.checked if not c.judged],
            }
        ],
        "columnKind": "unicodeCodePoints",
        "artifacts": [{"location": {"uri": uri}, "roles": ["analysisTarget"]} for uri in files.all()],
        "results": [_result(finding, spec, rules, files) for finding in report.findings],
        "properties": {"cleared": report.cleared, "checked": [_evidence(c) for c in report.checked]},
    }
    if spec is not None:
        # keeps the runs of several modules of one repository apart
        run["automationDetails"] = {"id": f"modgen/{spec.slug}/"}
    log = tidy({"$schema": SCHEMA, "version": VERSION, "runs": [run]})
    return (json.dumps(log, indent=2, ensure_ascii=False, allow_nan=False) + "\n").encode("utf-8", "replace")


def file_uri(path: str, *, folders: bool = False) -> str:
    """A path as a relative URI: percent-encoded, and never one that tells of the machine.

    Parameters
    ----------
    path : str
        As the user gave it. [-]
    folders : bool
        Whether the folders of a relative path are kept. [-]

    Returns
    -------
    str
        The file's name alone for an absolute path, one that goes up, or without ``folders``.
    """
    given = PurePath(path)
    kept = folders and not given.is_absolute() and not given.drive and ".." not in given.parts
    name = given.as_posix() if kept else PurePosixPath(given.as_posix()).name
    return quote(name, errors="surrogateescape")


class _Files:
    """The files that were judged, as URIs."""

    def __init__(self, spec: Spec | None, netlist: str, folders: bool) -> None:
        self._folders = folders
        self.spec = self.uri(spec.file) if spec is not None else ""
        self.netlist = self.uri(netlist) if netlist else ""

    def uri(self, path: str) -> str:
        return file_uri(path, folders=self._folders)

    def all(self) -> list[str]:
        return [uri for uri in (self.spec, self.netlist) if uri]


def _escaped(text: str) -> str:
    """A text as a message string: braces would be placeholders (SARIF 2.1.0, section 3.11.5)."""
    return text.replace("{", "{{").replace("}", "}}")


def _message(text: str) -> dict[str, str]:
    return {"text": _escaped(text)}


def _descriptor(rule: Rule) -> dict[str, Any]:
    """What a rule is, in the words of its own page."""
    page = headings(rule)
    summary = " ".join(page[""].split())
    plain = "\n\n".join(f"{name}:\n{page[name]}" for name in _HELP)
    marked = "\n\n".join(
        f"**{name}**\n\n```text\n{page[name]}\n```" if name in _EXAMPLES else f"**{name}**\n\n{page[name]}"
        for name in _HELP
    )
    return {
        "id": rule.name,
        "shortDescription": _message(summary),
        "fullDescription": _message(" ".join(page["Checks"].split())),
        "help": {**_message(plain), "markdown": _escaped(marked)},
        "defaultConfiguration": {"level": rule.level},
        "properties": {"tags": [rule.subject], "needsSpec": rule.needs_spec},
    }


def _index(name: str, rules: tuple[Rule, ...]) -> int | None:
    return next((n for n, rule in enumerate(rules) if rule.name == name), None)


def _result(finding: Finding, spec: Spec | None, rules: tuple[Rule, ...], files: _Files) -> dict[str, Any]:
    lines = [finding.message]
    if finding.why:
        lines.append(f"why: {finding.why}")
    if finding.fix:
        lines.append(f"fix: {finding.fix}")
    result: dict[str, Any] = {"ruleId": finding.rule}
    index = _index(finding.rule, rules)
    if index is not None:
        result["ruleIndex"] = index
    figures = {
        "parts": list(finding.parts) or None,
        "nets": list(finding.nets) or None,
        "key": finding.key or None,
        "measured": finding.measured,
        "limit": finding.limit,
        "unit": finding.unit or None,
        "margin": finding.margin,
    }
    return {
        **result,
        "kind": "fail",
        "level": finding.level,
        "message": _message("\n".join(lines)),
        "locations": [_location(finding, spec, files)],
        # stated for every result: without it a consumer cannot tell whether anybody answers for it
        "suppressions": [_suppression(finding, spec, files)] if finding.waived else [],
        "properties": {name: value for name, value in tidy(figures).items() if value is not None},
    }


def _location(finding: Finding, spec: Spec | None, files: _Files) -> dict[str, Any]:
    """Where to look: the line of the spec or the file, and the parts and nets."""
    where: dict[str, Any] = {}
    if spec is not None and (finding.key or not files.netlist):
        where["physicalLocation"] = _physical(spec.place(finding.key), files)
    elif files.netlist:
        where["physicalLocation"] = {"artifactLocation": {"uri": files.netlist}, "region": {"startLine": 1}}
    named = [("part", ref) for ref in finding.parts] + [("net", net) for net in finding.nets]
    if named:
        where["logicalLocations"] = [
            {"name": name, "fullyQualifiedName": f"{kind} {name}", "kind": kind} for kind, name in named
        ]
    return where


def _physical(place: Place, files: _Files) -> dict[str, Any]:
    region = {"startLine": max(place.line, 1)}
    if place.column:
        region["startColumn"] = place.column
    return {"artifactLocation": {"uri": files.uri(place.file)}, "region": region}


def _suppression(finding: Finding, spec: Spec | None, files: _Files) -> dict[str, Any]:
    """The waiver that covers a finding; the reason is plain text, not a message string."""
    suppression: dict[str, Any] = {"kind": "external", "status": "accepted", "justification": finding.waived}
    for waiver in spec.waive if spec is not None else ():
        if waives(waiver, finding) and waiver.reason == finding.waived:
            suppression["kind"] = "inSource"
            suppression["location"] = {"physicalLocation": _physical(waiver.place, files)}
            break
    return suppression


def _evidence(checked: Checked) -> dict[str, Any]:
    """What one rule looked at; a rule that measures nothing with a limit has no margin."""
    return {
        "rule": checked.rule,
        "judged": checked.judged,
        "instances": checked.instances,
        "worstMargin": checked.worst_margin,
        "worst": checked.worst or None,
        "notJudged": checked.not_judged or None,
    }


def _not_judged(checked: Checked, rules: tuple[Rule, ...]) -> dict[str, Any]:
    associated: dict[str, Any] = {"id": checked.rule}
    index = _index(checked.rule, rules)
    if index is not None:
        associated["index"] = index
    return {
        "level": "note",
        "message": _message(f"{checked.rule} was not judged: {checked.not_judged}"),
        "associatedRule": associated,
    }
