"""What is printed on parts: colour bands, letter codes (IEC 60062) and the three-digit code of capacitors."""

from __future__ import annotations

from collections.abc import Mapping
from decimal import Decimal
from types import MappingProxyType

from modgen.units.quantity import VALUE_DIGITS, format_quantity

#: Colour to (digit [-], power of ten of the multiplier [-], tolerance as a fraction [-]); None where it has
#: none. In the order of the digits, then the metals and pink. Tolerances are those of the 2016 edition, in
#: which grey is 0.01 % (0.05 % in earlier ones).
BANDS: Mapping[str, tuple[int | None, int | None, float | None]] = MappingProxyType(
    {
        "black": (0, 0, None),
        "brown": (1, 1, 0.01),
        "red": (2, 2, 0.02),
        "orange": (3, 3, 0.0005),
        "yellow": (4, 4, 0.0002),
        "green": (5, 5, 0.005),
        "blue": (6, 6, 0.0025),
        "violet": (7, 7, 0.001),
        "grey": (8, 8, 0.0001),
        "white": (9, 9, None),
        "gold": (None, -1, 0.05),
        "silver": (None, -2, 0.10),
        "pink": (None, -3, None),
    }
)

_DIGIT = {digit: colour for colour, (digit, _, _) in BANDS.items() if digit is not None}
_MULTIPLIER = {power: colour for colour, (_, power, _) in BANDS.items() if power is not None}
_TOLERANCE = {tolerance: colour for colour, (_, _, tolerance) in BANDS.items() if tolerance is not None}

_NO_BAND = 0.20  # a tolerance of 20 % has no band of its own

_LETTERS: Mapping[float, str] = MappingProxyType(
    {
        0.00005: "E",
        0.0001: "L",
        0.0002: "P",
        0.0005: "W",
        0.001: "B",
        0.0025: "C",
        0.005: "D",
        0.01: "F",
        0.02: "G",
        0.03: "H",
        0.05: "J",
        0.10: "K",
        0.20: "M",
        0.30: "N",
    }
)

_RKM: Mapping[str, tuple[tuple[int, str], ...]] = MappingProxyType(
    {
        "resistance": ((12, "T"), (9, "G"), (6, "M"), (3, "K"), (0, "R")),
        "capacitance": ((0, "F"), (-3, "m"), (-6, "u"), (-9, "n"), (-12, "p")),
    }
)


def colour_bands(resistance: float, tolerance: float, digits: int = 3) -> tuple[str, ...]:
    """Colours to look for on a resistor, from the first band to the tolerance.

    Parameters
    ----------
    resistance : float
        Nominal resistance; 0 is a wire link, which has one black band. [ohm]
    tolerance : float
        As a fraction; 0.2 has no band. [-]
    digits : int
        Significant digits: 3 for the five-band code (usual at 2 % and better), 2 for the four-band code. [-]

    Returns
    -------
    tuple of str
        Colour names, keys of :data:`BANDS`.

    Raises
    ------
    ValueError
        When the resistance has more digits, or the code has no colour for its multiplier or tolerance.

    References
    ----------
    IEC 60062:2016, Marking codes for resistors and capacitors, clause on the colour code.

    Examples
    --------
    >>> colour_bands(4700.0, 0.01)
    ('yellow', 'violet', 'black', 'brown', 'brown')
    >>> colour_bands(4700.0, 0.05, digits=2)
    ('yellow', 'violet', 'red', 'gold')
    """
    if digits not in (2, 3):
        raise ValueError(f"{digits} significant digits: the colour code has two or three")
    if resistance == 0.0:
        return ("black",)
    shown = _checked(resistance, "resistance")
    figures, power = _figures(resistance, digits, shown, "colour bands")
    if power not in _MULTIPLIER:
        raise ValueError(f"{shown} has no colour code: there is no colour for a multiplier of 10^{power}")
    bands = (*(_DIGIT[int(figure)] for figure in figures), _MULTIPLIER[power])
    if _same(tolerance, _NO_BAND):
        return bands
    for known, colour in _TOLERANCE.items():
        if _same(tolerance, known):
            return (*bands, colour)
    raise ValueError(f"a tolerance of {format_quantity(tolerance, 'ratio', VALUE_DIGITS)} has no colour")


