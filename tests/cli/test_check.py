"""``modgen check``: with a spec, with a netlist, with both, and with files that are neither."""

from __future__ import annotations

import json
import re
import resource
import time
from collections.abc import Callable
from pathlib import Path

import pytest

from modgen import run


@pytest.fixture
def text(write_spec: Callable) -> str:
    return run(write_spec()).netlist_text


@pytest.fixture
def netlist(tmp_path: Path, text: str) -> Path:
    path = tmp_path / "back.net"
    path.write_text(text, encoding="utf-8")
    return path


def test_with_both_nothing_is_said_of_what_was_not_compared(netlist: Path, modgen: Callable) -> None:
    ran = modgen("check", "spec.yaml", "--netlist", "back.net")
    assert (ran.status, ran.err) == (0, "")
    assert "not compared" not in ran.out
    assert ran.out.splitlines()[-1].startswith("cleared for ordering")


def test_a_netlist_by_itself(netlist: Path, modgen: Callable) -> None:
    ran = modgen("check", "--netlist", "back.net")
    assert (ran.status, ran.err) == (0, "")
    verdict, rest = ran.out.splitlines()[-2:]
    assert verdict.startswith("no error found, as far as that can be judged without a spec: ")
    assert "cleared for ordering" not in ran.out
    assert rest.startswith("no spec was given; ")
    assert "glide-range" in rest
    assert "differs-from-spec" in rest


def test_a_faulty_netlist_by_itself(netlist: Path, text: str, modgen: Callable) -> None:
    turned = re.sub(r'(\(ref "?D1"?\)\s*\(pin "?)([12])', lambda m: m[1] + ("2" if m[2] == "1" else "1"), text)
    assert turned != text
    netlist.write_text(turned, encoding="utf-8")
    ran = modgen("check", "--netlist", "back.net")
    assert ran.status == 1
    assert "[reverse-polarity]" in ran.out
    assert "NOT CLEARED FOR ORDERING" in ran.out


def test_a_netlist_by_itself_as_json(netlist: Path, modgen: Callable) -> None:
    ran = modgen("check", "--netlist", "back.net", "--format", "json")
    assert ran.status == 0
    assert json.loads(ran.out)["cleared"] is True


def test_neither(modgen: Callable) -> None:
    ran = modgen("check")
    assert (ran.status, ran.out) == (2, "")
    assert ran.err == (
        "modgen check: error: there is nothing to judge\n    fix: give a spec, a netlist with --netlist, or both\n"
    )


HOSTILE = {
    "empty": ("", "bad.net:1:1: error: the file is empty"),
    "cut off": ("(export (components (comp (ref R1)", "bad.net:1:35: error: the file ends in the middle of (comp"),
    "deep": ("(" * 2_000_000, "bad.net:1:41: error: lists nest deeper than 40"),
    "deep after a good start": (
        "(export\n" + "(a " * 1_000_000,
        "bad.net:2:118: error: lists nest deeper than 40",
    ),
    "a board": ("(kicad_pcb (version 2021))", "bad.net:1:1: error: this is not a netlist: it begins with '(kicad_pcb"),
    "an older dialect": ("# EESchema Netlist\n", "bad.net:1:1: error: this is not a netlist: it begins with '#'"),
    "XML": ('<?xml version="1.0"?><export/>', "bad.net:1:1: error: this is not a netlist: it begins with '<?xml'"),
    "SPICE": ("* a deck\nR1 1 2 10k\n.end\n", "bad.net:1:1: error: this is not a netlist: it begins with '*'"),
    "EDIF": ("(edif lag (edifVersion 2 0 0))", "bad.net:1:1: error: this is not a netlist: it begins with '(edif'"),
    "a page": ("module: x\n", "bad.net:1:1: error: this is not a netlist: it begins with 'module:'"),
    "binary": ("\0\1\2", "bad.net:1:1: error: the file is not text: it holds a zero byte"),
    "an open quote": ('(export "' + "x" * 5_000_000, "bad.net:1:9: error: the quote that begins here is never closed"),
    "many parts": (
        "(export (components " + "".join(f"(comp (ref R{n}) (value 1k))" for n in range(5000)) + ") (nets))",
        "bad.net:1:9: error: the netlist has 5000 parts, more than 4000",
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", HOSTILE)
@pytest.mark.parametrize("spec", [False, True])
def test_a_hostile_file(name: str, spec: bool, tmp_path: Path, write_spec: Callable, modgen: Callable) -> None:
    content, message = HOSTILE[name]
    (tmp_path / "bad.net").write_text(content, encoding="utf-8")
    given = [str(write_spec())] if spec else []
    start = time.process_time()
    ran = modgen("check", *given, "--netlist", "bad.net")
    assert time.process_time() - start < 5
    assert (ran.status, ran.out) == (2, "")
    assert ran.err.startswith(message)
    assert ran.err.count(": error: ") == 1


def test_two_hundred_megabytes_are_not_read(tmp_path: Path, modgen: Callable) -> None:
    with (tmp_path / "bad.net").open("wb") as file:
        file.truncate(200_000_000)
    before = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    ran = modgen("check", "--netlist", "bad.net")
    assert (ran.status, ran.out) == (2, "")
    assert ran.err.startswith("bad.net: error: the file has 200000000 bytes, more than 20000000")
    assert resource.getrusage(resource.RUSAGE_SELF).ru_maxrss - before < 50_000  # kilobyte


def test_json_of_a_netlist_by_itself_says_what_was_not_judged(netlist: Path, modgen: Callable) -> None:
    page = json.loads(modgen("check", "--netlist", "back.net", "--format", "json").out)
    missed = {entry["rule"]: entry["why"] for entry in page["not_judged"]}
    assert {"glide-range", "differs-from-spec", "library-erc"} <= set(missed)
    assert all(missed.values())
