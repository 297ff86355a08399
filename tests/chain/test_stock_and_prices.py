"""The spec's stock and price files on their way into sizing, parts list and review."""

from __future__ import annotations

import csv
import io
from collections.abc import Callable
from pathlib import Path

import pytest
from openpyxl import load_workbook

from modgen.catalogue import Evidence
from modgen.chain import check_netlist, run, write
from modgen.outputs.model import Job
from modgen.outputs.review import evidence_table
from modgen.outputs.table_csv import write_bom_csv
from modgen.outputs.wording import NOTHING
from modgen.outputs.workbook import COLUMNS, TOP, write_bom_xlsx
from modgen.problems import InputError

PRICES = "part;quantity;price\ntl072-dip8;1;0,62\ntl072-dip8;50;0,41\n"
STOCK = "part,quantity\njack-35-switched,37\ntl072-dip8,7\n1n5819,90\n"
HEADINGS = [heading for heading, _ in COLUMNS]


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A spec with both files beside it; built from elsewhere, so that paths have to be relative to the spec."""
    folder = tmp_path_factory.mktemp("ordering")
    (folder / "mine").mkdir()
    (folder / "mine" / "prices.csv").write_text(PRICES, encoding="utf-8")
    (folder / "stock.csv").write_text(STOCK, encoding="utf-8")
    (folder / "spec.yaml").write_text(
        "module: Test lag\nchannels: 4\njacks: 8\nrails: {positive: 12 V, negative: -12 V}\n"
        "glide: {shortest: 5 ms, longest: 2 s}\nbuild: {amplifier: tl072-dip8}\n"
        "order: {boards: 25, spares: 0 %, stock: stock.csv, prices: mine/prices.csv}\n",
        encoding="utf-8",
    )
    return folder


@pytest.fixture(scope="module")
def job(folder: Path) -> Job:
    return run(folder / "spec.yaml")


@pytest.fixture(scope="module")
def lines(job: Job) -> dict[str, dict[str, object]]:
    """The parts list's rows by order code, or by value where a part has none, with formulas as they are written."""
    sheet = load_workbook(io.BytesIO(write_bom_xlsx(job)))["Parts list"]
    rows = (
        {heading: sheet.cell(row, n).value for n, heading in enumerate(HEADINGS, 1)}
        for row in range(TOP + 1, sheet.max_row)
    )
    return {str(row["Order code"] or row["Value"]): row for row in rows if row["Line"]}


def test_stock_fills_the_workbooks_cells(lines: dict) -> None:
    assert lines["3.5 mm socket"]["In stock"] == 37
    assert lines["TL072CP"]["In stock"] == 7
    assert {row["In stock"] for code, row in lines.items() if code not in ("3.5 mm socket", "TL072CP", "1N5819")} == {0}
    # the order is what is needed without it
    row = int(lines["TL072CP"]["Line"]) + TOP
    assert lines["TL072CP"]["To order"] == f"=MAX(0,K{row}+L{row}-M{row})"


def test_the_parts_list_orders_what_is_not_on_hand(job: Job) -> None:
    found = {row["Part"]: row for row in csv.DictReader(io.StringIO(write_bom_csv(job).decode("utf-8-sig")))}
    amplifier = found["tl072-dip8"]  # 4 on each of 25 boards, 7 on hand: 93 at the price from 50 on
    columns = ("Needed", "In stock", "To order", "Unit price", "Line total", "Prices")
    assert [amplifier[c] for c in columns] == ["100", "7", "93", "0.41", "38.13", ""]
    assert (found["jack-35-switched"]["To order"], found["jack-35-switched"]["Prices"]) == ("163", "invented")


def test_prices_reach_the_workbook_and_are_not_called_invented(job: Job, lines: dict) -> None:
    assert lines["TL072CP"]["Prices"] is None
    assert lines["3.5 mm socket"]["Prices"] == "invented"
    facts = load_workbook(io.BytesIO(write_bom_xlsx(job)))["Catalogue facts"]
    rows = [[cell.value for cell in row] for row in facts.iter_rows()]
    amplifier = next(row for row in rows if row[0] == "tl072-dip8")
    assert [value for value in amplifier[9:] if value is not None] == [1, 50, 0.62, 0.41]
    evidence = [(row[1], row[2], row[8]) for row in rows if row[0] == "tl072-dip8"]
    assert ("own file", "prices", "mine/prices.csv") in evidence
    assert not any(kind == "invented" for kind, _, _ in evidence)


