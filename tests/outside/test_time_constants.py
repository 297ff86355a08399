"""Time constants of textbook networks against the lane's own sums of resistances and capacitances."""

from __future__ import annotations

import pytest

from modgen.analysis.glide import LaneValues
from modgen.formulas.glide import time_factor
from modgen.formulas.loading import parallel


def network(ohms, branches) -> LaneValues:
    """A lane of exact resistors in series and a control of nothing; branches of capacitors side by side."""
    return LaneValues(
        isolating=tuple((ohm, 0.0) for ohm in ohms),
        control=(0.0, 0.0),
        end=(0.0, 0.0),
        taper="linear",
        middle=0.5,
        rising=True,
        adjustable=True,
        branches=tuple(tuple((farad, 0.0) for farad in branch) for branch in branches),
    )


FOUR = "from memory: OpenStax, College Physics, chapter 21, problem: 2.00 and 7.50 uF, 25.0 and 100 kohm, all ways"
BOTH = (25.0e3, 100e3)
SERIES, SIDE_BY_SIDE = ((2.00e-6, 7.50e-6),), ((2.00e-6,), (7.50e-6,))


@pytest.mark.source(FOUR)
@pytest.mark.parametrize(
    ("ohms", "branches", "scale", "answer"),
    [
        (BOTH, SERIES, 1.0, "0.1974"),
        (BOTH, SIDE_BY_SIDE, 1.0, "1.1875"),
        ((parallel(*BOTH),), SERIES, 1e3, "31.58"),
        ((parallel(*BOTH),), SIDE_BY_SIDE, 1.0, "0.190"),
    ],
)
def test_two_resistors_and_two_capacitors(printed, ohms, branches, scale, answer):
    assert scale * network(ohms, branches).time_constant(1.0) == printed(answer)


@pytest.mark.source(
    "from memory: OpenStax, College Physics, section 21.6, problem: wipers, 0.500 uF, 2.00 to 15.0 s: 4.00 to 30.0 Mohm"
)
@pytest.mark.parametrize(("megohm", "seconds"), [(4.00, "2.00"), (30.0, "15.0")])
def test_intermittent_wiper(printed, megohm, seconds):
    assert network((megohm * 1e6,), ((0.500e-6,),)).time_constant(0.0) == printed(seconds)


@pytest.mark.source(
    "from memory: OpenStax, College Physics, section 21.6, problem: pacemaker, 72 a minute, 25.0 nF: 33.3 Mohm"
)
def test_pacemaker(printed):
    # one time constant to a beat
    seconds = 60 / 72
    assert seconds / network((1e6,), ((25.0e-9,),)).time_constant(0.0) == printed("33.3")


@pytest.mark.source("OpenStax, University Physics volume 2, section 10.5: a rheostat of 0 to 10 kohm, 10.00 mF")
def test_a_rheostat_is_turned_to_its_answer(printed):
    # 12 V, trips at 10 V after 10.00 s: 558.11 ohm, which is 0.055811 of the travel of a linear 10 kohm
    values = LaneValues((), (10e3, 0.0), (0.0, 0.0), "linear", 0.5, True, True, (((10.00e-3, 0.0),),))
    assert values.time_constant(0.055811) * time_factor("settle", 12.0, 2.0) == printed("10.00")
