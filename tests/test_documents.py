"""Reading one YAML file into nodes: what is kept, where it stands, and what is refused."""

from __future__ import annotations

import os
import time
from pathlib import Path

import pytest
import yaml
from hypothesis import given, settings
from hypothesis import strategies as st

from modgen.documents import DEEPEST, Fields, Node, nearest, parse_yaml, read_yaml, reader, shown, unknown
from modgen.problems import InputError, Place, Problem

QUOTING = (
    "put a value that holds ': ' or ' #', or begins with one of [ ] { } , & * ! | > % @ `, in quotes, "
    "and begin all keys of one mapping in the same column"
)


def message(data: bytes, what: str = "spec") -> str:
    with pytest.raises(InputError) as caught:
        parse_yaml(data, "a.yaml", what=what)
    return str(caught.value)


def file_message(path: Path, limit: int = 1_000_000) -> str:
    with pytest.raises(InputError) as caught:
        read_yaml(path, what="catalogue file", limit=limit)
    return str(caught.value)


# what is kept


@pytest.mark.parametrize(
    "text", ["NO", "1e3", "12:30", "0x10", "007", "~", "null", "true", "2001-01-01", "1_000", ".5", "4k7"]
)
def test_scalars_keep_their_own_text(text: str) -> None:
    node = parse_yaml(f"key: {text}\n".encode(), "a.yaml").get("key")
    assert node == Node("scalar", Place("a.yaml", 1, 6), text)


def test_quoted_and_block_scalars_are_not_plain() -> None:
    page = parse_yaml(b"a: 'x'\nb: \"y\"\nc: |\n  z\nd: w\n", "a.yaml")
    assert [(v.text, v.plain) for _, v in page.entries] == [("x", False), ("y", False), ("z\n", False), ("w", True)]


def test_places_count_from_one_and_in_characters() -> None:
    page = parse_yaml("µΩ: {a: 1, b: [2, 3]}\n\nlast:\n  - x\n".encode(), "a.yaml")
    assert page.kind == "mapping"
    assert page.place == Place("a.yaml", 1, 1)
    inner = page.get("µΩ")
    assert inner is not None
    assert inner.place == Place("a.yaml", 1, 5)
    assert [(k.place.column, v.place.column) for k, v in inner.entries] == [(6, 9), (12, 15)]
    assert [item.place.column for item in inner.entries[1][1].items] == [16, 19]
    assert page.key("last") == Node("scalar", Place("a.yaml", 3, 1), "last")
    assert page.get("last").items[0].place == Place("a.yaml", 4, 5)  # type: ignore[union-attr]
    assert page.keys() == ("µΩ", "last")
    assert page.get("none") is None
    assert page.key("none") is None


def test_a_byte_order_mark_and_foreign_line_ends_are_read() -> None:
    page = parse_yaml(b"\xef\xbb\xbfa: 1\r\nb: 2\r\n", "a.yaml")
    assert [(k.text, v.text, v.place.line, v.place.column) for k, v in page.entries] == [
        ("a", "1", 1, 4),
        ("b", "2", 2, 4),
    ]


def test_nodes_say_what_they_are() -> None:
    page = parse_yaml(b"a: {}\nb: []\nc:\nd: ''\ne: x\n", "a.yaml")
    assert [str(v) for _, v in page.entries] == ["a mapping", "a list", "nothing", "''", "'x'"]
    assert [v.blank for _, v in page.entries] == [False, False, True, False, False]


def test_depth_up_to_the_bound_is_read() -> None:
    node = parse_yaml(b"[" * DEEPEST + b"]" * DEEPEST, "a.yaml")
    for _ in range(DEEPEST - 1):
        node = node.items[0]
    assert node.items == ()


def test_the_pure_python_scanner_gives_the_same_nodes(monkeypatch: pytest.MonkeyPatch) -> None:
    data = "a: {b: [1, 'two', \"three µ\"]}\nc:\nd:\n  - x: |\n      y\n    z: >-\n      w\n".encode()
    fast = parse_yaml(data, "a.yaml")
    monkeypatch.setattr(reader, "_LOADER", yaml.SafeLoader)
    assert parse_yaml(data, "a.yaml") == fast
    assert message(b"a: 1\na: 2").startswith("a.yaml:2:1: error: the key 'a' stands twice in one mapping")
    assert message(b"[" * 5000).startswith("a.yaml:1:21: error: this spec is nested more than 20 levels deep")
    assert message(b'a: "\\U99999999"').startswith("a.yaml:1:")


