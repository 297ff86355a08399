"""Everything in this folder is held against something outside: no source, no test."""

from __future__ import annotations

from collections.abc import Callable
from decimal import Decimal
from pathlib import Path
from typing import Any

import pytest

HERE = Path(__file__).resolve().parent


@pytest.hookimpl(tryfirst=True)
def pytest_collection_modifyitems(items: list[pytest.Item]) -> None:
    """Refuse to collect a test of this folder that does not say where its values come from."""
    missing = []
    for item in items:
        # this hook sees every test of the run, not only those beside it
        if HERE not in item.path.resolve().parents:
            continue
        marker = item.get_closest_marker("source")
        text = marker.args[0] if marker and len(marker.args) == 1 else ""
        if not isinstance(text, str) or not text.strip():
            missing.append(item.nodeid)
    if missing:
        raise pytest.UsageError(
            'tests in tests/outside need @pytest.mark.source("document, edition, table"): ' + ", ".join(missing)
        )


@pytest.fixture(scope="session")
def printed() -> Callable[[str], Any]:
    """Turn a printed number into an expectation: the number, within half a unit of its last digit."""

    def expect(text: str) -> Any:
        number = Decimal(text)
        half = Decimal(5).scaleb(int(number.as_tuple().exponent) - 1)
        return pytest.approx(float(number), rel=0.0, abs=float(half) * (1 + 1e-9))

    return expect
