import json

from modgen.outputs.design_json import design_json, findings_json, tidy


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
