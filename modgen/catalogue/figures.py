"""What figures a record of each kind has, how each is written, and what bounds physics sets it."""

from __future__ import annotations

import math
import re
from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache
from types import MappingProxyType

from modgen.units import UNITS, QuantityError, parse_quantity

#: units that only catalogue figures have: unit text to its factor in base SI
_MEASURES: Mapping[str, tuple[str, Mapping[str, float], str]] = MappingProxyType(
    {
        "temperature": ("a temperature", {"°C": 1.0, "degC": 1.0}, "300 °C"),
        "angle": ("an angle", {"deg": 1.0, "°": 1.0}, "280 deg"),
        "interval": ("a temperature difference", {"K": 1.0}, "10 K"),
        "drift": ("a drift", {"V/K": 1.0, "mV/K": 1e-3, "µV/K": 1e-6, "nV/K": 1e-9}, "10 µV/K"),
        "slew": ("a slew rate", {"V/s": 1.0, "V/ms": 1e3, "V/µs": 1e6}, "13 V/µs"),
        "noise": ("a noise density", {"V/√Hz": 1.0, "µV/√Hz": 1e-6, "nV/√Hz": 1e-9}, "18 nV/√Hz"),
        "gain": ("a gain", {"V/V": 1.0, "V/mV": 1e3, "V/µV": 1e6}, "25 V/mV or 88 dB"),
        "rate": ("a leakage rate", {"/s": 1.0}, "0.01 /s, which is 0.01 µA for each µF and V"),
    }
)
_NUMBER_AND_UNIT = re.compile(r"([+-]?[0-9]+(?:\.[0-9]+)?) *(\S+)")
_SAME = str.maketrans({"\u03bc": "µ", "\u2212": "-", "\u00a0": " "})
_FLAGS: Mapping[str, bool] = MappingProxyType({"yes": True, "true": True, "no": False, "false": False})


@dataclass(frozen=True)
class Figure:
    """One figure of a record.

    kind: a kind of quantity that :mod:`modgen.units` reads, one of the measures above, ``word`` or
    ``flag``. least: the figure must be larger (``inclusive``: or equal). most: it must not be larger.
    """

    kind: str
    required: bool = True
    least: float = 0.0
    inclusive: bool = False
    most: float = math.inf
    words: tuple[str, ...] = ()


def _some(kind: str, **how: object) -> Figure:
    return Figure(kind, inclusive=True, **how)  # type: ignore[arg-type]


def _may(kind: str) -> Figure:
    return Figure(kind, required=False, inclusive=True)


_TOLERANCE = Figure("ratio", most=0.9)
_ANY_VOLTAGE = Figure("voltage", least=-math.inf)

#: per kind of part: the figures of its record, by the record's own field names
FIGURES: Mapping[str, Mapping[str, Figure]] = MappingProxyType(
    {
        "resistor": {
            "resistance": Figure("resistance"),
            "tolerance": _TOLERANCE,
            "power": Figure("power"),
            "voltage": Figure("voltage"),
            "series": Figure("word", words=("E3", "E6", "E12", "E24", "E48", "E96", "E192")),
        },
        "capacitor": {
            "capacitance": Figure("capacitance"),
            "tolerance": _TOLERANCE,
            "voltage": Figure("voltage"),
            "dielectric": Figure(
                "word",
                words=("film-pp", "film-pet", "film-pps", "c0g", "x7r", "electrolytic", "bipolar-electrolytic"),
            ),
            "polarised": _may("flag"),
            "series": Figure("word", words=("E3", "E6", "E12", "E24", "E48", "E96", "E192")),
            "insulation_resistance": _may("resistance"),
            "insulation_time": _may("time"),
            "leakage_rate": _may("rate"),
            "leakage_floor": _may("current"),
            "leakage_sum": _may("flag"),
            "derating": Figure("ratio", most=1.0),
        },
        "diode": {
            "reverse_voltage": Figure("voltage"),
            "forward_current": Figure("current"),
            "forward": Figure("forward"),
            "leakage": Figure("current"),
            "schottky": Figure("flag"),
        },
        "amplifier": {
            "type": Figure("word"),
            "sections": Figure("count"),
            "input": Figure("word", words=("jfet", "cmos", "bipolar")),
            "supply_absolute": Figure("voltage"),
            "supply_least": Figure("voltage"),
            "supply_most": Figure("voltage"),
            "offset_typical": _some("voltage"),
            "offset_max": Figure("voltage"),
            "offset_drift": _some("drift"),
            "bias_typical": _some("current"),
            "bias_max": Figure("current"),
            "bias_doubling": _some("interval"),
            "common_mode_low": _ANY_VOLTAGE,
            "common_mode_high": _ANY_VOLTAGE,
            "swing_low": _some("voltage"),
            "swing_high": _some("voltage"),
            "quiescent_typical": Figure("current"),
            "quiescent_max": Figure("current"),
            "gain_bandwidth": Figure("frequency"),
            "slew_rate": Figure("slew"),
            "short_circuit_least": Figure("current"),
            "short_circuit_typical": Figure("current"),
            "short_circuit_most": Figure("current"),
            "cmrr": Figure("gain", least=1.0),
            "gain": Figure("gain", least=1.0),
            "output_resistance": Figure("resistance"),
            "clamp_current": Figure("current"),
            "phase_reversal": Figure("flag"),
            "capacitive_load": Figure("capacitance"),
            "noise_density": Figure("noise"),
            "dissipation": Figure("power"),
            "ground_input_through_resistor": _may("flag"),
            "sink_near_negative": _may("current"),
        },
        "control": {
            "resistance": Figure("resistance"),
            "tolerance": _TOLERANCE,
            "taper": Figure("word", words=("linear", "log", "reverse-log")),
            "middle": Figure("ratio", most=0.99),
            "end_resistance": _some("resistance"),
            "end_share": _some("ratio", most=0.5),
            "power": Figure("power"),
            "voltage": Figure("voltage"),
            "travel": Figure("angle", most=3600.0),
            "solder_temperature": Figure("temperature", least=150.0, most=500.0),
            "solder_time": Figure("time"),
        },
        "jack": {
            "voltage": Figure("voltage"),
            "current": Figure("current"),
            "panel_hole": Figure("length"),
        },
        "switch": {
            "voltage": Figure("voltage"),
            "current": Figure("current"),
            "panel_hole": Figure("length"),
        },
        "header": {
            "current": Figure("current"),
            "voltage": Figure("voltage"),
        },
        "": {},  # a body of its own has no electrical figures
    }
)

