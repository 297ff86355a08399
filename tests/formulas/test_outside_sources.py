"""The folder of outside checks: a test without a source is not collected, and memory never stands alone."""

import ast
import subprocess
import sys
from pathlib import Path

import pytest

OUTSIDE = Path(__file__).resolve().parents[1] / "outside"


def collect(folder: Path, test: str) -> subprocess.CompletedProcess[str]:
    """Run pytest on one test beside a copy of the folder's conftest."""
    outside = folder / "tests" / "outside"
    outside.mkdir(parents=True)
    (outside / "conftest.py").write_text((OUTSIDE / "conftest.py").read_text(encoding="utf-8"), encoding="utf-8")
    (outside / "test_it.py").write_text(test, encoding="utf-8")
    (folder / "test_elsewhere.py").write_text("def test_elsewhere():\n    pass\n", encoding="utf-8")
    (folder / "pytest.ini").write_text("[pytest]\nmarkers =\n    source(text): where from\n", encoding="utf-8")
    command = [sys.executable, "-m", "pytest", "-q", "-p", "no:cacheprovider", "--rootdir", str(folder), str(folder)]
    return subprocess.run(command, cwd=folder, capture_output=True, text=True, check=False)


@pytest.mark.parametrize("mark", ["", "@pytest.mark.source('')\n", "@pytest.mark.source\n"])
def test_no_source_no_collection(tmp_path, mark):
    run = collect(tmp_path, f"import pytest\n{mark}def test_it():\n    pass\n")
    assert run.returncode == pytest.ExitCode.USAGE_ERROR
    assert (
        'tests in tests/outside need @pytest.mark.source("document, edition, table"): tests/outside/test_it.py::test_it'
    ) in run.stderr


def test_with_a_source(tmp_path):
    run = collect(tmp_path, "import pytest\n@pytest.mark.source('a book')\ndef test_it():\n    pass\n")
    assert run.returncode == pytest.ExitCode.OK
    assert "2 passed" in run.stdout


def test_printed_is_half_the_last_digit(tmp_path):
    test = (
        "import pytest\n@pytest.mark.source('a book')\ndef test_it(printed):\n"
        "    assert 1.2349 == printed('1.23')\n    assert 1.235 == printed('1.23')\n"
        "    assert 1.2351 != printed('1.23')\n    assert 1.2299 != printed('1.2300')\n"
        "    assert 95 == printed('1.0e2')\n    assert 106 != printed('1.0e2')\n"
    )
    run = collect(tmp_path, test)
    assert run.returncode == pytest.ExitCode.OK, run.stdout


def sources(path: Path) -> list[str]:
    """The source texts of a file's tests; names of module constants are looked up."""
    tree = ast.parse(path.read_text(encoding="utf-8"))
    constants = {
        target.id: node.value.value
        for node in tree.body
        if isinstance(node, ast.Assign) and isinstance(node.value, ast.Constant)
        for target in node.targets
        if isinstance(target, ast.Name)
    }
    found = []
    for node in ast.walk(tree):
        if isinstance(node, ast.Call) and isinstance(node.func, ast.Attribute) and node.func.attr == "source":
            argument = node.args[0]
            if isinstance(argument, ast.Constant):
                found.append(str(argument.value))
            elif isinstance(argument, ast.Name):
                found.append(str(constants[argument.id]))
            elif isinstance(argument, ast.JoinedStr):
                found.append("".join(str(part.value) for part in argument.values if isinstance(part, ast.Constant)))
    return found


@pytest.mark.parametrize("path", sorted(OUTSIDE.glob("test_*.py")), ids=lambda path: path.stem)
def test_memory_never_stands_alone(path):
    texts = sources(path)
    assert texts
    assert any(not text.startswith("from memory") for text in texts)
