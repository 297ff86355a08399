"""What keys say about each other: each check takes what could be read and names what does not fit together."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from modgen.documents import Node, shown
from modgen.problems import Problem
from modgen.spec.model import Jacks
from modgen.units import format_quantity

#: output jacks that one amplifier section is asked to drive
MOST_OUTPUTS = 8


def split_jacks(node: Node, total: int, channels: int) -> Jacks | Problem:
    """Inputs and outputs from the total number of jacks.

    Every channel has an output. Up to twice the channels, what is left are inputs; beyond that, every channel has
    an input and the rest are further outputs.
    """
    least, most = channels + 1, (MOST_OUTPUTS + 1) * channels
    if total < least:
        return node.problem(
            f"jacks is {total}, too few for {_channels(channels)}",
            f"every channel needs an output and there must be an input: {least} is the least number",
            f"write {least} or more; {2 * channels} gives every channel an input of its own",
        )
    if total > most:
        return node.problem(
            f"jacks is {total}, too many for {_channels(channels)}",
            f"one input and at most {MOST_OUTPUTS} outputs for each channel: {most} is the greatest number",
            f"write {most} or fewer",
        )
    outputs = channels if total < 2 * channels else total - channels
    return Jacks(total - outputs, outputs)


def jacks(node: Node, stated: dict[str, Any], channels: int) -> Iterator[Problem]:
    """Inputs and outputs, each stated, against the number of channels."""
    inputs, outputs = stated["inputs"], stated["outputs"]
    if inputs is not None and inputs > channels:
        yield _at(node, "inputs").problem(
            f"jacks.inputs is {inputs}, more than the {_channels(channels)}",
            "an input without a channel leads nowhere",
            f"write {channels} or fewer",
        )
    if outputs is not None and outputs < channels:
        yield _at(node, "outputs").problem(
            f"jacks.outputs is {outputs}, fewer than the {_channels(channels)}",
            f"every channel needs an output and there must be an input: {channels + 1} jacks is the least number",
            f"write {channels} or more",
        )
    if outputs is not None and outputs > MOST_OUTPUTS * channels:
        yield _at(node, "outputs").problem(
            f"jacks.outputs is {outputs}, more than {MOST_OUTPUTS} for each of the {_channels(channels)}",
            "one amplifier drives all outputs of its channel",
            f"write {MOST_OUTPUTS * channels} or fewer",
        )


def glide(node: Node, stated: dict[str, Any]) -> Iterator[Problem]:
    """Order of the range and of the settling, and keys without effect."""
    shortest, longest = stated["shortest"], stated["longest"]
    if shortest is not None and longest is not None and shortest >= longest:
        yield _at(node, "longest").problem(
            f"glide.longest is '{_text(node, 'longest')}', not longer than glide.shortest, '{_text(node, 'shortest')}'",
            "a range has two different ends",
            "exchange the two" if shortest > longest else "write a longer time",
        )
    if stated["measure"] is not None and stated["measure"] != "settle":
        for key in ("step", "within"):
            if node.get(key) is not None:
                yield _at(node, key).problem(
                    f"glide.{key} has no effect",
                    f"it counts only with measure: settle, and the measure is {stated['measure']}",
                    f"remove it, or {'write' if node.get('measure') else 'add'} measure: settle",
                )
    elif stated["step"] is not None and stated["within"] is not None and stated["within"] >= stated["step"]:
        at = "within" if node.get("within") is not None else "step"
        yield _at(node, at).problem(
            f"glide.within is {_volts(stated['within'])}, not less than glide.step, {_volts(stated['step'])}",
            "then it has settled before it begins to move",
            "write a smaller one, for instance within: 5 cents" if at == "within" else "write a larger step",
        )


def rail_sign(node: Node, name: str, value: float) -> Problem | None:
    """The commonest slip: a supply with the sign of the other."""
    text = shown(node.text)
    if name == "rails.negative" and value > 0:
        return node.problem(
            f"rails.negative is '{text}', which is positive",
            "the negative supply is written with its sign",
            f"write -{text.lstrip('+ ')}, or 0 V on a single supply",
        )
    if name == "rails.positive" and value < 0:
        return node.problem(
            f"rails.positive is '{text}', which is negative",
            "the positive supply has no sign; the negative one is rails.negative",
            f"write {text.lstrip('-− ')}",
        )
    return None


def signal(page: Node, stated: dict[str, Any], rails: dict[str, Any] | None) -> Iterator[Problem]:
    """A span below 0 V on a supply that has nothing there."""
    ends = stated["low"]
    if ends is None or rails is None or rails["negative"] != 0.0 or ends[0] >= 0.0:
        return
    section = page.get("signal")
    at = section.get("span") if section else None
    example = f"{format_quantity(0.0, 'voltage')} to {format_quantity(ends[1] if ends[1] > 0 else 5.0, 'voltage')}"
    if at is not None:
        yield at.problem(
            f"signal.span is '{shown(at.text)}', which reaches below 0 V on a single supply",
            "rails.negative is 0 V, so nothing below 0 V gets through",
            f"write span: {example}, or state a negative supply",
        )
        return
    found = page.get("rails")
    yield (_at(found, "negative") if found else page).problem(
        "signal.span is left at its default, ±5 V, which reaches below 0 V on a single supply",
        "rails.negative is 0 V, so nothing below 0 V gets through",
        f"add signal: {{span: {example}}}, or state a negative supply",
    )


def protection(page: Node, stated: dict[str, Any], channels: int, jacks_read: Jacks) -> Iterator[Problem]:
    """One feedback loop can hold one output jack."""
    section = page.get("output")
    if stated["protection"] == "inside" and section and jacks_read.outputs > channels:
        yield _at(section, "protection").problem(
            f"output.protection is 'inside', with {jacks_read.outputs} output jacks on {_channels(channels)}",
            "a feedback loop can hold the resistor of one output jack only",
            "write outside or auto, or give each channel one output jack",
        )


def _at(section: Node, key: str) -> Node:
    return section.get(key) or section


def _text(section: Node, key: str) -> str:
    return shown(_at(section, key).text)


def _volts(value: float) -> str:
    return format_quantity(value, "voltage")


def _channels(channels: int) -> str:
    return f"{channels} channel" if channels == 1 else f"{channels} channels"