def capacitor_code(capacitance: float) -> str:
    """The three digits printed on a capacitor: two figures and the number of zeros, in picofarads.

    Parameters
    ----------
    capacitance : float
        Nominal capacitance. [F]

    Returns
    -------
    str
        ``104`` for 100 nF; below 10 pF the third digit is 9, for a tenth: ``479`` for 4.7 pF.

    Raises
    ------
    ValueError
        When two significant digits do not say it, or it is below 1 pF or above 990 uF.

    Examples
    --------
    >>> capacitor_code(100e-9), capacitor_code(4.7e-12)
    ('104', '479')
    """
    shown = _checked(capacitance, "capacitance")
    figures, power = _figures(capacitance, 2, shown, "the three-digit code")
    zeros = power + 12
    if not -1 <= zeros <= 7:  # the third digits 8 and 9 are fractions, not zeros
        raise ValueError(f"{shown} has no three-digit code, which reaches from 1 pF to 990 µF")
    return figures + ("9" if zeros == -1 else str(zeros))


def rkm_code(value: float, kind: str) -> str:
    """The letter code of a value: a letter stands for the decimal point and the multiplier.

    Parameters
    ----------
    value : float
        Nominal value. [ohm] or [F]
    kind : str
        ``resistance`` (letters R, K, M, G, T) or ``capacitance`` (p, n, u, m, F). [-]

    Returns
    -------
    str
        ``4K7``, ``R47``, ``470R``, ``1M0``; ``100n``, ``2u2``, ``p47``.

    Raises
    ------
    ValueError
        When the value is not above zero.
    KeyError
        When there is no code for the kind.

    References
    ----------
    IEC 60062:2016, Marking codes for resistors and capacitors, clause on the letter and digit code.

    Examples
    --------
    >>> rkm_code(4700.0, "resistance"), rkm_code(2.2e-6, "capacitance")
    ('4K7', '2u2')
    """
    letters = _RKM[kind]
    _checked(value, kind)
    number = Decimal(f"{value:.{VALUE_DIGITS - 1}e}")
    power, letter = next(((p, x) for p, x in letters if number.adjusted() >= p), letters[-1])
    whole, _, part = f"{number.scaleb(-power):f}".partition(".")
    part = part.rstrip("0")
    if whole == "0":  # R47, R10: two figures at least
        return letter + part.ljust(2, "0")
    # 4K7, 470R; a single figure takes a nought behind the letter: 1M0
    return whole + letter + (part or ("0" if len(whole) == 1 else ""))


def tolerance_letter(tolerance: float) -> str:
    """The letter for a symmetrical tolerance.

    Parameters
    ----------
    tolerance : float
        As a fraction. [-]

    Returns
    -------
    str
        ``J`` for 0.05.

    Raises
    ------
    ValueError
        When there is no letter for it.

    References
    ----------
    IEC 60062:2016, Marking codes for resistors and capacitors, clause on tolerances.

    Examples
    --------
    >>> tolerance_letter(0.05), tolerance_letter(0.01)
    ('J', 'F')
    """
    for known, letter in _LETTERS.items():
        if _same(tolerance, known):
            return letter
    raise ValueError(f"a tolerance of {format_quantity(tolerance, 'ratio', VALUE_DIGITS)} has no letter")


def _checked(value: float, kind: str) -> str:
    """The value as text for a message, after refusing what no part has."""
    shown = format_quantity(value, kind, VALUE_DIGITS)
    if not 0.0 < value < float("inf"):
        raise ValueError(f"{shown} is not the {kind} of a part")
    return shown


def _figures(value: float, digits: int, shown: str, code: str) -> tuple[str, int]:
    """The significant digits as text, and the power of ten they are multiplied by."""
    number = Decimal(f"{value:.{VALUE_DIGITS - 1}e}")
    power = number.adjusted() - digits + 1
    figures = number.scaleb(-power)
    if figures != figures.to_integral_value():
        raise ValueError(f"{shown} has more than {digits} significant digits, which {code} cannot show")
    return str(int(figures)), power


def _same(one: float, other: float) -> bool:
    """Whether two tolerances are the same number but for binary rounding."""
    return abs(one - other) < 1e-9
