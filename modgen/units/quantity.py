"""Text with a unit to a float in base SI units, and back.

Strict on purpose: a number without a unit, a decimal comma, ``5 MS`` for milliseconds or ``5 V`` where a
time is asked for is refused with what to write instead, never guessed.
"""

from __future__ import annotations

import math
import re
from collections.abc import Mapping
from dataclasses import dataclass
from decimal import Decimal
from types import MappingProxyType

from modgen.units.remedies import in_words, reworded, with_unit, without_comma

#: no quantity that means something is longer; keeps hostile text out of the number readers
LONGEST_TEXT = 64
#: value texts keep this many digits: more than any part has, fewer than binary fractions disturb
VALUE_DIGITS = 12

CENTS_PER_VOLT = 1200.0  # 1 V per octave, 1200 cents to the octave

_EXPONENTS: Mapping[str, int] = MappingProxyType(
    {"f": -15, "p": -12, "n": -9, "µ": -6, "m": -3, "": 0, "k": 3, "M": 6, "G": 9, "T": 12}
)


@dataclass(frozen=True)
class _Kind:
    """How one kind of quantity is written."""

    article: str
    unit: str
    spellings: tuple[str, ...]
    #: prefixes that are read
    prefixes: str
    #: prefixes that are written, smallest first; "" among them is no prefix
    written: tuple[str, ...]
    example: str
    signed: bool = False
    #: unit letters that may stand for the decimal point, 3V3 or 4R7
    point: str = ""
    #: prefix letters that alone make a code, 4k7 or 100n (IEC 60062)
    code: str = ""


_KINDS: Mapping[str, _Kind] = MappingProxyType(
    {
        "resistance": _Kind(
            "a resistance",
            "Ω",
            ("Ω", "ohm", "ohms", "Ohm", "Ohms", "R"),
            "mkKMGT",
            ("m", "", "k", "M", "G", "T"),
            "4.7 kΩ, 4k7 or 100R",
            point="R",
            code="kKMGT",
        ),
        "capacitance": _Kind(
            "a capacitance",
            "F",
            ("F",),
            "fpnµm",
            ("p", "n", "µ"),
            "100 nF, 100n or 2u2",
            point="F",
            code="pnµm",
        ),
        "voltage": _Kind("a voltage", "V", ("V",), "nµmk", ("n", "µ", "m", "", "k"), "12 V", signed=True, point="V"),
        "current": _Kind("a current", "A", ("A",), "fpnµmk", ("f", "p", "n", "µ", "m", ""), "20 mA", signed=True),
        "time": _Kind("a time", "s", ("s",), "pnµm", ("p", "n", "µ", "m", ""), "5 ms"),
        "ratio": _Kind("a ratio", "%", ("%",), "", ("",), "5 %", signed=True),
        "pitch": _Kind("a pitch interval", "cents", ("cents", "cent"), "", ("",), "5 cents", signed=True),
        "length": _Kind("a length", "m", ("m",), "µm", ("m",), "5 mm"),
        "power": _Kind("a power", "W", ("W",), "nµmk", ("n", "µ", "m", "", "k"), "250 mW"),
        "frequency": _Kind("a frequency", "Hz", ("Hz",), "mkMG", ("m", "", "k", "M", "G"), "3 MHz"),
        "temperature": _Kind("a temperature", "°C", ("°C", "degC"), "", ("",), "25 °C", signed=True),
    }
)

#: Every kind of quantity and the unit it is written in.
UNITS: Mapping[str, str] = MappingProxyType({name: kind.unit for name, kind in _KINDS.items()})

_SPACES = "\u0020\u00a0\u2007\u2009\u200a\u202f"
_SAME = str.maketrans(
    # micro: Greek mu; ohm: the ohm sign; minus: the minus sign
    {"\u03bc": "µ", "\u2126": "Ω", "\u2212": "-", **dict.fromkeys(_SPACES, " ")}
)
_PLAIN = re.compile(r"(?P<number>[+-]?(?:[0-9]+(?:\.[0-9]+)?|\.[0-9]+)(?:[eE][+-]?[0-9]+)?) *(?P<unit>[^0-9.\s]*)")
_CODE = re.compile(r"(?P<sign>[+-]?)(?P<whole>[0-9]*)(?P<letter>[^0-9.,+\- ])(?P<part>[0-9]+) *(?P<unit>[^0-9.\s]*)")
_VALUE = re.compile(r"([+-]?[0-9]+(?:\.[0-9]+)?)([fpnuµmkMGT]?)")


