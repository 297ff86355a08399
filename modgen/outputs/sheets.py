"""Cells, rows and pages of a worksheet: what every sheet of the workbooks shares.

Row heights and page counts are worked out here, since not every program does so when it opens a file.
"""

from __future__ import annotations

import math
import re
import unicodedata
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any, Literal

from modgen.outputs.table_csv import formula_like, plain_text

if TYPE_CHECKING:
    from openpyxl.cell import Cell
    from openpyxl.worksheet.worksheet import Worksheet

BAD, INPUT, HEAD = "FFC00000", "FFFFF2CC", "FFD9E1F2"

#: Height of one line of text, and of a row without one of its own [pt]
LINE_HEIGHT = 15.0
#: What an indent takes from a cell, in widths of a digit
INDENT = 1.5
#: What can be printed on between the margins of an A4 page lying on its side, width and height [pt]
PAGE = (842 - 2 * 0.4 * 72, 595 - (0.5 + 0.6) * 72)
#: A last page that is less full than this goes onto the ones before, a little smaller [-]
LEAST_FILL = 0.25

# widths of letters in those of a digit, the wider of Calibri and the sans serif that stands in for it
_NARROW, _NARROW_WIDTH = frozenset("ijlftI.,:;'!|()[]/- "), 0.6
_WIDE, _WIDE_WIDTH = frozenset("mwMW@%"), 1.55
_CAPITAL_WIDTH = 1.15


def put_text(sheet: Worksheet, place: str, text: str, **look: Any) -> None:
    """Put a text in a cell so that it stays one, whatever it begins with."""
    cell = sheet[place]
    cell.value = plain_text(text)
    cell.data_type = "s"
    if formula_like(text):
        cell.quotePrefix = True
    style(cell, **look)


def put(sheet: Worksheet, place: str, value: float | str, form: str = "General", **look: Any) -> None:
    """Put a number or a formula in a cell."""
    cell = sheet[place]
    cell.value = value
    cell.number_format = form
    style(cell, **look)


def style(
    cell: Cell, *, bold: bool = False, fill: str = "", colour: str = "", wrap: bool = False, text: bool = False
) -> None:
    """Give a cell its look; ``text`` is for a formula whose result is one."""
    from openpyxl.styles import Alignment, Border, Font, PatternFill, Side

    if bold or colour:
        cell.font = Font(name="Calibri", size=11, bold=bold, color=colour or None)
    if fill:
        cell.fill = PatternFill("solid", fgColor=fill)
    if fill == INPUT:
        edge = Side(style="thin")
        cell.border = Border(left=edge, right=edge, top=edge, bottom=edge)
    # a text beside a number that stands to the right needs some air
    indent = 1 if (text or cell.data_type == "s") and cell.column > 1 else 0
    cell.alignment = Alignment(
        vertical="top", wrap_text=wrap or None, indent=indent, horizontal="left" if indent else None
    )


def head(sheet: Worksheet, row: int, headings: Sequence[str]) -> None:
    """A row of headings from the first column on."""
    for column, heading in enumerate(headings, start=1):
        put_text(sheet, f"{column_letter(column)}{row}", heading, bold=True, fill=HEAD, wrap=True)


def column_letter(column: int) -> str:
    """The letters of a column; the first is 1."""
    from openpyxl.utils import get_column_letter

    return str(get_column_letter(column))


def allow(sheet: Worksheet, cells: str, kind: Literal["whole", "decimal"], least: str, most: str, message: str) -> None:
    """Mark what an input cell takes."""
    from openpyxl.worksheet.datavalidation import DataValidation

    rule = DataValidation(type=kind, operator="between", formula1=least, formula2=most, allow_blank=True)
    rule.error = message
    rule.errorTitle = "Not possible here"
    rule.showErrorMessage = True
    rule.prompt = message
    rule.showInputMessage = True
    rule.add(cells)
    sheet.add_data_validation(rule)


def lines_of(text: str, width: float) -> int:
    """How many lines a text takes in a cell that wraps.

    Parameters
    ----------
    text : str
        Broken at spaces and behind hyphens; a word that is wider than the cell anywhere.
    width : float
        Of the cell without its indent, in digits.

    Returns
    -------
    int
        At least 1.
    """
    lines, used = 1, 0.0
    for word in re.findall(r" +|[^ -]*-+|[^ -]+", text):
        if not word.strip():
            used += _NARROW_WIDTH * len(word)  # a space at the end of a line hangs over it
            continue
        size = sum(map(_width, word))
        if used + size <= width:
            used += size
            continue
        lines += bool(used) + max(0, math.ceil(size / width) - 1)
        used = size % width if size > width else size
    return lines


def _width(character: str) -> float:
    if character in _NARROW:
        return _NARROW_WIDTH
    if character in _WIDE:
        return _WIDE_WIDTH
    if unicodedata.east_asian_width(character) in "WF":
        return 2.0
    return _CAPITAL_WIDTH if character.isupper() else 1.0


def fit(sheet: Worksheet, repeated: int) -> None:
    """Rows as high as their wrapped text, and no last page with a few rows on it; the top rows stand on each page."""
    wide = {str(area).partition(":")[0]: (area.min_col, area.max_col) for area in sheet.merged_cells.ranges}
    total = 0.0
    for number, row in enumerate(sheet.iter_rows(), start=1):
        lines = 1
        for cell in row:
            if isinstance(cell.value, str) and cell.alignment.wrap_text:
                first, last = wide.get(cell.coordinate, (cell.column, cell.column))
                width = sum(sheet.column_dimensions[column_letter(n)].width for n in range(first, last + 1))
                lines = max(lines, lines_of(cell.value, width - INDENT * cell.alignment.indent))
        if lines > 1:
            sheet.row_dimensions[number].height = LINE_HEIGHT * lines
        total += LINE_HEIGHT * lines
    columns = sum(sheet.column_dimensions[column_letter(n)].width for n in range(1, sheet.max_column + 1))
    sheet.page_setup.fitToHeight = pages(total, 0.75 * (7 * columns + 5 * sheet.max_column), LINE_HEIGHT * repeated)


def pages(height: float, width: float, repeated: float = 0.0) -> int:
    """To how many pages a sheet is held that is as wide as a page.

    Parameters
    ----------
    height, width : float
        Of everything on it, at full size. [pt]
    repeated : float
        Height of the rows that stand on every page. [pt]

    Returns
    -------
    int
        0 for as many as it takes; one fewer than that when the last one would be almost empty.
    """
    per_page = PAGE[1] / min(1.0, PAGE[0] / width) - repeated
    full, rest = divmod(height - repeated, per_page)
    return int(full) if full >= 1 and 0 < rest < LEAST_FILL * per_page else 0
