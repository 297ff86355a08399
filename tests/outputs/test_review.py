"""The review page: what it shows is what was computed, judged and counted."""

from __future__ import annotations

import re
from dataclasses import replace
from html import escape
from pathlib import Path

from modgen.analysis.accuracy import LEFT_OUT
from modgen.analysis.montecarlo import DISTRIBUTIONS
from modgen.catalogue.records import Evidence
from modgen.chain import run
from modgen.design.model import Choice
from modgen.outputs.choicewords import choice_margin, choice_words
from modgen.outputs.pages import Cell, environment
from modgen.outputs.review import (
    bom_table,
    evidence_table,
    review_html,
    rules_table,
    spec_table,
    waiver_table,
)
from modgen.outputs.review_figures import accuracy_tables, glide_tables, headroom_table, margin_cell, rails_table
from modgen.problems import Place
from modgen.rules.contract import Checked, Report

SPECS = sorted((Path(__file__).parents[2] / "specs").glob("*.yaml"))


def plain(text) -> str:
    text = text.text if isinstance(text, Cell) else text
    return str(text).replace("\u00a0", " ").replace("\u2212", "-").replace("\u2013", "-")


def cells(table):
    return [tuple(plain(cell) for cell in row) for row in table.rows]


def test_verdict_comes_first_with_its_counts_and_errors(faulty):
    page = review_html(faulty).decode()
    main = page[page.index("<main>") :]
    assert main.index("Not cleared for ordering") < main.index("<nav")
    assert "1 error, no warnings, no notes and 1 waived finding; 2 rules looked at 9 instances." in main
    assert "<li>C7: C7 is rated 10\u00a0V and can see 12.6\u00a0V</li>" in main


def test_sections_in_the_order_of_a_review(faulty):
    page = review_html(faulty).decode()
    order = [
        "spec", "choices", "findings", "rules", "glide", "travel", "accuracy", "noise", "stability", "headroom",
        "rails", "shorts", "supply", "waivers", "bom", "evidence",
    ]  # fmt: skip
    places = [page.index(f'<h2 id="{name}"') for name in order]
    assert places == sorted(places)
    assert [page.count(f'href="#{name}"') for name in order] == [1] * len(order)


def test_findings_say_what_why_and_what_to_do(faulty):
    page = review_html(faulty).decode()
    finding = page[page.index('<section class="finding error">') : page.index('<h2 id="rules"')]
    for words in (
        "capacitor-voltage",
        "C7 is rated 10\u00a0V",
        "12.6\u00a0V, limit 10\u00a0V",
        "it will short",
        "take 25\u00a0V",
    ):
        assert words in finding
    assert "idle-amplifier" not in finding  # it is waived, and stands there


def test_waivers_stand_with_their_reasons(faulty, job):
    assert cells(waiver_table(faulty)) == [("idle-amplifier", "error", "U2", "U2B is not tied off", "bench tested")]
    assert "<p>Nothing is waived.</p>" in review_html(job).decode()


def test_spec_says_what_was_stated_and_what_is_default(job):
    spec = replace(job.spec, places=(("channels", Place("s.yaml", 2, 1)), ("jacks", Place("s.yaml", 3, 1))))
    rows = {row[0]: row[1:] for row in cells(spec_table(replace(job, spec=spec)))}
    assert rows["channels"] == ("2", "stated")
    assert rows["jacks.outputs"] == ("2", "stated")
    assert rows["rails.tolerance"] == ("5 %", "default")
    assert rows["signal.pitch"] == ("no", "default")
    assert "waive" not in rows


def test_choices_show_reason_margin_and_what_lost(job):
    assert plain(choice_margin(job.design.choices[0])) == "longest glide: 10 % left"
    assert choice_margin(replace(job.design.choices[0], margin=None, binding="")) == ""
    page = review_html(job).decode()
    # the choice of this module decides no role, so its own words head it
    assert "<h3>Glide capacitor: 1u film</h3>\n<p>Cheapest that keeps the range.</p>" in page
    assert "<dd>longest glide: 10\u00a0% left</dd>" in page
    assert "<dd><strong>2u2</strong>: dearer</dd>" in page


def test_choices_are_headed_by_noun_value_and_references(job):
    choice = Choice("isolating", "r-2k2", "the largest", "the shortest glide", 0.2)
    words = choice_words(job, choice)
    assert plain(words.heading) == "Isolating resistor: 2.2 kΩ, R3, R8"
    assert (words.chosen, words.reason) == ("r-2k2", "The largest.")
    page = review_html(replace(job, design=replace(job.design, choices=(choice,)))).decode()
    assert '<h3>Isolating resistor: 2.2\u00a0kΩ, R3, R8</h3>\n<p class="part">r-2k2</p>\n<p>The largest.</p>' in page
    headings = [
        choice_words(job, Choice(s, "x", "y")).heading for s in ("input-series", "reverse-polarity", "amplifier")
    ]
    assert [plain(text) for text in headings] == [
        "Input series resistor: 100 kΩ, R2, R7",
        "Reverse-polarity diode: 1N5819, D1, D2",
        "Amplifier: TL072C, U1, U2",
    ]


