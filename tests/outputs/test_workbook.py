import io
import shutil
import subprocess

import pytest
from openpyxl import load_workbook

from modgen.outputs.bom import bom_lines, cost
from modgen.outputs.sheets import PAGE, lines_of, pages
from modgen.outputs.workbook import COLUMNS, TOP, write_bom_xlsx

SHEETS = ["Summary", "Parts list", "Catalogue facts"]
LETTER = {heading: chr(ord("A") + n) for n, (heading, _) in enumerate(COLUMNS)}


def opened(job, **more):
    return load_workbook(io.BytesIO(write_bom_xlsx(job)), **more)


def texts(sheet):
    return [cell.value for row in sheet.iter_rows() for cell in row if isinstance(cell.value, str)]


def test_sheets_and_their_order(job):
    assert opened(job).sheetnames == SHEETS


def test_quantities_are_the_netlists(make):
    job = make(3)
    sheet = opened(job)["Parts list"]
    lines = bom_lines(job.netlist, job.catalogue)
    found = [sheet[f"C{row}"].value for row in range(TOP + 1, TOP + 1 + len(lines))]
    assert found == [line.quantity for line in lines]
    assert sum(found) == len(job.netlist.parts)
    assert [sheet[f"B{row}"].value for row in range(TOP + 1, TOP + 1 + len(lines))] == [
        line.references for line in lines
    ]


def test_boards_and_spares_are_one_cell_each(make):
    book = opened(make(boards=25))
    assert book.defined_names["boards"].attr_text == "Summary!$B$5"
    assert book.defined_names["spares"].attr_text == "Summary!$B$6"
    assert (book["Summary"]["B5"].value, book["Summary"]["B6"].value) == (25, 0.05)


def test_amounts_are_formulas(job):
    sheet = opened(job)["Parts list"]
    last = TOP + len(bom_lines(job.netlist, job.catalogue))
    for row in range(TOP + 1, last + 1):
        for heading in ("Needed", "Spares", "To order", "Unit price", "Line total"):
            assert sheet[f"{LETTER[heading]}{row}"].data_type == "f", (heading, row)
    assert sheet["K5"].value == "=boards*C5"
    assert sheet["L5"].value == "=ROUNDUP(ROUND(K5*spares,6),0)"
    assert sheet[f"Q{last + 1}"].value == f"=SUM(Q5:Q{last})"
    assert all(cell.data_type == "f" for (cell,) in opened(job)["Summary"]["B7:B12"])


def test_every_sheet_prints_on_a4_with_its_headings(job):
    for sheet in opened(job):
        assert (sheet.page_setup.orientation, int(sheet.page_setup.paperSize)) == ("landscape", 9)
        assert sheet.sheet_properties.pageSetUpPr.fitToPage
        assert (int(sheet.page_setup.fitToWidth), int(sheet.page_setup.fitToHeight)) == (1, 0)
        assert sheet.print_title_rows == "$1:$4"
        assert sheet.freeze_panes.endswith("5")


def test_input_cells_are_marked_and_guarded(job):
    book = opened(job)
    guarded = {
        (sheet.title, str(rule.sqref), rule.type, rule.formula1, rule.formula2)
        for sheet in book
        for rule in sheet.data_validations.dataValidation
    }
    assert ("Summary", "B5", "whole", "1", "1000000") in guarded
    assert ("Summary", "B6", "decimal", "0", "1") in guarded
    assert ("Parts list", "M5:M16", "whole", "0", "10000000") in guarded
    for sheet, cell in (("Summary", "B5"), ("Summary", "B6"), ("Parts list", "M5"), ("Catalogue facts", "J5")):
        assert book[sheet][cell].fill.fgColor.rgb == "FFFFF2CC", cell


def test_prices_are_money(job):
    book = opened(job)
    assert book["Parts list"]["P5"].number_format == '#,##0.0000\\ "EUR"'
    assert book["Parts list"]["Q5"].number_format == '#,##0.00\\ "EUR"'
    assert book["Summary"]["B10"].number_format == '#,##0.00\\ "EUR"'


