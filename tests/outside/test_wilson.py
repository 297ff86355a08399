"""The Wilson interval against its published table and another program."""

import pytest
from scipy.stats import binomtest

from modgen.formulas.tolerance import wilson_interval


@pytest.mark.source("from memory: R. G. Newcombe, Statistics in Medicine 17 (1998) 857-872, table I, method 3, 95 %")
@pytest.mark.parametrize(
    ("successes", "trials", "low", "high"),
    [
        (81, 263, "0.2553", "0.3662"),
        (15, 148, "0.0624", "0.1605"),
        (0, 20, "0.0000", "0.1611"),
        (1, 29, "0.0061", "0.1718"),
    ],
)
def test_newcombe(printed, successes, trials, low, high):
    bounds = wilson_interval(successes, trials)
    assert bounds == (printed(low), printed(high))


@pytest.mark.source("SciPy, scipy.stats.binomtest(k, n).proportion_ci(method='wilson'), 1.17.1 when written")
@pytest.mark.parametrize(("k", "n"), [(0, 1), (1, 1), (23, 60), (50, 50), (9990, 10000), (99999, 100000)])
def test_another_program(k, n):
    theirs = binomtest(k, n).proportion_ci(0.95, method="wilson")
    # z is given to seven digits here, and in full there
    assert wilson_interval(k, n) == pytest.approx((theirs.low, theirs.high), abs=1e-7)
