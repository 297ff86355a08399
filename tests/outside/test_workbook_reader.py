"""bom.xlsx read with nothing but a zip reader and an XML reader, by what the file format's standard says."""

import io
import posixpath
import re
import xml.etree.ElementTree as ET
import zipfile

import pytest

from modgen.catalogue.records import Body, PinDef, PriceBreak, Resistor
from modgen.netlist.model import Net, Netlist, Part

M = "{http://schemas.openxmlformats.org/spreadsheetml/2006/main}"
R = "{http://schemas.openxmlformats.org/officeDocument/2006/relationships}"
P = "{http://schemas.openxmlformats.org/package/2006/relationships}"


class Book:
    """Sheets by name; each a dict from cell reference to (type, value or formula)."""

    def __init__(self, data: bytes) -> None:
        self.zip = zipfile.ZipFile(io.BytesIO(data))
        assert self.zip.testzip() is None
        root = ET.fromstring(self.zip.read("xl/workbook.xml"))
        targets = {r.get("Id"): r.get("Target") for r in ET.fromstring(self.zip.read("xl/_rels/workbook.xml.rels"))}
        self.strings = []
        if "xl/sharedStrings.xml" in self.zip.namelist():
            shared = ET.fromstring(self.zip.read("xl/sharedStrings.xml"))
            self.strings = ["".join(t.text or "" for t in item.iter(f"{M}t")) for item in shared]
        self.names = {n.get("name"): n.text for n in root.iter(f"{M}definedName")}
        self.sheets = {}
        for sheet in root.iter(f"{M}sheet"):
            path = posixpath.join("xl", targets[sheet.get(f"{R}id")].removeprefix("/xl/"))
            self.sheets[sheet.get("name")] = self._cells(self.zip.read(path))

    def _cells(self, data: bytes) -> dict[str, tuple[str, str]]:
        cells = {}
        for cell in ET.fromstring(data).iter(f"{M}c"):
            formula, value = cell.find(f"{M}f"), cell.find(f"{M}v")
            if formula is not None:
                cells[cell.get("r")] = ("formula", formula.text or "")
                continue
            kind = cell.get("t", "n")
            if kind == "inlineStr":
                cells[cell.get("r")] = ("text", "".join(t.text or "" for t in cell.iter(f"{M}t")))
            elif value is not None:
                text = value.text or ""
                cells[cell.get("r")] = ("text", self.strings[int(text)]) if kind == "s" else (kind, text)
        return cells


def resistor(key: str, prices: tuple[PriceBreak, ...]) -> Resistor:
    return Resistor(
        key=key,
        family="f",
        kind="resistor",
        description="=cmd()",
        mount="through-hole",
        body=Body("axial", 6e-3, 2e-3, 2e-3),
        land_pattern="X",
        pins=(PinDef("1", "1", "passive"), PinDef("2", "2", "passive")),
        resistance=1e3,
        tolerance=0.01,
        power=0.25,
        voltage=200.0,
        series="E24",
        prices=prices,
    )


@pytest.fixture
def book(monkeypatch):
    from types import SimpleNamespace

    from modgen.outputs.workbook import write_bom_xlsx

    parts = tuple(Part(f"R{n}", "1k", "X", (("part", "a" if n < 6 else "b"),)) for n in range(1, 8))
    job = SimpleNamespace(
        spec=SimpleNamespace(module="Fish & <chips>", order=SimpleNamespace(boards=3, spares=0.1)),
        catalogue={"a": resistor("a", (PriceBreak(1, 0.5), PriceBreak(100, 0.25))), "b": resistor("b", ())},
        netlist=Netlist("t", parts, (Net("n", (("R1", "1"),)),)),
        report=SimpleNamespace(cleared=True, findings=()),
        stock={"b": 4},
    )
    return Book(write_bom_xlsx(job))


pytestmark = pytest.mark.source(
    "ISO/IEC 29500-1:2016, Office Open XML, elements c, f, is, sst, definedName; from memory"
)


def test_sheets_text_numbers_and_formulas_by_the_standard(book):
    assert list(book.sheets) == ["Summary", "Parts list", "Catalogue facts"]
    parts = book.sheets["Parts list"]
    assert parts["B5"] == ("text", "R1-R5")
    assert parts["B6"] == ("text", "R6, R7")
    assert parts["C5"] == ("n", "5")
    assert (parts["M5"], parts["M6"]) == (("n", "0"), ("n", "4"))
    assert parts["K5"] == ("formula", "boards*C5")
    assert book.sheets["Summary"]["A1"] == ("text", "Fish & <chips>: order")
    assert book.sheets["Summary"]["B5"] == ("n", "3")
    assert book.names["boards"] == "Summary!$B$5"


def test_text_that_looks_like_a_formula_is_a_string(book):
    assert book.sheets["Parts list"]["E5"] == ("text", "=cmd()")


def test_formulas_refer_to_cells_that_hold_something(book):
    for name, cells in book.sheets.items():
        for place, (kind, formula) in cells.items():
            if kind != "formula":
                continue
            for sheet, cell in re.findall(r"(?:'([^']+)'!)?\$?([A-Z]{1,2})\$?[0-9]+(?![0-9(])", formula):
                assert sheet in ("", *book.sheets), (name, place, formula, cell)
    prices = "'Catalogue facts'!$L$5:$M$5"
    assert prices in book.sheets["Parts list"]["P5"][1]
    facts = book.sheets["Catalogue facts"]
    assert [facts[c][1] for c in ("J5", "K5", "L5", "M5")] == ["1", "100", "0.5", "0.25"]
    assert "L6" not in facts  # no price is no number, not nought


def test_the_archive_holds_no_time(book):
    assert {info.date_time for info in book.zip.infolist()} == {(1980, 1, 1, 0, 0, 0)}
    core = book.zip.read("docProps/core.xml").decode()
    assert set(re.findall(r"\d{4}-\d\d-\d\dT[\d:]+Z", core)) == {"1980-01-01T00:00:00Z"}
