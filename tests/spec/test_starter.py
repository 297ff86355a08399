"""The page to begin with."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from modgen.rules import rule_names
from modgen.spec import Waiver, parse_spec, read_spec, starter_text
from modgen.spec.keys import keys_of, page_name
from modgen.spec.model import Spec

COMMENTED = [line for line in starter_text().splitlines() if re.match(r"#( *)[a-z_]+:", line)]
SPECS = Path(__file__).resolve().parent.parent.parent / "specs"
SETTLING = ("#  step:", "#  within:")


def without_comments(text: str) -> str:
    """The page with every key that stands in a comment, settling aside, stated."""
    return "\n".join(
        line[1:] if line in COMMENTED and not line.startswith(SETTLING) else line for line in text.splitlines()
    )


def test_it_reads_without_problems_and_is_narrow() -> None:
    text = starter_text()
    assert parse_spec(text).slug == "my-first-lag"
    assert max(len(line) for line in text.splitlines()) <= 110
    assert "\t" not in text
    assert text.endswith("\n")


def test_it_writes_over_no_shipped_example() -> None:
    shipped = {read_spec(path).slug for path in SPECS.glob("*.yaml")}
    assert len(shipped) >= 4
    assert parse_spec(starter_text()).slug not in shipped


def test_the_rules_of_its_examples_exist() -> None:
    keys = dict(keys_of(Spec))
    waivers = parse_spec(starter_text() + f"waive: {keys['waive'].example}\n").waive
    named = [waiver.rule for waiver in waivers] + [dict(keys_of(Waiver))["rule"].example]
    assert len(named) == 2
    assert set(named) <= set(rule_names())
    assert all(f"rule: {waiver.rule}" in starter_text() for waiver in waivers)


def test_its_comments_state_the_defaults() -> None:
    stated = parse_spec(without_comments(starter_text()))
    assert stated == parse_spec(starter_text())
    every = sum(
        1 + len(keys_of(key.section) if key.kind == "section" and key.section else ()) for _, key in keys_of(Spec)
    )
    assert len(stated.places) == every - len(SETTLING) == 39


def test_settling_can_be_taken_out_of_its_comments() -> None:
    text = starter_text().replace("#  measure: rise ", "  measure: settle ")
    for line in COMMENTED:
        if line.startswith(SETTLING):
            text = text.replace(line, line[1:])
    glide = parse_spec(text).glide
    assert (glide.measure, glide.step, glide.within) == ("settle", 1.0, 5 / 1200)


@pytest.mark.parametrize("name", [page_name(name, key) for name, key in keys_of(Spec)])
def test_every_key_is_there_once(name: str) -> None:
    assert len(re.findall(rf"^#?{name}:", starter_text(), re.MULTILINE)) == 1
    for _, section in keys_of(Spec):
        if section.kind == "section" and section.section:
            for inner, key in keys_of(section.section):
                assert len(re.findall(rf"^#?  {page_name(inner, key)}:", starter_text(), re.MULTILINE)) == 1
