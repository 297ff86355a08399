"""Dividers and loading."""

import pytest

from modgen.formulas.loading import divider, loading_error, parallel
from modgen.formulas.pitch import scale_to_cents


@pytest.mark.source(
    "from memory: T. R. Kuphaldt, Lessons in Electric Circuits, volume I, chapter 6: 45 V across 5k, 10k, 7.5k"
)
def test_voltage_divider(printed):
    r1, r2, r3 = 5e3, 10e3, 7.5e3
    assert divider(45.0, r1, r2 + r3) == printed("35")
    assert 45.0 - divider(45.0, r1, r2 + r3) == printed("10")
    assert divider(45.0, r1 + r2, r3) == printed("15")
    assert divider(45.0, r1, r2 + r3) - divider(45.0, r1 + r2, r3) == printed("20")


@pytest.mark.source(
    "from memory: T. R. Kuphaldt, Lessons in Electric Circuits, volume I, chapter 5: 10k, 2k and 1k in parallel"
)
def test_parallel_resistors(printed):
    assert parallel(10e3, 2e3, 1e3) == printed("625")


@pytest.mark.source("Common practice, no source: 1 kohm into 100 kohm loses 1 %, 12 cents an octave")
def test_output_resistor_into_the_usual_input(printed):
    error = loading_error(1e3, 100e3)
    assert 100 * error == printed("1")
    assert scale_to_cents(error) == printed("12")
    # the same by the divider, which the textbook holds
    assert 1 - divider(1.0, 1e3, 100e3) == pytest.approx(error)
