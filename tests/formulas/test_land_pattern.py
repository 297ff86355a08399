"""Names of land patterns."""

import pytest

from modgen.formulas.land_pattern import (
    aluminium,
    axial,
    chip,
    dual_in_line,
    radial_box,
    radial_round,
    small_outline,
)


def test_names():
    assert chip("RESC", 1.6e-3, 0.8e-3, 0.55e-3) == "RESC1608X55N"
    assert chip("CAPC", 1.0e-3, 0.5e-3, 0.5e-3, density="L") == "CAPC1005X50L"
    assert small_outline("SOIC", 1.27e-3, 6.0e-3, 1.75e-3, 14, density="M") == "SOIC127P600X175-14M"
    assert aluminium(6.6e-3, 5.5e-3) == "CAPAE660X550N"
    assert axial("RESAD", 10.16e-3, 0.6e-3, 6.3e-3, 2.5e-3) == "RESAD1016W60L630D250"
    assert radial_round(2.0e-3, 0.5e-3, 5.0e-3, 11.0e-3) == "CAPPRD200W50D500H1100"
    assert radial_round(2.0e-3, 0.5e-3, 5.0e-3, 11.0e-3, polarised=False) == "CAPRD200W50D500H1100"
    assert radial_box(5e-3, 0.5e-3, 7.2e-3, 2.5e-3, 6.5e-3) == "CAPRR500W50L720T250H650"
    assert dual_in_line(7.62e-3, 0.53e-3, 2.54e-3, 19.3e-3, 5.08e-3, 14) == "DIP762W53P254L1930H508Q14"


def test_halves():
    # a chip 1.25 mm wide is a 12; hundredths are rounded up at the half
    assert chip("RESC", 2.0e-3, 1.25e-3, 0.6e-3) == "RESC2012X60N"
    assert chip("RESC", 2.0e-3, 1.26e-3, 0.6e-3) == "RESC2013X60N"
    assert chip("RESC", 2.0e-3, 1.25e-3, 0.605e-3) == "RESC2012X61N"


@pytest.mark.parametrize(
    ("dimensions", "message"),
    [
        ((0.0, 0.8e-3, 0.5e-3), "length 0 m: above 0 m and below 1 m"),
        ((1.6e-3, -0.8e-3, 0.5e-3), "width -0.0008 m: above 0 m and below 1 m"),
        ((1.6e-3, 0.8e-3, 1e-6), "height 1e-06 m: above 0 m and below 1 m"),
        # millimetres given for metres
        ((1.6, 0.8e-3, 0.5e-3), "length 1.6 m: above 0 m and below 1 m"),
        ((float("nan"), 0.8e-3, 0.5e-3), "length nan m: above 0 m and below 1 m"),
    ],
)
def test_no_dimension(dimensions, message):
    with pytest.raises(ValueError) as caught:  # noqa: PT011 - the whole message is compared
        chip("RESC", *dimensions)
    assert str(caught.value) == message


def test_no_pins_and_no_density():
    with pytest.raises(ValueError, match=r"^0 pins: at least 1$"):
        small_outline("SOIC", 1.27e-3, 6.0e-3, 1.75e-3, 0)
    with pytest.raises(ValueError, match=r"^0 pins: at least 1$"):
        dual_in_line(7.62e-3, 0.53e-3, 2.54e-3, 19.3e-3, 5.08e-3, 0)
    with pytest.raises(ValueError, match=r"^unknown density 'X': it is M, N or L$"):
        chip("RESC", 1.6e-3, 0.8e-3, 0.55e-3, density="X")
