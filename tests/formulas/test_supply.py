"""Rails and diode drops."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from modgen.formulas.supply import behind_diode, interpolate_drop, rail_ends

# a small Schottky, greatest drops
POINTS = [(0.1e-3, 0.24), (1e-3, 0.32), (10e-3, 0.40), (30e-3, 0.50), (100e-3, 1.0)]


def test_points_are_kept():
    assert [interpolate_drop(POINTS, i) for i, _ in POINTS] == pytest.approx([v for _, v in POINTS])


def test_between_points_it_is_logarithmic():
    # half a decade between 1 mA and 10 mA is half of 80 mV
    assert interpolate_drop(POINTS, 10**-2.5) == pytest.approx(0.36)


def test_below_the_first_it_stays():
    assert interpolate_drop(POINTS, 0.0) == 0.24
    assert interpolate_drop(POINTS, 1e-6) == 0.24


def test_above_the_last_it_is_resistive():
    # 0.5 V over 70 mA: 7.14 ohm, so 100 mA more is 0.714 V more
    assert interpolate_drop(POINTS, 0.2) == pytest.approx(1.0 + 0.1 * 0.5 / 0.07)


def test_one_point():
    assert interpolate_drop([(1.0, 1.1)], 0.01) == interpolate_drop([(1.0, 1.1)], 5.0) == 1.1


@given(st.floats(0.0, 1.0), st.floats(0.0, 1.0))
def test_drop_never_falls_with_current(one, other):
    low, high = sorted((one, other))
    assert interpolate_drop(POINTS, low) <= interpolate_drop(POINTS, high) + 1e-12


@pytest.mark.parametrize(
    ("points", "current", "message"),
    [
        ([], 1.0, "points []: at least one, currents above 0 A and rising"),
        ([(0.0, 0.1)], 1.0, "points [(0.0, 0.1)]: at least one, currents above 0 A and rising"),
        (
            [(1.0, 0.1), (1.0, 0.2)],
            1.0,
            "points [(1.0, 0.1), (1.0, 0.2)]: at least one, currents above 0 A and rising",
        ),
        ([(1.0, 0.1)], -1.0, "forward current -1 A: not below 0 A"),
    ],
)
def test_no_drop(points, current, message):
    with pytest.raises(ValueError) as caught:  # noqa: PT011 - the whole message is compared
        interpolate_drop(points, current)
    assert str(caught.value) == message


def test_rails():
    assert rail_ends(12.0, 0.05) == pytest.approx((11.4, 12.6))
    assert rail_ends(-12.0, 0.05) == pytest.approx((-11.4, -12.6))
    assert rail_ends(0.0, 0.05) == (0.0, 0.0)
    for tolerance in (-0.1, 1.0):
        with pytest.raises(ValueError, match=rf"^tolerance {tolerance:g}: 0 <= tolerance < 1$"):
            rail_ends(12.0, tolerance)


def test_behind_a_diode():
    assert behind_diode(11.4, 0.3) == pytest.approx(11.1)
    assert behind_diode(-11.4, 0.3) == pytest.approx(-11.1)
    assert behind_diode(0.2, 0.3) == 0.0
    with pytest.raises(ValueError, match=r"^drop -0.1 V: not below 0 V$"):
        behind_diode(12.0, -0.1)
