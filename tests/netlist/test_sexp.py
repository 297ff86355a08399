"""Nested lists with places."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from modgen.netlist.sexp import DEEPEST, Lines, SList, parse
from modgen.problems import InputError


def read(text: str) -> SList:
    return parse(text, Lines(text, "x.net"))


def message(text: str) -> str:
    with pytest.raises(InputError) as caught:
        read(text)
    return str(caught.value)


def test_words_and_lists() -> None:
    found = read('(a b "c d" (e 1e3) (e "")\n  (f))')
    assert (found.head, found.word()) == ("a", "b")
    assert [item for item in found.items if isinstance(item, str)] == ["b", "c d"]
    assert [e.word() for e in found.lists("e")] == ["1e3", ""]
    assert found.text("e") == "1e3"
    assert found.text("f") == ""
    assert found.text("g") == ""
    assert found.first("g") is None


@pytest.mark.parametrize(
    ("text", "word"),
    [
        (r'(a "\"")', '"'),
        (r'(a "\\")', "\\"),
        (r'(a "x\ny")', "x\ny"),
        (r'(a "\z")', "z"),
        ('(a "(b)")', "(b)"),
        ("(a it's)", "it's"),
        ("(a µΩ)", "µΩ"),
        ('(a"b")', "b"),
    ],
)
def test_quotes_and_escapes(text: str, word: str) -> None:
    assert read(text).word() == word


def test_places_count_from_one() -> None:
    text = "(a\n  (b)\n\n    (c))"
    lines = Lines(text, "x.net")
    found = parse(text, lines)
    assert [str(lines.place(item.at)) for item in found.items if isinstance(item, SList)] == [
        "x.net:2:3",
        "x.net:4:5",
    ]
    assert str(lines.place(0)) == "x.net:1:1"


def test_cut_off() -> None:
    assert message("(export\n  (components\n    (comp (ref R1)") == (
        "x.net:3:19: error: the file ends in the middle of (comp, which begins at line 3\n"
        "    why: 3 parentheses are still open: the file was cut off\n"
        "    fix: write the netlist again from the program that made it"
    )


def test_cut_off_in_a_quoted_word() -> None:
    assert message('(export\n (version "D') == (
        "x.net:2:11: error: the quote that begins here is never closed\n"
        "    why: the file was cut off, or edited by hand\n"
        "    fix: write the netlist again from the program that made it"
    )


def test_something_after_the_end() -> None:
    assert message("(export)\n(more)") == (
        "x.net:2:1: error: there is something after the end of the netlist\n"
        "    why: the list that begins the file was closed before: '(' belongs to nothing\n"
        "    fix: write the netlist again from the program that made it"
    )
    assert message("(export))").startswith("x.net:1:9: error: there is something after the end")


def test_no_list_at_all() -> None:
    assert message("module: a\n") == (
        "x.net:1:1: error: this is not a netlist: it begins with 'module:'\n"
        "    why: a netlist is one list that begins with '(export'\n"
        "    fix: give the S-expression netlist (often called .net) that the layout editor exports"
    )
    assert message(")").startswith("x.net:1:1: error: this is not a netlist: it begins with ')'")


@pytest.mark.parametrize("text", ["", " \n\t"])
def test_empty(text: str) -> None:
    assert message(text) == (
        "x.net:1:1: error: the file is empty\n"
        "    why: a netlist is one list that begins with '(export'\n"
        "    fix: give the S-expression netlist (often called .net) that the layout editor exports"
    )


def test_depth() -> None:
    assert read("(a" * DEEPEST + ")" * DEEPEST).head == "a"
    assert message("(" * 1_000_000) == (
        f"x.net:1:{DEEPEST + 1}: error: lists nest deeper than {DEEPEST}\n"
        "    why: a netlist needs seven levels\n"
        "    fix: check that this is the netlist, not some other file"
    )


def test_too_many_words(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("modgen.netlist.sexp.MOST_TOKENS", 5)
    assert read("(a b c)").word() == "b"
    assert message("(a b c d)") == (
        "x.net:1:9: error: the file has more than 5 words and parentheses\n"
        "    why: a netlist of 64 channels has a twentieth of that\n"
        "    fix: check that this is the netlist, not some other file"
    )


@given(st.text(st.sampled_from('()"\\ \nab'), max_size=40))
def test_nothing_but_our_error(text: str) -> None:
    try:
        read(text)
    except InputError as error:
        places = [problem.place.line for problem in error.problems]
    else:
        return
    assert places
    assert min(places) > 0


@given(st.text())
def test_any_word_survives_quoting(word: str) -> None:
    quoted = word.replace("\\", "\\\\").replace('"', '\\"')
    assert read(f'(a "{quoted}")').word() == word