def test_a_module_with_errors_says_so_on_every_sheet(job, faulty):
    for sheet in opened(faulty):
        assert sheet["A2"].value == "Not cleared for ordering: 1 error stands."
        assert sheet.oddFooter.center.text == "Not cleared for ordering"
    for sheet in opened(job):
        assert sheet["A2"].value == "Cleared for ordering."


def test_errors_and_waivers_are_on_the_summary(faulty):
    found = texts(opened(faulty)["Summary"])
    assert "C7 is rated 10 V and can see 12.6 V" in found
    assert "Waived" in found
    assert "bench tested" in found


def test_missing_and_invented_prices_are_said(job):
    book = opened(job)
    found = texts(book["Summary"])
    assert "11 lines have invented prices: put real ones in the yellow cells of 'Catalogue facts'." in found
    assert found[found.index("No price in the catalogue") + 3] == "330 Ω"
    prices = [book["Parts list"][f"R{row}"].value for row in range(5, 17)]
    assert prices.count("invented") == 11


def test_order_codes_are_codes_and_values_are_words(job):
    sheet = opened(job)["Parts list"]
    rows = {sheet[f"D{row}"].value: row for row in range(TOP + 1, TOP + 13)}
    code, instead = LETTER["Order code"], LETTER["Alternates"]
    assert sheet[f"{code}{rows['TL072C']}"].value == "TL072CP"
    for value in ("2 x 5 header", "3.5 mm socket", "2.2 kΩ"):
        assert sheet[f"{code}{rows[value]}"].value in (None, ""), value
        assert sheet[f"{instead}{rows[value]}"].value == "any maker to this rating"


def test_packs_are_said_not_to_be_rounded(job):
    assert opened(job)["Parts list"]["A3"].value.endswith(
        " 'To order' counts single parts: it is not rounded up to packs here."
    )


def test_summary_says_what_is_not_on_the_list(job):
    sheet = opened(job)["Summary"]
    rows = [tuple(cell.value for cell in row[:3]) for row in sheet.iter_rows()]
    start = rows.index(("Not on this list", "For one board", "Remark"))
    assert [row[:2] for row in rows[start + 1 :]] == [
        ("Bare board", 1),
        ("Knobs", 2),
        ("Sockets, DIP-8", 2),
        ("Power cables", 1),
    ]


def test_sources_are_told_whole(job):
    sheet = opened(job)["Catalogue facts"]
    rows = [[cell.value for cell in row] for row in sheet.iter_rows()]
    start = next(n for n, row in enumerate(rows, start=1) if row[:3] == ["Parts", "Evidence", "Figures"])
    # all of this module's records share two sources, so two rows say everything
    assert [(row[0], row[1], row[2], row[8]) for row in rows[start:]] == [
        ("all parts", "invented", "prices", "a round number for an example"),
        ("all parts", "published document", "tolerance", "a data sheet, table 1"),
    ]
    merged = {str(area) for area in sheet.merged_cells.ranges}
    assert f"C{start + 1}:H{start + 1}" in merged
    assert sheet[f"C{start + 1}"].alignment.wrap_text


def test_references_of_many_channels_do_not_fill_the_page(make):
    sheet = opened(make(64))["Parts list"]
    texts = [sheet[f"B{row}"].value for row in range(TOP + 1, TOP + 13)]
    assert "R5 to R320 (every 5th)" in texts
    assert max(row.height or 15 for row in sheet.row_dimensions.values()) <= 60


@pytest.mark.parametrize(
    ("text", "width", "lines"),
    [
        ("", 5, 1),
        ("Resistor, metal film, 0207", 26, 1),
        ("0000 0000", 9, 1),
        ("0000 0000", 8, 2),
        ("0000-0000", 8, 2),
        ("0" * 25, 10, 3),
        ("0 " + "0" * 25, 10, 4),
        ("MMMM", 4, 2),
    ],
)
def test_rows_are_as_high_as_their_text(text, width, lines):
    assert lines_of(text, width) == lines


