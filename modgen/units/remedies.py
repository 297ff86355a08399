"""What to write instead of a quantity that is refused: the number that was written, in a form that is read."""

from __future__ import annotations

import re
from collections.abc import Mapping
from decimal import Decimal
from types import MappingProxyType

#: units in words, and others that people use, with what they are in the unit of their kind
_WORDS: Mapping[str, Mapping[str, int | str]] = MappingProxyType(
    {
        "resistance": {"ohm": 1, "ohms": 1, "": 1},  # 1 meg
        "capacitance": {"farad": 1, "farads": 1},
        "voltage": {"volt": 1, "volts": 1, "vdc": 1},
        "current": {"amp": 1, "amps": 1, "ampere": 1, "amperes": 1},
        "time": {
            **dict.fromkeys(("sec", "secs", "second", "seconds"), 1),
            **dict.fromkeys(("min", "mins", "minute", "minutes"), 60),
            **dict.fromkeys(("h", "hour", "hours"), 3600),
        },
        "ratio": {"percent": 1, "pct": 1, "ppm": "0.0001"},
        "pitch": {"semitone": 100, "semitones": 100, "octave": 1200, "octaves": 1200},
        "length": {"metre": 1, "metres": 1, "meter": 1, "meters": 1},
        "power": {"watt": 1, "watts": 1},
        "frequency": {"hertz": 1},
        "temperature": {"celsius": 1, "degreescelsius": 1, "degrees": 1, "°": 1, "c": 1},
    }
)
_PREFIX_WORDS: Mapping[str, str] = MappingProxyType(
    {
        "pico": "p",
        "nano": "n",
        "micro": "µ",
        "milli": "m",
        "kilo": "k",
        "kil": "k",  # kilohm
        "mega": "M",
        "meg": "M",  # megohm
        "giga": "G",
    }
)


def in_words(unit: str, kind: str, prefixes: str) -> tuple[str, Decimal] | None:
    """A unit in words as a prefix and a factor to the unit of its kind; None for every other text.

    Parameters
    ----------
    unit : str
        ``msec``, ``kilohms``, ``minutes``, ``per cent``.
    kind : str
        One of :data:`modgen.units.UNITS`.
    prefixes : str
        The prefixes that are read before its unit.
    """
    word = unit.replace(" ", "").replace("-", "").removesuffix(".")
    known = {**{letter: letter for letter in prefixes}, "u": "µ", "K": "k", "": ""}
    for name, factor in _WORDS[kind].items():
        if not word.casefold().endswith(name):
            continue
        before = word[: len(word) - len(name)]
        prefix = _PREFIX_WORDS.get(before.casefold(), known.get(before) if name else None)
        if prefix is not None and prefix in ("", *prefixes) and (not prefix or factor == 1):
            return prefix, Decimal(factor)
    return None


def reworded(number: str, unit: str, kind: str, prefixes: str, symbol: str) -> str:
    """``write 20 ms`` for 20 msec; empty when the unit is none in words."""
    found = in_words(unit, kind, prefixes)
    if found is None or "e" in number.lower():
        return ""
    prefix, factor = found
    return f"write {number if factor == 1 else _plain(Decimal(number) * factor)} {prefix}{symbol}"


def with_unit(number: str, symbol: str) -> str:
    """How to write a number that has no unit; a small ratio may have been meant as a fraction."""
    if symbol == "%" and "e" not in number.lower() and 0 < abs(Decimal(number)) < 1:
        return f"write {_plain(Decimal(number) * 100)} % or {number} %, whichever is meant"
    return f"write {number} {symbol}"


def without_comma(text: str) -> str:
    """How to write a text with one comma; three digits behind it can be thousands, which is not ours to decide."""
    match = re.fullmatch(r"([^,]*),([0-9]+)([^0-9,][^,]*)?", text)
    if not match:
        return ""
    before, digits, rest = match[1], match[2], match[3] or ""
    point = f"write {before}.{digits}{rest}"
    return f"{point} or {before}{digits}{rest}, whichever is meant" if len(digits) == 3 and before else point


def _plain(number: Decimal) -> str:
    """A decimal number without an exponent and without zeros at its end."""
    return f"{number.normalize():f}"