# what is refused

REFUSED = {
    "empty": (
        b"",
        "a.yaml:1:1: error: this spec is empty\n"
        "    why: it holds no keys, only blanks or comments\n"
        "    fix: fill it in",
    ),
    "only a comment": (
        b"# nothing\n\n",
        "a.yaml:1:1: error: this spec is empty\n"
        "    why: it holds no keys, only blanks or comments\n"
        "    fix: fill it in",
    ),
    "zero byte": (
        b"a: 1\nb\0c",
        "a.yaml:2:2: error: this spec is not text: byte 7 is zero\n"
        "    why: it is a binary file, or text in UTF-16\n"
        "    fix: save it as UTF-8 text",
    ),
    "UTF-16": (
        "module: x".encode("utf-16"),
        "a.yaml:1:1: error: this spec is not UTF-8 text: byte 1 is 0xFF\n"
        "    why: it is a binary file, or text in another encoding\n"
        "    fix: save it as UTF-8 text",
    ),
    "Latin-1": (
        "a: 1\nr: 5 µs".encode("latin-1"),
        "a.yaml:2:6: error: this spec is not UTF-8 text: byte 11 is 0xB5\n"
        "    why: it is a binary file, or text in another encoding\n"
        "    fix: save it as UTF-8 text",
    ),
    "bad byte after a byte order mark": (
        b"\xef\xbb\xbfa: \xff",
        "a.yaml:1:5: error: this spec is not UTF-8 text: byte 7 is 0xFF\n"
        "    why: it is a binary file, or text in another encoding\n"
        "    fix: save it as UTF-8 text",
    ),
    "control character": (
        b"a: x\x07\n",
        "a.yaml:1:5: error: the control character U+0007 stands in this spec\n"
        "    why: YAML allows only characters that can be seen\n"
        "    fix: remove it",
    ),
    "escaped control character": (
        b'a: "x\\0"\n',
        "a.yaml:1:4: error: this text holds the control character U+0000\n"
        "    why: it cannot be written to a drawing, a sheet or a netlist\n"
        "    fix: remove the escape",
    ),
    "tab": (
        b"a:\n\tb: 1\n",
        "a.yaml:2:1: error: this line is indented with a tab\n"
        "    why: YAML allows only spaces before the first character of a line\n"
        "    fix: replace the tab by spaces",
    ),
    "unclosed list": (
        b"a: [1\n",
        "a.yaml:1:4: error: the [ that opens here is not closed\n"
        "    why: the page ends while it is open\n"
        "    fix: close the [ that opens on line 1 with a ]",
    ),
    "two colons": (
        b"a: b: c\n",
        "a.yaml:1:4: error: a second colon stands in the value of 'a': 'b: c'\n"
        "    why: a colon and a blank end a key, and a line has one key\n"
        "    fix: put the value in quotes, a: 'b: c', or in braces when it is made of keys, a: {b: c}",
    ),
    "what is left to the scanner's words": (
        b"? a\n: b\n? c\n: [d\n",
        "a.yaml:5:1: error: this is not valid YAML: while parsing a flow sequence, did not find expected ',' or ']'\n"
        "    why: what cannot be completed here begins at line 4, column 3\n"
        f"    fix: {QUOTING}",
    ),
    "second document": (
        b"a: 1\n---\nb: 2\n",
        "a.yaml:2:1: error: a second document begins in this spec\n"
        "    why: one file holds one document\n"
        "    fix: remove the line '---' or make two files",
    ),
    "duplicate key, both places": (
        b"a: 1\nb: 2\n'a': 3\n",
        "a.yaml:3:1: error: the key 'a' stands twice in one mapping\n"
        "    why: it stands at line 1, column 1 already\n"
        "    fix: remove one of the two",
    ),
    "anchor, alias and merge key, all at once": (
        b"a: &x {b: 1}\nc: *x\nd:\n  <<: *x\n",
        "a.yaml:1:4: error: the anchor '&x' is not allowed\n"
        "    why: a page means what it says where it says it\n"
        "    fix: write the value out where it is used, without the anchor\n"
        "a.yaml:2:4: error: the alias '*x' is not allowed\n"
        "    why: a page means what it says where it says it; aliases can also grow without bound\n"
        "    fix: write the value out\n"
        "a.yaml:4:3: error: the merge key '<<' is not allowed\n"
        "    why: a page means what it says where it says it\n"
        "    fix: write the keys out\n"
        "a.yaml:4:7: error: the alias '*x' is not allowed\n"
        "    why: a page means what it says where it says it; aliases can also grow without bound\n"
        "    fix: write the value out",
    ),
    "type tag": (
        b"a: !!python/object/apply:os.system [x]\n",
        "a.yaml:1:4: error: the type tag 'tag:yaml.org,2002:python/object/apply:os.system' is not allowed\n"
        "    why: what a value means is decided by its key\n"
        "    fix: remove the tag",
    ),
    "key that is a list": (
        b"? [a]\n: b\n",
        "a.yaml:1:3: error: a key is a list, not text\n    why: keys are words\n    fix: write 'key: value'",
    ),
    "deep": (
        b"- " * (DEEPEST + 1) + b"x",
        "a.yaml:1:41: error: this spec is nested more than 20 levels deep\n"
        "    why: nothing that is read here needs that\n"
        "    fix: check the brackets",
    ),
}


