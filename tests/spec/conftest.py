"""Pages to read: a complete one, and that one with some keys changed."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from modgen.problems import InputError
from modgen.spec import parse_spec

KEYS = {
    "module": "Lag",
    "channels": "4",
    "jacks": "8",
    "rails": "{positive: 12 V, negative: -12 V}",
    "glide": "{shortest: 5 ms, longest: 2 s}",
}


@pytest.fixture(scope="session")
def page() -> Callable[..., str]:
    """A page of one line a key; keys given replace or follow the required ones, None removes."""

    def make(**keys: str | None) -> str:
        return "".join(f"{key}: {text}\n" for key, text in {**KEYS, **keys}.items() if text is not None)

    return make


@pytest.fixture(scope="session")
def refusal(page: Callable[..., str]) -> Callable[..., str]:
    """Every message about such a page."""

    def read(**keys: str | None) -> str:
        with pytest.raises(InputError) as caught:
            parse_spec(page(**keys))
        return str(caught.value)

    return read
