"""Netlist files: what is read, and what is said of those that cannot be."""

from __future__ import annotations

import os
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from modgen.netlist import Net, Netlist, Part, parse_netlist, read_netlist
from modgen.netlist.reader import LARGEST, LONGEST_NAME, MOST_PROBLEMS
from modgen.problems import InputError

# As a layout editor writes it back: quoted and bare words, own fields, library pins, another order.
RETURNED = """\
(export (version "E")
  (design
    (source "/home/somebody/lag.sch")
    (date "2026-01-01")
    (tool "some editor 8.0.4")
    (sheet (number "2") (name "/CH1/") (tstamps "/1/")
      (title_block (title "A channel") (company) (rev) (date)))
    (sheet (number "1") (name "/") (tstamps "/")
      (title_block (title "Lag, \\"revised\\"") (company) (rev) (date))))
  (components
    (comp (ref "R10") (value "2.2k")
      (footprint "Axial:R")
      (fields
        (field (name "tolerance") "1%")
        (field (name "Footprint") "Axial:R")
        (field (name "Datasheet"))
        (field (name "part") "R-2k2")
        (field (name "note") ""))
      (libsource (lib "Device") (part "R") (description "resistor"))
      (sheetpath (names "/CH1/") (tstamps "/1/")))
    (comp (ref R2) (value 1e3))
    (comp (ref "C1") (value "1u")
      (libsource (lib "Device") (part "C_Polarised"))))
  (libparts
    (libpart (lib "Device") (part "R") (pins (pin (num "1") (name "~")) (pin (num "2") (name "~"))))
    (libpart (lib "Device") (part "C_Polarised")
      (pins (pin (num "2") (name "-")) (pin (num "1") (name "+")))))
  (libraries (library (logical "Device") (uri "/usr/lib")))
  (nets
    (net (code "2") (name "V+") (class "Default")
      (node (ref "R10") (pin "1") (pintype "passive"))
      (node (ref "C1") (pin "1") (pintype "passive")))
    (net (code "1") (name "0V") (node (ref "R2") (pin "2")))
    (net (code "3") (name "EMPTY"))))
"""


def wrapped(components: str = '(comp (ref "R1") (value "1k"))', nets: str = "") -> str:
    return f"(export\n(components\n{components})\n(nets\n{nets}))\n"


def message(text: str) -> str:
    with pytest.raises(InputError) as caught:
        parse_netlist(text, "lag.net")
    return str(caught.value)


def test_what_came_back_from_layout() -> None:
    assert parse_netlist(RETURNED) == Netlist(
        title='Lag, "revised"',
        parts=(
            Part("C1", "1u", "", (), "/", ("2", "1")),
            Part("R2", "1e3", "", (), "/", ()),
            Part("R10", "2.2k", "Axial:R", (("part", "R-2k2"), ("tolerance", "1%")), "/CH1/", ("1", "2")),
        ),
        nets=(
            Net("0V", (("R2", "2"),)),
            Net("EMPTY", ()),
            Net("V+", (("C1", "1"), ("R10", "1"))),
        ),
    )


def test_from_a_file(tmp_path: Path) -> None:
    path = tmp_path / "lag.net"
    path.write_text("\ufeff" + RETURNED, encoding="utf-8")
    assert read_netlist(path) == read_netlist(str(path)) == parse_netlist(RETURNED)
    path.write_bytes(RETURNED.replace("\n", "\r\n").encode())
    assert read_netlist(path) == parse_netlist(RETURNED)


def test_duplicate_references_are_kept_for_the_rule() -> None:
    found = parse_netlist(wrapped('(comp (ref "R1") (value "2k")) (comp (ref "R1") (value "1k"))'))
    assert [(p.ref, p.value) for p in found.parts] == [("R1", "1k"), ("R1", "2k")]


def test_no_title() -> None:
    assert parse_netlist(wrapped()).title == ""


def test_another_kind_of_file() -> None:
    assert message("(kicad_pcb (version 1))") == (
        "lag.net:1:1: error: this is not a netlist: it begins with '(kicad_pcb', not '(export'\n"
        "    why: the file is of some other kind: a board, a schematic or a library\n"
        "    fix: give the S-expression netlist (often called .net) that the layout editor exports"
    )


def test_sections_missing() -> None:
    assert message('\n(export (version "D"))') == (
        "lag.net:2:1: error: the netlist has no (components ...)\n"
        "    why: parts and nets are both needed\n"
        "    fix: write the netlist again from the program that made it\n"
        "lag.net:2:1: error: the netlist has no (nets ...)\n"
        "    why: parts and nets are both needed\n"
        "    fix: write the netlist again from the program that made it"
    )


def test_no_parts() -> None:
    assert message(wrapped("")) == (
        "lag.net:2:1: error: the netlist has no parts\n"
        "    why: there is nothing to look at\n"
        "    fix: write the netlist again from the program that made it"
    )


FIX = "    fix: write the netlist again from the program that made it"


