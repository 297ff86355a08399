import json
from dataclasses import fields
from pathlib import Path

import pytest

from modgen.analysis.accuracy import LEFT_OUT
from modgen.analysis.montecarlo import DISTRIBUTIONS, SEED
from modgen.chain import run
from modgen.outputs.design_json import design_json, findings_json, tidy

SPECS = sorted((Path(__file__).parents[2] / "specs").glob("*.yaml"))


def load(job):
    def no_constant(name):
        raise AssertionError(f"{name} is not JSON")

    return json.loads(design_json(job), parse_constant=no_constant)


def test_keys_in_their_order(job):
    assert list(load(job)) == [
        "module",
        "cleared",
        "findings",
        "checked",
        "spec",
        "channels",
        "boards_inside",
        "choices",
        "parts",
        "rails",
        "accuracy",
        "headroom",
        "monte_carlo",
        "matching",
        "travel",
        "tapers",
        "stability",
        "noise",
        "shorts",
        "dissipation",
        "supply_states",
        "bounds",
    ]


def test_a_channel_has_its_times_in_seconds(job):
    channel = load(job)["channels"][1]
    assert channel["channel"] == 2
    assert channel["shortest"] == {"nominal": 4.84e-3, "low": 4.5e-3, "high": 5.2e-3}
    assert channel["middle"]["nominal"] == 0.334
    assert channel["longest"] == {"nominal": 2.2, "low": 1.67, "high": 2.77}


def test_shares_of_channels_and_of_boards_are_apart(job):
    data = load(job)
    assert data["channels"][0]["inside"] == {"share": 0.98, "low": 0.97, "high": 0.99, "boards": 10000}
    assert data["boards_inside"] == {"share": 0.9604, "low": 0.9409, "high": 0.9801}


def test_rails_are_signed_and_named_by_magnitude(job):
    positive, negative = load(job)["rails"]
    assert positive["bus"] == {"nominal": 12.0, "least": 11.4, "greatest": 12.6}
    assert negative["bus"] == {"nominal": -12.0, "least": -11.4, "greatest": -12.6}
    assert negative["protected"] == {"nominal": -11.75, "least": -11.1, "greatest": -12.4}


def test_parts_are_the_netlists_with_the_designs_reasons(job):
    parts = load(job)["parts"]
    assert [p["ref"] for p in parts] == [p.ref for p in job.netlist.parts]
    found = {p["ref"]: p for p in parts}
    assert found["C1"] == {
        "ref": "C1",
        "part": "c-1u-pp",
        "value": "1u",
        "channel": 1,
        "role": "glide-capacitor",
        "serves": None,
        "land_pattern": "RESAD1016W60L630D250",
        "reason": "reason of glide-capacitor",
    }
    assert (found["C2"]["channel"], found["C2"]["serves"]) == (None, "U1")


def test_the_spec_is_whole_and_choices_keep_what_lost(job):
    data = load(job)
    assert data["spec"]["channels"] == 2
    assert {"rails", "glide", "signal", "accuracy", "order"} <= set(data["spec"])
    assert data["choices"][0]["runners_up"] == [{"what": "2u2", "why": "dearer"}]


def test_what_has_no_bound_is_null(job):
    bounds = {b["net"]: b for b in load(job)["bounds"]}
    assert bounds["FLOATING"] == {"net": "FLOATING", "low": None, "high": None}
    assert bounds["CH1_GLIDE"]["high"] == 12.6


def test_terms_carry_formula_source_and_remedy_and_the_largest_is_named(job):
    accuracy = load(job)["accuracy"]
    assert accuracy["terms"][0] == {
        "kind": "scale",
        "name": "output resistor into load",
        "worst": 0.0033,
        "formula": "R/(R+load)",
        "source": "divider",
        "remedy": "a smaller resistor",
    }
    assert [term["kind"] for term in accuracy["terms"]] == ["scale", "drift"]
    assert accuracy["largest"] == {
        "scale": "output resistor into load",
        "offset": None,
        "drift": "bias current, output buffer",
    }
    assert accuracy["left_out"] == list(LEFT_OUT)


