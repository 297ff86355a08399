"""The shipped specs: each builds, is cleared, covers what the four are there to cover, and comes out the same twice."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

from modgen import run
from modgen.outputs import pack_files
from modgen.outputs.model import Job

TOP = Path(__file__).resolve().parent.parent
SPECS = sorted((TOP / "specs").glob("*.yaml"))
EXAMPLE = "four-lane-pitch-lag"


@pytest.fixture(scope="module")
def jobs() -> dict[str, Job]:
    return {path.stem: run(path) for path in SPECS}


def test_every_spec_is_cleared(jobs: dict[str, Job]) -> None:
    """The one thing said: with nominal cover, how few boards reach the whole range over tolerance."""
    for name, job in jobs.items():
        said = [(finding.rule, finding.level) for finding in job.report.findings]
        assert said == ([("glide-range", "note")] if job.spec.glide.cover == "nominal" else []), name
        assert job.report.cleared
        assert all(checked.judged for checked in job.report.checked)


def test_the_specs_cover_what_they_should(jobs: dict[str, Job]) -> None:
    specs = [job.spec for job in jobs.values()]
    channels = {s.channels for s in specs}
    assert {2, 4} <= channels
    assert max(channels) >= 8
    assert any(n % 2 for n in channels)
    rails = {(s.rails.positive, s.rails.negative) for s in specs}
    assert {(12.0, -12.0), (15.0, -15.0)} <= rails
    assert any(s.rails.single for s in specs)
    assert any(s.jacks.total < 2 * s.channels for s in specs)
    assert any(s.jacks.total > 2 * s.channels for s in specs)
    assert {s.build.mount for s in specs} == {"through-hole", "surface"}
    assert any(s.signal.pitch for s in specs)
    assert {s.normalling for s in specs} == {"ground", "chain"}


def test_the_committed_pack_is_what_a_build_makes(jobs: dict[str, Job]) -> None:
    folder = TOP / "output" / EXAMPLE
    made = dict(pack_files(jobs[EXAMPLE]))
    assert sorted(made) == sorted(p.name for p in folder.iterdir())
    for name, content in made.items():
        assert (folder / name).read_bytes() == content, f"{name}: build {EXAMPLE} again and read the difference"


@pytest.mark.parametrize("path", SPECS, ids=lambda p: p.stem)
def test_same_bytes_whatever_the_surroundings(path: Path, tmp_path: Path) -> None:
    """Two processes with other hash seeds, locales, time zones and folders write the same pack."""
    packs = []
    for n, (seed, zone, language) in enumerate((("1", "UTC", "C"), ("77", "Asia/Tokyo", "tr_TR.UTF-8"))):
        folder = tmp_path / f"place {n}"
        folder.mkdir()
        surroundings = os.environ | {"PYTHONHASHSEED": seed, "TZ": zone, "LC_ALL": language, "LANG": language}
        subprocess.run(
            [sys.executable, "-m", "modgen", "build", str(path), "--out", "out"],
            cwd=folder,
            env=surroundings | {"PYTHONPATH": str(TOP)},
            check=True,
            capture_output=True,
        )
        (pack,) = (folder / "out").iterdir()
        packs.append({p.name: p.read_bytes() for p in pack.iterdir()})
        assert str(tmp_path).encode() not in b"".join(packs[-1].values()), "no machine path in any file"
    assert packs[0] == packs[1]


def test_design_json_says_what_the_job_says(jobs: dict[str, Job], modgen: Callable) -> None:
    for name, job in jobs.items():
        page = json.loads(pack_files(job)["design.json"])
        assert page["cleared"] is True
        assert [c["channel"] for c in page["channels"]] == list(range(1, job.spec.channels + 1)), name
        assert {p["ref"] for p in page["parts"]} == {p.ref for p in job.design.parts}
        for said, channel in zip(page["channels"], job.analyses.glide, strict=True):
            assert said["longest"]["nominal"] == pytest.approx(channel.longest.nominal, rel=1e-8)


def test_sizing_and_analysis_agree(jobs: dict[str, Job]) -> None:
    """The design's promise is what the netlist, read back and analysed by itself, shows."""
    for job in jobs.values():
        budget = job.analyses.accuracy
        assert budget.scale_worst <= job.spec.accuracy.scale
        assert budget.offset_worst <= job.spec.accuracy.offset
        for channel in job.analyses.glide:
            shortest, longest = channel.shortest, channel.longest
            if job.spec.glide.cover == "worst-case":
                assert shortest.high <= job.spec.glide.shortest * (1 + 1e-9)
                assert longest.low >= job.spec.glide.longest * (1 - 1e-9)
            assert shortest.nominal <= job.spec.glide.shortest * (1 + 1e-9)
            assert longest.nominal >= job.spec.glide.longest * (1 - 1e-9)