@pytest.mark.skipif(not yaml.__with_libyaml__, reason="the scanner written in Python words its messages otherwise")
@pytest.mark.parametrize("case", REFUSED)
def test_what_is_no_page_is_refused(case: str) -> None:
    data, expected = REFUSED[case]
    assert message(data) == expected


@pytest.mark.parametrize("data", [b"[" * 100_000, b"- " * 100_000, b"{a: " * 50_000, b"? " * 50_000])
def test_deep_nesting_ends_quickly(data: bytes) -> None:
    begin = time.process_time()
    assert "this spec is nested more than 20 levels deep" in message(data)
    assert time.process_time() - begin < 1.0


def test_aliases_that_would_grow_without_bound_end_quickly() -> None:
    lines = ["a0: &a0 [x, x]"] + [f"a{n}: &a{n} [*a{n - 1}, *a{n - 1}]" for n in range(1, 60)]
    begin = time.process_time()
    assert message("\n".join(lines).encode()).count("is not allowed") == 60 + 2 * 59
    assert time.process_time() - begin < 1.0


@settings(deadline=None)
@given(st.binary(max_size=300))
def test_any_bytes_give_a_node_or_our_error(data: bytes) -> None:
    problems: tuple[Problem, ...] = ()
    try:
        node = parse_yaml(data, "a.yaml")
    except InputError as error:
        problems = error.problems
        str(error).encode()
    assert problems or node.kind in ("mapping", "sequence", "scalar")


@settings(deadline=None)
@given(st.text(st.sampled_from("a:-[]{}&*!|>'\"%@`#,? \n\t~\\0x"), max_size=60))
def test_any_punctuation_gives_a_node_or_our_error(text: str) -> None:
    problems: tuple[Problem, ...] = ()
    try:
        parse_yaml(text.encode(), "a.yaml")
    except InputError as error:
        problems = error.problems
    lines = text.count("\n") + 1
    assert all(1 <= p.place.line <= lines + 1 and p.place.column >= 1 for p in problems)


PIECES = ["a: 1", "b:", "c 2", "- ", "- d", "{", "}", "[", "]", ", ", "'", '"', "# e", "|", "? f", ": ", "\\", "&g "]


@settings(deadline=None)
@given(st.lists(st.sampled_from([*PIECES, "\n", "\n", "\n ", "\n  ", "\r\n", "\r"]), max_size=40).map("".join))
def test_any_pieces_of_a_page_give_a_node_or_a_place_on_it(text: str) -> None:
    problems: tuple[Problem, ...] = ()
    try:
        parse_yaml(text.encode(), "a.yaml")
    except InputError as error:
        problems = error.problems
    ends = text.replace("\r\n", "\n").replace("\r", "\n").split("\n")
    assert all(1 <= p.place.line <= len(ends) + 1 and p.place.column >= 1 for p in problems)