def test_others_that_fit_are_counted(job):
    runners = (("A", "dearer"), ("B", "dearer"), ("C", "too low"))
    found = {
        reason: choice_words(job, Choice("amplifier", "x", reason, runners_up=runners)).more
        for reason in ("the least (5 of 6 do)", "the least (3 of 4 do)", "the least", "the least (20005 of 20006 do)")
    }
    assert {reason: plain(more) for reason, more in found.items()} == {
        "the least (5 of 6 do)": "and 2 more that fit, behind these",
        "the least (3 of 4 do)": "",
        "the least": "",
        "the least (20005 of 20006 do)": "and 20 002 more that fit, behind these",
    }


def test_costs_name_the_currency(job):
    words = choice_words(
        job, Choice("x", "y", "z", runners_up=(("w", "costs 0.05 more a channel"), ("v", "costs 3% more")))
    )
    assert [plain(why) for _, why in words.lost] == ["costs 0.05 EUR more a channel", "costs 3 % more"]


def test_scale_in_reasons_is_in_the_unit_of_the_spec(job):
    reason = "loads it by 1.21 cents per octave, and costs 12 instead of 6 cents per octave"
    assert plain(choice_words(job, Choice("x", "y", reason)).reason) == (
        "Loads it by 0.101 % (1.21 cents per octave), and costs 1 % instead of 0.5 % "
        "(12 instead of 6 cents per octave)."
    )
    pitch = replace(job, spec=replace(job.spec, signal=replace(job.spec.signal, pitch=True)))
    assert (
        plain(choice_words(pitch, Choice("x", "y", "by 1.21 cents per octave")).reason) == "By 1.21 cents per octave."
    )


def test_shipped_choices_all_have_nouns_and_references():
    for path in SPECS:
        job = run(path)
        for choice in job.design.choices:
            words = choice_words(job, choice)
            assert choice.chosen not in words.heading
            assert words.chosen == choice.chosen
        (amplifier,) = [c for c in job.design.choices if c.subject == "amplifier"]
        fit, tried = (int(n) for n in re.findall(r"([0-9]+) of ([0-9]+) do", amplifier.reason)[0])
        named = len(amplifier.runners_up) - (tried - fit)
        unnamed = fit - 1 - named
        assert choice_words(job, amplifier).more.startswith(f"and {unnamed} more" if unnamed else "")


def test_every_rule_with_instances_and_margin():
    checked = (
        Checked("capacitor-voltage", 12, 0.37, "C1: 12.6 V of 20 V"),
        Checked("output-swing", 2, -0.26, "U1A"),
        Checked("lone-net", 33, None, ""),
        Checked("glide-range", 0, None, "", judged=False, not_judged="needs the spec, and none was given"),
    )
    table = rules_table(checked)
    assert cells(table) == [
        ("capacitor-voltage", "12", "37 %", "C1: 12.6 V of 20 V"),
        ("output-swing", "2", "-26 %", "U1A"),
        ("lone-net", "33", "-", "-"),
        ("glide-range", "-", "not judged", "needs the spec, and none was given"),
    ]
    assert [getattr(row[2], "tone", "") for row in table.rows] == ["", "stop", "", "warn"]


def test_rule_that_was_not_judged_is_counted_in_the_verdict(make):
    report = Report((), (Checked("a", 1, None, ""), Checked("b", 0, None, "", judged=False, not_judged="no spec")))
    page = review_html(make(report=report)).decode()
    assert "1 rule looked at 1 instance, 1 rule could not be judged." in page


def test_margin_of_nothing_left_is_not_negative():
    assert plain(margin_cell(0.0)) == "0 %"
    assert margin_cell(-0.001) == Cell("\u22120.1\u00a0%", tone="stop")


def test_glide_is_nominal_worst_case_and_share(job):
    times, shares = glide_tables(job)
    assert plain(times.caption) == "Glide times (rise); asked 5 ms to 2 s, nominal"
    assert cells(times)[0] == (
        "1", "C1, R3, R4", "4.84 ms", "4.5 ms to 5.2 ms", "334 ms", "250 ms to 420 ms", "2.2 s", "1.67 s to 2.77 s",
    )  # fmt: skip
    assert plain(shares.caption) == "How many such channels, and how many whole boards, cover the whole of 5 ms to 2 s"
    assert cells(shares) == [
        ("1, 2, each", "98 %", "97 % to 99 %", "10 000"),
        ("all 2 of a board", "96 %", "94.09 % to 98.01 %", "-"),
    ]
    assert plain(shares.note).startswith(
        "Of channels like these 98 % cover the range; of boards, on which every channel must, 96 %, "
    )


def test_accuracy_terms_and_sums_against_the_budget(job):
    sums, _, _, scale, _ = accuracy_tables(job)
    assert cells(sums) == [
        ("Scale", "0.33 %", "0.33 %", "2 %", "83.5 %"),
        ("Offset", "20 mV", "14 mV", "200 mV", "90 %"),
    ]
    assert sums.note == "An offset can be tuned out; a scale error cannot."
    assert cells(scale) == [
        ("output resistor into load", "0.33 %", "R/(R+load)", "divider", "a smaller resistor"),
    ]