class QuantityError(Exception):
    """A text that is not the quantity that was asked for.

    Parameters
    ----------
    what, why, fix : str
        What is wrong, with the text as written; why that matters; what to write instead.
    """

    def __init__(self, what: str, why: str, fix: str) -> None:
        self.what = what
        self.why = why
        self.fix = fix
        super().__init__(f"{what}\n    why: {why}\n    fix: {fix}")


def parse_quantity(text: str, kind: str) -> float:
    """Read a quantity.

    Parameters
    ----------
    text : str
        ``250 kΩ``, ``250k``, ``4k7``, ``2u2``, ``100 nF``, ``5 ms``, ``-12 V``, ``5 %``, ``5 cents``.
    kind : str
        One of :data:`UNITS`.

    Returns
    -------
    float
        In base SI units [ohm, F, V, A, s, m, W, Hz]; a ratio as a fraction [-]; a pitch interval as the
        voltage it is at 1 V per octave [V]; a temperature as it is written [degC].

    Raises
    ------
    QuantityError
        When the text is not understood, has no unit or another one, or is negative and cannot be.
    KeyError
        When there is no such kind.

    Examples
    --------
    >>> parse_quantity("4k7", "resistance")
    4700.0
    >>> parse_quantity("2.2 µF", "capacitance")
    2.2e-06
    >>> parse_quantity("5 %", "ratio")
    0.05
    """
    how = _KINDS[kind]
    clean = _clean(text, how)
    match = _PLAIN.fullmatch(clean)
    if match:
        number, exponent = match["number"], _unit(text, match["unit"], kind, match["number"])
        if match["unit"] in ("R", *_prefixes(how.code)) and "e" in number.lower():
            raise QuantityError(
                f"{text!r} mixes an exponent with a code letter",
                "the two are different notations, and together they are easily misread",
                f"write it with a unit, for instance {how.example}",
            )
    else:
        number, exponent = _code(text, clean, kind)
    return _float(text, number, exponent, how)


def parse_span(text: str) -> tuple[float, float]:
    """Read a range of voltages.

    Parameters
    ----------
    text : str
        ``±5 V``, ``+/-5 V``, ``0 V to 5 V`` or ``-2 V to 8 V``.

    Returns
    -------
    tuple of float
        Low and high end [V].

    Raises
    ------
    QuantityError
        When the text is neither form, or the range is empty or upside down.

    Examples
    --------
    >>> parse_span("±5 V")
    (-5.0, 5.0)
    >>> parse_span("0 V to 5 V")
    (0.0, 5.0)
    """
    clean = text.translate(_SAME).strip()
    for mark in ("±", "+/-"):
        if clean.startswith(mark):
            size = clean[len(mark) :].strip()
            if size[:1] in ("+", "-", "±"):
                raise QuantityError(
                    f"{_shown(text)} has two signs",
                    f"{mark} already says both ways",
                    f"write one sign, for instance {mark}5 V",
                )
            high = parse_quantity(size, "voltage")
            if high == 0.0:
                raise QuantityError(
                    f"the range {text!r} is empty",
                    "a signal that never leaves 0 V has no span",
                    "write the largest voltage of the signal, for instance ±5 V",
                )
            return -high, high
    ends = re.split(r" +to +", clean)
    if len(ends) != 2:
        raise QuantityError(
            f"{_shown(text)} is not a range of voltages",
            "a signal has a lowest and a highest voltage",
            "write ±5 V, or 0 V to 5 V",
        )
    low, high = (parse_quantity(end, "voltage") for end in ends)
    if low >= high:
        raise QuantityError(
            f"the range {text!r} is " + ("empty" if low == high else "upside down"),
            "the first voltage must be below the second",
            "write ±5 V" if low == high else f"write {ends[1]} to {ends[0]}",
        )
    return low, high


def format_quantity(value: float, kind: str, digits: int = 3) -> str:
    """Write a quantity for people.

    Parameters
    ----------
    value : float
        In base SI units, as :func:`parse_quantity` returns it.
    kind : str
        One of :data:`UNITS`.
    digits : int
        Greatest number of significant digits; trailing zeros are left out.

    Returns
    -------
    str
        ``4.7 kΩ``, ``-12 V``, ``5 %``, ``2.2 µF``.

    Raises
    ------
    ValueError
        When the value is not a number, or there are fewer than one digit.

    Examples
    --------
    >>> format_quantity(4700.0, "resistance")
    '4.7 kΩ'
    >>> format_quantity(-11.999, "voltage")
    '-12 V'
    >>> format_quantity(0.05, "ratio")
    '5 %'
    """
    how = _KINDS[kind]
    if math.isnan(value):
        raise ValueError(f"not a number, so it cannot be written as {how.article}")
    if digits < 1:
        raise ValueError(f"{digits} significant digits: at least one is needed")
    if math.isinf(value):
        return f"{'-' if value < 0 else ''}∞ {how.unit}"
    if kind == "ratio":
        value *= 100.0
    elif kind == "pitch":
        value *= CENTS_PER_VOLT
    number, prefix = _scaled(value, digits, how.written)
    unit = "cent" if kind == "pitch" and number in ("1", "-1") else how.unit
    return f"{number} {prefix}{unit}"


