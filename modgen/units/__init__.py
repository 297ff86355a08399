"""Quantities as text and back: SI prefixes, IEC 60062 codes, colour bands, preferred printing."""

from modgen.units.codes import BANDS, capacitor_code, colour_bands, rkm_code, tolerance_letter
from modgen.units.quantity import (
    UNITS,
    QuantityError,
    format_quantity,
    parse_quantity,
    parse_span,
    read_value,
    value_text,
)
from modgen.units.ranges import parse_range

__all__ = [
    "BANDS",
    "UNITS",
    "QuantityError",
    "capacitor_code",
    "colour_bands",
    "format_quantity",
    "parse_quantity",
    "parse_range",
    "parse_span",
    "read_value",
    "rkm_code",
    "tolerance_letter",
    "value_text",
]
