"""Module names as folder names."""

from __future__ import annotations

import re

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from modgen.spec.names import LONGEST_SLUG, slug


@pytest.mark.parametrize(
    ("name", "expected"),
    [
        ("Four-lane pitch lag", "four-lane-pitch-lag"),
        ("  Lag -- 2 / B_3 ", "lag-2-b-3"),
        ("Größe Ångström Łódź Æon", "grosse-angstrom-lodz-aeon"),
        ("Builder's lag", "builders-lag"),
        ("½ ﬁne", "1-2-fine"),
        ("../../etc", "etc"),
        ("..", ""),
        ("мой", ""),
        ("CON", "con-module"),
        ("com1", "com1-module"),
        ("lpt9", "lpt9-module"),
        ("com10", "com10"),
        ("console", "console"),
        ("x" * 100, "x" * LONGEST_SLUG),
        ("x" * (LONGEST_SLUG - 1) + " y", "x" * (LONGEST_SLUG - 1)),
    ],
)
def test_slug(name: str, expected: str) -> None:
    assert slug(name) == expected


@settings(deadline=None)
@given(st.text())
def test_a_slug_is_always_safe_and_final(name: str) -> None:
    found = slug(name)
    assert re.fullmatch(r"([a-z0-9]+(-[a-z0-9]+)*)?", found)
    assert len(found) <= LONGEST_SLUG + len("-module")
    assert slug(found) == found
