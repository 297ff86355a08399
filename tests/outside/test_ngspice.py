"""The emitted deck, run by ngspice, gives the glide times of design.json within 1 %.

Run live on every shipped spec, and on one with range switches, where ngspice is installed. One case is kept beside
this file, in ``ngspice/``: the deck, and what ngspice of the stated version printed for it; it is compared also where
there is no ngspice.
To make it again after the deck has changed on purpose: ``python tests/outside/test_ngspice.py`` and read the
difference.
"""

from __future__ import annotations

import json
import re
import shutil
import subprocess
import sys
import tempfile
from functools import cache
from pathlib import Path

import pytest

HERE = Path(__file__).resolve().parent
ROOT = HERE.parents[1]
#: what is shipped, and what no shipped spec has
SPECS = [*sorted((ROOT / "specs").glob("*.yaml")), HERE / "ngspice" / "two-range-lag.yaml"]
KEPT = HERE / "ngspice" / "four-lane-pitch-lag"
POSITIONS = ("shortest", "middle", "longest")
#: with a range switch: where the ranges meet, as (range, position) of design.json
MEETING = {"fast_longest": (0, "longest"), "slow_shortest": (1, "shortest")}

pytestmark = pytest.mark.source("ngspice 39, batch run of the emitted deck; kept run in tests/outside/ngspice/")


@cache
def job(path: Path):
    from modgen.chain import run

    return run(path)


def deck(path: Path) -> bytes:
    from modgen.outputs.spice import spice_deck

    return spice_deck(job(path))


def design(path: Path) -> dict:
    from modgen.outputs.design_json import design_json

    return json.loads(design_json(job(path)))


def simulated(program: str, text: bytes) -> str:
    """What ngspice prints for a deck."""
    with tempfile.TemporaryDirectory() as folder:
        (Path(folder) / "circuit.cir").write_bytes(text)
        done = subprocess.run(
            [program, "-b", "circuit.cir"], cwd=folder, capture_output=True, text=True, timeout=300, check=True
        )
    return done.stdout


def printed_lines(text: str) -> dict[tuple[int, str], float]:
    return {
        (int(channel), what): float(value)
        for channel, what, value in re.findall(r"^CH(\d+) (\w+) (\S+)$", text, re.MULTILINE)
    }


def compare(found: dict[tuple[int, str], float], data: dict) -> None:
    channels = [channel["channel"] for channel in data["channels"]]
    ranged = {channel["channel"] for channel in data["channels"] if channel["ranges"]}
    expected_lines = [(n, what) for n in channels for what in (*POSITIONS, "error")]
    assert sorted(found) == sorted([*expected_lines, *((n, what) for n in ranged for what in MEETING)])
    for channel in data["channels"]:
        for what, (index, position) in MEETING.items() if channel["ranges"] else ():
            expected = channel["ranges"][index][position]["nominal"]
            assert found[channel["channel"], what] == pytest.approx(expected, rel=0.01), (channel, what)
        for position in POSITIONS:
            expected = channel[position]["nominal"]
            assert found[channel["channel"], position] == pytest.approx(expected, rel=0.01), (channel, position)
        # typical offsets and guaranteed gains lie inside what the budget allows for the whole span
        budget = data["accuracy"]
        most = budget["offset"]["worst"] + budget["scale"]["worst"] * 10
        assert abs(found[channel["channel"], "error"]) < most


def test_there_are_specs_to_run():
    assert len(SPECS) >= 5
    assert any(channel["ranges"] for channel in design(SPECS[-1])["channels"])


@pytest.mark.parametrize("path", SPECS, ids=lambda path: path.stem)
def test_ngspice_agrees_with_design_json(path):
    program = shutil.which("ngspice")
    if program is None:
        pytest.skip("ngspice is not installed: the deck is not run here, see the kept case")
    compare(printed_lines(simulated(program, deck(path))), design(path))


def test_the_kept_run_agrees_with_design_json():
    compare(printed_lines(KEPT.with_suffix(".txt").read_text("utf-8")), design(ROOT / "specs" / f"{KEPT.name}.yaml"))


def test_the_kept_deck_is_the_one_that_is_emitted():
    assert deck(ROOT / "specs" / f"{KEPT.name}.yaml") == KEPT.with_suffix(".cir").read_bytes()


def keep() -> None:
    """Run the kept case again."""
    program = shutil.which("ngspice")
    if program is None:
        sys.exit("ngspice is not installed")
    sys.path.insert(0, str(ROOT))
    text = deck(ROOT / "specs" / f"{KEPT.name}.yaml")
    version = subprocess.run([program, "--version"], capture_output=True, text=True, check=True).stdout
    name = re.search(r"ngspice-\S+", version)
    lines = [line for line in simulated(program, text).splitlines() if re.match(r"CH\d+ ", line)]
    head = f"# {name[0] if name else 'ngspice'}: ngspice -b {KEPT.name}.cir"
    KEPT.parent.mkdir(exist_ok=True)
    KEPT.with_suffix(".cir").write_bytes(text)
    KEPT.with_suffix(".txt").write_text("\n".join([head, *lines]) + "\n", "utf-8")


if __name__ == "__main__":
    keep()
