"""Specs and a small catalogue for the sizing tests."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from modgen.catalogue import Catalogue, load_catalogue
from modgen.spec import Spec, read_spec


@pytest.fixture(scope="session")
def catalogue() -> Catalogue:
    return load_catalogue()


@pytest.fixture
def spec_of(write_spec: Callable) -> Callable[..., Spec]:
    def make(*lines: str) -> Spec:
        return read_spec(write_spec(*lines))

    return make