#: the figure that ``values`` lists
VALUE_OF: Mapping[str, str] = MappingProxyType(
    {"resistor": "resistance", "capacitor": "capacitance", "control": "resistance"}
)


def read_figure(figure: Figure, text: str) -> float | bool | int | str:
    """Read one figure from its text.

    Parameters
    ----------
    figure : Figure
        What is expected; not of kind ``forward``.
    text : str
        As written: ``4 V``, ``13 V/µs``, ``88 dB``, ``yes``, ``jfet``.

    Returns
    -------
    float, bool, int or str
        In base SI units; gains and rejections as ratios [-], angles in degrees, temperatures in degC.

    Raises
    ------
    QuantityError
        When it is not understood or outside its bounds.
    """
    if figure.kind == "word":
        return _word(figure, text)
    if figure.kind == "flag":
        if text not in _FLAGS:
            raise QuantityError(
                f"'{text}' is neither yes nor no", "this says whether something is so", "write yes or no"
            )
        return _FLAGS[text]
    if figure.kind == "count":
        if not re.fullmatch(r"[1-9][0-9]?", text):
            raise QuantityError(f"'{text}' is not a small whole number", "parts are counted", "write 2, for example")
        return int(text)
    value = _quantity(text, figure.kind) if figure.kind in UNITS else _measure(figure.kind, text)
    _bounded(figure, text, value)
    return value


@lru_cache(maxsize=2000)
def _quantity(text: str, kind: str) -> float:
    """A quantity; the rows of a catalogue repeat few texts many times."""
    return parse_quantity(text, kind)


def _bounded(figure: Figure, text: str, value: float) -> None:
    """Refuse what no real part has."""
    if value < figure.least or (value == figure.least and not figure.inclusive):
        bound = f"{figure.least:g}" + ("" if figure.inclusive else " or less")
        raise QuantityError(
            f"'{text}' is too small",
            f"no real part has {'less than ' if figure.inclusive else ''}{bound} here",
            "check the sign and the unit",
        )
    if value > figure.most or not math.isfinite(value):
        bound = f"{figure.most:g}" if figure.kind != "ratio" else f"{figure.most * 100:g} %"
        raise QuantityError(f"'{text}' is too large", f"no real part has more than {bound} here", "check the unit")


def _word(figure: Figure, text: str) -> str:
    if not text:
        raise QuantityError("nothing is written here", "a word is needed", "write it")
    if figure.words and text not in figure.words:
        raise QuantityError(
            f"'{text}' is not known here", f"known here: {', '.join(figure.words)}", "use one of the known words"
        )
    return text


def _measure(kind: str, text: str) -> float:
    """A number with one of the units that only the catalogue has."""
    name, factors, example = _MEASURES[kind]
    match = _NUMBER_AND_UNIT.fullmatch(text.translate(_SAME).strip())
    if match:
        number, unit = float(match[1]), match[2]
        unit = re.sub(r"^u(?=V)|(?<=/)u(?=[sV])", "µ", unit).replace("rtHz", "√Hz")
        if kind == "gain" and unit == "dB":
            return float(10.0 ** (number / 20.0)) if abs(number) <= 400 else math.inf
        if unit in factors:
            return _times(number, factors[unit])
    raise QuantityError(
        f"'{text}' is not {name}", f"{name} is a number and one of {', '.join(factors)}", f"write it like {example}"
    )


def _times(number: float, factor: float) -> float:
    """The product, rounded once where the factor is a negative power of ten."""
    return number / round(1.0 / factor) if factor < 1.0 else number * factor
