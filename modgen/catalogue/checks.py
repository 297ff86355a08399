"""What the figures of one part must be to each other; single figures are bounded where they are read."""

from __future__ import annotations

import itertools
from typing import Any

from modgen.catalogue.figures import FIGURES, VALUE_OF
from modgen.catalogue.layers import Layer
from modgen.documents import Node
from modgen.formulas.series import in_series
from modgen.problems import Place, Problem
from modgen.units import format_quantity

#: figures of an amplifier that must not fall from left to right
RISING: tuple[tuple[str, ...], ...] = (
    ("supply_least", "supply_most", "supply_absolute"),
    ("offset_typical", "offset_max"),
    ("bias_typical", "bias_max"),
    ("quiescent_typical", "quiescent_max"),
    ("short_circuit_least", "short_circuit_typical", "short_circuit_most"),
)


def check_figures(kind: str, layer: Layer, problems: list[Problem]) -> None:
    """Report figures of a row that contradict each other."""
    if kind == "amplifier":
        _amplifier(layer, problems)
    elif kind == "control":
        _taper(layer, problems)
    elif kind == "capacitor":
        _capacitor(layer, problems)


def _amplifier(layer: Layer, problems: list[Problem]) -> None:
    figures: dict[str, Any] = layer.figures
    for names in RISING:
        for low, high in itertools.pairwise(names):
            if low in figures and high in figures and figures[low] > figures[high]:
                problems.append(
                    Problem(
                        max(layer.places[low], layer.places[high]),
                        f"{low} {_text(low, figures)} is above {high} {_text(high, figures)}",
                        f"{' <= '.join(names)} holds for every part",
                        "exchange them or check the units",
                    )
                )
    for low, high in (("swing_low", "swing_high"), ("common_mode_low", "common_mode_high")):
        if all(name in figures for name in (low, high, "supply_most")) and (
            figures[low] + figures[high] >= figures["supply_most"]
        ):
            problems.append(
                Problem(
                    max(layer.places[low], layer.places[high]),
                    f"{low} and {high} leave nothing of supply_most {_text('supply_most', figures)}",
                    "both are headrooms from the rails",
                    "write how far from each rail, not how far from 0 V",
                )
            )


def _taper(layer: Layer, problems: list[Problem]) -> None:
    taper, middle = layer.figures.get("taper"), layer.figures.get("middle")
    if not isinstance(taper, str) or not isinstance(middle, float):
        return
    if {"linear": middle != 0.5, "log": middle >= 0.5, "reverse-log": middle <= 0.5}[taper]:
        problems.append(
            Problem(
                max(layer.places["taper"], layer.places["middle"]),
                f"middle is {format_quantity(middle, 'ratio')} on a {taper} taper",
                "half way a linear control stands at 50 %, a log one below, a reverse-log one above",
                "check taper and middle",
            )
        )


def _capacitor(layer: Layer, problems: list[Problem]) -> None:
    dielectric, polarised = layer.figures.get("dielectric"), layer.figures.get("polarised", False)
    if isinstance(dielectric, str) and polarised != (dielectric == "electrolytic"):
        problems.append(
            Problem(
                layer.places.get("polarised", layer.places["dielectric"]),
                f"the dielectric {dielectric} is {'' if polarised else 'not '}stated to be polarised",
                "an electrolytic is polarised, every other kind is not",
                "correct polarised, or write bipolar-electrolytic",
            )
        )


def check_series(
    kind: str,
    layer: Layer,
    node: Node | None,
    values: list[tuple[float | None, Place]],
    problems: list[Problem],
) -> None:
    """Report the values that are not in the series the family is sold in; of a listed series the first."""
    series, name = layer.figures.get("series"), VALUE_OF.get(kind, "")
    if not isinstance(series, str):
        return
    listed = node.get("series") if node is not None else None
    if listed is not None and listed.text == series:
        return  # they were taken out of it
    said: set[Place] = set()
    for listed_value, place in values:
        value = layer.figures.get(name) if listed_value is None else listed_value
        if isinstance(value, float) and place not in said and not in_series(value, series):
            said.add(place)
            problems.append(
                Problem(
                    place,
                    f"{format_quantity(value, name)} is not in {series}, the series this family is sold in",
                    "a value outside its series cannot be ordered",
                    "correct the value or the series",
                )
            )


def _text(name: str, figures: dict[str, Any]) -> str:
    """A figure of an amplifier as people write it."""
    return format_quantity(figures[name], FIGURES["amplifier"][name].kind)
