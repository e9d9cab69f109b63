"""A short version of the long study: three benches of every family, with what so few can tell.

Neighbouring points of a curve, and the three standards of a bench, share one analyser and fail together, so a bench
counts once. From bench to bench the part of the points that the bound covers has a standard deviation of 0.08 to
0.10 (measured over hundreds of benches); the mean of N benches has SPREAD/√N, and three of those are allowed below
95 %.
"""

import numpy as np
import pytest

from stdfit.trials.study import family_names, run

BENCHES = 3
SPREAD = 0.10
FAMILIES = tuple(family_names())


@pytest.fixture(scope="module")
def rows():
    return {row.family: row for row in run([], BENCHES, workers=1)}


@pytest.mark.parametrize("family", FAMILIES)
def test_every_family_is_covered(rows, family):
    """Three benches: 0.95 − 3·0.10/√3 = 0.78. A bound that forgets a source of error falls far below it."""
    row = rows[family]
    assert row.failed == 0
    assert row.benches == BENCHES
    assert row.coverage >= 0.95 - 3.0 * SPREAD / np.sqrt(BENCHES)
    assert row.limit > 0.1


def test_all_benches_together(rows):
    """About 100 benches: 0.95 − 3·0.10/√100 = 0.92; for yes-or-no figures the binomial √(0.95·0.05/N)."""
    row = rows["all"]
    count = BENCHES * len(FAMILIES)
    assert row.benches == count
    assert row.failed == 0
    assert row.coverage >= 0.95 - 3.0 * SPREAD / np.sqrt(count)
    assert row.devices >= 0.95 - 3.0 * SPREAD / np.sqrt(count)
    binomial = 3.0 * np.sqrt(0.95 * 0.05 / count)
    assert row.limits_true >= 0.95 - binomial
    assert row.quantities >= 0.95 - binomial


def test_bounds_are_not_bought_with_width(rows):
    """The mean bound is at most 1.8 times what would just have held 95 % of the errors, and the plain covariance
    of the fit, which is narrower, holds hardly any."""
    assert 0.8 <= rows["all"].sharpness <= 1.8
    assert rows["all"].coverage_alone < 0.3
