"""One row of a family to the parts it stands for: what it lacks, whether its figures agree, its records."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

from modgen.catalogue.checks import check_figures, check_series
from modgen.catalogue.figures import FIGURES, VALUE_OF, read_figure
from modgen.catalogue.layers import Known, Layer
from modgen.catalogue.packages import AMPLIFIER_PINS, PACKAGES, pins_of
from modgen.catalogue.readings import article, items_of
from modgen.catalogue.records import (
    Amplifier,
    Body,
    Capacitor,
    Control,
    Diode,
    Evidence,
    Header,
    Jack,
    Part,
    Resistor,
    Switch,
)
from modgen.documents import Fields, Node, shown, unknown
from modgen.formulas.series import SERIES, series_values
from modgen.problems import Place, Problem
from modgen.units import QuantityError, rkm_code

#: kind of part to its record
RECORDS: dict[str, Callable[..., Part]] = {
    "resistor": Resistor,
    "capacitor": Capacitor,
    "control": Control,
    "diode": Diode,
    "amplifier": Amplifier,
    "jack": Jack,
    "switch": Switch,
    "header": Header,
}
_SECTION_WORDS = {2: "dual", 4: "quad"}
_INSULATION = ("insulation_resistance", "insulation_time", "leakage_rate", "leakage_floor")
_EXAMPLE = "{series: E24, from: 1 Ω, to: 1 MΩ}"


@dataclass
class Row:
    """A row of a family, or a family that has no rows. ``layer`` already holds the family's figures."""

    family: str
    kind: str
    layer: Layer
    place: Place
    key: Node | None
    values: Node | None

    def __post_init__(self) -> None:
        # values out of a series are sold in it, unless the family says otherwise
        series = self.values.get("series") if self.values is not None else None
        if series is not None and series.text in SERIES and "series" in FIGURES[self.kind]:
            self.layer.figures.setdefault("series", series.text)

    def lacking(self) -> tuple[str, ...]:
        """What the row needs and does not state; what it states wrongly is reported where it stands."""
        layer = self.layer
        listed = VALUE_OF.get(self.kind) if self.values is not None else None
        out = [
            name
            for name, figure in FIGURES[self.kind].items()
            if figure.required and name not in layer.figures and name not in layer.places and name != listed
        ]
        if self.kind == "capacitor" and not any(name in layer.places for name in _INSULATION):
            out.append(f"{', '.join(_INSULATION[:-1])} or {_INSULATION[-1]}")
        if "description" not in layer.text:
            out.append("description")
        package = PACKAGES.get(str(layer.body.get("package")))
        if "body" not in layer.places:
            out.append("body")
        elif package is not None:
            out += [key for key in ("size", *package.needs) if key not in layer.body and key not in layer.places]
        elif "package" not in layer.places and "size" in layer.places:
            out.append("package")
        return tuple(out)

    def parts(self, known: Known, problems: list[Problem], *, complete: bool) -> Iterator[tuple[Part, Place]]:
        """Every part of the row and where it stands; none when it is not complete or has problems."""
        before = len(problems)
        if self.key is None and self.values is None:
            problems.append(
                Problem(
                    self.place,
                    f"this part of '{shown(self.family)}' has no key",
                    "a part is known by its key",
                    "add key: my-part, or values: to name the parts of a family by their value",
                )
            )
        if self.key is not None and (self.key.kind != "scalar" or not _is_key(self.key.text)):
            problems.append(
                self.key.problem(
                    f"the key is {self.key}",
                    "keys go into netlists and orders: lower-case letters, digits, '-' and '.'",
                    "write it like tl072-dip8",
                )
            )
        values = self._values(problems)
        check_figures(self.kind, self.layer, problems)
        check_series(self.kind, self.layer, self.values, values, problems)
        body, land_pattern = self._body(problems)
        evidence = self._evidence(known, problems)
        unread = [n for n, f in FIGURES[self.kind].items() if f.required and n not in self.layer.figures]
        if not complete or len(problems) > before or body is None or any(n != VALUE_OF.get(self.kind) for n in unread):
            return
        common = self._common(body, land_pattern, evidence)
        record = RECORDS[self.kind]
        for value, place in values:
            if value is not None:
                common[VALUE_OF[self.kind]] = value
            elif unread:
                continue  # the value itself was not understood
            common["key"] = self.key.text if self.key is not None else self._key_of(value or 0.0)
            yield record(**common), place

    def _common(self, body: Body, land_pattern: str, evidence: tuple[tuple[str, Evidence], ...]) -> dict[str, Any]:
        """The fields that all parts of the row share."""
        layer = self.layer
        common: dict[str, Any] = dict(layer.figures)
        if self.kind == "amplifier":
            sections = common["sections"]
            section_pins, positive, negative = AMPLIFIER_PINS[sections, body.pins]
            common |= {"section_pins": section_pins, "positive_pin": positive, "negative_pin": negative}
            pins = pins_of("amplifier", sections=sections, pins=body.pins)
        else:
            pins = pins_of(self.kind, polarised=bool(common.get("polarised", False)))
        return common | {
            "family": self.family,
            "kind": self.kind,
            "description": self._description(body),
            "note": layer.text.get("note", ""),
            "mount": PACKAGES[body.package].mount,
            "body": body,
            "land_pattern": land_pattern,
            "pins": pins,
            "order_code": layer.text.get("order_code", ""),
            "alternates": layer.alternates,
            "pack": layer.pack or 1,
            "prices": layer.prices,
            "evidence": evidence,
        }

    def _key_of(self, value: float) -> str:
        """``family``, taper or rated voltage where the kind has one, value: ``film-pet-5mm-63v-1u0``."""
        figures: dict[str, Any] = self.layer.figures
        middle = ""
        if self.kind == "control":
            middle = f"-{figures['taper']}"
        elif self.kind == "capacitor":
            middle = f"-{figures['voltage']:g}v"
        return f"{self.family}{middle}-{_code(value, VALUE_OF[self.kind])}"

    def _description(self, body: Body) -> str:
        """The family's words and what tells its parts from each other."""
        figures: dict[str, Any] = self.layer.figures
        text = self.layer.text["description"]
        if self.kind == "amplifier":
            return f"{text}, {_SECTION_WORDS[figures['sections']]}, {body.package.upper()}-{body.pins}"
        if self.kind == "control":
            return f"{text}, {figures['taper']}"
        return text

    def _values(self, problems: list[Problem]) -> list[tuple[float | None, Place]]:
        """What ``values`` lists, with where it stands; one None when the row is one part by key."""
        node = self.values
        if node is None:
            return [(None, self.place)]
        name = VALUE_OF.get(self.kind)
        if name is None:
            why = "its parts differ in more than one value"
            problems.append(node.problem(f"{article(self.kind)} has no values", why, "use key: instead"))
            return []
        if node.kind == "mapping":
            found = self._series(node, name, problems)
        else:
            read = [
                (_quantity(item, self.kind, name, problems), item.place) for item in items_of(node, "values", problems)
            ]
            found = [pair for pair in read if pair[0] is not None]
        if self.key is not None and len(found) > 1:
            problems.append(
                self.key.problem(
                    f"the key {self.key} is given to {len(found)} values",
                    "a key stands for one part",
                    "leave the key out: it is made from family and value",
                )
            )
        return found

    def _series(self, node: Node, name: str, problems: list[Problem]) -> list[tuple[float | None, Place]]:
        """The values of ``{series: E24, from: 1 Ω, to: 10 MΩ}``."""
        fields = Fields(node, problems, "values", _EXAMPLE)
        series, first, last = fields.take("series"), fields.take("from"), fields.take("to")
        fields.rest()
        if series is None or first is None or last is None:
            absent = [k for k, v in (("series", series), ("from", first), ("to", last)) if v is None]
            why = "a series is listed from its first value to its last"
            problems.append(node.problem(f"values has no {', '.join(absent)}", why, f"write it like {_EXAMPLE}"))
            return []
        if series.text not in SERIES:
            problems.append(unknown(series, SERIES, "series"))
            return []
        low, high = (_quantity(bound, self.kind, name, problems) for bound in (first, last))
        if low is None or high is None:
            return []
        span = f"values from {shown(first.text)} to {shown(last.text)}"
        if high < low:
            problems.append(
                first.problem(f"{span}: the first is above the last", "none is between", "exchange from and to")
            )
            return []
        if high / low > 1e12:
            problems.append(
                first.problem(f"{span} is more than twelve decades", "no family has that", "check the prefixes")
            )
            return []
        return [(value, node.place) for value in series_values(series.text, low, high)]

    def _body(self, problems: list[Problem]) -> tuple[Body | None, str]:
        """The body and its land pattern, or None and a problem."""
        given: dict[str, Any] = self.layer.body
        place = self.layer.places.get("body", self.place)
        word = given.get("package", "")
        if word not in PACKAGES:
            return None, ""  # reported where it stands
        package = PACKAGES[word]
        if self.kind not in package.holds:
            fit = ", ".join(name for name, other in PACKAGES.items() if self.kind in other.holds)
            problems.append(
                Problem(
                    place,
                    f"{article(self.kind)} does not come in the package '{word}'",
                    f"packages of {article(self.kind)}: {fit}",
                    "use one of these",
                )
            )
            return None, ""
        if any(key not in given for key in ("size", *package.needs)):
            return None, ""
        size: tuple[float, ...] = given["size"]
        if len(size) != (2 if package.round else 3):
            form = "diameter x height" if package.round else "length x width x height"
            example = "5 x 11 mm" if package.round else "7.2 x 2.5 x 6.5 mm"
            problems.append(
                Problem(
                    place,
                    f"the size of the package '{word}' has {len(size)} dimensions",
                    f"it is {form}",
                    f"write it like {example}",
                )
            )
            return None, ""
        pins = given["pin_count"] if "pin_count" in package.needs else package.pins
        sections = self.layer.figures.get("sections")
        if self.kind == "amplifier" and (sections, pins) not in AMPLIFIER_PINS:
            if sections is not None:
                problems.append(
                    Problem(
                        place,
                        f"{sections} sections in {pins} pins have no standard pin numbers",
                        "two sections come in 8 pins, four in 14",
                        "check sections and pin_count",
                    )
                )
            return None, ""
        length, width, height = (size[0], size[0], size[1]) if package.round else size
        body = Body(
            word,
            length,
            width,
            height,
            pitch=given.get("pitch", 0.0),
            lead=given.get("lead", 0.0),
            span=given.get("span", 0.0),
            pins=pins,
        )
        try:
            return body, package.name(body, bool(self.layer.figures.get("polarised", False)))
        except ValueError as error:
            why = "a land pattern is named by its dimensions"
            problems.append(Problem(place, f"no land pattern: {error}", why, "check the dimensions"))
            return None, ""

    def _evidence(self, known: Known, problems: list[Problem]) -> tuple[tuple[str, Evidence], ...]:
        """(figure, evidence) of every figure of the row, in the order of the record."""
        layer = self.layer
        names = [n for n in FIGURES[self.kind] if n in layer.figures or n == VALUE_OF.get(self.kind)]
        # other parts' pin numbers are a convention of the netlist, not a figure of the part
        names += ["body", "pins"] if self.kind in ("amplifier", "header", "jack", "switch") else ["body"]
        names += ["prices"] if layer.prices else []
        names += ["order_code"] if layer.text.get("order_code") else []
        without = [name for name in names if not layer.source_of(name)]
        if without:
            problems.append(
                Problem(
                    self.place,
                    f"no source is given for {', '.join(without)} of '{shown(self.family)}'",
                    "every figure names where it comes from",
                    "add source: memory, or name a document under 'sources'",
                )
            )
            return ()
        reported = Evidence("?", "?")  # where the unknown source is named
        return tuple((name, known.sources.get(layer.source_of(name), reported)) for name in names)


def _is_key(text: str) -> bool:
    return 0 < len(text) <= 60 and all(c in "abcdefghijklmnopqrstuvwxyz0123456789-." for c in text)


def _quantity(node: Node, kind: str, name: str, problems: list[Problem]) -> float | None:
    """One listed value, or None and a problem."""
    if node.kind != "scalar":
        problems.append(node.problem(f"{name} is {node}, not one figure", "", "write one value with its unit"))
        return None
    try:
        return float(read_figure(FIGURES[kind][name], node.text))
    except QuantityError as error:
        problems.append(node.problem(f"{name}: {error.what}", error.why, error.fix))
        return None


@lru_cache(maxsize=1000)
def _code(value: float, kind: str) -> str:
    """The letter code of a value as keys have it; most families share their values."""
    return rkm_code(value, kind).lower()
