"""The highest frequency up to which a bound keeps within a tolerance, without a gap."""

import numpy as np
import pytest

from stdfit.validity.limit import first_gap

F = np.array([1e9, 2e9, 3e9, 4e9])


@pytest.mark.parametrize(
    "bound, limit_hz, place",
    [
        ([0.001, 0.005, 0.010, 0.020], 4e9, None),  # equal to the tolerance is within it
        ([0.001, 0.005, 0.010, 0.030], 3.5e9, 3),  # half way
        ([0.001, 0.015, 0.025, 0.001], 2.5e9, 2),  # what comes after a gap does not count
        ([0.021, 0.001, 0.001, 0.001], 0.0, 0),
        ([0.020, 0.060, 0.001, 0.001], 1e9, 1),
        ([0.001, np.nan, 0.001, 0.001], 1e9, 1),  # what is not known is not within
        ([np.nan, 0.001, 0.001, 0.001], 0.0, 0),
        ([0.001, 0.001, np.inf, 0.001], 2e9, 2),
        ([np.inf] * 4, 0.0, 0),
    ],
)
def test_first_gap(bound, limit_hz, place):
    found, at = first_gap(F, np.array(bound), 0.02)
    assert found == pytest.approx(limit_hz, rel=1e-12)
    assert at == place


def test_one_point():
    assert first_gap(np.array([1e9]), np.array([0.01]), 0.02) == (1e9, None)
    assert first_gap(np.array([1e9]), np.array([0.03]), 0.02) == (0.0, 0)


def test_the_limit_rises_with_the_tolerance_and_the_bound_keeps_it():
    rng = np.random.default_rng(1)
    for _ in range(200):
        bound = np.abs(rng.standard_normal(30)).cumsum() * rng.uniform(1e-4, 1e-2)
        bound += 0.002 * rng.random(30)
        grid = np.sort(rng.uniform(1e6, 6e9, 30))
        limits = [first_gap(grid, bound, within)[0] for within in (0.005, 0.01, 0.02, 0.05)]
        assert limits == sorted(limits)
        fine = np.linspace(grid[0], limits[2], 500) if limits[2] > 0.0 else np.array([])
        assert (np.interp(fine, grid, bound) <= 0.02 * (1 + 1e-9)).all()