def test_offset_over_temperature(job):
    accuracy = load(job)["accuracy"]
    assert accuracy["offset"] == {
        "worst": 0.02,
        "rss": 0.014,
        "budget": 0.2,
        "cold": 0.021,
        "cold_temperature": 15.0,
        "hot": 0.03,
        "hot_temperature": 65.0,
    }
    assert accuracy["drift"] == {"worst": 4e-3, "rss": 3.5e-3}


def test_monte_carlo_says_what_it_drew_from(job):
    assert load(job)["monte_carlo"] == {"distributions": DISTRIBUTIONS, "seed": SEED, "boards": 10000}


def test_stability_has_its_sweep_and_the_unit_of_its_loads(job):
    first, second = load(job)["stability"][:2]
    assert (first["stage"], first["load_unit"], first["measured"], first["limit"]) == (
        "input buffer",
        "ohm",
        72.8,
        45.0,
    )
    assert first["sweep"] == [{"load": 0.0, "phase_margin": 73.0}, {"load": 2.0, "phase_margin": 72.8}]
    assert (second["load_unit"], second["margin"]) == ("F", -0.1)


def test_supply_states_with_margins_and_null_where_nothing_limits(job):
    states = load(job)["supply_states"]
    assert list(states) == ["reversed", "missing_rails", "powered_off"]
    assert states["reversed"][0]["margin"] == 0.37
    assert states["missing_rails"][0]["capacitor"] == "C7"
    straight = next(b for b in states["powered_off"] if b["subject"] == "output")
    assert (straight["measured"], straight["margin"]) == (None, None)


@pytest.mark.parametrize("path", SPECS, ids=lambda path: path.stem)
def test_nothing_that_was_computed_is_left_out(path):
    """Every name of every field of the analyses is a key somewhere in the file."""
    job = run(path)
    data = load(job)

    def keys(value):
        if isinstance(value, dict):
            return set(value).union(*map(keys, value.values()))
        return set().union(*map(keys, value)) if isinstance(value, list) else set()

    found = keys(data)
    for name in ("matching", "travel", "stability", "noise", "shorts", "dissipation"):
        values = getattr(job.analyses, name)
        assert len(data[name]) == len(values) > 0
        assert {field.name for value in values for field in fields(value)} <= found
    for name in ("reversed_supply", "missing_rails", "powered_off"):
        held = data["supply_states"][name.removesuffix("_supply")]
        assert len(held) == len(getattr(job.analyses, name))
        for shown, value in zip(held, getattr(job.analyses, name), strict=True):
            assert {field.name for field in fields(value)} | {"margin"} == set(shown)
    assert len(data["accuracy"]["terms"]) == len(job.analyses.accuracy.terms) + len(job.analyses.accuracy.drift)


def test_findings_have_exactly_the_promised_fields(faulty):
    data = findings_json(faulty.report)
    assert data == {
        "cleared": False,
        "findings": [
            {
                "rule": "capacitor-voltage",
                "level": "error",
                "parts": ["C7"],
                "message": "C7 is rated 10 V and can see 12.6 V",
                "why": "it will short",
                "fix": "take 25 V",
                "measured": 12.6,
                "limit": 10.0,
                "unit": "V",
                "waived": None,
            },
            {
                "rule": "idle-amplifier",
                "level": "error",
                "parts": ["U2"],
                "message": "U2B is not tied off",
                "why": "it oscillates",
                "fix": "tie it",
                "measured": None,
                "limit": None,
                "unit": "",
                "waived": "bench tested",
            },
        ],
        "checked": [
            {"rule": "capacitor-voltage", "instances": 8, "worst_margin": -0.26},
            {"rule": "idle-amplifier", "instances": 1, "worst_margin": None},
        ],
    }
    assert {key: load(faulty)[key] for key in data} == data


def test_the_last_bits_of_arithmetic_do_not_show():
    assert tidy(0.1 + 0.2) == 0.3
    assert tidy((1, True, None, "x", {"a": [float("nan")]})) == [1, True, None, "x", {"a": [None]}]


def test_ends_with_a_line_end_and_repeats(make):
    assert design_json(make(3)).endswith(b"}\n")
    assert design_json(make(3)) == design_json(make(3))