@pytest.mark.parametrize(
    "text",
    [
        "- " * 9 + "[" + "'a', " * 20_000,
        "a: '" + "x: y\n" * 20_000,
        "a" + " " * 90_000 + "b\nc: {d",
        "a 1\n" * 20_000 + "b: [",
    ],
)
def test_the_search_for_the_trouble_ends_quickly(text: str) -> None:
    begin = time.process_time()
    assert "a.yaml:1:" in message(text.encode())
    assert time.process_time() - begin < 1.0


# files


def test_a_file_is_read_under_the_name_it_was_given(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "sub").mkdir()
    (tmp_path / "sub" / "p.yaml").write_text("a: 1\n", encoding="utf-8")
    monkeypatch.chdir(tmp_path)
    assert read_yaml(Path("sub/p.yaml")).place == Place("sub/p.yaml", 1, 1)


def test_a_missing_file(tmp_path: Path) -> None:
    path = tmp_path / "no.yaml"
    assert file_message(path) == (
        f"{path}: error: this catalogue file cannot be found\n    why: there is no such file\n    fix: check the path"
    )


def test_a_folder(tmp_path: Path) -> None:
    assert file_message(tmp_path) == (
        f"{tmp_path}: error: this is a folder, not a catalogue file\n"
        "    why: a catalogue file is one YAML file\n"
        "    fix: name the file"
    )


@pytest.mark.skipif(not Path("/dev/zero").exists(), reason="there is no endless device here")
def test_an_endless_device() -> None:
    assert file_message(Path("/dev/zero")) == (
        "/dev/zero: error: this is not a regular file, so no catalogue file\n"
        "    why: devices and pipes are not read\n"
        "    fix: name a file"
    )


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="there are no pipes with names here")
def test_a_pipe_that_nobody_writes_does_not_hang(tmp_path: Path) -> None:
    os.mkfifo(tmp_path / "pipe")
    assert "error: this is not a regular file" in file_message(tmp_path / "pipe")


def test_a_large_file_is_refused_before_it_is_read(tmp_path: Path) -> None:
    path = tmp_path / "big.yaml"
    with path.open("wb") as stream:
        stream.truncate(100_000_000)
    begin = time.process_time()
    assert file_message(path) == (
        f"{path}: error: this catalogue file is too large: 100000000 bytes\n"
        "    why: at most 1000000 bytes are read\n"
        "    fix: check that this file is a catalogue file"
    )
    assert time.process_time() - begin < 0.5


def test_the_size_bound_itself_is_read(tmp_path: Path) -> None:
    path = tmp_path / "p.yaml"
    path.write_bytes(b"a: 1\n")
    assert read_yaml(path, limit=5).keys() == ("a",)
    assert "is too large: 5 bytes" in file_message(path, limit=4)


@pytest.mark.skipif(not hasattr(os, "geteuid") or os.geteuid() == 0, reason="permissions do not bind here")
def test_an_unreadable_file(tmp_path: Path) -> None:
    path = tmp_path / "p.yaml"
    path.write_bytes(b"a: 1\n")
    path.chmod(0)
    assert file_message(path) == (
        f"{path}: error: this catalogue file cannot be read\n"
        "    why: the system says: Permission denied\n"
        "    fix: check the path and its permissions"
    )


@pytest.mark.parametrize("name", ["a\0b", "x" * 10_000, "loop"])
def test_names_that_the_system_refuses(tmp_path: Path, name: str) -> None:
    if name == "loop":
        (tmp_path / name).symlink_to(tmp_path / name)
    assert "error: this catalogue file cannot be read\n    why: the system says: " in file_message(tmp_path / name)


# fields


def fields(text: str, where: str = "glide") -> tuple[Fields, list[Problem]]:
    problems: list[Problem] = []
    return Fields(parse_yaml(text.encode(), "a.yaml"), problems, where, "glide: {longest: 2 s}"), problems


def test_fields_take_and_place() -> None:
    taken, problems = fields("longest: 2 s\n")
    node = taken.take("longest")
    assert node is not None
    assert node.text == "2 s"
    assert taken.take("shortest") is None
    assert taken.place("longest") == Place("a.yaml", 1, 1)
    assert taken.place("shortest") == Place("a.yaml", 1, 1)
    taken.rest()
    assert problems == []


