"""Tables, verdict and the frame that every page has."""

from __future__ import annotations

import re
from html.parser import HTMLParser
from itertools import pairwise
from pathlib import Path

import pytest

from modgen.chain import run
from modgen.outputs.assembly import assembly_html
from modgen.outputs.pages import Table, columns, environment
from modgen.outputs.review import review_html
from modgen.outputs.wording import (
    chosen,
    grouped,
    natural,
    number_words,
    plural,
    prose,
    quantity,
    short_ranges,
    signed,
    verdict,
)

PAGES = (assembly_html, review_html)
SPECS = sorted((Path(__file__).parents[2] / "specs").glob("*.yaml"))
VOID = {"meta", "br", "path", "rect", "circle"}


class Balanced(HTMLParser):
    """Fails on an end tag that does not close the last open one; collects headings and attributes."""

    def __init__(self) -> None:
        super().__init__()
        self.open: list[str] = []
        self.headings: list[int] = []
        self.ids: list[str] = []
        self.labels: list[str] = []
        self.tags: set[str] = set()
        self.attributes: list[tuple[str, str, str]] = []

    def handle_starttag(self, tag, attrs):
        self.tags.add(tag)
        if tag not in VOID:
            self.open.append(tag)
        if re.fullmatch(r"h[1-6]", tag):
            self.headings.append(int(tag[1]))
        for name, value in attrs:
            self.attributes.append((tag, name, value or ""))
            if name == "id":
                self.ids.append(value)
            if name == "aria-labelledby":
                self.labels.append(value)

    def handle_startendtag(self, tag, attrs):
        self.tags.add(tag)
        self.attributes += [(tag, name, value or "") for name, value in attrs]

    def handle_endtag(self, tag):
        assert self.open, f"</{tag}> closes nothing"
        assert self.open.pop() == tag


def parsed(page: bytes) -> Balanced:
    parser = Balanced()
    parser.feed(page.decode())
    parser.close()
    return parser


@pytest.mark.parametrize("page", PAGES)
@pytest.mark.parametrize("which", ["job", "faulty"])
def test_every_element_is_closed_and_named_once(page, which, request):
    parser = parsed(page(request.getfixturevalue(which)))
    assert parser.open == []
    assert len(parser.ids) == len(set(parser.ids))
    assert set(parser.labels) <= set(parser.ids)


@pytest.mark.parametrize("page", PAGES)
def test_headings_go_down_one_at_a_time(page, faulty):
    levels = parsed(page(faulty)).headings
    assert levels[0] == 1
    assert levels.count(1) == 1
    assert all(after <= before + 1 for before, after in pairwise(levels))


@pytest.mark.parametrize("page", PAGES)
def test_page_stands_alone(page, job):
    text = page(job).decode()
    parser = parsed(page(job))
    assert parser.tags.isdisjoint({"script", "link", "img", "iframe", "object", "base", "form"})
    assert not [a for a in parser.attributes if a[1] in ("src", "srcset", "action") or a[1].startswith("on")]
    assert all(value.startswith("#") for _, name, value in parser.attributes if name in ("href", "xlink:href"))
    assert "http:" not in text
    assert "https:" not in text
    assert "url(" not in text
    assert "@import" not in text


@pytest.mark.parametrize("page", PAGES)
def test_language_encoding_and_width_are_stated(page, job):
    text = page(job).decode()
    assert text.startswith('<!DOCTYPE html>\n<html lang="en">\n')
    assert '<meta charset="utf-8">' in text
    assert '<meta name="viewport" content="width=device-width, initial-scale=1">' in text


@pytest.mark.parametrize("page", PAGES)
def test_every_table_has_a_caption_and_scoped_headings(page, job):
    text = page(job).decode()
    assert text.count("<table") == text.count("<caption>") == text.count("<thead>") > 0
    assert re.findall(r"<th (?!scope=)", text) == []


@pytest.mark.parametrize("page", PAGES)
def test_module_name_cannot_become_markup(page, make):
    name = "</style></title><script>alert(1)</script>\"'&{{ 7*7 }}"
    text = page(make(module=name)).decode()
    assert "<script" not in text
    assert text.count("</style>") == text.count("</title>") == 1
    assert "&lt;script&gt;alert(1)&lt;/script&gt;&#34;&#39;&amp;{{ 7*7 }}" in text
    assert parsed(text.encode()).open == []


@pytest.mark.parametrize("page", PAGES)
def test_half_a_surrogate_does_not_stop_the_page(page, make):
    assert b"Lag ? lamp" in page(make(module="Lag \ud83d lamp"))


@pytest.mark.parametrize("page", PAGES)
def test_page_that_is_not_cleared_says_so_on_every_printed_page(page, faulty):
    text = page(faulty).decode()
    assert '<p class="ribbon" role="status"><strong>Not cleared for ordering</strong></p>' in text
    assert '@bottom-left { content: "NOT CLEARED FOR ORDERING"; }' in text
    assert '<div class="edge" aria-hidden="true"><span>Not cleared for ordering</span>' in text
    edge = re.search(r"\.not-cleared \.edge \{[^}]*\}", text)
    assert edge is not None
    assert "position: fixed" in edge[0]
    assert "Cleared for ordering" not in text


@pytest.mark.parametrize("page", PAGES)
def test_cleared_page_has_no_ribbon(page, job):
    text = page(job).decode()
    assert "Cleared for ordering" in text
    assert 'class="ribbon"' not in text
    assert 'class="edge"' not in text
    assert "NOT CLEARED" not in text


@pytest.mark.parametrize("page", PAGES)
def test_same_job_same_bytes(page, make):
    assert page(make(3)) == page(make(3))


