"""The parts list and the netlist of every shipped spec, each read back from its file."""

import csv
import io
import re
from collections import Counter
from functools import cache
from pathlib import Path

import pytest
from openpyxl import load_workbook

from modgen.chain import run
from modgen.outputs.table_csv import write_bom_csv
from modgen.outputs.workbook import TOP, write_bom_xlsx

SPECS = sorted((Path(__file__).resolve().parents[2] / "specs").glob("*.yaml"))


@cache
def job(path):
    return run(path)


def expand(text):
    """``R1-R3, R7, R9 to R21 (every 6th)`` as single references."""
    out = []
    for piece in text.split(", "):
        steps = re.fullmatch(r"([A-Z]+)([0-9]+) to [A-Z]+([0-9]+) \(every ([0-9]+)[a-z]{2}\)", piece)
        if steps:
            out += [f"{steps[1]}{n}" for n in range(int(steps[2]), int(steps[3]) + 1, int(steps[4]))]
            continue
        first, _, last = piece.partition("-")
        letters = first.rstrip("0123456789")
        start = int(first[len(letters) :])
        end = int(last[len(letters) :]) if last else start
        out += [f"{letters}{n}" for n in range(start, end + 1)]
    return out


def parts_in_netlist(text):
    """Reference and catalogue key of every component, with a pattern and not with our reader."""
    found = {}
    for component in re.split(r"\(comp\b", text.split("(libparts")[0].split("(nets")[0])[1:]:
        ref = re.search(r'\(ref "?([^")\s]+)"?\)', component)
        key = re.search(r'\(field\s+\(name "?part"?\)\s+"?([^")]+)"?\)', component)
        assert ref, component[:200]
        assert key, component[:400]
        found[ref[1]] = key[1]
    return found


@pytest.mark.parametrize("path", SPECS, ids=lambda path: path.stem)
def test_quantities_equal_the_netlists_parts(path):
    netlist = parts_in_netlist(job(path).netlist_text)
    assert netlist
    counts = Counter(netlist.values())

    table = list(csv.DictReader(io.StringIO(write_bom_csv(job(path)).decode("utf-8-sig"), newline="")))
    assert {row["Part"]: int(row["Per board"]) for row in table} == counts
    assert {ref: row["Part"] for row in table for ref in expand(row["References"])} == netlist

    book = load_workbook(io.BytesIO(write_bom_xlsx(job(path))))
    sheet, facts = book["Parts list"], book["Catalogue facts"]
    rows = range(TOP + 1, TOP + 1 + len(table))
    assert {facts[f"A{row}"].value: sheet[f"C{row}"].value for row in rows} == counts
    assert sorted(ref for row in rows for ref in expand(sheet[f"B{row}"].value)) == sorted(netlist)
