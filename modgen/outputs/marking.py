"""What is printed on a part, as somebody at the bench reads it, and which way round it goes.

Marks follow IEC 60062 where it has one. Where makers differ, the words say so instead of guessing.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from contextlib import suppress

from modgen.catalogue.records import Amplifier, Capacitor, Control, Diode, Header, Resistor
from modgen.catalogue.records import Part as Record
from modgen.outputs.pages import Cell
from modgen.outputs.partwords import order_words
from modgen.outputs.wording import pin_words
from modgen.units import capacitor_code, colour_bands, rkm_code, tolerance_letter, value_text

#: Chips shorter than this have nothing printed on them [m]: 1005 metric and smaller. Common practice.
LEAST_PRINTED_CHIP = 1.5e-3

#: Resistors of this tolerance and better carry five bands [-]. Common practice.
FIVE_BANDS = 0.02

#: What an open pin is on.
OPEN = "nothing"

UNMARKED = "nothing is printed: take it from its labelled strip or bag, one value at a time"


def chip_code(resistance: float, figures: int = 4) -> str:
    """The number on a chip resistor: significant figures, then the count of zeros; R is a decimal point.

    Parameters
    ----------
    resistance
        Nominal value. [ohm]
    figures
        Characters in the code: 4 for 1 % parts, 3 for 5 % parts. [-]

    Returns
    -------
    str
        ``1002`` for 10 kilohm, ``4701`` for 4.7 kilohm, ``47R0`` for 47 ohm; ``103`` with three figures.

    Notes
    -----
    Common practice of makers; IEC 60062 describes the same three- and four-character codes.

    Examples
    --------
    >>> chip_code(10e3), chip_code(4700.0), chip_code(47.0), chip_code(10e3, 3), chip_code(4.7, 3)
    ('1002', '4701', '47R0', '103', '4R7')
    """
    significant = figures - 1
    mantissa, _, power = f"{resistance:.{significant - 1}e}".partition("e")
    digits, zeros = mantissa.replace(".", ""), int(power) - (significant - 1)
    if zeros >= 0:
        return f"{digits}{zeros}"
    whole = int(power) + 1
    if whole <= 0:
        return f"R{'0' * -whole}{digits}"[: figures + 1]
    return f"{digits[:whole]}R{digits[whole:]}"


def printed(record: Record) -> Cell:
    """What is printed on a part.

    Parameters
    ----------
    record
        From the catalogue. [-]

    Returns
    -------
    Cell
        Colour bands for resistors with leads, else words.
    """
    if isinstance(record, Resistor):
        return _resistor(record)
    if isinstance(record, Capacitor):
        return _capacitor(record)
    if isinstance(record, Diode):
        mark = "" if record.mount == "through-hole" else " (or the maker's short code for it)"
        return Cell(f"{_type_number(record)}{mark}, and a band at the cathode")
    if isinstance(record, Amplifier):
        return Cell(f"{_type_number(record)}, with the maker's letters and a date code beside it")
    if isinstance(record, Control):
        return Cell(
            f"{value_text(record.resistance).upper()}, {record.taper} taper",
            more=("makers use different letters for the taper: go by the label of the bag",),
        )
    return Cell("nothing to read: there is one kind")


def _resistor(record: Resistor) -> Cell:
    if record.mount != "surface":
        return _bands(record)
    if record.body.length < LEAST_PRINTED_CHIP:
        return Cell(UNMARKED)
    codes = [chip_code(record.resistance)]
    if float(f"{record.resistance:.1e}") == record.resistance:
        codes.append(chip_code(record.resistance, 3))
    return Cell(" or ".join(codes))


def _bands(record: Resistor) -> Cell:
    """Five bands at 2 % and better, else four; five again for a value that four cannot say."""
    for digits in (3,) if record.tolerance <= FIVE_BANDS else (2, 3):
        try:
            return Cell(bands=colour_bands(record.resistance, record.tolerance, digits))
        except ValueError:
            continue
    return Cell(
        f"{rkm_code(record.resistance, 'resistance')} or the value in figures",
        more=("the colour code cannot say this value and tolerance: measure it",),
    )


def _capacitor(record: Capacitor) -> Cell:
    volts = f"{record.voltage:g}"
    if "electrolytic" in record.dielectric:
        micro = f"{record.capacitance * 1e6:g}"
        if not record.polarised:
            return Cell(f"{micro} µF {volts} V, and BP or NP: no stripe")
        where = "a stripe of minus signs" if record.mount != "surface" else "a dark segment on the top, at minus"
        return Cell(f"{micro} µF {volts} V, and {where}")
    if record.mount == "surface":
        return Cell(UNMARKED)
    code = rkm_code(record.capacitance, "capacitance").replace("u", "µ")
    with suppress(ValueError):  # a value of more than two figures, or a tolerance without a letter
        code = f"{capacitor_code(record.capacitance)}{tolerance_letter(record.tolerance)} or {code}"
    return Cell(code, more=(f"often with {volts} for the voltage",))


def _type_number(record: Record) -> str:
    code, _ = order_words(record)
    return code or "its type number"


def net_words(net: str) -> str:
    """A net as the notes name it: the channel's number left open, so that channels share a line.

    Parameters
    ----------
    net
        As in the netlist. [-]

    Returns
    -------
    str
        ``CHk_GLIDE`` for ``CH3_GLIDE``; ``0 V`` for ``0V``; others as they are.
    """
    net = re.sub(r"^CH\d+_", "CHk_", net)
    return {"0V": "0\u00a0V", "V-": "V\u2212", "BUS-": "BUS\u2212"}.get(net, net) or OPEN


def orientation(record: Record, pins: Mapping[str, str]) -> Cell:
    """Which way round a part goes, with a sketch where that matters.

    Parameters
    ----------
    record
        From the catalogue. [-]
    pins
        Pin number to net name, from the netlist. [-]

    Returns
    -------
    Cell
        Empty text when either way is right.
    """
    surface = record.mount == "surface"
    if isinstance(record, Diode):
        return Cell(
            f"band = cathode = pin 1, to {net_words(pins.get('1', ''))}",
            more=(f"anode = pin 2, to {net_words(pins.get('2', ''))}",),
            sketch="diode-chip" if surface else "diode",
        )
    if isinstance(record, Capacitor) and record.polarised:
        return Cell(
            f"+ = pin 1, to {net_words(pins.get('1', ''))}",
            more=(
                f"\u2212 = pin 2, to {net_words(pins.get('2', ''))}",
                "the dark segment is\u00a0\u2212"
                if surface
                else "the longer lead is\u00a0+, the stripe is\u00a0\u2212",
            ),
            sketch="electrolytic-chip" if surface else "electrolytic",
        )
    if isinstance(record, Amplifier):
        return Cell(
            "pin 1 at the dot, or left of the notch with the notch up",
            more=(
                f"pin {record.positive_pin} on {net_words(pins.get(record.positive_pin, ''))}, "
                f"pin {record.negative_pin} on {net_words(pins.get(record.negative_pin, ''))}",
            ),
            sketch="package",
            pins=len(record.pins),
        )
    if isinstance(record, Header):
        return _header(pins)
    if isinstance(record, Control):
        return Cell("shaft through the panel; clockwise is slower")
    return Cell("")


def _header(pins: Mapping[str, str]) -> Cell:
    by_net: dict[str, list[str]] = {}
    for number in sorted(pins, key=int):
        by_net.setdefault(net_words(pins[number]), []).append(number)
    words = [f"{pin_words(numbers)}: {'not connected' if net == OPEN else net}" for net, numbers in by_net.items()]
    negative = "BUS\u2212" in by_net
    stripe = (
        "the cable's coloured stripe goes to pin 1, the negative rail"
        if negative
        else "the cable's coloured stripe goes to pin 1, which is not connected here"
    )
    return Cell(stripe, more=tuple(words), sketch="header")
