"""Files that a page names and that are not there."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from modgen.spec import missing_file, parse_spec, read_spec

PAGE = (
    "build: {catalogue: [there.yaml, own.yaml], land_patterns: names.yaml}\norder: {stock: stock.csv, prices: p.csv}\n"
)
MISSING = {
    ("build.catalogue", "own.yaml"): ("6:33", "catalogue file"),
    ("build.land_patterns", "names.yaml"): ("6:44", "land-pattern file"),
    ("order.stock", "stock.csv"): ("7:9", "stock file"),
    ("order.prices", "p.csv"): ("7:27", "price file"),
}


@pytest.mark.parametrize(("key", "name"), MISSING)
def test_a_missing_file_is_told_where_it_is_named(
    page: Callable[..., str], tmp_path: Path, monkeypatch: pytest.MonkeyPatch, key: str, name: str
) -> None:
    monkeypatch.chdir(tmp_path)
    Path("specs").mkdir()
    Path("specs/a.yaml").write_text(page() + PAGE, encoding="utf-8")
    spec = read_spec("specs/a.yaml")
    at, called = MISSING[key, name]
    assert str(missing_file(spec, key, name)) == (
        f"specs/a.yaml:{at}: error: the {called} '{name}' cannot be found\n"
        f"    why: paths are relative to the spec, and there is no file specs/{name}\n"
        f"    fix: check {key}, or put the file there"
    )
    Path("specs", name).touch()
    assert missing_file(spec, key, Path(name)) is None


def test_what_stands_in_the_way_of_a_file_is_not_told_as_missing(page: Callable[..., str], tmp_path: Path) -> None:
    spec = parse_spec(page(), str(tmp_path / "spec.yaml"))
    (tmp_path / "folder").mkdir()
    (tmp_path / "file").touch()
    assert missing_file(spec, "order.stock", "folder") is None
    assert missing_file(spec, "order.stock", "x" * 10_000) is None
    beneath = missing_file(spec, "order.stock", "file/stock.csv")
    assert beneath is not None
    assert beneath.what == "the stock file 'file/stock.csv' cannot be found"


def test_a_key_that_names_no_file_is_a_fault_of_the_caller(page: Callable[..., str]) -> None:
    with pytest.raises(KeyError):
        missing_file(parse_spec(page()), "build.mount", "a")
