"""A spec written in the words of the page reads back the same, and the schema takes both."""

from __future__ import annotations

import json
from collections.abc import Callable
from typing import Any

import pytest
import yaml
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from jsonschema import Draft202012Validator

from modgen.problems import InputError
from modgen.spec import json_schema, parse_spec, resolved
from modgen.spec.names import slug
from modgen.spec.resolved import exact_text, span_text
from modgen.units import parse_quantity

UNHURRIED = settings(deadline=None, suppress_health_check=[HealthCheck.too_slow])
SCHEMA = Draft202012Validator(json_schema())


def numbers(low: float, high: float, unit: str) -> st.SearchStrategy[str]:
    """Any number of binary64 between two bounds, and the few digits that people write."""
    exact = st.floats(low, high).filter(lambda x: x == 0.0 or abs(x) > 1e-300)
    few = st.integers(1, 99).map(lambda n: low + (high - low) * n / 100).map(lambda x: f"{x:.4g}")
    return st.one_of(exact.map(repr), few).map(lambda number: f"{number} {unit}")


def some(**keys: st.SearchStrategy[Any]) -> st.SearchStrategy[dict[str, Any]]:
    """A section that states any of its keys."""
    return st.fixed_dictionaries({}, optional=keys)


PLAIN = st.characters(codec="utf-8", categories=["L", "N", "P", "S", "Zs"], exclude_characters="\\")
WORDS = st.text(PLAIN, min_size=1, max_size=40).filter(lambda t: t == t.strip() and t.isprintable())
NAMES = WORDS.filter(lambda t: bool(slug(t)))
REFERENCES = st.from_regex(r"[A-Z]{1,2}[0-9]{1,3}", fullmatch=True)


@st.composite
def pages(draw: st.DrawFn) -> dict[str, Any]:
    """A page without problems, stating any of the keys."""
    channels = draw(st.integers(1, 64))
    total = st.integers(channels + 1, 9 * channels)
    both = st.fixed_dictionaries(
        {"inputs": st.integers(1, channels), "outputs": st.integers(channels, 8 * channels)},
    )
    single = draw(st.booleans())
    low = draw(st.floats(0.0 if single else -20.0, 19.0))
    high = draw(st.floats(low + 0.01, 20.0))
    span = draw(
        st.sampled_from(
            [f"{low} V to {high} V", "0 V to 5 V"] if single else [f"{low} V to {high} V", f"±{high - low} V"]
        )
    )
    if abs(high - low) > 20.0 and span.startswith("±"):
        span = "±20 V"
    page: dict[str, Any] = {
        "module": draw(NAMES),
        "channels": channels,
        "jacks": draw(st.one_of(total, both)),
        "rails": {
            "positive": draw(numbers(3.0, 18.0, "V")),
            "negative": "0 V" if single else draw(numbers(-18.0, -0.001, "V")),
            **draw(some(tolerance=numbers(0.0, 20.0, "%"))),
        },
        "glide": {
            "shortest": draw(numbers(1e-4, 0.9, "s")),
            "longest": draw(numbers(1.0, 1000.0, "s")),
            **draw(
                st.one_of(
                    some(measure=st.sampled_from(["rise", "time-constant"])),
                    st.fixed_dictionaries(
                        {
                            "measure": st.just("settle"),
                            "step": st.one_of(numbers(1.0, 40.0, "V"), numbers(1201.0, 4000.0, "cents")),
                            "within": st.one_of(numbers(1e-4, 0.9, "V"), numbers(0.01, 1000.0, "cents")),
                        }
                    ),
                )
            ),
            **draw(
                some(
                    cover=st.sampled_from(["nominal", "worst-case"]),
                    taper=st.sampled_from(["linear", "log", "reverse-log"]),
                    ranges=st.sampled_from([1, 2]),
                )
            ),
        },
        "signal": {
            "span": span,
            **draw(some(source=numbers(0.0, 1e7, "Ω"), load=numbers(1e4, 1e12, "Ω"), pitch=st.booleans())),
        },
    }
    optional = {
        "normalling": st.sampled_from(["ground", "chain"]),
        "accuracy": some(
            scale=st.one_of(
                numbers(1e-4, 50.0, "%"), numbers(0.1, 600.0, "cents"), numbers(0.1, 600.0, "cents per octave")
            ),
            offset=st.one_of(numbers(1e-6, 20.0, "V"), numbers(1e-4, 50.0, "%")),
            temperature=st.tuples(numbers(-40.0, 24.0, "°C"), numbers(25.0, 125.0, "°C")).map(" to ".join),
        ),
        "output": some(protection=st.sampled_from(["auto", "outside"])),
        "build": some(
            mount=st.sampled_from(["through-hole", "surface"]),
            amplifier=WORDS,
            capacitor=WORDS,
            prefer=st.sampled_from(["cost", "accuracy", "size"]),
            catalogue=st.lists(WORDS, unique=True, max_size=3),
            land_patterns=WORDS,
        ),
        "order": some(boards=st.integers(1, 1_000_000), spares=numbers(0.0, 100.0, "%"), stock=WORDS, prices=WORDS),
        "waive": st.lists(
            st.fixed_dictionaries(
                {"rule": st.sampled_from(["glide-range", "lone-net"]), "reason": WORDS},
                optional={"parts": st.one_of(REFERENCES, st.lists(REFERENCES, min_size=1, max_size=3, unique=True))},
            ),
            max_size=3,
        ),
    }
    return {**page, **draw(some(**optional))}


