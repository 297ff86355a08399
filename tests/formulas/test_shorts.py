"""Shorts: V/R until the limit, and heat that is greatest at half the voltage."""

from __future__ import annotations

import math

import pytest

from modgen.formulas.shorts import section_power, shorted_current


def test_current_by_hand():
    assert shorted_current(12.0, 1e3, 60e-3) == 12e-3
    assert shorted_current(-12.0, 1e3, 60e-3) == 12e-3
    assert shorted_current(12.0, 100.0, 60e-3) == 60e-3
    assert shorted_current(12.0, 200.0, 60e-3) == 60e-3
    assert shorted_current(12.0, 0.0, 60e-3) == 60e-3
    assert shorted_current(12.0, 1e3, math.inf) == 12e-3


def test_heat_by_hand():
    # 6 V at 6 mA
    assert section_power(12.0, 1e3, 60e-3) == pytest.approx(36e-3)
    assert section_power(-12.0, 1e3, 60e-3) == pytest.approx(36e-3)
    # 60 mA before half the voltage: 12 V less 0.6 V
    assert section_power(12.0, 10.0, 60e-3) == pytest.approx(60e-3 * 11.4)
    assert section_power(12.0, 0.0, 60e-3) == pytest.approx(0.72)


def test_no_other_level_is_hotter():
    worst = section_power(12.0, 150.0, 60e-3)
    levels = [n / 100 * 12.0 for n in range(101)]
    assert worst == pytest.approx(max((12.0 - v) * v / 150.0 for v in levels if v / 150.0 <= 60e-3))


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: shorted_current(1.0, -1.0, 1.0), "-1 ohm, limit 1 A: neither below 0"),
        (lambda: section_power(1.0, 1.0, math.inf), "1 ohm, limit inf A: neither below 0, the limit finite"),
    ],
)
def test_values_outside_the_domain(call, message):
    with pytest.raises(ValueError, match="neither") as caught:
        call()
    assert str(caught.value) == message
