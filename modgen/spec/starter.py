"""A page to begin with: what must be stated, and every default in a comment."""

from __future__ import annotations

import re
import textwrap

from modgen.spec.keys import Key, keys_of, page_name
from modgen.spec.model import Spec

_HEAD = """\
# One lag module. The keys without a '#' must be there; the others show their defaults:
# remove the '#' in front of a key (and of the key it belongs to) to state another value.
# Quantities are text with a unit: 5 ms, 2 s, 12 V, 4k7, 100 kΩ, 5 %, 5 cents.
"""
_COLUMN = 30
_WIDTH = 110


def starter_text() -> str:
    """A commented page that reads without problems and states what the defaults are."""
    lines = [_HEAD]
    for name, key in keys_of(Spec):
        word = page_name(name, key)
        if key.kind != "section":
            lines.extend([""] * (not key.required))
            lines.append(_entry(word, key, "", key.required))
            continue
        assert key.section is not None
        lines.append("")
        lines.append(_line(f"{word}:", key.says, "" if key.required else "#"))
        for inner_name, inner in keys_of(key.section):
            lines.append(_entry(page_name(inner_name, inner), inner, "  ", inner.required))
    return "\n".join(lines) + "\n"


def _entry(word: str, key: Key, indent: str, stated: bool) -> str:
    """One key with its value and what it means."""
    value = key.example if stated else key.default
    says = key.help
    if key.pitch_default:
        says = f"{says}; {key.pitch_default} with signal.pitch: true"
    if not stated and key.example:
        says = f"{says}; for instance {key.example}"
    return _line(f"{indent}{word}: {value}", says, "" if stated else "#")


def _line(text: str, says: str, mark: str) -> str:
    """A key and what it means, wrapped beside it."""
    # a hard blank keeps a number and its unit on one line
    glued = re.sub(r"(?<=[0-9]) (?=[^0-9 ]{1,5}\b|%|Ω)", "\u00a0", says)
    wrapped = textwrap.wrap(glued, _WIDTH - _COLUMN - 4, break_on_hyphens=False)
    first, *rest = (piece.replace("\u00a0", " ") for piece in wrapped)
    lines = [f"{f'{mark}{text}':<{_COLUMN}}  # {first}", *(f"{'':<{_COLUMN}}  # {more}" for more in rest)]
    return "\n".join(lines)