def dumped(page: dict[str, Any]) -> str:
    return str(yaml.safe_dump(page, allow_unicode=True, sort_keys=False))


@UNHURRIED
@given(pages())
def test_resolved_reads_back_to_an_equal_spec(page: dict[str, Any]) -> None:
    spec = parse_spec(dumped(page))
    written = resolved(spec)
    assert parse_spec(dumped(written)) == spec
    assert resolved(parse_spec(dumped(written))) == written
    assert json.loads(json.dumps(written)) == written


@UNHURRIED
@given(pages())
def test_the_schema_takes_what_the_reader_takes(page: dict[str, Any]) -> None:
    spec = parse_spec(dumped(page))
    assert [e.message for e in SCHEMA.iter_errors(page)] == []
    assert [e.message for e in SCHEMA.iter_errors(resolved(spec))] == []


def test_resolved_states_every_default_in_the_words_of_the_page(page: Callable[..., str]) -> None:
    assert resolved(parse_spec(page())) == {
        "module": "Lag",
        "channels": 4,
        "jacks": {"inputs": 4, "outputs": 4},
        "rails": {"positive": "12 V", "negative": "-12 V", "tolerance": "5 %"},
        "glide": {
            "shortest": "5 ms",
            "longest": "2 s",
            "measure": "rise",
            "cover": "nominal",
            "taper": "log",
            "ranges": 1,
        },
        "normalling": "ground",
        "signal": {"span": "±5 V", "source": "1 kΩ", "load": "100 kΩ", "pitch": False},
        "accuracy": {"scale": "2 %", "offset": "200 mV", "temperature": "15 °C to 65 °C"},
        "output": {"protection": "auto"},
        "build": {
            "mount": "through-hole",
            "amplifier": "auto",
            "capacitor": "auto",
            "prefer": "cost",
            "catalogue": [],
            "land_patterns": "none",
        },
        "order": {"boards": 1, "spares": "5 %", "stock": "none", "prices": "none"},
        "waive": [],
    }