def value_text(value: float) -> str:
    """Write a part's value for a netlist: a plain number with one SI prefix and no unit.

    Parameters
    ----------
    value : float
        In base SI units.

    Returns
    -------
    str
        ``4.7k``, ``220``, ``1M``, ``100n``, ``2.2u``; all digits that are there, up to twelve.

    Raises
    ------
    ValueError
        When the value is infinite or not a number.

    Examples
    --------
    >>> value_text(4700.0), value_text(2.2e-6), value_text(220.0)
    ('4.7k', '2.2u', '220')
    """
    if not math.isfinite(value):
        raise ValueError(f"{value} is not a part value")
    number, prefix = _scaled(value, VALUE_DIGITS, tuple(_EXPONENTS))
    return number + prefix.replace("µ", "u")


def read_value(text: str) -> float:
    """Read a part's value as :func:`value_text` writes it; IEC 60062 codes are read too.

    Parameters
    ----------
    text : str
        ``4.7k``, ``220``, ``2.2u``, ``4k7``, ``R47``.

    Returns
    -------
    float
        In base SI units.

    Raises
    ------
    QuantityError
        When the text is anything else.

    Examples
    --------
    >>> read_value("4.7k"), read_value("100n")
    (4700.0, 1e-07)
    """
    clean = text.translate(_SAME).strip()
    if len(clean) <= LONGEST_TEXT:
        match = _VALUE.fullmatch(clean)
        if match:
            return float(f"{match[1]}e{_EXPONENTS[match[2].replace('u', 'µ')]}")
        code = re.fullmatch(r"([0-9]*)([pnuµmRkKMGT])([0-9]+)|([0-9]+)([RK])", clean)
        if code:
            letter = code[2] or code[5]
            exponent = 0 if letter == "R" else _exponent(letter)
            return float(f"{code[1] or code[4] or '0'}.{code[3] or '0'}e{exponent}")
    raise QuantityError(
        f"the value {_shown(text)} is not understood",
        "a value is a number with at most one SI prefix, and no unit",
        "write it like 4.7k, 220, 1M, 100n or 2.2u",
    )


def _clean(text: str, how: _Kind) -> str:
    """The text with one spelling of every sign, or an error for what no notation has."""
    clean = text.translate(_SAME).strip()
    if not clean:
        raise QuantityError(f"{text!r} is empty", f"{how.article} is needed here", f"write it like {how.example}")
    if len(clean) > LONGEST_TEXT:
        raise QuantityError(
            f"{_shown(text)} is too long for {how.article}",
            f"nothing longer than {LONGEST_TEXT} characters is read as a quantity",
            f"write it like {how.example}",
        )
    if re.search(r"[0-9],|,[0-9]", clean):
        raise QuantityError(
            f"{text!r} has a comma",
            "a comma is a decimal sign to some and a separator of thousands to others",
            without_comma(clean) or f"use a decimal point and no separators, for instance {how.example}",
        )
    return clean


def _shown(text: str) -> str:
    """The text as it goes into a message: quoted, and cut when it is very long."""
    return repr(text) if len(text) <= LONGEST_TEXT else repr(text[:40]) + "..."


def _prefixes(letters: str) -> tuple[str, ...]:
    """Every spelling of the given prefix letters."""
    return (*letters, "u") if "µ" in letters else tuple(letters)


def _exponent(prefix: str) -> int:
    """The power of ten of a prefix, in any accepted spelling."""
    return _EXPONENTS[{"u": "µ", "K": "k"}.get(prefix, prefix)]


