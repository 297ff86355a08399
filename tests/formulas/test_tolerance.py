"""Worst cases and intervals."""

import itertools
import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from modgen.formulas.tolerance import root_sum_square, wilson_interval, worst_case_product


def test_all_and_none():
    low, high = wilson_interval(50, 50)
    assert high == 1.0
    assert low == pytest.approx(50 / (50 + 1.959964**2))
    assert wilson_interval(0, 50) == pytest.approx((0.0, 1.0 - low))
    assert wilson_interval(0, 50)[0] == 0.0


@given(st.integers(1, 10**6), st.data())
def test_the_share_is_inside(trials, data):
    successes = data.draw(st.integers(0, trials))
    low, high = wilson_interval(successes, trials)
    assert 0.0 <= low <= successes / trials <= high <= 1.0
    assert low < high


def test_more_boards_narrow_it():
    narrow, wide = wilson_interval(900, 1000), wilson_interval(90, 100)
    assert narrow[1] - narrow[0] < wide[1] - wide[0]
    assert wilson_interval(90, 100, z=2.575829)[0] < wide[0]


@pytest.mark.parametrize(("successes", "trials"), [(0, 0), (-1, 5), (6, 5)])
def test_no_interval(successes, trials):
    message = rf"^{successes} of {trials}: 1 <= trials, 0 <= successes <= trials$"
    with pytest.raises(ValueError, match=message):
        wilson_interval(successes, trials)


FACTOR = st.tuples(st.floats(1e-6, 1e6), st.floats(0.0, 0.9))


@given(st.lists(FACTOR, min_size=1, max_size=4))
def test_worst_case_is_the_extreme_of_all_corners(factors):
    corners = [
        math.prod(value * (1 + sign * tolerance) for (value, tolerance), sign in zip(factors, signs, strict=True))
        for signs in itertools.product((-1, 1), repeat=len(factors))
    ]
    assert worst_case_product(factors) == pytest.approx((min(corners), max(corners)), rel=1e-9)


def test_worst_case_by_hand():
    assert worst_case_product([(1e6, 0.20), (1e-6, 0.10)]) == pytest.approx((0.72, 1.32))
    assert worst_case_product([]) == (1.0, 1.0)


@pytest.mark.parametrize("factor", [(0.0, 0.1), (1.0, -0.1), (1.0, 1.0)])
def test_no_worst_case(factor):
    message = rf"^factor {factor[0]:g} at {factor[1]:g}: value above 0, 0 <= tolerance < 1$"
    with pytest.raises(ValueError, match=message):
        worst_case_product([factor])


def test_root_sum_square():
    assert root_sum_square([3.0, -4.0]) == 5.0
    assert root_sum_square([]) == 0.0
