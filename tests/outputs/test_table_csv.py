import csv
import io
from dataclasses import replace

import pytest

from modgen.outputs.bom import bom_lines
from modgen.outputs.table_csv import HEADER, plain_text, safe_text, write_bom_csv


def rows(job):
    return list(csv.DictReader(io.StringIO(write_bom_csv(job).decode("utf-8-sig"), newline="")))


def test_one_row_a_line_and_as_many_parts_as_the_netlist(job):
    found = rows(job)
    assert tuple(found[0]) == HEADER
    assert len(found) == len(bom_lines(job.netlist, job.catalogue))
    assert sum(int(row["Per board"]) for row in found) == len(job.netlist.parts)


def test_a_whole_row(make):
    found = {row["Part"]: row for row in rows(make(boards=25))}
    assert found["c-1u-pp"] == {
        "Line": "2",
        "References": "C1, C4",
        "Per board": "2",
        "Value": "1 µF",
        "Description": "capacitor c-1u-pp",
        "Rating": "63 V",
        "Tolerance": "5 %",
        "Package": "axial-0207",
        "Mount": "through-hole",
        "Part": "c-1u-pp",
        "Order code": "",
        "Alternates": "any maker to this rating",
        "Pack (orders are not rounded to it)": "1",
        "Boards": "25",
        "Needed": "50",
        "Spares": "3",
        "In stock": "0",
        "To order": "53",
        "Unit price": "0.7",
        "Line total": "37.10",
        "Currency": "EUR",
        "Prices": "invented",
        "Status": "Cleared for ordering",
    }
    assert found["r-330"]["Unit price"] == found["r-330"]["Line total"] == "no price"
    assert found["r-330"]["Currency"] == ""
    assert (found["tl072c"]["Order code"], found["tl072c"]["Alternates"]) == ("TL072CP", "TL072CN")


def test_what_is_on_hand_is_not_ordered(make):
    found = {row["Part"]: row for row in rows(replace(make(boards=25), stock={"c-1u-pp": 13, "jack-3.5": 500}))}
    film = found["c-1u-pp"]  # 50 and 3 spare without the 13 on hand: below the break at 50
    assert (film["In stock"], film["To order"], film["Unit price"], film["Line total"]) == ("13", "40", "0.9", "36.00")
    assert (found["jack-3.5"]["In stock"], found["jack-3.5"]["To order"]) == ("500", "0")
    assert found["tl072c"]["In stock"] == "0"


def test_every_row_says_when_it_is_not_cleared_and_what_is_waived(faulty):
    assert {row["Status"] for row in rows(faulty)} == {
        "Not cleared for ordering; waived: idle-amplifier on U2: bench tested"
    }


@pytest.mark.parametrize("sign", ["=", "+", "-", "@", "\t", "\r"])
def test_no_text_is_a_formula(sign):
    assert safe_text(f"{sign}1+1").startswith("'")
    assert not safe_text(f"1{sign}1").startswith("'")


def test_control_characters_and_line_breaks_are_spaces():
    assert plain_text("a\x00b\nc\x7fd\ud800e") == "a b c d e"
    assert plain_text("Ω µ – ok") == "Ω µ – ok"


def test_the_same_bytes_every_time(make):
    assert write_bom_csv(make(3)) == write_bom_csv(make(3))