def test_offset_over_temperature_and_its_drift(job):
    table = accuracy_tables(job)[1]
    assert cells(table) == [
        ("Offset at 15 °C", "21 mV", "-"),
        ("Offset at 25 °C", "20 mV", "14 mV"),
        ("Offset at 65 °C", "30 mV", "-"),
        ("Drift from 15 °C to 65 °C", "4 mV", "3.5 mV"),
    ]
    assert plain(table.note).endswith("at 1 V per octave the worst case of it is 4.8 cents.")


def test_largest_terms_say_what_would_reduce_them(job):
    largest, _, drift = accuracy_tables(job)[2:]
    assert cells(largest) == [
        ("Scale", "output resistor into load", "0.33 %", "100 %", "a smaller resistor"),
        ("Drift", "bias current, output buffer", "3 mV", "75 %", "a smaller control"),
    ]
    assert drift.caption == "What moves the offset between 15 °C and 65 °C, worst first"


def test_page_says_what_was_drawn_from_and_what_is_left_out(job):
    page = plain(review_html(job).decode())
    assert page.count(DISTRIBUTIONS) == 2
    accuracy = page[page.index('<h2 id="accuracy"') : page.index('<h2 id="noise"')]
    for line in LEFT_OUT:
        assert f"<li>{escape(line).replace('&#x27;', '&#39;')}</li>" in accuracy


def test_cents_stand_beside_a_scale_in_per_cent(job):
    worst = accuracy_tables(job)[0].rows[0][1]
    assert isinstance(worst, Cell)
    assert [plain(text) for text in worst.more] == ["3.96 cents per octave"]


def test_scale_is_in_cents_where_pitch_matters(job):
    pitch = replace(job, spec=replace(job.spec, signal=replace(job.spec.signal, pitch=True)))
    assert cells(accuracy_tables(pitch)[0])[0][1] == "3.96 cents per octave"


def test_terms_are_listed_worst_first(job):
    term = job.analyses.accuracy.terms[0]
    terms = (replace(term, name="small", worst=1e-4), term, replace(term, name="large", worst=0.01))
    changed = replace(job, analyses=replace(job.analyses, accuracy=replace(job.analyses.accuracy, terms=terms)))
    assert [row[0] for row in cells(accuracy_tables(changed)[3])] == ["large", "output resistor into load", "small"]


def test_headroom_and_rails(job):
    assert cells(headroom_table(job)) == [
        ("input buffer, common mode", "U1", "-5 V to +5 V", "-7.1 V to +7.1 V", "2.1 V"),
    ]
    assert cells(rails_table(job))[1] == (
        "V-", "D2", "-12 V (-11.4 V to -12.6 V)", "-11.8 V (-11.1 V to -12.4 V)", "5.6 mA", "10 mA", "20 mA",
    )  # fmt: skip


def test_headroom_that_is_missing_stands_out(job):
    short = replace(job.analyses.headroom[0], can_high=4.5)
    table = headroom_table(replace(job, analyses=replace(job.analyses, headroom=(short,))))
    assert table.rows[0][4] == Cell("\u2212500\u00a0mV", tone="stop")


def test_parts_list_shows_no_catalogue_key(job):
    rows = {row[2]: row for row in cells(bom_table(job))}
    assert rows["2 x 5 header"][-1] == rows["3.5 mm socket"][-1] == "any maker to this rating"
    assert rows["TL072C"][-1] == "TL072CP"


def test_links_begin_at_one_height():
    loader = environment().loader
    assert loader is not None
    style = loader.get_source(environment(), "style.css")[0]
    # a margin above the first item of a column would be dropped in all columns but the first
    assert re.search(r"\.contents li \{ margin: 0;", style)


def test_parts_list_counts_the_netlist(job):
    table = bom_table(job)
    assert sum(int(row[1]) for row in cells(table)) == len(job.netlist.parts)
    assert table.caption == "Parts of one board: 27 parts on 12 lines"
    assert ("U1, U2", "2", "TL072C") in [row[:3] for row in cells(table)]


def test_evidence_names_the_figures_that_rest_on_memory(job):
    first = job.design.parts[0]
    record = replace(
        first.record,
        evidence=(
            ("voltage", Evidence("memory", "m")),
            ("panel_hole", Evidence("memory", "m")),
            ("body", Evidence("published document", "d")),
            ("prices", Evidence("invented", "i")),
        ),
    )
    parts = tuple(replace(p, record=record) if p.record == first.record else p for p in job.design.parts)
    rows = {row[0]: row[1:] for row in cells(evidence_table(replace(job, design=replace(job.design, parts=parts))))}
    assert rows["jack-3.5"] == ("1", "-", "2", "1", "panel hole, voltage")
    assert rows["r-1m"] == ("1", "-", "-", "1", "none")
