"""A module's name as the name of a folder."""

from __future__ import annotations

import unicodedata

LONGEST_SLUG = 60

# letters that Unicode does not decompose and that have an ASCII spelling people expect
_SPELLED = str.maketrans({"æ": "ae", "œ": "oe", "ø": "o", "đ": "d", "ð": "d", "ł": "l", "þ": "th", "ı": "i", "ħ": "h"})
# device names that Windows refuses as file names
_RESERVED = frozenset(["con", "prn", "aux", "nul", *(f"com{n}" for n in range(10)), *(f"lpt{n}" for n in range(10))])


def slug(text: str) -> str:
    """A name as lower-case ASCII letters and digits with single hyphens between.

    It can be a folder's name on every system and can never lead out of a folder. Letters with marks
    lose them; what has no ASCII form becomes a hyphen; a name that Windows reserves gets ``-module``
    appended. Empty when nothing is left.

    Examples
    --------
    >>> slug("Four-lane Pitch Lag (Größe 2)")
    'four-lane-pitch-lag-grosse-2'
    >>> slug("../..")
    ''
    >>> slug("con")
    'con-module'
    """
    plain = unicodedata.normalize("NFKD", text.casefold().translate(_SPELLED)).casefold()
    kept = "".join(
        c if c.isascii() and c.isalnum() else "" if unicodedata.combining(c) or c in "'’" else " " for c in plain
    )
    name = "-".join(kept.split())[:LONGEST_SLUG].strip("-")
    return f"{name}-module" if name in _RESERVED else name
