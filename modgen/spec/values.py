"""One value of the page, by the kind its key has: a node in, a value in base SI units out.

Every reader takes the node, the key's full name and its definition, and returns the value; what cannot be used
is raised as :class:`RefusedError` with the problem at the node.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from typing import Any

from modgen.documents import Node, nearest, shown
from modgen.problems import Problem
from modgen.spec.keys import LONGEST_NAME, LONGEST_PATH, LONGEST_REASON, NONE, Key
from modgen.spec.names import slug
from modgen.units import QuantityError, parse_quantity, parse_range, parse_span

#: most values of one list on the page
LONGEST_LIST = 1000
#: narrowest span of a signal [V]: less is not a control voltage
NARROWEST_SPAN = 1e-3

#: digits of a whole number that are looked at; every bound has fewer
MOST_DIGITS = 18

_WHOLE = re.compile(r"-?(0|[1-9][0-9]*)")
# what a scale error in cents is an error of; it may be said and changes nothing
_PER_OCTAVE = re.compile(r"(?<=[a-z])(?:[ \u00a0]+per[ \u00a0]+|[ \u00a0]*/[ \u00a0]*)octave[ \u00a0]*$")
_RULE = re.compile(r"[a-z]+(-[a-z]+)*")


class RefusedError(Exception):
    """A value that cannot be used."""

    def __init__(self, *problems: Problem) -> None:
        self.problems = problems
        super().__init__()


def read_value(node: Node, name: str, key: Key) -> Any:
    """Read a value of any kind that is a scalar or a list of scalars.

    Raises
    ------
    RefusedError
        With every problem of the value.
    """
    return _READERS[key.kind](node, name, key)


def refuse(node: Node, what: str, why: str = "", fix: str = "") -> RefusedError:
    """A refusal with one problem at the node."""
    return RefusedError(node.problem(what, why, fix))


def scalar(node: Node, name: str, key: Key) -> str:
    """The text of a single value that is there."""
    if node.kind == "scalar" and not node.blank:
        return node.text
    if name.endswith("]"):
        fix = "write a text, or remove the entry"
    else:
        fix = f"write it like this: {name.rpartition('.')[2]}: {key.example or key.default}"
        if node.blank and not key.required:
            fix += "; or remove the line"
    what = f"{name} has no value" if node.blank else f"{name} is {node}, not a single value"
    raise refuse(node, what, f"{name}: {key.says}", fix)


def number(node: Node, name: str, key: Key) -> int:
    """A whole number in digits, whatever its size; nothing that only some readers of YAML take for one."""
    text = scalar(node, name, key)
    if not _WHOLE.fullmatch(text):
        raise refuse(
            node,
            f"{name} is '{shown(text)}', not a whole number",
            f"{name} is a whole number {key.bounds}, in digits",
            f"write digits only, for instance {key.example or key.default}",
        )
    # Python converts only so many digits; past these the sign and the size are all that counts
    return int(text[:MOST_DIGITS])


def whole(node: Node, name: str, key: Key) -> int:
    """A whole number within the bounds of its key."""
    return int(bounded(node, name, key, number(node, name, key)))


def flag(node: Node, name: str, key: Key) -> bool:
    """Plain true or false; not the other words that YAML 1.1 takes for them."""
    text = scalar(node, name, key)
    if node.plain and text in ("true", "false"):
        return text == "true"
    raise refuse(
        node,
        f"{name} is '{shown(text)}', neither true nor false",
        "other words, capitals and quotes mean different things to different readers of YAML",
        "write true or false, in small letters and without quotes",
    )


def choice(node: Node, name: str, key: Key) -> str:
    """One of some words."""
    text = scalar(node, name, key)
    if text in key.choices:
        return text
    near = nearest(text, key.choices)
    raise refuse(
        node,
        f"{name} is '{shown(text)}', which is none of its choices",
        f"the choices are {', '.join(key.choices)}",
        f"did you mean '{near}'?" if near else f"write one of them, for instance {key.choices[0]}",
    )


def line(node: Node, name: str, key: Key, longest: int, forbidden: str = "\\") -> str:
    """A text of one line that can be shown, printed and written to any file."""
    text = scalar(node, name, key)
    if text != text.strip():
        raise refuse(
            node, f"{name} begins or ends with a blank", f"{name} is '{shown(text)}'", "remove the blanks at its ends"
        )
    if not text:
        like = (
            "write a text, or remove the entry"
            if name.endswith("]")
            else f"write one, for instance {key.example or key.default}"
        )
        raise refuse(node, f"{name} is an empty text", f"{name}: {key.says}", like)
    if len(text) > longest:
        raise refuse(
            node, f"{name} has {len(text)} characters: '{shown(text)}'", f"at most {longest} are allowed", "shorten it"
        )
    for character in text:
        if not character.isprintable() or character in forbidden:
            what = "a backslash" if character == "\\" else f"the character U+{ord(character):04X}"
            raise refuse(
                node,
                f"{name} holds {what}: '{shown(text)}'",
                "backslashes, line breaks and invisible characters are not safe in every file that is written",
                "use / between folders" if character == "\\" and key.kind in ("path", "paths") else "remove it",
            )
    return text


def title(node: Node, name: str, key: Key) -> str:
    """The module's name, which also has to make a folder's name."""
    text = line(node, name, key, LONGEST_NAME)
    if not slug(text):
        raise refuse(
            node,
            f"{name} is '{shown(text)}', which leaves no name for the output folder",
            "the folder's name is made of the letters a to z and the digits in it",
            "add a word in Latin letters or a number",
        )
    return text


def name_text(node: Node, name: str, key: Key) -> str:
    """A name that only the catalogue can judge."""
    return line(node, name, key, LONGEST_NAME)


def rule(node: Node, name: str, key: Key) -> str:
    """The name of a rule, judged by its form; which rules there are is not known here."""
    text = line(node, name, key, LONGEST_NAME)
    if not _RULE.fullmatch(text):
        raise refuse(
            node,
            f"{name} is '{shown(text)}', which is not the name of a rule",
            "rules are named in lower-case words joined by hyphens",
            "'modgen rules' prints the names",
        )
    return text


def reason(node: Node, name: str, key: Key) -> str:
    """A sentence; line breaks of a block scalar count as blanks."""
    text = " ".join(scalar(node, name, key).split())
    return line(Node("scalar", node.place, text, plain=False), name, key, LONGEST_REASON)


def path(node: Node, name: str, key: Key) -> str:
    """A path as written; empty for ``none``. A file of that name is written ``./none``."""
    text = line(node, name, key, LONGEST_PATH)
    return "" if text == NONE else text


def texts(node: Node, name: str, key: Key) -> tuple[str, ...]:
    """A list of texts; a single one may stand without the list."""
    longest = LONGEST_PATH if key.kind == "paths" else LONGEST_NAME
    forbidden = "\\" if key.kind == "paths" else "\\, "
    if node.kind == "scalar":
        return (_one(node, name, key, longest, forbidden),)
    if node.kind == "mapping":
        raise refuse(
            node, f"{name} is a mapping, not a list", f"{name}: {key.says}", f"write it like this: {key.example}"
        )
    if len(node.items) > LONGEST_LIST:
        raise refuse(node, f"{name} has {len(node.items)} entries", f"at most {LONGEST_LIST} are read", "shorten it")
    if not node.items and key.kind == "parts":
        raise refuse(node, f"{name} is an empty list", f"{name}: {key.says}", "name the parts, or remove the line")
    found: list[str] = []
    problems: list[Problem] = []
    for number, item in enumerate(node.items, 1):
        try:
            text = _one(item, f"{name}[{number}]", key, longest, forbidden)
        except RefusedError as refused:
            problems.extend(refused.problems)
            continue
        if text in found:
            problems.append(
                item.problem(f"{name} names '{shown(text)}' twice", "once is enough", "remove one of the two")
            )
        found.append(text)
    if problems:
        raise RefusedError(*problems)
    return tuple(found)


def _one(node: Node, name: str, key: Key, longest: int, forbidden: str) -> str:
    text = scalar(node, name, key)
    if key.kind == "parts" and re.search("[, ]", text.strip()):
        raise refuse(
            node,
            f"{name} is '{shown(text)}', more than one reference",
            "a reference holds no blank and no comma",
            f"write a list: {key.example}",
        )
    return line(node, name, key, longest, forbidden)


def quantity(node: Node, name: str, key: Key) -> float:
    """A number with a unit, within the bounds of its key."""
    text = scalar(node, name, key)
    return bounded(node, name, key, _parsed(node, name, text, key.dimension))


def level(node: Node, name: str, key: Key) -> float:
    """A voltage, or a pitch interval at 1 V per octave [V]."""
    text = scalar(node, name, key)
    return bounded(node, name, key, _parsed(node, name, text, "pitch" if _in_cents(text) else "voltage"))


def scale(node: Node, name: str, key: Key) -> float:
    """A share, or cents per octave [-]."""
    text = scalar(node, name, key)
    # one cent per octave is 1/1200 of the octave, as one cent is 1/1200 V
    if "cent" in text.casefold() and "percent" not in text.casefold():
        return bounded(node, name, key, _parsed(node, name, _PER_OCTAVE.sub("", text), "pitch"))
    return bounded(node, name, key, _parsed(node, name, text, "ratio"))


def offset(node: Node, name: str, key: Key, span: float) -> float:
    """A voltage, or a share of the span [V]."""
    text = scalar(node, name, key)
    if _in_cents(text):
        raise refuse(
            node,
            f"{name} is '{shown(text)}', a pitch interval",
            "a constant error is a voltage, whatever it does to the pitch",
            "write it like 30 mV or 2 %",
        )
    if text.rstrip().endswith("%"):
        return bounded(node, name, key, _parsed(node, name, text, "ratio") * span)
    return bounded(node, name, key, _parsed(node, name, text, "voltage"))


def span(node: Node, name: str, key: Key) -> tuple[float, float]:
    """Lowest and highest voltage [V]."""
    text = scalar(node, name, key)
    try:
        low, high = parse_span(text)
    except QuantityError as error:
        raise refuse(node, f"{name}: {error.what}", error.why, error.fix) from None
    if not (key.inside(low) and key.inside(high)):
        raise refuse(
            node,
            f"{name} is '{shown(text)}', beyond its bounds",
            f"{name} may lie {key.bounds}",
            "write a smaller span",
        )
    if high - low < NARROWEST_SPAN:
        raise refuse(
            node,
            f"{name} is '{shown(text)}', narrower than 1 mV",
            "a control voltage moves more than that",
            "write ±5 V",
        )
    return low, high


def quantity_range(node: Node, name: str, key: Key) -> tuple[float, float]:
    """Two quantities, the lower first."""
    text = scalar(node, name, key)
    try:
        low, high = parse_range(text, key.dimension)
    except QuantityError as error:
        raise refuse(node, f"{name}: {error.what}", error.why, error.fix) from None
    if not (key.inside(low) and key.inside(high)):
        raise refuse(
            node,
            f"{name} is '{shown(text)}', beyond its bounds",
            f"{name} may lie {key.bounds}",
            f"write a narrower range, for instance {key.default}",
        )
    return low, high


def bounded(node: Node, name: str, key: Key, value: float) -> float:
    """The value, when it keeps the bounds of its key."""
    if key.inside(value) or key.least is None or key.most is None:
        return value
    low, high = key.bound(key.least), key.bound(key.most)
    text = shown(node.text) if key.kind in ("whole", "jacks") else f"'{shown(node.text)}'"
    if value > key.most:
        outside, fix = f"above {high}", f"write {high} or less"
    elif key.above:
        outside, fix = f"not above {low}", f"write more than {low}"
    else:
        outside, fix = f"below {low}", f"write {low} or more"
    raise refuse(node, f"{name} is {text}, {outside}", f"{name} may be {key.bounds}", fix)


def _in_cents(text: str) -> bool:
    return text.rstrip().casefold().endswith(("cent", "cents"))


def _parsed(node: Node, name: str, text: str, dimension: str) -> float:
    try:
        return parse_quantity(text, dimension)
    except QuantityError as error:
        raise refuse(node, f"{name}: {error.what}", error.why, error.fix) from None


_READERS: dict[str, Callable[[Node, str, Key], Any]] = {
    "title": title,
    "name": name_text,
    "rule": rule,
    "reason": reason,
    "path": path,
    "paths": texts,
    "parts": texts,
    "whole": whole,
    "flag": flag,
    "choice": choice,
    "quantity": quantity,
    "level": level,
    "scale": scale,
    "span": span,
    "range": quantity_range,
}
