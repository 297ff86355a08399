"""First-order lags: textbook problems against our response and time factors."""

import math

import pytest

from modgen.formulas.glide import step_response, time_factor

KUPHALDT = "from memory: T. R. Kuphaldt, Lessons in Electric Circuits, volume I, chapter 16: 15 V, 10 kohm, 100 uF"


@pytest.mark.source(KUPHALDT)
@pytest.mark.parametrize(
    ("seconds", "volts"),
    [
        ("0.5", "5.902"),
        ("1", "9.482"),
        ("2", "12.970"),
        ("3", "14.253"),
        ("5", "14.899"),
        ("7.25", "14.989"),
    ],
)
def test_charging_capacitor(printed, seconds, volts):
    assert step_response(float(seconds), 10e3 * 100e-6, 0.0, 15.0) == printed(volts)


@pytest.mark.source(
    "OpenStax, University Physics volume 2, section 10.5, intermittent wipers: R = 558.11 ohm at 10.00 s"
)
def test_charge_to_a_trip_voltage(printed):
    # 12 V, 10.00 mF, trips at 10 V after 10.00 s; "settled to within 2 V of 12 V"
    resistance = 10.00 / (10.00e-3 * time_factor("settle", 12.0, 12.0 - 10.0))
    assert resistance == printed("558.11")


@pytest.mark.source(
    "OpenStax, University Physics volume 2, chapter 10, problem 54: 8.00 uF, 12.0 kV to 600 V, tau 10.0 ms"
)
def test_discharge_of_a_defibrillator(printed):
    assert 10.0e-3 * time_factor("settle", 12.0e3, 600.0) * 1e3 == printed("30.0")
    # back again, with the resistance of the answer and its rounded time: 600 V to two figures
    assert step_response(30.0e-3, 1.25e3 * 8.00e-6, 12.0e3, 0.0) == printed("6.0e2")


@pytest.mark.source(
    "from memory: OpenStax, College Physics, section 21.6, example: 8.00 uF, 1.00 kohm, 10.0 kV to 500 V "
    "in about 24.0 ms (it rounds to three time constants, where 498 V is left)"
)
def test_discharge_after_three_time_constants(printed):
    tau = 8.00e-6 * 1.00e3
    assert tau * time_factor("settle", 10.0e3, 500.0) * 1e3 == printed("24.0")
    assert step_response(3 * tau, tau, 10.0e3, 0.0) == printed("498")


@pytest.mark.source(
    "from memory: universal time-constant curve, as textbooks tabulate it: 63.2 %, 86.5 %, 95.0 %, 98.2 %, 99.3 %"
)
@pytest.mark.parametrize(("taus", "percent"), [(1, "63.2"), (2, "86.5"), (3, "95.0"), (4, "98.2"), (5, "99.3")])
def test_universal_curve(printed, taus, percent):
    assert 100 * step_response(float(taus), 1.0, 0.0, 1.0) == printed(percent)


@pytest.mark.source("Common practice, no source: t_rise = 2.2 RC = 0.35/bandwidth, 10 % to 90 %")
def test_rise_time(printed):
    factor = time_factor("rise")
    assert factor == printed("2.2")
    assert factor / (2 * math.pi) == printed("0.35")
    # IEEE Std 181's own definition, by the response: from the 10 % level to the 90 % level
    t10, t90 = -math.log(0.9), -math.log(0.1)
    assert step_response(t10, 1.0, 0.0, 1.0) == pytest.approx(0.1)
    assert step_response(t90, 1.0, 0.0, 1.0) == pytest.approx(0.9)
    assert factor == pytest.approx(t90 - t10)


@pytest.mark.source(
    "from memory: converter handbooks, settling of one pole: 6.9 tau to 0.1 %, 9.2 tau to 0.01 % (ln 1000, ln 10000)"
)
@pytest.mark.parametrize(("share", "taus"), [("1e-3", "6.9"), ("1e-4", "9.2")])
def test_settling_of_one_pole(printed, share, taus):
    assert time_factor("settle", 1.0, float(share)) == printed(taus)
