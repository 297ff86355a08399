"""A user's mistake: a clear message, exit 2, nothing written, no traceback."""

from __future__ import annotations

import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

PAGE = """module: Test lag
channels: {channels}
jacks: 4
rails: {{positive: 12 V, negative: -12 V}}
glide: {{shortest: 5 ms, longest: {longest}}}
"""


def page(channels: str = "2", longest: str = "2 s") -> str:
    return PAGE.format(channels=channels, longest=longest)


BAD = {
    "empty": b"",
    "list": b"- one\n- two\n",
    "scalar": b"just words\n",
    "binary": bytes(range(256)) * 8,
    "wrong unit": page(longest="2 kg").encode(),
    "no unit": page(longest="2").encode(),
    "negative channels": page(channels="-4").encode(),
    "many channels": page(channels="1000000000").encode(),
    "exponent": page(channels="1e9").encode(),
    "nan": page(channels=".nan").encode(),
    "nan quantity": page(longest="NaN s").encode(),
    "alias bomb": b"a: &a [x, x]\nb: &b [*a, *a]\nc: &c [*b, *b]\nmodule: *c\n",
    "deep": b"[" * 5000,
    "tab": b"module:\tx\n\tchannels: 3\n",
    "duplicate": page().encode() + b"channels: 3\n",
    "unknown key": page().encode() + b"colour: red\n",
    "python tag": b"!!python/object/apply:os.system ['true']\n",
}


@pytest.mark.parametrize("name", BAD)
@pytest.mark.parametrize("command", ["build", "check"])
def test_bad_page(name: str, command: str, modgen: Callable, tmp_path: Path) -> None:
    spec = tmp_path / "bad.yaml"
    spec.write_bytes(BAD[name])
    ran = modgen(command, "bad.yaml")
    assert ran.status == 2
    assert ran.out == ""
    assert ran.err.startswith("bad.yaml")
    assert ": error: " in ran.err
    assert sorted(p.name for p in tmp_path.iterdir()) == ["bad.yaml"]


def test_hundred_megabytes(modgen: Callable, tmp_path: Path) -> None:
    with (tmp_path / "large.yaml").open("wb") as file:
        file.truncate(100_000_000)
    ran = modgen("build", "large.yaml")
    assert ran.status == 2
    assert "large.yaml: error: " in ran.err


def test_missing_file_folder_and_catalogue(modgen: Callable, tmp_path: Path, write_spec: Callable) -> None:
    assert modgen("build", "absent.yaml").status == 2
    (tmp_path / "folder.yaml").mkdir()
    assert modgen("build", "folder.yaml").status == 2
    write_spec("build: {catalogue: [mine.yaml]}")
    ran = modgen("build", "spec.yaml")
    assert ran.status == 2
    assert ran.err.startswith("spec.yaml:6:21: error: the catalogue file 'mine.yaml' cannot be found\n")


@pytest.mark.skipif(os.name == "nt" or os.geteuid() == 0, reason="root reads and writes everything")
def test_unreadable_spec(modgen: Callable, write_spec: Callable) -> None:
    write_spec().chmod(0)
    assert modgen("build", "spec.yaml").status == 2


def test_target_that_cannot_be_written(modgen: Callable, tmp_path: Path, write_spec: Callable) -> None:
    write_spec()
    (tmp_path / "taken").write_text("a file\n")
    ran = modgen("build", "spec.yaml", "--out", "taken")
    assert ran.status == 2
    assert ": error: " in ran.err
    assert (tmp_path / "taken").read_text() == "a file\n"
    if sys.platform == "linux":
        assert modgen("build", "spec.yaml", "--out", "/proc/nowhere").status == 2


def test_a_folder_that_is_no_pack_is_left_alone(modgen: Callable, tmp_path: Path, write_spec: Callable) -> None:
    write_spec()
    mine = tmp_path / "output" / "test-lag"
    mine.mkdir(parents=True)
    (mine / "letter.txt").write_text("dear\n")
    assert modgen("build", "spec.yaml").status == 2
    assert [p.name for p in mine.iterdir()] == ["letter.txt"]


def test_one_bad_spec_does_not_stop_the_others(modgen: Callable, tmp_path: Path, write_spec: Callable) -> None:
    write_spec("channels: 2000", name="bad.yaml")
    write_spec(name="good.yaml")
    ran = modgen("build", "bad.yaml", "good.yaml")
    assert ran.status == 2
    assert "bad.yaml:2:11: error: " in ran.err
    assert (tmp_path / "output" / "test-lag" / "design.json").exists()


def test_unknown_command_and_option(modgen: Callable) -> None:
    assert modgen("assemble").status == 2
    assert modgen("build", "x.yaml", "--fast").status == 2
    assert modgen().status == 2
    assert modgen("--help").status == 0
    assert modgen("--version").out == "modgen 0.1.0\n"


def test_two_modules_with_one_folder_name(modgen: Callable, tmp_path: Path, write_spec: Callable) -> None:
    """Neither in one run nor in two may one module take another's folder in silence."""
    write_spec("module: Codes", name="one.yaml")
    write_spec("module: Codes µ", name="two.yaml")
    ran = modgen("build", "one.yaml", "two.yaml")
    assert ran.status == 2
    assert ran.err == (
        "two.yaml:1:1: error: module 'Codes µ' has the folder of another module of this run, 'codes'\n"
        "    why: one.yaml was written there\n"
        "    fix: give one another name\n"
    )
    kept = (tmp_path / "output" / "codes" / "design.json").read_bytes()
    ran = modgen("build", "two.yaml")
    assert ran.status == 2
    assert "is the pack of another module, 'Codes'" in ran.err
    assert (tmp_path / "output" / "codes" / "design.json").read_bytes() == kept


def test_output_that_cannot_take_every_letter() -> None:
    """A pipe with an old code page gets question marks, not a crash."""
    environment = os.environ | {"PYTHONIOENCODING": "ascii"}
    ran = subprocess.run(
        [sys.executable, "-m", "modgen", "catalogue", "metal-film-0207-4k7"],
        env=environment,
        capture_output=True,
        text=True,
        check=False,
    )
    assert (ran.returncode, ran.stderr) == (0, "")
    assert "4.7 k?" in ran.stdout


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="no device that is always full")
def test_output_to_a_full_device() -> None:
    with open("/dev/full", "w") as full:
        ran = subprocess.run(
            [sys.executable, "-m", "modgen", "rules"], stdout=full, stderr=subprocess.PIPE, text=True, check=False
        )
    assert ran.returncode == 2
    assert ran.stderr.startswith("modgen: no room left on the device that the output goes to")