def _unit(text: str, unit: str, kind: str, number: str) -> int:
    """The power of ten that a unit with its prefix stands for, or an error for every other text."""
    how = _KINDS[kind]
    if unit in how.spellings:
        return 0
    if unit in _prefixes(how.code):
        return _exponent(unit)
    for spelling in how.spellings:
        prefix = unit.removesuffix(spelling).rstrip(" ") if unit.endswith(spelling) else ""
        # R is the unit only by itself (100R): kR would be a code with its letter twice
        if prefix in _prefixes(how.prefixes) and prefix and spelling != "R" and f"{prefix}{spelling}" == unit:
            return _exponent(prefix)
    if not unit:
        raise QuantityError(
            f"{text!r} has no unit",
            f"{how.article} needs one: what is not said is not guessed",
            f"write {number} Ω or {number}R" if kind == "resistance" else with_unit(number, how.unit),
        )
    for spelling in (*(s for s in how.spellings if s != "R"), ""):
        for prefix in ("", *_prefixes(how.prefixes)):
            right = prefix + spelling
            alone = not spelling and prefix not in _prefixes(how.code)
            if right and right.lower() == unit.lower() and not alone:
                raise QuantityError(
                    f"{text!r} has the unit {unit!r}, which differs from {right!r} by capitals",
                    "capitals count: m is a thousandth and M a million, s is a second and S a siemens",
                    f"write {number}{' ' if spelling else ''}{right} if that is what is meant",
                )
    for other, its in _KINDS.items():
        if other != kind and (
            any(unit == prefix + spelling for spelling in its.spellings for prefix in ("", *_prefixes(its.prefixes)))
            or (in_words(unit, other, its.prefixes) and not in_words(unit, kind, how.prefixes))
        ):
            raise QuantityError(
                f"{text!r} is {its.article}, not {how.article}",
                f"{how.article} is measured in {how.unit}",
                f"write it like {how.example}",
            )
    raise QuantityError(
        f"{text!r} has the unit {unit!r}, which is not one of {how.article}",
        f"{how.article} is measured in {how.unit}"
        + (f", with a prefix of {_listed(how.prefixes)} or none" if how.prefixes else ", with no prefix"),
        reworded(number, unit, kind, how.prefixes, how.unit) or f"write it like {how.example}",
    )


def _listed(letters: str) -> str:
    """``mkM`` as ``m, k, M``; the accepted other spelling of kilo is not advertised."""
    return ", ".join(letters.replace("K", ""))


def _code(text: str, clean: str, kind: str) -> tuple[str, int]:
    """A text whose decimal point is a letter: 4k7, 2u2, R47, 3V3."""
    how = _KINDS[kind]
    match = _CODE.fullmatch(clean)
    if match:
        letter, after = match["letter"], match["unit"]
        if after and (after == "R" or after not in how.spellings):
            match = None
        elif letter in _prefixes(how.code) or (letter and letter in how.point):
            number = f"{match['sign']}{match['whole'] or '0'}.{match['part']}"
            return number, 0 if letter in how.point else _exponent(letter)
        elif how.code:
            raise QuantityError(
                f"{text!r} has the letter {letter!r} for a decimal point, which is not one of {how.article}",
                f"the letters are {_listed(how.point + how.code)}, and capitals count",
                f"write it like {how.example}",
            )
    words = re.fullmatch(r"([+-]?[0-9]+(?:\.[0-9]+)?) *([^0-9]+)", clean)
    raise QuantityError(
        f"{_shown(text)} is not {how.article}",
        "it is not a decimal number followed by a unit" + (", nor a code of IEC 60062" if how.code else ""),
        (reworded(words[1], words[2], kind, how.prefixes, how.unit) if words else "") or f"write it like {how.example}",
    )


def _float(text: str, number: str, exponent: int, how: _Kind) -> float:
    """The number times ten to the exponent, rounded once."""
    mantissa, _, power = number.lower().partition("e")
    if how.unit == "%":
        exponent -= 2
    value = float(f"{mantissa}e{int(power or '0') + exponent}")
    if how.unit == "cents":
        value /= CENTS_PER_VOLT
    if math.isinf(value) or (value == 0.0 and re.search("[1-9]", mantissa)):
        raise QuantityError(
            f"{text!r} is out of range",
            f"no {how.article.partition(' ')[2]} is that {'large' if value else 'small'}",
            f"write it like {how.example}",
        )
    if value < 0.0 and not how.signed:
        raise QuantityError(
            f"{text!r} is negative",
            f"{how.article} has no sign",
            f"write it like {how.example}",
        )
    return value + 0.0  # -0.0 becomes 0.0


def _scaled(value: float, digits: int, prefixes: tuple[str, ...]) -> tuple[str, str]:
    """The value rounded to some digits, as a plain decimal and the prefix that makes it 1 to 999."""
    rounded = Decimal(f"{value:.{digits - 1}e}")
    if not rounded:
        return "0", "" if "" in prefixes else prefixes[-1]
    fitting = [p for p in prefixes if _EXPONENTS[p] <= rounded.adjusted()]
    prefix = fitting[-1] if fitting else prefixes[0]
    plain = f"{rounded.scaleb(-_EXPONENTS[prefix]):f}"
    if "." in plain:
        plain = plain.rstrip("0").rstrip(".")
    return plain, prefix
