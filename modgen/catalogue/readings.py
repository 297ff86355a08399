"""The values of catalogue keys: one figure, a size, prices, a diode's curve, short texts; each or a problem."""

from __future__ import annotations

import itertools
import re

from modgen.catalogue.figures import Figure, read_figure
from modgen.catalogue.records import PriceBreak
from modgen.documents import Fields, Node, shown
from modgen.problems import Problem
from modgen.units import QuantityError, parse_quantity

_SIZE = re.compile(r"([0-9.]+) *[x×] *([0-9.]+)(?: *[x×] *([0-9.]+))? *(mm|m)")
_PRICE = re.compile(r"[0-9]{1,9}(?:\.[0-9]{1,9})?")
_QUANTITY = re.compile(r"[1-9][0-9]{0,8}")

_LONGEST = 200  # characters of a description


def read_size(node: Node, problems: list[Problem]) -> tuple[float, ...]:
    """``7.2 x 2.5 x 6.5 mm`` as three lengths [m], ``5 x 11 mm`` as two."""
    match = _SIZE.fullmatch(node.text.strip())
    sizes: list[float] = []
    try:
        sizes = [parse_quantity(f"{part} {match[4]}", "length") for part in match.groups()[:3] if part] if match else []
    except QuantityError:
        sizes = []
    if not sizes or not all(0.0 < x < 1.0 for x in sizes):
        problems.append(
            node.problem(
                f"size is {node}, not dimensions",
                "a size is length x width x height, or diameter x height of a round can",
                "write it like 7.2 x 2.5 x 6.5 mm",
            )
        )
        return ()
    return tuple(sizes)


def read_scalar(node: Node, key: str, figure: Figure, problems: list[Problem]) -> object:
    """One figure, or None and a problem."""
    if node.kind != "scalar":
        problems.append(node.problem(f"{key} is {node}, not one figure", "", f"write {key}: and one figure"))
        return None
    try:
        return read_figure(figure, node.text)
    except QuantityError as error:
        problems.append(node.problem(f"{key}: {error.what}", error.why, error.fix))
        return None


def read_forward(node: Node, problems: list[Problem]) -> tuple[tuple[float, float, float], ...] | None:
    """A diode's curve: current to typical and greatest drop [A, V, V], rising."""
    points: list[tuple[float, float, float]] = []
    before = len(problems)
    example = "{1 mA: [0.2 V, 0.3 V], 1 A: [0.5 V, 0.6 V]}"
    for key, value in Fields(node, problems, "forward", example).node.entries:
        pair = value.items
        if len(pair) != 2:
            problems.append(
                value.problem(
                    f"forward at {shown(key.text)} is {value}, not two drops",
                    "each current has a typical and a greatest drop",
                    f"write it like {example}",
                )
            )
            continue
        current = read_scalar(key, "forward", Figure("current"), problems)
        typical = read_scalar(pair[0], "forward", Figure("voltage"), problems)
        most = read_scalar(pair[1], "forward", Figure("voltage"), problems)
        if isinstance(current, float) and isinstance(typical, float) and isinstance(most, float):
            if typical > most:
                problems.append(
                    pair[0].problem(
                        f"forward at {shown(key.text)}: the typical drop {shown(pair[0].text)} is above the greatest, "
                        f"{shown(pair[1].text)}",
                        "the greatest is what the maker promises of every part",
                        "write the typical drop first",
                    )
                )
            points.append((current, typical, most))
    if len(problems) > before or node.kind != "mapping":
        return None
    rising = all(a < b for one, two in itertools.pairwise(points) for a, b in zip(one, two, strict=True))
    if not points or not rising:
        problems.append(
            node.problem(
                "forward has no points" if not points else "forward does not rise from point to point",
                "drops between the points are interpolated over the current",
                f"write it like {example}, by rising current",
            )
        )
        return None
    return tuple(points)


def read_prices(node: Node, problems: list[Problem]) -> tuple[PriceBreak, ...]:
    """Quantity to unit price, rising by quantity."""
    fix = "write it like {1: 0.40, 100: 0.25}"
    out = []
    for key, value in Fields(node, problems, "prices", "{1: 0.40, 100: 0.25}").node.entries:
        if not _QUANTITY.fullmatch(key.text):
            problems.append(
                key.problem(f"'{shown(key.text)}' is not a quantity", "prices hold from a quantity on", fix)
            )
        elif value.kind != "scalar" or not _PRICE.fullmatch(value.text):
            problems.append(value.problem(f"the price is {value}", "a price is a number, without a currency", fix))
        else:
            out.append(PriceBreak(int(key.text), float(value.text)))
    return tuple(sorted(out, key=lambda b: b.quantity))


def read_whole(node: Node, key: str, problems: list[Problem]) -> int:
    """A whole number above 0, or 0 and a problem."""
    if node.kind == "scalar" and _QUANTITY.fullmatch(node.text):
        return int(node.text)
    problems.append(node.problem(f"{key} is {node}, not a whole number above 0", "", f"write {key}: 10, for example"))
    return 0


def text_of(node: Node, key: str, problems: list[Problem]) -> str:
    """A short text; never with a backslash or a line break, which netlists do not hold."""
    if node.kind == "scalar" and node.text.strip() and len(node.text) <= _LONGEST and node.text.isprintable():
        if "\\" not in node.text:
            return node.text.strip()
        problems.append(
            node.problem(
                f"{key} holds a backslash: {node}", "it is written to netlists, which hold none", "leave it out"
            )
        )
        return "?"
    problems.append(
        node.problem(
            f"{key} is {node}, not a short text", f"at most {_LONGEST} characters on one line", "write a few words"
        )
    )
    return "?"


def items_of(node: Node, key: str, problems: list[Problem]) -> tuple[Node, ...]:
    """The items of a list of words."""
    if node.kind == "sequence" and all(item.kind == "scalar" for item in node.items):
        return node.items
    problems.append(node.problem(f"{key} is {node}, not a list of words", "", f"write {key}: [one, another]"))
    return ()


def article(kind: str) -> str:
    """``an amplifier``, ``a diode``."""
    return f"{'an' if kind[0] in 'aeiou' else 'a'} {kind}"
