"""Words, numbers and references as they stand on pages."""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from modgen.outputs import bom
from modgen.units import format_quantity

if TYPE_CHECKING:
    from modgen.rules.contract import Report

#: The two verdicts, in the same words on every page, sheet and row.
CLEARED, NOT_CLEARED = "Cleared for ordering", "Not cleared for ordering"

#: The verdict names no more errors than this one by one.
MOST_STANDING = 12

#: What stands in a table where there is nothing to say.
NOTHING = "–"

_NO_BREAK = "\u00a0"

_UNIT = r"(?:[fpnµmkMGT]?(?:Ω|V|A|F|s|W|Hz)|cents?|[µm]?m[²³]?|mm[23]|K|dB|°C|EUR)"
_VALUE_AND_UNIT = re.compile(rf"(?<=[0-9]) +(?=(?:%|{_UNIT}(?![\w²³])))")
_SHARE = re.compile(r"(?<=[0-9])%")
#: a hyphen before a number is a sign only where nothing stands before it
_SIGN = re.compile(r"(?<![\w\u2013\u2212-])-(?=[0-9.])")
_RAIL = re.compile(r"(?<![\w-])(V|BUS)-(?![\w-])")
#: a count: a long whole number with a word behind it
_COUNT = re.compile(r"(?<![\w.,-])[0-9]{5,}(?= [a-z]{2,})")
_POWER = re.compile(r"(?<=mm)([23])(?!\w)")


def quantity(value: float, kind: str, digits: int = 3) -> str:
    """A quantity as it stands on a page: a true minus sign, and no line break before the unit.

    Parameters
    ----------
    value
        In base SI units; a ratio as a fraction, an interval of pitch in volts. [SI]
    kind
        One of :data:`modgen.units.UNITS`. [-]
    digits
        Most significant digits. [-]

    Returns
    -------
    str
        ``−12 V``, ``4.7 kΩ``.
    """
    return format_quantity(value, kind, digits).replace("-", "\u2212").replace(" ", _NO_BREAK)


def grouped(number: int) -> str:
    """A whole number with its digits in threes from five digits on, as ISO 80000-1 has it.

    Parameters
    ----------
    number
        A count. [-]

    Returns
    -------
    str
        ``1 860 624`` with spaces that do not break; ``4096`` as it is.
    """
    return f"{number:,}".replace(",", _NO_BREAK) if abs(number) >= 10_000 else str(number)


def prose(text: str) -> str:
    """A sentence of another part of the program, set as pages set theirs; the words stay as they are.

    Parameters
    ----------
    text
        Plain text with values as programs write them. [-]

    Returns
    -------
    str
        No break between a number and its unit, a space before ``%``, a true minus sign before a number, long
        counts in groups of three digits.

    Examples
    --------
    >>> prose("-5 V is 2.8% of 1860624 parts on 34 mm2").replace("\u00a0", "~")
    '−5~V is 2.8~% of 1~860~624 parts on 34~mm²'
    """
    text = _SIGN.sub("\u2212", _RAIL.sub("\\1\u2212", text))
    text = _COUNT.sub(lambda match: grouped(int(match[0])), text)
    text = _SHARE.sub(_NO_BREAK + "%", _VALUE_AND_UNIT.sub(_NO_BREAK, text))
    return _POWER.sub(lambda match: "²³"[int(match[1]) - 2], text)


def signed(value: float, kind: str, digits: int = 3) -> str:
    """The same with a plus sign when positive.

    Parameters
    ----------
    value
        In base SI units. [SI]
    kind
        One of :data:`modgen.units.UNITS`. [-]
    digits
        Most significant digits. [-]

    Returns
    -------
    str
        ``+12 V``, ``0 V``, ``−12 V``.
    """
    return ("+" if value > 0 else "") + quantity(value, kind, digits)


def percent(share: float, digits: int = 3) -> str:
    """A share of one as per cent.

    Parameters
    ----------
    share
        1.0 is the whole. [-]
    digits
        Most significant digits. [-]

    Returns
    -------
    str
        ``63.2 %``.
    """
    return quantity(share, "ratio", digits)


def natural(text: str) -> tuple[tuple[int, int, str], ...]:
    """A sort key that puts R2 before R10.

    Parameters
    ----------
    text
        A reference or a name. [-]

    Returns
    -------
    tuple
        Comparable with that of any other text.
    """
    return tuple((1, int(piece), "") if piece.isdecimal() else (0, 0, piece) for piece in re.findall(r"\d+|\D+", text))


def short_ranges(refs: Iterable[str]) -> str:
    """References in as few words as possible, as on the parts list but with a true range dash.

    Many at even steps are put together (:func:`modgen.outputs.bom.brief_references`).

    Parameters
    ----------
    refs
        References, in any order. [-]

    Returns
    -------
    str
        ``R1–R4, R7``.

    Examples
    --------
    >>> short_ranges(["R7", "R2", "R1", "R3"])
    'R1–R3, R7'
    """
    return bom.brief_references(set(refs)).replace("-", "\u2013")