def test_resolved_settling_pitch_and_waivers(page: Callable[..., str]) -> None:
    written = resolved(
        parse_spec(
            page(
                glide="{shortest: 5 ms, longest: 2 s, measure: settle}",
                signal="{span: 0 V to 5 V, pitch: true}",
                waive="[{rule: a, reason: b}, {rule: a, parts: C3, reason: b}]",
            )
        )
    )
    assert (written["glide"]["step"], written["glide"]["within"]) == ("1 V", "5 cents")
    assert written["accuracy"] == {"scale": "5 cents", "offset": "30 mV", "temperature": "15 °C to 65 °C"}
    assert written["signal"]["span"] == "0 V to 5 V"
    assert written["waive"] == [{"rule": "a", "reason": "b"}, {"rule": "a", "parts": ["C3"], "reason": "b"}]


@pytest.mark.parametrize(
    ("value", "kind", "text"),
    [
        (12.0, "voltage", "12 V"),
        (0.0, "voltage", "0 V"),
        (0.07, "ratio", "7 %"),
        (0.0125, "ratio", "1.25 %"),
        (4700.0, "resistance", "4.7 kΩ"),
        (5 / 1200, "pitch", "5 cents"),
        (1 / 3, "time", "333.3333333333333 ms"),
    ],
)
def test_exact_text(value: float, kind: str, text: str) -> None:
    assert exact_text(value, kind) == text


@UNHURRIED
@given(st.floats(1e-300, 1e300), st.sampled_from(["voltage", "time", "ratio", "resistance"]))
def test_exact_text_is_exact(value: float, kind: str) -> None:
    assert parse_quantity(exact_text(value, kind), kind) == value


def test_span_text() -> None:
    assert span_text(-5.0, 5.0) == "±5 V"
    assert span_text(0.0, 5.0) == "0 V to 5 V"
    assert span_text(-0.5, 8.0) == "-500 mV to 8 V"


MUTANTS = st.sampled_from(
    [
        "",
        "'",
        '"',
        "[",
        "]",
        "{",
        "}",
        ":",
        ": ",
        "- ",
        "\n",
        "\t",
        "&a ",
        "*a",
        "!!int ",
        "|",
        "0",
        "-",
        "e9",
        "NaN",
        "µ",
        "\\",
        "\0",
        "%",
        "\u202e",
        "\U0001f600",
        "<<: ",
    ]
)


@UNHURRIED
@given(pages(), st.lists(st.tuples(st.floats(0, 1), MUTANTS, st.integers(0, 3)), min_size=1, max_size=4))
def test_damaged_pages_give_a_spec_or_our_error(page: dict[str, Any], damage: list[tuple[float, str, int]]) -> None:
    text = dumped(page)
    for where, what, lost in damage:
        at = round(where * len(text))
        text = text[:at] + what + text[at + lost :]
    said = ""
    try:
        spec = parse_spec(text)
    except InputError as error:
        said = str(error)
    assert "error: " in said or parse_spec(dumped(resolved(spec))) == spec


VALUES = st.recursive(
    st.one_of(st.none(), st.booleans(), st.integers(), st.floats(), st.text(max_size=10), st.dates()),
    lambda inner: st.one_of(st.lists(inner, max_size=3), st.dictionaries(st.text(max_size=5), inner, max_size=3)),
    max_leaves=6,
)


@UNHURRIED
@given(pages(), st.data())
def test_any_value_anywhere_gives_a_spec_or_our_error(page: dict[str, Any], data: st.DataObject) -> None:
    key = data.draw(st.sampled_from(sorted(page)))
    inner = page[key]
    if isinstance(inner, dict) and inner and data.draw(st.booleans()):
        page = {**page, key: {**inner, data.draw(st.sampled_from(sorted(inner))): data.draw(VALUES)}}
    else:
        page = {**page, key: data.draw(VALUES)}
    said = ""
    try:
        spec = parse_spec(dumped(page))
    except InputError as error:
        said = str(error)
    assert "error: " in said or parse_spec(dumped(resolved(spec))) == spec


@UNHURRIED
@given(st.one_of(st.text(max_size=200), st.binary(max_size=200)))
def test_anything_gives_our_error(data: str | bytes) -> None:
    with pytest.raises(InputError):
        parse_spec(data)
