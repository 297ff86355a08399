"""Small frozen pieces of a board: a section, a socket, a neighbour; and reading numbers in fields."""

from __future__ import annotations

import re
from dataclasses import dataclass

from modgen.catalogue.records import Amplifier
from modgen.units import QuantityError, read_value

_FIELD = re.compile(r"(?P<number>[0-9][0-9.]*\s*[fpnu\u00b5\u03bcmkMGR]?)\s*(?P<unit>%|V|W|A|F|[\u03a9\u2126])?")


@dataclass(frozen=True)
class Section:
    """One amplifier of a package; nets are None where a pin is open."""

    package: str
    index: int
    record: Amplifier
    pins: tuple[str, str, str]  # output, inverting, non-inverting
    output: str | None
    inverting: str | None
    noninverting: str | None
    positive: str | None
    negative: str | None

    @property
    def follower(self) -> bool:
        """Whether the output is tied straight to the inverting input."""
        return self.output is not None and self.output == self.inverting

    @property
    def name(self) -> str:
        """Reference and letter, as people say it: ``U1A``."""
        return f"{self.package}{chr(ord('A') + self.index)}"


@dataclass(frozen=True)
class Jack:
    """A socket and the nets of tip, tip switch and sleeve; None where a contact is open."""

    ref: str
    tip: str | None
    switch: str | None
    sleeve: str | None


#: positions of a panel switch, each with the throw that it joins to the common pin 2
POSITIONS = {"1-2": "1", "2-3": "3"}


@dataclass(frozen=True)
class Contact:
    """A contact of a panel switch: closed in one position, ``1-2`` or ``2-3``, where it joins two nets."""

    ref: str
    position: str
    common: str  # net of pin 2
    throw: str  # net of pin 1 or 3


@dataclass(frozen=True)
class Neighbour:
    """A part seen from one of its nets: its pin there, and the net and pin on its other side."""

    ref: str
    kind: str
    pin: str
    net: str
    other_pin: str


def reference_order(ref: str) -> tuple[str, int, str]:
    """Sort key that puts R2 before R10."""
    letters = ref.rstrip("0123456789")
    digits = ref[len(letters) :]
    return letters, int(digits) if digits else 0, ref


def field_number(text: str) -> float | None:
    """Read a field such as ``63V``, ``0.25W`` or ``1%``; a percentage becomes a fraction.

    Parameters
    ----------
    text
        The field as it stands in the netlist. [-]

    Returns
    -------
    float or None
        The number in base SI units, None when the field is empty or not a number.
    """
    match = _FIELD.fullmatch(text.strip().lstrip("±"))
    if match is None:
        return None
    try:
        number = read_value(match["number"].replace(" ", ""))
    except QuantityError:
        return None
    return number / 100 if match["unit"] == "%" else number