def test_the_review_counts_them_as_ones_own(job: Job) -> None:
    table = evidence_table(job)
    own, invented = (next(n for n, c in enumerate(table.columns) if c.label == t) for t in ("Own file", "Invented"))
    rows = {row[0]: (row[own], row[invented]) for row in table.rows}
    assert rows["tl072-dip8"] == ("1", NOTHING)
    assert rows["jack-35-switched"] == (NOTHING, "1")


def test_records_of_the_design_are_those_with_the_prices(job: Job) -> None:
    record = job.design.values.packages[0]
    assert dict(record.evidence)["prices"] == Evidence("own file", "mine/prices.csv")
    assert "the catalogue's invented prices" not in [why for c in job.design.choices for _, why in c.runners_up]


def test_the_same_bytes_from_any_folder(folder: Path, job: Job, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(folder)
    again = run("spec.yaml")
    assert write_bom_xlsx(again) == write_bom_xlsx(job)
    assert write_bom_csv(again) == write_bom_csv(job)


def test_prices_decide_what_is_cheapest(write_spec: Callable[..., Path], tmp_path: Path) -> None:
    chosen = run(write_spec()).design.values
    dear = chosen.glide.key
    (tmp_path / "prices.csv").write_text(f"part,quantity,price\n{dear},1,99.5\n", encoding="utf-8")
    job = run(write_spec("order: {prices: prices.csv}"))
    assert job.design.values.glide.key != dear
    whys = [why for choice in job.design.choices for _, why in choice.runners_up if "prices" in why]
    assert whys
    assert all(
        why.endswith(" at your own prices, and the catalogue's invented ones where you give none") for why in whys
    )


def test_problems_of_all_files_at_once(modgen: Callable, write_spec: Callable[..., Path], tmp_path: Path) -> None:
    (tmp_path / "prices.csv").write_text("part,quantity,price\ntl072-dip88,1,0.5\n", encoding="utf-8")
    (tmp_path / "stock.csv").write_text("part,quantity\ntl072-dip8,some\n", encoding="utf-8")
    (tmp_path / "mine.yaml").write_text("families: []\n", encoding="utf-8")
    write_spec(
        "build: {catalogue: [mine.yaml], land_patterns: names.yaml}", "order: {stock: stock.csv, prices: prices.csv}"
    )
    ran = modgen("build", "spec.yaml")
    assert (ran.status, ran.out) == (2, "")
    errors = [line.partition(": error: ")[0] for line in ran.err.splitlines() if ": error: " in line]
    # keys are not judged while the catalogue itself cannot be read
    assert errors == ["mine.yaml:1:11", "spec.yaml:6:33", "stock.csv:2:12"]
    (tmp_path / "mine.yaml").unlink()
    write_spec("build: {land_patterns: names.yaml}", "order: {stock: stock.csv, prices: prices.csv}")
    ran = modgen("check", "spec.yaml")
    assert ran.status == 2
    assert "prices.csv:2:1: error: unknown part 'tl072-dip88'" in ran.err
    assert "fix: did you mean 'tl072-dip8'?" in ran.err
    assert "stock.csv:2:12: error: the quantity is 'some'" in ran.err
    assert "spec.yaml:6:9: error: the land-pattern file 'names.yaml' cannot be found" in ran.err
    assert not (tmp_path / "output").exists()


def test_a_netlist_is_judged_without_the_stock_file(folder: Path, job: Job, tmp_path: Path) -> None:
    netlist = write(job, tmp_path / "packs") / "netlist.net"
    (folder / "without.yaml").write_text(
        (folder / "spec.yaml").read_text(encoding="utf-8").replace("stock.csv", "absent.csv"), encoding="utf-8"
    )
    spec, report = check_netlist(folder / "without.yaml", netlist)
    assert (spec.order.stock, report.cleared) == ("absent.csv", True)
    with pytest.raises(InputError, match=r"without.yaml:7:\d+: error: the stock file 'absent.csv' cannot be found"):
        run(folder / "without.yaml")
