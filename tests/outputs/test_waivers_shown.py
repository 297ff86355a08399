"""What somebody answers for is told, with the reason, wherever the module is judged or made."""

from __future__ import annotations

import html
import io
import json
from dataclasses import replace
from pathlib import Path

import openpyxl
import pytest

from modgen.cli.screen import report_text, summary
from modgen.outputs import pack_files
from modgen.outputs.wording import answered
from modgen.rules.contract import Finding, Report

REASON = "bench tested <twice> & held"
#: the circuit itself, as the circuit library writes it: it carries no verdict either
WITHOUT = {"netlist.net"}


def waived(refs: tuple[str, ...], rule: str = "idle-amplifier", reason: str = REASON) -> Finding:
    return Finding(rule, "error", refs, f"{refs[0]} is not tied off", "it oscillates", "tie it", waived=reason)


@pytest.fixture
def files(make):
    return pack_files(make(report=Report((waived(("U2",)),), ())))


def text_of(name: str, content: bytes) -> str:
    """What a reader of a file sees."""
    if name.endswith(".xlsx"):
        book = openpyxl.load_workbook(io.BytesIO(content))
        return "\n".join(str(c.value) for sheet in book for row in sheet for c in row if c.value is not None)
    text = content.decode("utf-8")
    if name.endswith((".json", ".sarif")):
        return json.dumps(json.loads(text), ensure_ascii=False)
    return html.unescape(text) if name.endswith(".html") else text


def test_every_file_tells_rule_part_and_reason(files):
    for name in sorted(set(files) - WITHOUT):
        text = text_of(name, files[name])
        assert REASON in text, name
        assert "idle-amplifier" in text, name
        assert "U2" in text, name


def test_screen_and_text(make):
    job = make(report=Report((waived(("U2",)),), ()))
    for text in (summary(job, Path("output/x")), report_text(job.report)):
        assert f"error, waived: U2 is not tied off [idle-amplifier]\n    waived: {REASON}\n" in text
        assert "cleared for ordering: 1 waived\n" in text


def test_nothing_waived_nothing_said(make):
    for name, content in pack_files(make()).items():
        assert "Waived by" not in text_of(name, content)
        assert "waived:" not in text_of(name, content).lower(), name


def test_one_line_for_each_rule_and_reason():
    findings = (
        waived(("U3",)),
        waived(("U1", "U2")),
        waived(("R1",), "lone-net", "a test point"),
        replace(waived(("R1",), "glide-range", "measured"), parts=()),
        replace(waived(("U4",)), waived=""),
    )
    assert answered(Report(findings, ())) == (
        f"idle-amplifier on U1-U3: {REASON}",
        "lone-net on R1: a test point",
        "glide-range: measured",
    )


def test_a_reason_with_letters_no_simulator_reads(make):
    deck = pack_files(make(report=Report((waived(("U2",), reason="4.7 kΩ\n.end"),), ())))["circuit.cir"]
    assert b"* Waived: idle-amplifier on U2: 4.7 k?.end\n" in deck