def _luminance(colour: str) -> float:
    channels = [int(colour[n : n + 2], 16) / 255 for n in (1, 3, 5)]
    linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in channels]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def _contrast(one: str, other: str) -> float:
    light, dark = sorted((_luminance(one), _luminance(other)), reverse=True)
    return (light + 0.05) / (dark + 0.05)


def test_contrast_arithmetic_knows_black_on_white():
    assert _contrast("#000000", "#ffffff") == pytest.approx(21.0)


@pytest.mark.parametrize(
    ("text", "ground"),
    [
        *((t, g) for t in ("ink", "soft") for g in ("paper", "wash", "stop-wash", "go-wash", "warn-wash")),
        ("accent", "paper"),
        ("stop", "paper"),
        ("stop", "stop-wash"),
        ("go", "go-wash"),
        ("warn", "paper"),
        ("warn", "warn-wash"),
        ("paper", "stop"),
        ("paper", "accent"),
    ],
)
def test_text_stands_out_from_its_ground(text, ground):
    loader = environment().loader
    assert loader is not None
    style = loader.get_source(environment(), "style.css")[0]
    colours = dict(re.findall(r"--([a-z-]+): (#[0-9a-f]{6})", style))
    assert _contrast(colours[text], colours[ground]) >= 4.5


def test_table_refuses_a_row_of_another_length():
    with pytest.raises(ValueError, match=r"^table 'Rails': 1 cells in a row of 2 columns$"):
        Table("Rails", columns("!Rail", "#Volts"), (("V+",),))


def test_short_tables_stay_on_one_page_and_long_ones_do_not():
    row = (("a",),)
    assert Table("t", columns("x"), row * 3).whole
    assert not Table("t", columns("x"), row * 4).whole


def test_column_marks():
    kinds = [(c.label, c.kind) for c in columns("!Rail", "#Volts", "Where", "_Found", "")]
    assert kinds == [("Rail", "name"), ("Volts", "number"), ("Where", "text"), ("Found", "blank"), ("Done", "tick")]


def test_quantities_have_a_true_minus_and_do_not_break():
    assert quantity(-12.0, "voltage") == "\u221212\u00a0V"
    assert signed(12.0, "voltage") == "+12\u00a0V"
    assert signed(0.0, "voltage") == "0\u00a0V"
    assert quantity(1 / 1200, "pitch") == "1\u00a0cent"


def test_references_in_short_ranges():
    assert short_ranges(["R7", "R2", "R1", "R3", "C10", "C9"]) == "C9, C10, R1–R3, R7"
    assert short_ranges([]) == ""


def test_many_references_at_even_steps_are_together():
    every = [f"R{n}" for n in range(2, 60, 6)]
    assert short_ranges(every[:8]) == "R2, R8, R14, R20, R26, R32, R38, R44"
    assert short_ranges(every) == "R2 to R56 (every 6th)"
    assert short_ranges([*every, *(f"R{n}" for n in range(6, 60, 6)), "R61"]) == (
        "R2 to R56 (every 6th), R6 to R54 (every 6th), R61"
    )
    assert short_ranges([*every, "C1", "C2", "C3", "U1"]) == "C1–C3, R2 to R56 (every 6th), U1"


def test_sentences_are_set_as_quantities_are():
    said = prose("costs 2.8% more: -5 V of ±12 V, 34 mm2, 9.5 ms, V- and BUS-; 1525554 combinations, 3 cents")
    assert said == (
        "costs 2.8\u00a0% more: \u22125\u00a0V of ±12\u00a0V, 34\u00a0mm², 9.5\u00a0ms, V\u2212 and BUS\u2212; "
        "1\u00a0525\u00a0554 combinations, 3\u00a0cents"
    )


@pytest.mark.parametrize(
    "text",
    ["film-pet-5mm-63v-1u0", "R1-R4", "pins 3-8", "LM358-N", "4 Volumes", "61300511121", "2 x tl074-dip14", "CH3_IN"],
)
def test_names_are_left_alone(text):
    assert prose(text) == text


def test_counts_are_grouped_from_five_digits():
    assert [grouped(n) for n in (999, 9999, 10000, 1860624)] == ["999", "9999", "10\u00a0000", "1\u00a0860\u00a0624"]
    assert number_words(["10", "1", "2", "3"]) == "1 to 3, 10"


@pytest.mark.parametrize("page", PAGES)
@pytest.mark.parametrize("path", SPECS, ids=lambda path: path.stem)
def test_no_value_of_a_shipped_spec_is_apart_from_its_unit(page, path):
    text = re.sub(r"<(style|svg)\b.*?</\1>", "", page(run(path)).decode(), flags=re.DOTALL)
    shown = re.sub(r"<[^>]*>", "\n", text)
    assert re.findall(r"[0-9] (?:[mkµnp]?(?:V|A|s|Ω|F|W)|%|cents?|mm|°C)\b.*", shown) == []
    assert re.findall(r"[0-9]%.*", shown) == []
    assert re.findall(r"(?<!\S)-[0-9].*", shown) == []


def test_words():
    assert sorted(["R10", "R2", "C1"], key=natural) == ["C1", "R2", "R10"]
    assert [plural(n, "error") for n in (0, 1, 2)] == ["no errors", "1 error", "2 errors"]
    assert [chosen(x) for x in ([], ["a"], ["a", "b"], ["a", "b", "c"])] == ["", "a", "a and b", "a, b and c"]


def test_verdict_counts(faulty, job):
    found = verdict(faulty.report)
    assert not found.cleared
    assert found.headline == "Not cleared for ordering"
    assert found.reason == "1 error, no warnings, no notes and 1 waived finding; 2 rules looked at 9 instances."
    assert found.standing == ("C7: C7 is rated 10 V and can see 12.6 V",)
    assert verdict(job.report).headline == "Cleared for ordering"
