"""Time factors, the response of a lag, and tapers."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from modgen.formulas.glide import step_response, taper_resistance, time_factor


def test_factors():
    assert time_factor("rise") == pytest.approx(2.1972245773)
    assert time_factor("time-constant") == 1.0
    assert time_factor("settle", 1.0, 5 / 1200) == pytest.approx(5.4806389)
    assert time_factor("settle", math.e, 1.0) == pytest.approx(1.0)


def test_one_lane_by_hand():
    # 1 uF, 1 Mohm + 2.2 kohm: rise 2.20 s; 2 ohm + 2.2 kohm: 4.84 ms
    assert time_factor("rise") * 1e-6 * (1e6 + 2.2e3) == pytest.approx(2.20, abs=5e-3)
    assert time_factor("rise") * 1e-6 * (2.0 + 2.2e3) == pytest.approx(4.84e-3, abs=5e-6)


@given(st.floats(1e-3, 10.0), st.floats(1e-4, 0.99), st.floats(1e-4, 1e3))
def test_after_the_settling_time_the_distance_is_what_was_asked(step, share, tau):
    time = tau * time_factor("settle", step, step * share)
    assert step - step_response(time, tau, 0.0, step) == pytest.approx(step * share, rel=1e-9)


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (("fall",), "unknown measure 'fall': it is rise, time-constant or settle"),
        (("settle", 1.0, 1.0), "a step of 1 V cannot settle to within 1 V: 0 V < within < step"),
        (("settle", 1.0, 0.0), "a step of 1 V cannot settle to within 0 V: 0 V < within < step"),
        (("settle", -1.0, 0.1), "a step of -1 V cannot settle to within 0.1 V: 0 V < within < step"),
    ],
)
def test_no_factor(arguments, message):
    with pytest.raises(ValueError) as caught:  # noqa: PT011 - the whole message is compared
        time_factor(*arguments)
    assert str(caught.value) == message


def test_response():
    assert step_response(0.0, 1.0, -5.0, 5.0) == -5.0
    assert step_response(1e3, 1.0, -5.0, 5.0) == 5.0
    assert step_response(math.log(2.0), 1.0, -5.0, 5.0) == pytest.approx(0.0)


def test_response_of_arrays():
    times = np.array([0.0, 1.0, 2.0])
    one_by_one = [step_response(float(t), 0.5, 1.0, 3.0) for t in times]
    assert step_response(times, 0.5, 1.0, 3.0) == pytest.approx(one_by_one)


def test_no_response():
    with pytest.raises(ValueError, match=r"^time -1 s and time constant 1 s: 0 <= time and 0 < time constant$"):
        step_response(-1.0, 1.0, 0.0, 1.0)
    with pytest.raises(ValueError, match=r"^time 1 s and time constant 0 s: 0 <= time and 0 < time constant$"):
        step_response(1.0, 0.0, 0.0, 1.0)
    with pytest.raises(
        ValueError,
        match=r"^a time below 0 s or a time constant not above 0 s: 0 <= time and 0 < time constant$",
    ):
        step_response(np.array([1.0, -1.0]), 1.0, 0.0, 1.0)


@pytest.mark.parametrize(("taper", "middle"), [("linear", 0.5), ("log", 0.15), ("reverse-log", 0.85), ("log", 0.1)])
def test_taper_goes_through_its_three_points(taper, middle):
    assert taper_resistance(taper, middle, 0.0) == 0.0
    assert taper_resistance(taper, middle, 0.5) == pytest.approx(middle)
    assert taper_resistance(taper, middle, 1.0) == pytest.approx(1.0)


def test_log_is_slow_at_first():
    # sqrt(b) = 1/0.15 - 1 = 17/3; at a quarter (b^(1/4) - 1)/(b - 1)
    base = (17 / 3) ** 2
    assert taper_resistance("log", 0.15, 0.25) == pytest.approx((base**0.25 - 1) / (base - 1))
    assert taper_resistance("log", 0.15, 0.25) < 0.25 < taper_resistance("reverse-log", 0.85, 0.25)


@given(st.floats(0.0, 1.0), st.floats(0.01, 0.49))
def test_reverse_log_is_the_mirror_of_log(rotation, middle):
    mirrored = 1.0 - taper_resistance("log", middle, 1.0 - rotation)
    assert taper_resistance("reverse-log", 1.0 - middle, rotation) == pytest.approx(mirrored, abs=1e-9)


def test_tapers_rise_and_take_arrays():
    rotation = np.linspace(0.0, 1.0, 11)
    for taper, middle in (("linear", 0.5), ("log", 0.15), ("reverse-log", 0.85)):
        share = taper_resistance(taper, middle, rotation)
        assert share == pytest.approx([taper_resistance(taper, middle, float(x)) for x in rotation])
        assert np.all(np.diff(share) > 0.0)


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (("log", 0.5, 0.5), "a log taper has 0.5 at half travel: it must be above 0 and below 0.5"),
        (("log", 0.0, 0.5), "a log taper has 0 at half travel: it must be above 0 and below 0.5"),
        (("reverse-log", 0.15, 0.5), "a reverse-log taper has 0.15 at half travel: it must be above 0.5 and below 1"),
        (("audio", 0.15, 0.5), "unknown taper 'audio': it is linear, log or reverse-log"),
        (("linear", 0.5, 1.5), "rotation 1.5: it goes from 0 to 1"),
        (("linear", 0.5, math.nan), "rotation nan: it goes from 0 to 1"),
    ],
)
def test_no_taper(arguments, message):
    with pytest.raises(ValueError) as caught:  # noqa: PT011 - the whole message is compared
        taper_resistance(*arguments)
    assert str(caught.value) == message


def test_no_taper_in_an_array():
    with pytest.raises(ValueError, match=r"^rotation \[ 0.5 -0.1\]: it goes from 0 to 1$"):
        taper_resistance("log", 0.15, np.array([0.5, -0.1]))