def test_unknown_keys_are_reported_with_the_nearest() -> None:
    taken, problems = fields("longst: 2 s\nzzz: 1\ntaper: log\n")
    taken.take("longest")
    taken.rest(known=["taper"])
    assert [str(p) for p in problems] == [
        "a.yaml:1:1: error: unknown key 'longst' in glide\n"
        "    why: known here: longest, taper\n"
        "    fix: did you mean 'longest'?",
        "a.yaml:2:1: error: unknown key 'zzz' in glide\n"
        "    why: known here: longest, taper\n"
        "    fix: use one of the known names",
    ]


def test_a_key_without_its_colon_is_told_so() -> None:
    taken, problems = fields("{longest 2 s, taper:log, step}")
    for key in ("longest", "taper", "step"):
        taken.take(key)
    taken.rest()
    assert [str(p) for p in problems] == [
        "a.yaml:1:2: error: there is no colon after 'longest'\n"
        "    why: a key is followed by a colon and a blank\n"
        "    fix: write 'longest: 2 s'",
        "a.yaml:1:15: error: there is no blank after the colon of 'taper'\n"
        "    why: a key is followed by a colon and a blank\n"
        "    fix: write 'taper: log'",
    ]


def test_what_an_unknown_key_is_may_be_known_elsewhere() -> None:
    taken, problems = fields("pitch: true\nzzz: 1\n")
    taken.take("longest")
    taken.rest(elsewhere=lambda name: name.problem("not here") if name.text == "pitch" else None)
    assert [p.what for p in problems] == ["not here", "unknown key 'zzz' in glide"]


def test_a_decimal_comma_in_braces_is_given_to_the_reader_of_the_value() -> None:
    taken, problems = fields("{longest: 0,5 ms, prices: {1: 0,40, 100: 0,25}, span: ±2,5 V}")
    longest, prices, span = (taken.take(key) for key in ("longest", "prices", "span"))
    assert longest is not None
    assert prices is not None
    assert span is not None
    assert (longest.text, longest.place) == ("0,5 ms", Place("a.yaml", 1, 11))
    assert span.text == "±2,5 V"
    assert [(k.text, v.text) for k, v in Fields(prices, problems).node.entries] == [("1", "0,40"), ("100", "0,25")]
    taken.rest()
    assert problems == []


@pytest.mark.parametrize("text", ["{a: 1, 5 ms}", "{a: x,5}", "{a: 1,b}", "{a: 1,5: 2}", "{a: '1',5}", "{a: 1,\n 5}"])
def test_other_keys_of_digits_stay_keys(text: str) -> None:
    taken, problems = fields(text)
    taken.take("a")
    taken.rest()
    assert len(problems) == 1
    assert problems[0].what.startswith("unknown key '")


def test_a_flood_of_unknown_keys_is_summed_up() -> None:
    taken, problems = fields("\n".join(f"k{n}: 1" for n in range(1000)), where="")
    taken.rest(known=["module"])
    assert len(problems) == 21
    assert (
        str(problems[-1]) == "a.yaml:21:1: error: 980 more unknown keys in the page\n    fix: mend the ones above first"
    )


@pytest.mark.parametrize(("text", "found"), [("[1]", "a list"), ("5 ms", "'5 ms'")])
def test_fields_of_something_else(text: str, found: str) -> None:
    taken, problems = fields(text)
    assert taken.take("longest") is None
    taken.rest()
    assert [str(p) for p in problems] == [
        f"a.yaml:1:1: error: glide is {found}, not a mapping\n"
        "    why: glide is made of keys and values\n"
        "    fix: write it like this: glide: {longest: 2 s}"
    ]


def test_nearest_name() -> None:
    assert nearest("Chanels", ["channels", "jacks"]) == "channels"
    assert nearest("land patterns", ["land_patterns"]) == "land_patterns"
    assert nearest("zzz", ["channels", "jacks"]) == ""
    assert nearest("x" * 100_000, ["channels"]) == ""


def test_unknown_without_names() -> None:
    node = Node("scalar", Place("a.yaml", 2, 3), "foo")
    assert str(unknown(node, [], "family")) == (
        "a.yaml:2:3: error: unknown family 'foo'\n    why: no names are known here\n    fix: use one of the known names"
    )


def test_text_is_shown_on_one_line_and_cut() -> None:
    assert shown("a\nb\u202e") == "a\\nb\\u202e"
    assert shown("x" * 60) == "x" * 60
    assert shown("x" * 61) == "x" * 59 + "…"
