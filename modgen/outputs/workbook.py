"""``bom.xlsx``: the parts list as a workbook that does its own sums.

The number of boards and the share of spares are one cell each; quantities, prices at the quantity break and
totals are formulas on them, in functions that Excel and LibreOffice share. What is written here is text, numbers
and formulas, never a computed amount: :func:`modgen.outputs.bom.cost` computes the same and the tests compare.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from modgen.outputs.bom import CURRENCY, BomLine, bom_lines, brief_references
from modgen.outputs.partwords import not_listed
from modgen.outputs.sheets import BAD, INPUT, allow, column_letter, fit, head, put, put_text, style
from modgen.outputs.table_csv import NO_PRICE, plain_text
from modgen.outputs.wording import CLEARED, NOT_CLEARED
from modgen.outputs.xlsx import save_plain

if TYPE_CHECKING:
    from openpyxl import Workbook
    from openpyxl.worksheet.worksheet import Worksheet

    from modgen.outputs.model import Job

SUMMARY, PARTS, FACTS = "Summary", "Parts list", "Catalogue facts"
MONEY = f'#,##0.00\\ "{CURRENCY}"'
UNIT_MONEY = f'#,##0.0000\\ "{CURRENCY}"'
COUNT = "#,##0"
#: What 'To order' counts
PACKS = "'To order' counts single parts: it is not rounded up to packs here."
#: Rows above the first line of a table: title, verdict, remark, headings
TOP = 4

COLUMNS = (
    # heading, width; the letters below count on this order
    ("Line", 6),
    ("References", 22),
    ("Per board", 8),
    ("Value", 15),
    ("Description", 34),
    ("Rating", 18),
    ("Tolerance", 12),
    ("Package", 15),
    ("Order code", 16),
    ("Alternates", 24),
    ("Needed", 9),
    ("Spares", 8),
    ("In stock", 8),
    ("To order", 9),
    ("Pack", 6),
    ("Unit price", 13),
    ("Line total", 13),
    ("Prices", 10),
)
FACT_COLUMNS = (
    "Part",
    "Kind",
    "Family",
    "Mount",
    "Package",
    "Length [mm]",
    "Width [mm]",
    "Height [mm]",
    "Land pattern",
)


def write_bom_xlsx(job: Job) -> bytes:
    """The parts list of a module as a workbook.

    Parameters
    ----------
    job : Job
        The module, built and judged; ``spec.order`` fills the two input cells, ``stock`` those of the parts on hand.

    Returns
    -------
    bytes
        The same bytes for the same job.
    """
    from openpyxl import Workbook

    lines = bom_lines(job.netlist, job.catalogue)
    book = Workbook()
    book.remove(book.worksheets[0])
    summary, parts, facts = (book.create_sheet(title) for title in (SUMMARY, PARTS, FACTS))
    for sheet, heading in ((summary, "order"), (parts, "parts list"), (facts, "catalogue facts")):
        _top(sheet, job, heading)
    breaks = max([1, *(len(line.prices) for line in lines)])
    _parts(parts, job, lines, breaks)
    _facts(facts, job, lines, breaks)
    _summary(book, summary, job, lines)
    for sheet in (summary, parts, facts):
        fit(sheet, TOP)
    book.calculation.fullCalcOnLoad = True
    book.properties.creator = "modgen"
    book.properties.title = plain_text(f"{job.spec.module}: parts list")
    return save_plain(book)


def _top(sheet: Worksheet, job: Job, heading: str) -> None:
    """Title, verdict and page set-up, which every sheet has."""
    put_text(sheet, "A1", f"{job.spec.module}: {heading}", bold=True)
    if job.report.cleared:
        put_text(sheet, "A2", f"{CLEARED}.")
    else:
        standing = sum(f.level == "error" and not f.waived for f in job.report.findings)
        errors = "1 error stands" if standing == 1 else f"{standing} errors stand"
        put_text(sheet, "A2", f"{NOT_CLEARED}: {errors}.", bold=True, colour=BAD)
    sheet.page_setup.orientation = "landscape"
    sheet.page_setup.paperSize = 9  # A4
    sheet.page_setup.fitToWidth = 1
    margins = sheet.page_margins
    margins.left, margins.right, margins.top, margins.bottom = 0.4, 0.4, 0.5, 0.6
    margins.header = margins.footer = 0.3
    sheet.sheet_properties.pageSetUpPr.fitToPage = True  # type: ignore[union-attr]
    name = plain_text(job.spec.module).replace("&", "&&")
    left, center, right = (getattr(sheet.oddFooter, side) for side in ("left", "center", "right"))
    left.text = f"{name}: {heading}"
    center.text = "" if job.report.cleared else NOT_CLEARED
    right.text = "&P / &N"


def _invented_note(lines: Sequence[BomLine]) -> str:
    count = sum(line.invented for line in lines)
    if not count:
        return ""
    verb = "line has" if count == 1 else "lines have"
    return f"{count} {verb} invented prices: put real ones in the yellow cells of '{FACTS}'."


# --- sheets ---------------------------------------------------------------------------------------


def _parts(sheet: Worksheet, job: Job, lines: Sequence[BomLine], breaks: int) -> None:
    put_text(sheet, "A3", f"{_invented_note(lines)} {PACKS}".strip())
    head(sheet, TOP, [heading for heading, _ in COLUMNS])
    for column, (_, width) in enumerate(COLUMNS, start=1):
        sheet.column_dimensions[column_letter(column)].width = width
    starts = column_letter(len(FACT_COLUMNS) + 1), column_letter(len(FACT_COLUMNS) + breaks)
    prices = column_letter(len(FACT_COLUMNS) + breaks + 1), column_letter(len(FACT_COLUMNS) + 2 * breaks)
    for row, line in enumerate(lines, start=TOP + 1):
        put(sheet, f"A{row}", row - TOP, COUNT)
        put_text(sheet, f"B{row}", brief_references(line.refs), wrap=True)
        put(sheet, f"C{row}", line.quantity, COUNT)
        texts = (
            line.value,
            line.description,
            line.rating,
            line.tolerance,
            line.package,
            line.order_code,
            ", ".join(line.alternates),
        )
        for letter, text in zip("DEFGHIJ", texts, strict=True):
            put_text(sheet, f"{letter}{row}", text, wrap=True)
        put(sheet, f"K{row}", f"=boards*C{row}", COUNT)
        put(sheet, f"L{row}", f"=ROUNDUP(ROUND(K{row}*spares,6),0)", COUNT)
        put(sheet, f"M{row}", job.stock.get(line.key, 0), COUNT, fill=INPUT)
        put(sheet, f"N{row}", f"=MAX(0,K{row}+L{row}-M{row})", COUNT)
        put(sheet, f"O{row}", line.pack, COUNT)
        from_ = f"'{FACTS}'!${starts[0]}${row}:${starts[1]}${row}"
        price = f"'{FACTS}'!${prices[0]}${row}:${prices[1]}${row}"
        at_break = f'INDEX({price},1,MAX(1,COUNTIF({from_},"<="&N{row})))'
        put(sheet, f"P{row}", f'=IF(COUNT({price})=0,"{NO_PRICE}",{at_break})', UNIT_MONEY)
        put(sheet, f"Q{row}", f'=IF(ISNUMBER(P{row}),P{row}*N{row},"{NO_PRICE}")', MONEY)
        put_text(sheet, f"R{row}", "invented" if line.invented else "")
    last = TOP + len(lines)
    put_text(sheet, f"B{last + 1}", "Total", bold=True)
    for letter in "CKLN":
        put(sheet, f"{letter}{last + 1}", f"=SUM({letter}{TOP + 1}:{letter}{last})", COUNT, bold=True)
    put(sheet, f"Q{last + 1}", f"=SUM(Q{TOP + 1}:Q{last})", MONEY, bold=True)
    allow(sheet, f"M{TOP + 1}:M{last}", "whole", "0", "10000000", "Whole parts on hand, 0 or more.")
    sheet.freeze_panes = f"C{TOP + 1}"
    sheet.print_title_rows = f"1:{TOP}"


def _facts(sheet: Worksheet, job: Job, lines: Sequence[BomLine], breaks: int) -> None:
    put_text(sheet, "A3", f"Line by line as in '{PARTS}'. Prices in {CURRENCY}, each from its quantity on.")
    headings = [*FACT_COLUMNS, *(f"From {n + 1}" for n in range(breaks)), *(f"Price {n + 1}" for n in range(breaks))]
    head(sheet, TOP, headings)
    for row, line in enumerate(lines, start=TOP + 1):
        record = job.catalogue.get(line.key)
        put_text(sheet, f"A{row}", line.key)
        put_text(sheet, f"B{row}", line.kind)
        put_text(sheet, f"C{row}", record.family if record else "")
        put_text(sheet, f"D{row}", line.mount)
        put_text(sheet, f"E{row}", line.package)
        if record:
            body = record.body
            for letter, size in zip("FGH", (body.length, body.width, body.height), strict=True):
                put(sheet, f"{letter}{row}", round(size * 1e3, 3), "0.00")
            put_text(sheet, f"I{row}", record.land_pattern)
        for n in range(breaks):
            start, price = column_letter(len(FACT_COLUMNS) + 1 + n), column_letter(len(FACT_COLUMNS) + 1 + breaks + n)
            style(sheet[f"{start}{row}"], fill=INPUT)
            style(sheet[f"{price}{row}"], fill=INPUT)
            sheet[f"{start}{row}"].number_format = COUNT
            sheet[f"{price}{row}"].number_format = UNIT_MONEY
            if n < len(line.prices):
                sheet[f"{start}{row}"].value = line.prices[n].quantity
                sheet[f"{price}{row}"].value = line.prices[n].price
    last = TOP + len(lines)
    first = len(FACT_COLUMNS) + 1
    quantities = f"{column_letter(first)}{TOP + 1}:{column_letter(first + breaks - 1)}{last}"
    money = f"{column_letter(first + breaks)}{TOP + 1}:{column_letter(first + 2 * breaks - 1)}{last}"
    allow(sheet, quantities, "whole", "1", "10000000", "The quantity from which the price holds, rising to the right.")
    allow(sheet, money, "decimal", "0", "1000000", "Price of one part.")
    widths = (40, 19, 22, 14, 18, 9, 9, 9, 36)
    for column, width in enumerate([*widths, *[9] * breaks, *[14] * breaks], start=1):
        sheet.column_dimensions[column_letter(column)].width = width
    _evidence(sheet, job, lines, last + 3)
    sheet.freeze_panes = f"B{TOP + 1}"
    sheet.print_title_rows = f"1:{TOP}"


def _evidence(sheet: Worksheet, job: Job, lines: Sequence[BomLine], row: int) -> None:
    """Where the figures come from: one row for all parts whose same figures share a source."""
    last = column_letter(sheet.max_column)
    sources: dict[tuple[str, str, tuple[str, ...]], list[str]] = {}
    for line in lines:
        record = job.catalogue.get(line.key)
        found: dict[tuple[str, str], list[str]] = {}
        for figure, evidence in record.evidence if record else ():
            found.setdefault((evidence.kind, evidence.source), []).append(figure.replace("_", " "))
        for (kind, source), names in found.items():
            sources.setdefault((kind, source, tuple(names)), []).append(line.key)
    head(sheet, row, ("Parts", "Evidence", "Figures", "", "", "", "", "", "Source"))
    for (kind, source, figures), keys in sources.items():
        row += 1
        # a figure is not cut off by the column beside it: its cell goes on to the source's
        sheet.merge_cells(f"C{row}:H{row}")
        sheet.merge_cells(f"I{row}:{last}{row}")
        parts = "all parts" if len(keys) == len(lines) > 1 else ", ".join(keys)
        for column, words in zip("ABCI", (parts, kind, ", ".join(figures), source), strict=True):
            put_text(sheet, f"{column}{row}", words, wrap=True)


def _summary(book: Workbook, sheet: Worksheet, job: Job, lines: Sequence[BomLine]) -> None:
    from openpyxl.workbook.defined_name import DefinedName

    order, last = job.spec.order, TOP + len(lines)

    def column(letter: str) -> str:
        return f"'{PARTS}'!{letter}{TOP + 1}:{letter}{last}"

    put_text(sheet, "A3", "Change the yellow cells; everything else follows.")
    head(sheet, TOP, ("What", "Value", "Remark"))
    put_text(sheet, "A5", "Boards", bold=True)
    put(sheet, "B5", order.boards, COUNT, fill=INPUT)
    allow(sheet, "B5", "whole", "1", "1000000", "Whole boards, 1 or more.")
    put_text(sheet, "A6", "Spares, share of what is needed", bold=True)
    put(sheet, "B6", order.spares, "0.0%", fill=INPUT)
    put_text(sheet, "C6", "rounded up to whole parts, line by line")
    allow(sheet, "B6", "decimal", "0", "1", "A share from 0 % to 100 %.")
    rows: tuple[tuple[str, str, str, str], ...] = (
        ("Parts on one board", f"=SUM({column('C')})", COUNT, ""),
        ("Different parts", f"=COUNT({column('A')})", COUNT, ""),
        ("Parts to order", f"=SUM({column('N')})", COUNT, ""),
        ("Total", f"=SUM({column('Q')})", MONEY, "without the lines that have no price"),
        ("Cost per board", "=B10/boards", MONEY, "total shared over the boards, spares and all"),
        ("Lines without a price", f'=COUNTIF({column("Q")},"{NO_PRICE}")', COUNT, ""),
    )
    for row, (what, formula, form, remark) in enumerate(rows, start=7):
        put_text(sheet, f"A{row}", what, bold=True)
        put(sheet, f"B{row}", formula, form)
        put_text(sheet, f"C{row}", remark)
    said = 'IF(B12=1,"1 line without a price",B12&" lines without a price")&": the total is too low."'
    put(sheet, "C12", f'=IF(B12=0,"every line has a price",{said})', text=True)
    for name, cell in (("boards", "B5"), ("spares", "B6"), ("total", "B10")):
        place = f"{SUMMARY}!${cell[0]}${cell[1:]}"
        book.defined_names[name] = DefinedName(name, attr_text=place)
    row = 14
    if note := _invented_note(lines):
        put_text(sheet, f"A{row}", note, colour=BAD)
        row += 2
    row = _unpriced(sheet, lines, row)
    row = _findings(sheet, job, row)
    records = [record for line in lines if (record := job.catalogue.get(line.key)) for _ in line.refs]
    head(sheet, row, ("Not on this list", "For one board", "Remark"))
    for what, number, remark in not_listed(records):
        row += 1
        put_text(sheet, f"A{row}", what)
        put(sheet, f"B{row}", number, COUNT)
        put_text(sheet, f"C{row}", remark, wrap=True)
    for letter, width in zip("ABCDE", (32, 20, 40, 44, 44), strict=True):
        sheet.column_dimensions[letter].width = width
    sheet.freeze_panes = f"A{TOP + 1}"
    sheet.print_title_rows = f"1:{TOP}"


def _unpriced(sheet: Worksheet, lines: Sequence[BomLine], row: int) -> int:
    """List what the catalogue has no price of; the first free row below."""
    missing = [line for line in lines if not line.prices]
    if not missing:
        return row
    head(sheet, row, ("No price in the catalogue", "References", "Description"))
    for line in missing:
        row += 1
        put_text(sheet, f"A{row}", line.order_code or line.value or line.key)
        put_text(sheet, f"B{row}", brief_references(line.refs), wrap=True)
        put_text(sheet, f"C{row}", line.description, wrap=True)
    return row + 2


def _findings(sheet: Worksheet, job: Job, row: int) -> int:
    """What stands against ordering, and what somebody answers for; the first free row below."""
    standing = [f for f in job.report.findings if f.level == "error" and not f.waived]
    waived = [f for f in job.report.findings if f.waived]
    groups = (
        (standing, ("Error", "Parts", "Rule", "What is wrong", "What to do")),
        (waived, ("Waived", "Parts", "Rule", "What is wrong", "Reason given")),
    )
    for findings, headings in groups:
        if not findings:
            continue
        head(sheet, row, headings)
        for finding in findings:
            row += 1
            last = finding.waived or finding.fix
            texts = (finding.level, ", ".join(finding.parts), finding.rule, finding.message, last)
            for letter, text in zip("ABCDE", texts, strict=True):
                put_text(sheet, f"{letter}{row}", text, wrap=True)
        row += 2
    return row
