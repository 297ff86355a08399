"""The JSON Schema of a spec page, for editors; made from the definition that the reader reads by."""

from __future__ import annotations

from typing import Any

from modgen.spec.keys import LONGEST_NAME, LONGEST_PATH, LONGEST_REASON, Key, keys_of, page_name
from modgen.spec.model import Spec

_NUMBER = r"(?:[0-9]+(?:\.[0-9]+)?|\.[0-9]+)(?:[eE][+-]?[0-9]+)?"
_BLANK = "[ \u00a0\u2007\u2009\u200a\u202f]"
_SIGN = "[+\u2212-]?"
# prefix and unit, and the letters that may stand for the decimal point
_WRITTEN: dict[str, tuple[str, str]] = {
    "voltage": ("[nuµ\u03bcmk]?V", "V"),
    "time": ("[pnuµ\u03bcm]?s", ""),
    "ratio": ("%", ""),
    "pitch": ("cents?", ""),
    "pitch per octave": (f"cents?(?:(?:{_BLANK}+per{_BLANK}+|{_BLANK}*/{_BLANK}*)octave)?", ""),
    "temperature": ("(?:°C|degC)", ""),
    "resistance": ("(?:[mkKMGT]?(?:Ω|\u2126|[oO]hms?)|[kKMGT]|R)", "[RkKMGT]"),
}
_DIMENSIONS: dict[str, tuple[str, ...]] = {
    "level": ("voltage", "pitch"),
    "scale": ("ratio", "pitch per octave"),
    "offset": ("voltage", "ratio"),
}


def json_schema() -> dict[str, Any]:
    """The schema of a spec page, JSON Schema draft 2020-12.

    It refuses unknown and missing keys, wrong kinds and values that are no quantity of their kind. Bounds of quantities
    and what keys say about each other are left to the reader, which alone knows everything.
    """
    return {
        "$schema": "https://json-schema.org/draft/2020-12/schema",
        "title": "modgen spec",
        "description": "One multi-channel lag module. Quantities are text with a unit.",
        **_section(Spec),
    }


def quantity_pattern(dimensions: tuple[str, ...]) -> str:
    """A pattern that every text passes which is read as a quantity of one of the dimensions."""
    return f"^{_BLANK}*{_one_of(dimensions)}{_BLANK}*$"


def _one_of(dimensions: tuple[str, ...]) -> str:
    forms = []
    for dimension in dimensions:
        unit, point = _WRITTEN[dimension]
        forms.append(f"{_SIGN}{_NUMBER}{_BLANK}?{unit}")
        if point:
            forms.append(f"{_SIGN}[0-9]*{point}[0-9]+{_BLANK}?(?:{unit})?")
    return f"(?:{'|'.join(forms)})"


def _section(model: type) -> dict[str, Any]:
    keys = [(page_name(name, key), key) for name, key in keys_of(model)]
    made: dict[str, Any] = {
        "type": "object",
        "properties": {word: _value(key) for word, key in keys},
        "additionalProperties": False,
    }
    required = [word for word, key in keys if key.required]
    if required:
        made["required"] = required
    return made


def _value(key: Key) -> dict[str, Any]:
    made: dict[str, Any] = {"description": _description(key), **_kind(key)}
    default = _default(key)
    if default is not None:
        made["default"] = default
    if key.example and key.kind in ("title", "name", "quantity", "span", "rule", "reason", "path"):
        made["examples"] = [key.example]
    return made


def _description(key: Key) -> str:
    """One sentence, with the other default where there is one."""
    text = f"{key.help[0].upper()}{key.help[1:]}."
    return f"{text} With signal.pitch: true the default is {key.pitch_default}." if key.pitch_default else text


def _default(key: Key) -> Any:
    if not key.default:
        return None
    if key.kind == "whole":
        return int(key.default)
    if key.kind == "flag":
        return key.default == "true"
    return [] if key.kind in ("paths", "waivers") else key.default


def _kind(key: Key) -> dict[str, Any]:
    """The part of the schema that depends on how a key is written."""
    whole = {"type": "integer", "minimum": int(key.least or 0), "maximum": int(key.most or 0)}
    name = {"type": "string", "minLength": 1, "maxLength": LONGEST_NAME, "pattern": r"^[^\\]*$"}
    path = {**name, "maxLength": LONGEST_PATH}
    if key.kind == "section":
        assert key.section is not None
        return _section(key.section)
    if key.kind == "jacks":
        assert key.section is not None
        return {"oneOf": [whole, _section(key.section)]}
    if key.kind == "waivers":
        assert key.section is not None
        return {"type": "array", "items": _section(key.section)}
    if key.kind == "whole":
        return whole
    if key.kind == "flag":
        return {"type": "boolean"}
    if key.kind == "choice":
        return {"enum": list(key.choices)}
    if key.kind == "paths":
        return {"oneOf": [path, {"type": "array", "items": path, "uniqueItems": True}]}
    if key.kind == "parts":
        part = {**name, "pattern": r"^[^\\, ]*$"}
        return {"oneOf": [part, {"type": "array", "items": part, "minItems": 1, "uniqueItems": True}]}
    if key.kind == "path":
        return path
    if key.kind == "rule":
        return {**name, "pattern": "^[a-z]+(-[a-z]+)*$"}
    if key.kind == "reason":
        # line breaks of a block scalar do not count, so the length is only known to the reader
        return {"type": "string", "minLength": 1, "pattern": r"^[^\\]*$", "maxLength": 2 * LONGEST_REASON}
    if key.kind == "span":
        volts = _one_of(("voltage",))
        ends = rf"(?:(?:±|\+/-){_BLANK}*{volts}|{volts}{_BLANK}+to{_BLANK}+{volts})"
        return {"type": "string", "pattern": f"^{_BLANK}*{ends}{_BLANK}*$"}
    if key.kind == "range":
        end = _one_of((key.dimension,))
        return {"type": "string", "pattern": rf"^{_BLANK}*{end}{_BLANK}+to{_BLANK}+{end}{_BLANK}*$"}
    if key.kind in ("quantity", "level", "scale", "offset"):
        return {"type": "string", "pattern": quantity_pattern(_DIMENSIONS.get(key.kind, (key.dimension,)))}
    return name
