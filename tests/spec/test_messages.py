"""Every kind of mistake on a page, and the whole message about it."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
import yaml

from modgen.problems import InputError
from modgen.spec import parse_spec
from modgen.units import QuantityError, parse_quantity

FOLDER = Path(__file__).parent / "cases"
CASES: dict[str, Any] = yaml.safe_load((FOLDER / "messages.yaml").read_text(encoding="utf-8"))
SYNTAX: dict[str, Any] = yaml.safe_load((FOLDER / "syntax.yaml").read_text(encoding="utf-8"))


@pytest.mark.parametrize("case", CASES)
def test_the_whole_message(refusal: Callable[..., str], case: str) -> None:
    assert refusal(**CASES[case]["page"]) + "\n" == CASES[case]["message"]


@pytest.mark.parametrize("case", SYNTAX)
def test_the_whole_message_about_a_page_that_is_no_yaml(case: str) -> None:
    with pytest.raises(InputError) as caught:
        parse_spec(SYNTAX[case]["text"])
    assert str(caught.value) + "\n" == SYNTAX[case]["message"]


def test_digits_without_end(refusal: Callable[..., str]) -> None:
    """Python itself refuses to convert so many."""
    assert refusal(channels="9" * 5000).startswith("spec.yaml:2:11: error: channels is 99999")
    assert ", above 64\n" in refusal(channels="9" * 5000)
    assert ", below 1\n" in refusal(channels="-" + "9" * 5000)


QUANTITIES = [
    ("rails.positive", {"rails": "{positive: 12, negative: -12 V}"}, "4:19", "12", "voltage"),
    ("rails.negative", {"rails": "{positive: 12 V, negative: 12 ms}"}, "4:35", "12 ms", "voltage"),
    ("rails.tolerance", {"rails": "{positive: 12 V, negative: -12 V, tolerance: 5}"}, "4:53", "5", "ratio"),
    ("glide.shortest", {"glide": "{shortest: -5 ms, longest: 2 s}"}, "5:19", "-5 ms", "time"),
    ("glide.longest", {"glide": "{shortest: 5 ms, longest: 2 MS}"}, "5:34", "2 MS", "time"),
    ("glide.longest", {"glide": "{shortest: 5 ms, longest: .inf}"}, "5:34", ".inf", "time"),
    (
        "glide.step",
        {"glide": "{shortest: 5 ms, longest: 2 s, measure: settle, step: NaN V}"},
        "5:62",
        "NaN V",
        "voltage",
    ),
    (
        "glide.within",
        {"glide": "{shortest: 5 ms, longest: 2 s, measure: settle, within: x cents}"},
        "5:64",
        "x cents",
        "pitch",
    ),
    ("signal.source", {"signal": "{source: 1 kV}"}, "6:18", "1 kV", "resistance"),
    ("signal.load", {"signal": "{load: 1e5}"}, "6:16", "1e5", "resistance"),
    ("accuracy.scale", {"accuracy": "{scale: 5}"}, "6:19", "5", "ratio"),
    ("accuracy.offset", {"accuracy": "{offset: 12:30}"}, "6:20", "12:30", "voltage"),
    ("order.spares", {"order": "{spares: five}"}, "6:17", "five", "ratio"),
]


@pytest.mark.parametrize(("key", "keys", "at", "text", "kind"), QUANTITIES, ids=[f"{q[0]}={q[3]}" for q in QUANTITIES])
def test_what_is_no_quantity(
    refusal: Callable[..., str], key: str, keys: dict[str, str], at: str, text: str, kind: str
) -> None:
    """The reader says which key and where; the words are those of the units."""
    with pytest.raises(QuantityError) as caught:
        parse_quantity(text, kind)
    said = caught.value
    assert refusal(**keys) == f"spec.yaml:{at}: error: {key}: {said.what}\n    why: {said.why}\n    fix: {said.fix}"


@pytest.mark.parametrize("span", ["5 V", "5 V to 0 V", "±0 V", "0 V to 5", "NaN"])
def test_what_is_no_span(refusal: Callable[..., str], span: str) -> None:
    assert refusal(signal=f"{{span: {span}}}").startswith("spec.yaml:6:16: error: signal.span: ")


@pytest.mark.parametrize("text", ["[]", "- module: x", "hello", "'module: x'"])
def test_a_page_that_is_no_mapping(text: str) -> None:
    found = "'" if "[" not in text and "-" not in text else "a list"
    with pytest.raises(InputError) as caught:
        parse_spec(text)
    first, *rest = str(caught.value).split("\n")
    assert first.startswith(f"spec.yaml:1:1: error: the page is {found}")
    assert rest == [
        "    why: the page is made of keys and values",
        "    fix: write it like this: module: ..., channels: ..., jacks: ..., rails: ..., glide: ...",
    ]


def test_all_problems_in_the_order_of_the_page() -> None:
    text = """\
module: ''
jacks: none
rails: {positive: 12 s, negative: 12 V}
chanels: 4
glide: {shortest: 2 s, longest: 1 s, taper: 5}
signal:
  pitch: yes
  span: 5 V
"""
    with pytest.raises(InputError) as caught:
        parse_spec(text)
    found = [(p.place.line, p.what.split(" is ")[0].split(":")[0]) for p in caught.value.problems]
    assert found == [
        (1, "the key 'channels'"),
        (1, "module"),
        (2, "jacks"),
        (3, "rails.positive"),
        (3, "rails.negative"),
        (4, "unknown key 'chanels'"),
        (5, "glide.longest"),
        (5, "glide.taper"),
        (7, "signal.pitch"),
        (8, "signal.span"),
    ]