def number_words(numbers: Iterable[str]) -> str:
    """Numbers of channels or pins in words, three or more in a row as a range.

    Parameters
    ----------
    numbers
        Whole numbers as text, in any order. [-]

    Returns
    -------
    str
        ``1, 2``, ``3 to 8``.

    Examples
    --------
    >>> number_words(["4", "1", "2", "3", "7"])
    '1 to 4, 7'
    """
    ordered = sorted(set(numbers), key=natural)
    return bom.short_ranges(f"P{number}" for number in ordered).replace("P", "").replace("-", " to ")


def channel_words(numbers: Iterable[str]) -> str:
    """Numbers of channels in words.

    Parameters
    ----------
    numbers
        Whole numbers as text, in any order. [-]

    Returns
    -------
    str
        ``channel 4``, ``channels 1 to 8``.

    Examples
    --------
    >>> channel_words(["2", "1", "3"]), channel_words(["4"])
    ('channels 1 to 3', 'channel 4')
    """
    found = set(numbers)
    return f"{'channel' if len(found) == 1 else 'channels'} {number_words(found)}"


def pin_words(numbers: Iterable[str]) -> str:
    """Pin numbers of one part in words, three or more in a row as a range.

    Parameters
    ----------
    numbers
        Pin numbers, in any order. [-]

    Returns
    -------
    str
        ``pin 4``, ``pins 1, 2``, ``pins 3 to 8``.

    Examples
    --------
    >>> pin_words(["8", "3", "4", "5", "6", "7"]), pin_words(["10", "9"])
    ('pins 3 to 8', 'pins 9, 10')
    """
    found = set(numbers)
    return f"{'pin' if len(found) == 1 else 'pins'} {number_words(found)}"


def plural(count: int, word: str) -> str:
    """A count with its word.

    Parameters
    ----------
    count
        How many. [-]
    word
        In the singular. [-]

    Returns
    -------
    str
        ``no errors``, ``1 error``, ``2 errors``.
    """
    return f"{count or 'no'} {word}" + ("" if count == 1 else "s")


def chosen(items: Sequence[str], last: str = "and") -> str:
    """A list in words.

    Parameters
    ----------
    items
        What is listed. [-]
    last
        The word before the last item. [-]

    Returns
    -------
    str
        ``a, b and c``.
    """
    if len(items) < 2:
        return "".join(items)
    return f"{', '.join(items[:-1])} {last} {items[-1]}"


@dataclass(frozen=True)
class Verdict:
    """Whether the module may be ordered, and why."""

    cleared: bool
    headline: str
    reason: str
    #: the errors that stand, one line each
    standing: tuple[str, ...]
    #: what somebody answers for, see :func:`answered`
    answered: tuple[str, ...] = ()


def verdict(report: Report) -> Verdict:
    """The verdict on a module in words.

    Parameters
    ----------
    report
        What the rules found. [-]

    Returns
    -------
    Verdict
        With the count of every level and of what was looked at.
    """
    counts = {
        level: sum(1 for f in report.findings if f.level == level and not f.waived)
        for level in ("error", "warning", "note")
    }
    waived = sum(1 for f in report.findings if f.waived)
    instances = sum(c.instances for c in report.checked if c.judged)
    judged = sum(1 for c in report.checked if c.judged)
    skipped = len(report.checked) - judged
    reason = ", ".join(plural(counts[level], level) for level in counts)
    reason += (
        f" and {plural(waived, 'waived finding')}; {plural(judged, 'rule')} looked at {plural(instances, 'instance')}"
    )
    if skipped:
        reason += f", {plural(skipped, 'rule')} could not be judged"
    standing = tuple(
        f"{short_ranges(f.parts)}: {f.message}" if f.parts else f.message
        for f in report.findings
        if f.level == "error" and not f.waived
    )
    headline = CLEARED if report.cleared else NOT_CLEARED
    if len(standing) > MOST_STANDING:
        standing = (*standing[:MOST_STANDING], f"and {len(standing) - MOST_STANDING} more, all of them under Findings")
    return Verdict(report.cleared, headline, reason[0].upper() + reason[1:] + ".", standing, answered(report))


def answered(report: Report) -> tuple[str, ...]:
    """What somebody answers for: rule, parts and the reason given, one line for each rule and reason.

    Parameters
    ----------
    report
        What the rules found. [-]

    Returns
    -------
    tuple of str
        In the order of the findings; empty when nothing is waived. In plain letters but for the reason, since
        tables and decks carry it too.
    """
    parts: dict[tuple[str, str], dict[str, None]] = {}
    for f in report.findings:
        if f.waived:
            parts.setdefault((f.rule, f.waived), {}).update(dict.fromkeys(f.parts))
    return tuple(
        f"{rule} on {bom.short_ranges(list(refs))}: {reason}" if refs else f"{rule}: {reason}"
        for (rule, reason), refs in parts.items()
    )
