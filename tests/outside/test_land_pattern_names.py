"""Land-pattern names as others publish them."""

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


@pytest.mark.source("IPC-7351B, naming convention, SOIC pattern names as they stand in makers' and layout libraries")
@pytest.mark.parametrize(("pins", "name"), [(8, "SOIC127P600X175-8N"), (14, "SOIC127P600X175-14N")])
def test_small_outline(pins, name):
    assert small_outline("SOIC", 1.27e-3, 6.00e-3, 1.75e-3, pins) == name


@pytest.mark.source(
    "from memory: IPC-7351B, naming convention, chip resistors and capacitors: RESC, CAPC + L W X height"
)
@pytest.mark.parametrize(
    ("family", "millimetres", "name"),
    [
        ("RESC", (1.6, 0.8, 0.55), "RESC1608X55N"),
        ("RESC", (2.0, 1.25, 0.6), "RESC2012X60N"),
        ("RESC", (3.2, 1.6, 0.7), "RESC3216X70N"),
        ("CAPC", (2.0, 1.25, 1.25), "CAPC2012X125N"),
    ],
)
def test_chips(family, millimetres, name):
    assert chip(family, *(mm * 1e-3 for mm in millimetres)) == name


@pytest.mark.source(
    "Draft IPC-7251, naming convention, published example DIOAD680W50L405D165 (the page's own key misprints D156)"
)
def test_axial_diode():
    assert axial("DIOAD", 6.80e-3, 0.50e-3, 4.05e-3, 1.65e-3) == "DIOAD680W50L405D165"


@pytest.mark.source("from memory: IPC-7351B and draft IPC-7251, names in the grammar of the published ones above")
def test_names_of_the_same_grammar():
    assert axial("RESAD", 10.16e-3, 0.60e-3, 6.30e-3, 2.50e-3) == "RESAD1016W60L630D250"
    assert axial("DIOAD", 10.16e-3, 0.79e-3, 5.21e-3, 2.72e-3) == "DIOAD1016W79L521D272"
    assert radial_round(2.50e-3, 0.50e-3, 6.30e-3, 11.50e-3) == "CAPPRD250W50D630H1150"
    assert radial_box(5.00e-3, 0.50e-3, 7.20e-3, 3.50e-3, 8.50e-3) == "CAPRR500W50L720T350H850"
    assert dual_in_line(7.62e-3, 0.53e-3, 2.54e-3, 9.59e-3, 5.08e-3, 8) == "DIP762W53P254L959H508Q8"
    assert small_outline("SOT", 0.95e-3, 2.37e-3, 1.12e-3, 3) == "SOT95P237X112-3N"
    assert chip("DIOM", 5.2e-3, 2.6e-3, 2.44e-3) == "DIOM5226X244N"
    assert chip("SOD", 3.7e-3, 1.6e-3, 1.35e-3) == "SOD3716X135N"
    assert aluminium(6.60e-3, 5.50e-3) == "CAPAE660X550N"
