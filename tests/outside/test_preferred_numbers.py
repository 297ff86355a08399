"""IEC 60063: our series against the printed table and against other programs."""

import eseries
import pytest

from modgen.formulas.series import SERIES, in_series, nearest, series_values


@pytest.mark.source("IEC 60063:2015, table of the E24, E12, E6 and E3 series, as reprinted in makers' catalogues")
@pytest.mark.parametrize(
    ("name", "printed"),
    [
        ("E24", "10 11 12 13 15 16 18 20 22 24 27 30 33 36 39 43 47 51 56 62 68 75 82 91"),
        ("E12", "10 12 15 18 22 27 33 39 47 56 68 82"),
        ("E6", "10 15 22 33 47 68"),
        ("E3", "10 22 47"),
    ],
)
def test_the_printed_series(name, printed):
    assert SERIES[name] == tuple(int(figure) for figure in printed.split())


@pytest.mark.source("PyPI eseries 1.2.1, eseries.series()")
@pytest.mark.parametrize("name", ["E3", "E6", "E12", "E24", "E48", "E96", "E192"])
def test_every_series_of_another_program(name):
    assert SERIES[name] == tuple(eseries.series(eseries.ESeries[name]))


@pytest.mark.source("PyPI eseries 1.2.1, eseries.erange()")
@pytest.mark.parametrize("name", ["E3", "E12", "E96", "E192"])
@pytest.mark.parametrize(("low", "high"), [(1.0, 1e7), (4.7e-10, 2.2e-5), (950.0, 1050.0)])
def test_ranges_of_another_program(name, low, high):
    theirs = list(eseries.erange(eseries.ESeries[name], low, high))
    assert series_values(name, low, high) == pytest.approx(theirs, rel=1e-12)


@pytest.mark.source("PyPI PyResistorColorCode 1.0.0, table E192: holds 920, where 100 x 10^(185/192) rounds to 919")
def test_the_exception_in_e192():
    assert round(100 * 10 ** (185 / 192)) == 919
    assert in_series(920.0, "E192")
    assert not in_series(919.0, "E192")


@pytest.mark.source("PyPI eseries 1.2.1, eseries.find_nearest()")
@pytest.mark.parametrize("value", [1300.0, 5.6e-8, 9.9, 3.0e5, 0.47, 88.0])
@pytest.mark.parametrize("name", ["E6", "E24", "E96"])
def test_nearest_of_another_program(value, name):
    assert nearest(value, name) == pytest.approx(eseries.find_nearest(eseries.ESeries[name], value), rel=1e-12)


@pytest.mark.source("PyPI eseries 1.2.1, eseries.find_nearest(), which goes by difference; we go by ratio")
def test_nearest_where_the_other_program_differs():
    # 1234 is 234 above 1000 and 266 below 1500, yet 1.234 times the one and 1/1.216 of the other
    assert eseries.find_nearest(eseries.E6, 1234.0) == 1000.0
    assert nearest(1234.0, "E6") == 1500.0
