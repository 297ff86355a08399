"""The JSON Schema: the keys of the model, and nothing that the reader would refuse for its form."""

from __future__ import annotations

import json
from typing import Any

import pytest
import yaml
from jsonschema import Draft202012Validator

from modgen.spec import json_schema, starter_text
from modgen.spec.keys import Key, keys_of, page_name
from modgen.spec.model import Spec

SCHEMA = json_schema()
PAGE: dict[str, Any] = {
    "module": "Lag",
    "channels": 4,
    "jacks": 8,
    "rails": {"positive": "12 V", "negative": "-12 V"},
    "glide": {"shortest": "5 ms", "longest": "2 s"},
}


def complaints(page: Any) -> list[str]:
    return [error.message for error in Draft202012Validator(SCHEMA).iter_errors(page)]


def test_it_is_a_schema_and_json() -> None:
    Draft202012Validator.check_schema(SCHEMA)
    assert json.loads(json.dumps(SCHEMA)) == SCHEMA
    assert SCHEMA["$schema"] == "https://json-schema.org/draft/2020-12/schema"


def sections(model: type, schema: dict[str, Any], where: str = "") -> list[tuple[str, type, dict[str, Any]]]:
    found = [(where or "page", model, schema)]
    for name, key in keys_of(model):
        if key.section:
            inner = schema["properties"][page_name(name, key)]
            inner = inner.get("items") or (inner["oneOf"][1] if "oneOf" in inner else inner)
            found += sections(key.section, inner, page_name(name, key))
    return found


@pytest.mark.parametrize(
    ("where", "model", "schema"), sections(Spec, SCHEMA), ids=[s[0] for s in sections(Spec, SCHEMA)]
)
def test_keys_required_and_defaults_are_the_model_s(where: str, model: type, schema: dict[str, Any]) -> None:
    keys: dict[str, Key] = {page_name(name, key): key for name, key in keys_of(model)}
    assert list(schema["properties"]) == list(keys)
    assert schema.get("required", []) == [word for word, key in keys.items() if key.required]
    assert schema["additionalProperties"] is False
    for word, key in keys.items():
        assert schema["properties"][word]["description"]
        assert ("default" in schema["properties"][word]) == bool(key.default), word


def test_all_sections_are_there() -> None:
    names = [name for name, _, _ in sections(Spec, SCHEMA)]
    assert names == ["page", "jacks", "rails", "glide", "signal", "accuracy", "output", "build", "order", "waive"]


def test_it_takes_the_starter_and_the_least_page() -> None:
    assert complaints(yaml.safe_load(starter_text())) == []
    assert complaints(PAGE) == []


@pytest.mark.parametrize(
    "change",
    [
        {"channels": 0},
        {"channels": 65},
        {"channels": "4"},
        {"channels": 2.5},
        {"channels": True},
        {"module": ""},
        {"module": "x" * 61},
        {"module": "a\\b"},
        {"jacks": [8]},
        {"jacks": {"inputs": 4}},
        {"jacks": {"inputs": 4, "outputs": 4, "more": 1}},
        {"rails": {"positive": "12 V"}},
        {"rails": {"positive": 12, "negative": "-12 V"}},
        {"rails": {"positive": "12", "negative": "-12 V"}},
        {"rails": {"positive": "12 s", "negative": "-12 V"}},
        {"glide": {"shortest": "5 MS", "longest": "2 s"}},
        {"glide": {"shortest": "5 ms", "longst": "2 s"}},
        {"glide": {"shortest": "5 ms", "longest": "2 s", "measure": "fall"}},
        {"normalling": "none"},
        {"signal": {"span": "5 V"}},
        {"signal": {"pitch": "yes"}},
        {"signal": {"source": "1 kV"}},
        {"signal": {"load": "4,7 k"}},
        {"accuracy": {"scale": "5 mV"}},
        {"accuracy": {"scale": "5 % per octave"}},
        {"accuracy": {"scale": "5 cents per volt"}},
        {"accuracy": {"offset": "5 cents"}},
        {"accuracy": {"temperature": "65 °C"}},
        {"accuracy": {"temperature": "15 to 65 °C"}},
        {"output": {"protection": "none"}},
        {"build": {"catalogue": {"a": 1}}},
        {"build": {"catalogue": ["a", "a"]}},
        {"order": {"boards": 0}},
        {"waive": [{"rule": "a"}]},
        {"waive": [{"rule": "a", "parts": [], "reason": "x"}]},
        {"waive": [{"rule": "A b", "reason": "x"}]},
        {"chanels": 4},
    ],
    ids=str,
)
def test_it_refuses(change: dict[str, Any]) -> None:
    assert complaints({**PAGE, **change})


@pytest.mark.parametrize(
    "change",
    [
        {"jacks": {"inputs": 4, "outputs": 4}},
        {"rails": {"positive": "12V", "negative": "−12.0 V", "tolerance": "5%"}},
        {"rails": {"positive": "3V3", "negative": "-3V3"}},
        {"glide": {"shortest": "500 us", "longest": "2000 ms", "step": "100 cents", "within": "1 mV"}},
        {"glide": {"shortest": "5 μs", "longest": "1e3 s"}},
        {"signal": {"span": "+/-5 V", "source": "4k7", "load": "100 kohm", "pitch": True}},
        {"signal": {"span": "-2.5 V to 8 V", "source": "47R", "load": "1M"}},
        {"accuracy": {"scale": "1 cent", "offset": "2 %"}},
        {"accuracy": {"scale": "5 cents per octave"}},
        {"accuracy": {"scale": "5 cents / octave"}},
        {"accuracy": {"temperature": "-10 °C to 40degC"}},
        {"build": {"catalogue": "mine.yaml"}},
        {"waive": [{"rule": "glide-range", "parts": "R3", "reason": "in the drawer"}]},
    ],
    ids=str,
)
def test_it_takes_every_notation(change: dict[str, Any]) -> None:
    assert complaints({**PAGE, **change}) == []
