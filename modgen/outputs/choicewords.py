"""The design's choices as the review page words them: headed by what the reader sees on the board."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import TYPE_CHECKING

from modgen.outputs.bom import CURRENCY
from modgen.outputs.partwords import value_words
from modgen.outputs.wording import grouped, percent, prose, quantity, short_ranges

if TYPE_CHECKING:
    from modgen.design.model import Choice
    from modgen.outputs.model import Job

#: What a choice decides, by its subject; the subject is the role of the parts.
_NOUNS = {
    "amplifier": "Amplifier",
    "glide-capacitor": "Glide capacitor",
    "glide-control": "Glide control",
    "range-switch": "Range switch",
    "range-capacitor": "Range capacitor",
    "range-keeper": "Resistor that keeps the range capacitor",
    "isolating": "Isolating resistor",
    "terminator": "Terminator",
    "input-series": "Input series resistor",
    "output-series": "Output series resistor",
    "feedback": "Feedback resistor",
    "compensation": "Compensation capacitor",
    "reverse-polarity": "Reverse-polarity diode",
    "reservoir": "Reservoir capacitor",
    "decoupling": "Decoupling capacitor",
}

_FIT = re.compile(r"\(([0-9]+) of ([0-9]+) do\)")
_COSTS = re.compile(r"\bcosts ([0-9]+(?:\.[0-9]+)?) more\b")
_CENTS = re.compile(r"([0-9]+(?:\.[0-9]+)?(?:e[+-]?[0-9]+)?)( instead of [0-9.]+)? cents per octave")


@dataclass(frozen=True)
class ChoiceWords:
    """One choice, ready to be shown. ``lost`` pairs what was not taken with why; ``more`` is about the others."""

    heading: str
    chosen: str
    reason: str
    binding: str
    lost: tuple[tuple[str, str], ...]
    more: str = ""


def choice_words(job: Job, choice: Choice) -> ChoiceWords:
    """A choice in the reader's words.

    Parameters
    ----------
    job
        The module, for the parts that the choice decided. [-]
    choice
        From its design. [-]

    Returns
    -------
    ChoiceWords
        Headed by noun, value and references; catalogue keys stand below.
    """
    noun = _NOUNS.get(choice.subject, choice.subject.replace("-", " ").capitalize())
    groups: dict[str, list[str]] = {}
    for part in job.design.parts:
        if part.role == choice.subject:
            groups.setdefault(prose(value_words(part.record, part.value)), []).append(part.ref)
    made = "; ".join(f"{value}, {short_ranges(refs)}" for value, refs in groups.items())
    reason = _words(job, choice.reason)
    return ChoiceWords(
        heading=f"{noun}: {made or choice.chosen}",
        chosen=choice.chosen if made else "",
        reason=f"{reason[:1].upper()}{reason[1:]}.",
        binding=prose(choice_margin(choice)),
        lost=tuple((prose(what), _words(job, why)) for what, why in choice.runners_up),
        more=_others(choice),
    )


def choice_margin(choice: Choice) -> str:
    """What binds a choice and how much is left, in words.

    Parameters
    ----------
    choice
        From the design. [-]

    Returns
    -------
    str
        Empty when nothing binds.
    """
    if choice.margin is None:
        return choice.binding
    left = f"{percent(choice.margin)} left"
    return f"{choice.binding}: {left}" if choice.binding else left


def _others(choice: Choice) -> str:
    """How many more would have done than are listed; the reason says how many there are."""
    match = _FIT.search(choice.reason)
    if match is None:
        return ""
    fit, tried = int(match[1]), int(match[2])
    unnamed = fit - 1 - max(0, len(choice.runners_up) - (tried - fit))
    return f"and {grouped(unnamed)} more that fit, behind these" if unnamed > 0 else ""


def _words(job: Job, text: str) -> str:
    """A reason with its currency named, and scale errors in the unit that this spec's reader thinks in."""
    text = _COSTS.sub(rf"costs \1 {CURRENCY} more", text)
    if not job.spec.signal.pitch:
        text = _CENTS.sub(lambda match: _as_share(match[1], match[2]), text)
    return prose(text)


def _as_share(cents: str, instead: str | None) -> str:
    """Cents per octave as per cent, the cents beside."""
    shown = percent(float(cents) / 1200)
    if instead is None:
        return f"{shown} ({quantity(float(cents) / 1200, 'pitch')} per octave)"
    other = instead.removeprefix(" instead of ")
    return f"{shown} instead of {percent(float(other) / 1200)} ({cents} instead of {other} cents per octave)"
