"""A range of quantities written as text: ``15 °C to 65 °C``."""

from __future__ import annotations

import re

from modgen.units.quantity import LONGEST_TEXT, QuantityError, format_quantity, parse_quantity


def parse_range(text: str, kind: str) -> tuple[float, float]:
    """Read a range from its lower to its upper end.

    Parameters
    ----------
    text : str
        Two quantities with ``to`` between them, each with its unit.
    kind : str
        One of :data:`modgen.units.UNITS`.

    Returns
    -------
    tuple of float
        Low and high end, as :func:`modgen.units.parse_quantity` reads them.

    Raises
    ------
    QuantityError
        When the text is not two such quantities, or the range is empty or upside down.

    Examples
    --------
    >>> parse_range("15 °C to 65 °C", "temperature")
    (15.0, 65.0)
    """
    ends = re.split(r"\s+to\s+", text.strip()) if len(text) <= 2 * LONGEST_TEXT else []
    if len(ends) != 2:
        shown = repr(text) if len(text) <= LONGEST_TEXT else repr(text[:40]) + "..."
        example = f"{format_quantity(15.0, kind)} to {format_quantity(65.0, kind)}"
        raise QuantityError(
            f"{shown} is not a range", "a range has a lower and an upper end with 'to' between", f"write {example}"
        )
    low, high = (parse_quantity(end, kind) for end in ends)
    if low >= high:
        raise QuantityError(
            f"the range {text!r} is " + ("empty" if low == high else "upside down"),
            "the first end must be below the second",
            "write two different ends" if low == high else f"write {ends[1]} to {ends[0]}",
        )
    return low, high
