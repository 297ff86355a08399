"""Fixtures that every part of the suite may use."""

from __future__ import annotations

import contextlib
import io
import os
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import pytest
from hypothesis import settings

# the same examples on every run of a submission: what is found by chance is for the developer's own runs
settings.register_profile("ci", derandomize=True, deadline=None)
if os.environ.get("CI"):
    settings.load_profile("ci")

TOP = Path(__file__).resolve().parent.parent


@dataclass(frozen=True)
class Ran:
    """What one run of the command line left."""

    status: int
    out: str
    err: str


@pytest.fixture(scope="session")
def top() -> Path:
    """The project's top folder."""
    return TOP


@pytest.fixture(scope="session")
def spec_paths() -> list[Path]:
    """The shipped specs."""
    return sorted((TOP / "specs").glob("*.yaml"))


@pytest.fixture
def modgen(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Callable[..., Ran]:
    """Run the command line in an empty folder; exit status, stdout and stderr apart; never a traceback."""
    from modgen.cli import main

    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("COLUMNS", "200")

    def run(*arguments: str) -> Ran:
        out, err = io.StringIO(), io.StringIO()
        with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
            status = main(list(arguments))
        assert "Traceback" not in err.getvalue() + out.getvalue()
        return Ran(status, out.getvalue(), err.getvalue())

    return run


@pytest.fixture
def write_spec(tmp_path: Path) -> Callable[..., Path]:
    """Write a spec from the four required keys and whatever lines a test adds or replaces."""
    required = {
        "module": "module: Test lag",
        "channels": "channels: 2",
        "jacks": "jacks: 4",
        "rails": "rails: {positive: 12 V, negative: -12 V}",
        "glide": "glide: {shortest: 5 ms, longest: 2 s}",
    }

    def write(*lines: str, name: str = "spec.yaml") -> Path:
        page = dict(required)
        for line in lines:
            page[line.partition(":")[0]] = line
        path = tmp_path / name
        path.write_text("\n".join(page.values()) + "\n", encoding="utf-8")
        return path

    return write
