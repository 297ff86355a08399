"""A spec back in the words of the page, with every default stated."""

from __future__ import annotations

from decimal import Decimal
from typing import Any

from modgen.spec.keys import NONE, Key, keys_of, page_name
from modgen.spec.model import Spec
from modgen.units import UNITS, format_quantity, parse_quantity

#: digits after which a share or a voltage is no longer one that a person wrote, and cents are tried
_WRITTEN_DIGITS = 6
_EXACT_DIGITS = 17  # every binary64 number is told apart by 17 significant digits


def resolved(spec: Spec) -> dict[str, Any]:
    """The whole spec as it could stand on a page.

    Returns
    -------
    dict
        Ready for JSON. Quantities are text with units that read back to the very same number, so that the
        page made of it gives an equal spec. Keys without effect (``glide.step`` and ``glide.within`` unless
        the measure is ``settle``) are left out.
    """
    return _section(Spec, spec)


def _section(model: type, value: Any) -> dict[str, Any]:
    written: dict[str, Any] = {}
    for name, key in keys_of(model):
        if key.kind == "parts" and not getattr(value, name):
            continue  # no parts means all of them, which is said by leaving the key out
        if key.only and getattr(value, "measure", "") != "settle":
            continue
        written[page_name(name, key)] = _value(key, getattr(value, name), value)
    return written


def _value(key: Key, value: Any, owner: Any) -> Any:
    if key.kind in ("section", "jacks"):
        assert key.section is not None
        return _section(key.section, value)
    if key.kind == "waivers":
        assert key.section is not None
        return [_section(key.section, waiver) for waiver in value]
    if key.kind == "span":
        return span_text(owner.low, owner.high)
    if key.kind == "range":
        return " to ".join(exact_text(end, key.dimension) for end in value)
    if key.kind in ("paths", "parts"):
        return list(value)
    if key.kind == "path":
        return value or NONE
    if key.kind in ("quantity", "offset"):
        return exact_text(value, key.dimension)
    if key.kind in ("level", "scale"):
        return _perhaps_cents(value, key.dimension)
    return value


def span_text(low: float, high: float) -> str:
    """A range of voltages [V] as the page writes it: ``±5 V``, ``0 V to 5 V``."""
    if low == -high:
        return f"±{exact_text(high, 'voltage')}"
    return f"{exact_text(low, 'voltage')} to {exact_text(high, 'voltage')}"


def exact_text(value: float, dimension: str) -> str:
    """The shortest text with a unit that reads back to the very same number.

    Parameters
    ----------
    value : float
        In base SI units.
    dimension : str
        One of :data:`modgen.units.UNITS`.
    """
    for digits in range(1, _EXACT_DIGITS + 1):
        text = format_quantity(value, dimension, digits)
        if len(text) < 40 and parse_quantity(text, dimension) == value:
            return text
    number = Decimal(repr(value))
    return f"{number.scaleb(2) if dimension == 'ratio' else number} {UNITS[dimension]}"


def _perhaps_cents(value: float, dimension: str) -> str:
    """In cents when only that makes a number that a person would write."""
    plain = exact_text(value, dimension)
    cents = exact_text(value, "pitch")
    if _digits(plain) > _WRITTEN_DIGITS and parse_quantity(cents, "pitch") == value and _digits(cents) < _digits(plain):
        return cents
    return plain


def _digits(text: str) -> int:
    return sum(c.isdigit() for c in text)