def test_no_page_with_a_few_rows():
    wide, high = PAGE
    assert pages(high * 0.99, wide) == 0
    assert pages(high * 1.1, wide) == 1
    assert pages(high * 1.5, wide) == 0
    assert pages(high * 2.2, wide) == 2
    # twice as wide is half as large: twice as much goes on a page
    assert pages(high * 1.5, 2 * wide) == 0
    assert pages(high * 2.2, 2 * wide) == 1
    # rows that stand on every page leave less of it
    assert pages(high * 1.7, wide, high * 0.4) == 2


@pytest.mark.parametrize("start", ["=", "+", "-", "@", "\t", "#N/A", "=HYPERLINK("])
def test_text_never_becomes_a_formula(make, start):
    book = opened(make(module=f"{start}1+1"))
    cell = book["Summary"]["A1"]
    assert cell.data_type == "s"
    assert cell.value == f"{start}1+1: order".replace("\t", " ")
    assert bool(cell.quotePrefix) == (start[0] in "=+-@\t")


def test_control_characters_do_not_break_the_file(make):
    assert opened(make(module="a\x00\x1bb & <c>"))["Summary"]["A1"].value == "a b & <c>: order"


def test_the_same_bytes_every_time(make):
    assert write_bom_xlsx(make(3)) == write_bom_xlsx(make(3))


@pytest.fixture(scope="session")
def office():
    found = shutil.which("soffice") or shutil.which("libreoffice")
    if found is None:
        pytest.skip("LibreOffice is not installed: the formulas are not recalculated here")
    return found


def recalculated(office, tmp_path, book):
    """Every cell's value after LibreOffice has computed the workbook."""
    source = tmp_path / "in.xlsx"
    book.save(source)
    command = [office, f"-env:UserInstallation=file://{tmp_path}/profile", "--headless"]
    command += ["--convert-to", "xlsx", "--outdir", str(tmp_path / "out"), str(source)]
    subprocess.run(command, check=True, capture_output=True, timeout=120)
    return load_workbook(tmp_path / "out" / "in.xlsx", data_only=True)


@pytest.mark.parametrize(("boards", "spares"), [(1, 0.05), (25, 0.05), (130, 0.07)])
def test_the_workbooks_sums_are_ours(office, tmp_path, make, boards, spares):
    job = make(3)
    book = opened(job)
    book["Summary"]["B5"].value = boards
    book["Summary"]["B6"].value = spares
    book["Parts list"]["M5"].value = 4  # of the first line, some are on hand
    lines = bom_lines(job.netlist, job.catalogue)
    order = cost(lines, boards, spares, {lines[0].key: 4})
    found = recalculated(office, tmp_path, book)
    sheet = found["Parts list"]
    for row, each in enumerate(order.lines, start=TOP + 1):
        got = [sheet[f"{LETTER[h]}{row}"].value for h in ("Needed", "Spares", "To order")]
        assert got == [each.needed, each.spares, each.to_order], each.line.key
        for heading, ours in (("Unit price", each.unit_price), ("Line total", each.total)):
            value = sheet[f"{LETTER[heading]}{row}"].value
            assert value == ("no price" if ours is None else pytest.approx(ours, rel=1e-9)), each.line.key
    summary = found["Summary"]
    assert summary["B7"].value == len(job.netlist.parts)
    assert summary["B8"].value == len(lines)
    assert summary["B9"].value == sum(each.to_order for each in order.lines)
    assert summary["B10"].value == pytest.approx(order.total, rel=1e-9)
    assert summary["B11"].value == pytest.approx(order.per_board, rel=1e-9)
    assert summary["B12"].value == 1
    assert summary["C12"].value == "1 line without a price: the total is too low."
