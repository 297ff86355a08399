"""``bom.csv``: the parts list for other programs, and for the number of boards that the spec orders.

UTF-8 with a byte order mark, so that spreadsheet programs show Ω and µ; CRLF line ends and quotes as RFC 4180
has them. A text that a spreadsheet would take for a formula (it begins with ``=``, ``+``, ``-``, ``@``, a tab or a
carriage return) gets an apostrophe in front; control characters become spaces.
"""

from __future__ import annotations

import csv
import io
import re
from typing import TYPE_CHECKING

from modgen.outputs.bom import CURRENCY, bom_lines, cost
from modgen.outputs.wording import CLEARED, NOT_CLEARED, answered

if TYPE_CHECKING:
    from modgen.outputs.model import Job

NO_PRICE = "no price"
HEADER = (
    "Line",
    "References",
    "Per board",
    "Value",
    "Description",
    "Rating",
    "Tolerance",
    "Package",
    "Mount",
    "Part",
    "Order code",
    "Alternates",
    "Pack (orders are not rounded to it)",
    "Boards",
    "Needed",
    "Spares",
    "In stock",
    "To order",
    "Unit price",
    "Line total",
    "Currency",
    "Prices",
    "Status",
)
_CONTROL = re.compile(r"[\x00-\x1f\x7f-\x9f\ufffe\uffff\ud800-\udfff]+")


def plain_text(text: str) -> str:
    """A text without control characters and line breaks: what no table and no XML may hold becomes a space."""
    return _CONTROL.sub(" ", text)


def formula_like(text: str) -> bool:
    """Whether a spreadsheet program would take a text for a formula."""
    return text.startswith(("=", "+", "-", "@", "\t", "\r"))


def safe_text(text: str) -> str:
    """A text that no spreadsheet program takes for a formula, with an apostrophe in front where it would."""
    return ("'" if formula_like(text) else "") + plain_text(text)


def write_bom_csv(job: Job) -> bytes:
    """The parts list of a module as CSV.

    Parameters
    ----------
    job : Job
        The module, built and judged; ``spec.order`` says for how many boards and with what spares, ``stock`` what
        is on hand. The last column has the verdict and what somebody answers for, with the reason.

    Returns
    -------
    bytes
        One line per orderable part under :data:`HEADER`. A line without a price says so; it is not 0.
    """
    lines = bom_lines(job.netlist, job.catalogue)
    order = cost(lines, job.spec.order.boards, job.spec.order.spares, job.stock)
    status = "; waived: ".join((CLEARED if job.report.cleared else NOT_CLEARED, *answered(job.report)))
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\r\n")
    writer.writerow(HEADER)
    for number, each in enumerate(order.lines, start=1):
        line = each.line
        texts = (
            line.value,
            line.description,
            line.rating,
            line.tolerance,
            line.package,
            line.mount,
            line.key,
            line.order_code,
            ", ".join(line.alternates),
        )
        writer.writerow(
            (
                number,
                safe_text(line.references),
                line.quantity,
                *(safe_text(text) for text in texts),
                line.pack,
                order.boards,
                each.needed,
                each.spares,
                each.stock,
                each.to_order,
                NO_PRICE if each.unit_price is None else f"{each.unit_price:.6g}",
                NO_PRICE if each.total is None else f"{each.total:.2f}",
                "" if each.total is None else CURRENCY,
                "invented" if line.invented else "",
                safe_text(status),
            )
        )
    return b"\xef\xbb\xbf" + out.getvalue().encode("utf-8")