@pytest.mark.parametrize(
    ("text", "wanted"),
    [
        (
            wrapped('(comp (value "1k"))'),
            "lag.net:3:1: error: a part has no (ref ...)\n    why: without it nothing can be said of it\n" + FIX,
        ),
        (
            wrapped(nets="(net (code 1))"),
            "lag.net:5:1: error: a net has no (name ...)\n    why: without it nothing can be said of it\n" + FIX,
        ),
        (
            wrapped(nets='(net (name "A") (node (ref "R1")))'),
            "lag.net:5:17: error: a node of net A has no (pin ...)\n    why: without it nothing can be said of it\n"
            + FIX,
        ),
        (
            wrapped(nets='(net (name "A") (node (ref "R9") (pin "1")))'),
            "lag.net:5:17: error: net A names R9, which is not among the parts\n    why: a part is missing\n" + FIX,
        ),
        (
            wrapped(nets='(net (name "A"))\n(net (name "A"))'),
            "lag.net:6:1: error: net A stands twice\n    why: what is on it cannot be told\n" + FIX,
        ),
        (
            wrapped(nets='(net (name "A") (node (ref "R1") (pin "1")))\n(net (name "B") (node (ref R1) (pin 1)))'),
            "lag.net:6:17: error: R1 pin 1 is on net A and on net B\n    why: a pin is on one net\n" + FIX,
        ),
        (
            wrapped(nets='(net (name "A") (node (ref "R1") (pin "1")) (node (ref "R1") (pin "1")))'),
            "lag.net:5:45: error: R1 pin 1 is twice on net A\n    why: a pin is on one net\n" + FIX,
        ),
        (
            wrapped('(comp (ref "R\\n1"))'),
            "lag.net:3:1: error: a part is called 'R\\n1'\n    why: a name has up to 120 printable characters\n" + FIX,
        ),
    ],
    ids=["no ref", "no net name", "no pin", "unknown part", "net twice", "two nets", "pin twice", "line break"],
)
def test_contradictions(text: str, wanted: str) -> None:
    assert message(text) == wanted


def test_everything_is_reported_at_once_in_the_order_of_the_file() -> None:
    text = wrapped('(comp (ref "R1")) (comp)', '(net (name "A") (node (ref "R2") (pin "1")))\n(net)')
    assert [line.split(": ")[0] for line in message(text).splitlines() if line.startswith("lag")] == [
        "lag.net:3:19",
        "lag.net:5:17",
        "lag.net:6:1",
    ]


def test_many_problems_are_counted_not_listed() -> None:
    text = wrapped("(comp)\n" * (MOST_PROBLEMS + 7))
    lines = [line for line in message(text).splitlines() if line.startswith("lag")]
    assert len(lines) == MOST_PROBLEMS + 1
    assert lines[-2] == f"lag.net:{MOST_PROBLEMS + 2}:1: error: a part has no (ref ...)"
    assert lines[-1] == f"lag.net:{MOST_PROBLEMS + 3}:1: error: 7 more problems from here on are not listed"


def test_longest_name() -> None:
    longest = "R" * LONGEST_NAME
    assert parse_netlist(wrapped(f'(comp (ref "{longest}"))')).parts[0].ref == longest
    assert message(wrapped(f'(comp (ref "{longest}1"))')).startswith("lag.net:3:1: error: a part is called 'RRR")


def file_message(path: Path) -> str:
    with pytest.raises(InputError) as caught:
        read_netlist(path)
    return str(caught.value).replace(str(path), "FILE")


def test_too_large_is_refused_before_reading(tmp_path: Path) -> None:
    path = tmp_path / "large.net"
    with path.open("wb") as file:
        file.truncate(LARGEST + 1)
    assert file_message(path) == (
        "FILE: error: the file has 20000001 bytes, more than 20000000\n"
        "    why: a netlist of 64 channels has a twentieth of that\n"
        "    fix: check that this is the netlist, not some other file"
    )


def test_missing_file_folder_and_device(tmp_path: Path) -> None:
    assert file_message(tmp_path / "none.net") == (
        "FILE: error: the file cannot be read: No such file or directory\n    fix: check the path and its permissions"
    )
    folder = (
        "FILE: error: this is not a file\n"
        "    why: it is a folder or a device\n"
        "    fix: give the path of the netlist file"
    )
    assert file_message(tmp_path) == folder
    os.mkfifo(tmp_path / "pipe")
    assert file_message(tmp_path / "pipe") == folder
    with pytest.raises(InputError, match="cannot be read: embedded null byte"):
        read_netlist("a\0b")


def test_binary(tmp_path: Path) -> None:
    path = tmp_path / "binary.net"
    path.write_bytes(b"(export \xff\xfe)")
    assert file_message(path) == (
        "FILE: error: the file is not text: byte 9 is not UTF-8\n"
        "    why: a netlist is a text file\n"
        "    fix: give the S-expression netlist (often called .net) that the layout editor exports"
    )
    path.write_bytes(b"(export\n \0)")
    assert file_message(path) == (
        "FILE:2:2: error: the file is not text: it holds a zero byte\n"
        "    why: a netlist is a text file\n"
        "    fix: give the S-expression netlist (often called .net) that the layout editor exports"
    )


@given(st.integers(min_value=0, max_value=len(RETURNED) - 2))
def test_a_file_cut_off_anywhere_is_never_taken_for_a_whole_one(length: int) -> None:
    with pytest.raises(InputError):
        parse_netlist(RETURNED[:length])


@given(
    st.integers(min_value=0, max_value=len(RETURNED) - 1),
    st.sampled_from(["", "(", ")", '"', "\\", " ", "x", "\0"]),
)
def test_a_damaged_file_gives_our_error_or_a_netlist(at: int, put: str) -> None:
    try:
        found = len(parse_netlist(RETURNED[:at] + put + RETURNED[at + 1 :]).parts)
    except InputError as error:
        found = len(error.problems)
    assert found > 0
