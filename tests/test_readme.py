"""The README holds: its reference is the model's, its screen is what is printed, its commands run.

``python tests/test_readme.py`` writes the reference and the screen into it anew.
"""

from __future__ import annotations

import re
import shutil
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from modgen.spec.keys import Key, keys_of, page_name
from modgen.spec.model import Spec

TOP = Path(__file__).resolve().parent.parent
README = TOP / "README.md"
FILES = (
    "netlist.net",
    "circuit.cir",
    "design.json",
    "bom.xlsx",
    "bom.csv",
    "assembly.html",
    "review.html",
    "review.sarif",
)


def rows(model: type, before: str = "") -> Iterator[tuple[str, str, str]]:
    for field, key in keys_of(model):
        name = before + page_name(field, key)
        if key.section is not None and key.kind == "section":
            yield from rows(key.section, name + ".")
        else:
            yield name, _default(key), key.help


def _default(key: Key) -> str:
    if key.required:
        return "required"
    default = f"`{key.default or '[]'}`"
    return f"{default}, or `{key.pitch_default}`" if key.pitch_default else default


def reference() -> str:
    lines = ["| key | default | what it says |", "| --- | --- | --- |"]
    lines += [f"| `{name}` | {default} | {says} |" for name, default, says in rows(Spec)]
    return "\n".join(lines)


def screen() -> str:
    import os

    from modgen import run
    from modgen.cli.screen import summary

    os.environ["COLUMNS"] = "120"
    return summary(run(TOP / "specs" / "four-lane-pitch-lag.yaml"), Path("output/four-lane-pitch-lag"))


def section(text: str, name: str) -> str:
    return text.partition(f"<!-- {name} -->\n")[2].partition(f"\n<!-- /{name} -->")[0]


def test_reference_is_the_model() -> None:
    assert section(README.read_text("utf-8"), "reference") == reference()


def test_screen_is_what_a_build_prints(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("COLUMNS", "120")
    assert section(README.read_text("utf-8"), "screen") == f"```text\n{screen()}```"


def test_exactly_two_set_up_commands() -> None:
    part = README.read_text("utf-8").partition("## Two commands")[2].partition("\n## ")[0]
    (block,) = re.findall(r"```sh\n(.*?)```", part, re.S)
    assert len(block.splitlines()) == 2


def test_every_command_runs(modgen: Callable, tmp_path: Path) -> None:
    text = README.read_text("utf-8").partition("## What it writes")[2]
    commands = [line for block in re.findall(r"```sh\n(.*?)```", text, re.S) for line in block.splitlines()]
    assert len(commands) >= 10
    shutil.copytree(TOP / "specs", tmp_path / "specs")
    for line in commands:
        program, *arguments = line.split()
        assert program == "modgen"
        assert modgen(*arguments).status == 0, line


def test_the_file_table_is_what_is_written() -> None:
    text = README.read_text("utf-8")
    assert all(f"`{name}`" in text for name in FILES)
    assert sorted(FILES) == sorted(p.name for p in (TOP / "output" / "four-lane-pitch-lag").iterdir())


def test_own_catalogue_example_works(modgen: Callable, write_spec: Callable, tmp_path: Path) -> None:
    blocks = re.findall(r"```yaml\n(.*?)```", README.read_text("utf-8"), re.S)
    (page,) = (block for block in blocks if "drawer-film" in block)
    (tmp_path / "my-parts.yaml").write_text(page, encoding="utf-8")
    write_spec("build: {catalogue: [my-parts.yaml], capacitor: drawer-film}")
    ran = modgen("build", "spec.yaml")
    assert ran.status == 0, ran.err
    assert "drawer-film-1u0" in ran.out


def test_example_message_is_the_real_one(modgen: Callable, tmp_path: Path) -> None:
    text = README.read_text("utf-8")
    message = next(block for block in re.findall(r"```text\n(.*?)```", text, re.S) if block.startswith("my-lag.yaml"))
    spec = (TOP / "specs" / "four-lane-pitch-lag.yaml").read_text("utf-8")
    page = [line for line in spec.splitlines() if not line.startswith(("#", "signal"))]
    (tmp_path / "my-lag.yaml").write_text("\n".join(page).replace("2 s", "900 s") + "\n", encoding="utf-8")
    assert modgen("build", "my-lag.yaml").err == message


def test_python_example_runs(monkeypatch: pytest.MonkeyPatch, tmp_path: Path, capsys: pytest.CaptureFixture) -> None:
    (example,) = re.findall(r"```python\n(.*?)```", README.read_text("utf-8"), re.S)
    shutil.copytree(TOP / "specs", tmp_path / "specs")
    monkeypatch.chdir(tmp_path)
    exec(compile(example, "README.md", "exec"), {})
    assert capsys.readouterr().out.startswith("True Interval(nominal=2.20")
    assert (tmp_path / "output" / "four-lane-pitch-lag" / "design.json").exists()


def test_pictures_exist() -> None:
    for name in re.findall(r"\]\((output/[^)]*)\)", README.read_text("utf-8")):
        assert (TOP / name).exists(), name


if __name__ == "__main__":
    page = README.read_text("utf-8")
    for name, content in (("reference", reference()), ("screen", f"```text\n{screen()}```")):
        old = f"<!-- {name} -->\n{section(page, name)}\n<!-- /{name} -->"
        if old not in page:
            old = f"<!-- {name} -->\n<!-- /{name} -->"
        page = page.replace(old, f"<!-- {name} -->\n{content}\n<!-- /{name} -->")
    README.write_text(page, "utf-8")
