"""Preferred numbers."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from modgen.formulas.series import SERIES, in_series, nearest, series_values

NAMES = list(SERIES)


def test_sizes():
    assert {name: len(figures) for name, figures in SERIES.items()} == {f"E{n}": n for n in (3, 6, 12, 24, 48, 96, 192)}


def test_values_and_bounds():
    assert series_values("E3", 1.0, 100.0) == (1.0, 2.2, 4.7, 10.0, 22.0, 47.0, 100.0)
    assert series_values("E6", 100e-9, 1e-6) == pytest.approx((1e-7, 1.5e-7, 2.2e-7, 3.3e-7, 4.7e-7, 6.8e-7, 1e-6))
    assert series_values("E12", 5.0, 5.5) == ()
    assert series_values("E12", 5.0, 4.0) == ()


def test_membership():
    assert in_series(4.7e-6, "E6")
    assert in_series(4.7e-6 * 10, "E6")
    assert not in_series(25e3, "E24")
    assert in_series(24.9e3, "E96")
    assert not in_series(24.9e3, "E24")
    # a value counts as the number to within a millionth, no further
    assert in_series(4700.0 * (1 + 5e-7), "E24")
    assert not in_series(4700.0 * (1 + 5e-6), "E24")
    assert not in_series(0.0, "E24")
    assert not in_series(math.inf, "E24")


@pytest.mark.parametrize("name", NAMES)
def test_every_decade_is_the_same(name):
    decade = [v for v in series_values(name, 1e3, 10e3) if v < 10e3]
    assert decade == [v * 1e3 / SERIES[name][0] for v in SERIES[name]]
    assert all(in_series(v * 1e-12, name) for v in decade)


@given(st.floats(1e-12, 1e9), st.sampled_from(NAMES))
def test_nearest_is_a_member_and_stays(value, name):
    found = nearest(value, name)
    assert in_series(found, name)
    assert nearest(found, name) == found
    others = series_values(name, value / 10, value * 10)
    assert all(abs(math.log(found / value)) <= abs(math.log(other / value)) + 1e-12 for other in others)


@given(st.floats(1e-9, 1e9), st.floats(1.0, 10.0), st.sampled_from(NAMES))
def test_nearest_keeps_order(value, ratio, name):
    assert nearest(value, name) <= nearest(value * ratio, name)


def test_no_such_series():
    message = r"^unknown series 'E7': it is one of E3, E6, E12, E24, E48, E96, E192$"
    for function, arguments in ((series_values, ("E7", 1.0, 2.0)), (in_series, (1.0, "E7")), (nearest, (1.0, "E7"))):
        with pytest.raises(ValueError, match=message):
            function(*arguments)


def test_no_such_values():
    with pytest.raises(ValueError, match=r"^values from 0 to 1: above 0, and not infinite$"):
        series_values("E6", 0.0, 1.0)
    with pytest.raises(ValueError, match=r"^values from 1 to inf: above 0, and not infinite$"):
        series_values("E6", 1.0, math.inf)
    with pytest.raises(ValueError, match=r"^value -1: above 0, and not infinite$"):
        nearest(-1.0, "E6")
