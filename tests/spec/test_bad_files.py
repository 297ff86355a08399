"""Files that are no spec: quick, with a message, and only ever our error."""

from __future__ import annotations

import os
import time
from collections.abc import Callable
from pathlib import Path

import pytest

from modgen.problems import InputError
from modgen.spec import read_spec
from modgen.spec.reader import LARGEST

FULL = LARGEST - 40  # room for what stands around it
FILES: dict[str, tuple[bytes, str]] = {
    "empty": (b"", ":1:1: error: this spec is empty"),
    "a list": (b"- module: x\n", ":1:1: error: the page is a list, not a mapping"),
    "binary": (bytes(range(256)) * 10, ":1:1: error: this spec is not text: byte 1 is zero"),
    "nested aliases": (
        b"a: &a [x]\n" + b"".join(b"k%d: [*a, *a]\n" % n for n in range(50)),
        ":1:4: error: the anchor '&a' is not allowed",
    ),
    "deep": (b"module: " + b"[" * FULL, " error: this spec is nested more than 20 levels deep"),
    "many keys": (b"".join(b"k%05d: 1\n" % n for n in range(FULL // 10)), " more unknown keys in the page"),
    "many problems": (b"waive: [" + b"{}," * (FULL // 3) + b"]", f":1:8: error: waive has {FULL // 3} entries"),
    "many waivers": (
        b"waive: [" + b"{a: 1, b: 2, c: 3}," * 1000 + b"]",
        ":1:9: error: the key 'waive[1].reason' is missing",
    ),
    "many paths": (
        b"build: {catalogue: [" + b",".join(b"%d" % (n % 999) for n in range(1000)) + b"]}",
        "error: build.catalogue names '0' twice",
    ),
    "a long key": (
        b"x" * 1000 + b": 1\n",
        ":1:1: error: unknown key 'xxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxx…'",
    ),
    "a long value": (b"module: " + b"x" * FULL, f":1:9: error: module has {FULL} characters"),
    "a long number": (b"channels: " + b"9" * FULL, ":1:11: error: channels is 999"),
    "a long quantity": (b"glide: {longest: " + b"9" * FULL + b"}", ":1:18: error: glide.longest: "),
    "commas": (b"a," * (FULL // 2), ":1:1: error: the page is 'a,a,a"),
    "a list of letters": (b"[" + b"a," * (FULL // 2) + b"]", ":1:1: error: the page is a list, not a mapping"),
    "too large": (b"#" * (LARGEST + 1), ": error: this spec is too large: 100001 bytes"),
}


@pytest.mark.parametrize("case", FILES)
def test_a_bad_file_gets_its_message_quickly(tmp_path: Path, case: str) -> None:
    data, expected = FILES[case]
    path = tmp_path / "bad.yaml"
    path.write_bytes(data)
    begin = time.process_time()
    with pytest.raises(InputError) as caught:
        read_spec(path)
    assert time.process_time() - begin < 1.0
    said = str(caught.value)
    assert expected in said
    assert len(said) < 2_000_000


def test_a_hundred_megabytes(tmp_path: Path) -> None:
    path = tmp_path / "big.yaml"
    with path.open("wb") as stream:
        stream.truncate(100 * 1024 * 1024)
    begin = time.process_time()
    with pytest.raises(InputError) as caught:
        read_spec(path)
    assert time.process_time() - begin < 0.5
    assert str(caught.value) == (
        f"{path}: error: this spec is too large: 104857600 bytes\n"
        "    why: at most 100000 bytes are read\n"
        "    fix: check that this file is a spec"
    )


def test_the_largest_page_is_read(tmp_path: Path, page: Callable[..., str]) -> None:
    text = page()
    (tmp_path / "a.yaml").write_text(text + "#" * (LARGEST - len(text)), encoding="utf-8")
    assert os.path.getsize(tmp_path / "a.yaml") == LARGEST
    assert read_spec(tmp_path / "a.yaml").module == "Lag"
