"""Constant, drift or step: values over time with errors of their own and in common."""

import numpy as np
import pytest

from stdfit.validity.change.trend import (
    DRIFT,
    EITHER,
    SAME,
    STEP,
    TOO_FEW,
    Series,
    own_uncertainty,
    series_of,
    trend,
)

LINE = 1.959964


def white(x, y, u, common=0.0, freedom=np.inf):
    """Values with independent errors u, and one error that all share."""
    n = len(x)
    parts = [np.diag(row) for row in np.eye(n) * u**2] + [common**2 * np.ones((n, n))]
    return Series(np.array(x, float), np.array(y, float), np.array(parts), [freedom] * n + [np.inf])


def test_slope_is_that_of_a_straight_line_fit():
    """numpy.polyfit with unscaled covariance is the reference."""
    x, y = np.arange(6.0), np.array([1.0, 1.3, 1.1, 1.6, 1.9, 1.7])
    found = trend(white(x, y, 0.2)).slope
    (slope, _), covariance = np.polyfit(x, y, 1, w=np.full(6, 5.0), cov="unscaled")
    half = LINE * np.sqrt(covariance[0, 0])
    assert [found.value, found.low, found.high] == pytest.approx([slope, slope - half, slope + half])


def test_what_all_values_share_moves_neither_slope_nor_step_nor_verdict():
    x, y = np.arange(6.0), np.array([0.0, 0.1, 0.0, 1.1, 1.0, 1.1])
    alone, shared = trend(white(x, y, 0.1)), trend(white(x, y, 0.1, common=5.0))
    for name in ("slope", "step"):
        one, other = getattr(alone, name), getattr(shared, name)
        assert [one.value, one.low, one.high] == pytest.approx([other.value, other.low, other.high], rel=1e-6)
    assert (alone.verdict, alone.after) == (shared.verdict, shared.after) == (STEP, 2)
    assert own_uncertainty(white(x, y, 0.1, common=5.0)) == pytest.approx(np.full(6, 0.1))


def test_step_has_the_size_and_uncertainty_of_a_difference_of_means():
    y = [0.0, 0.0, 2.0, 2.0, 2.0]
    found = trend(white(range(5), y, 0.1))
    half = LINE * 0.1 * np.sqrt(1 / 2 + 1 / 3)
    assert (found.verdict, found.after) == (STEP, 1)
    assert [found.step.value, found.step.high] == pytest.approx([2.0, 2.0 + half])


def test_few_degrees_of_freedom_widen():
    """Six errors of 3 degrees of freedom each: 18 by Welch and Satterthwaite where they weigh alike, fewer else."""
    x, y = np.arange(6.0), np.arange(6.0)
    sure, unsure = (trend(white(x, y, 0.1, freedom=nu)).slope for nu in (np.inf, 3.0))
    ratio = (unsure.high - unsure.low) / (sure.high - sure.low)
    assert 2.10 / LINE < ratio < 2.45 / LINE  # t of 18 degrees is 2.101, of 6 it is 2.447 (published tables)


@pytest.mark.parametrize(
    "y, verdict",
    [
        ([0.0, 1.0, 2.0, 3.0, 4.0, 5.0], DRIFT),
        ([0.0, 0.0, 0.0, 5.0, 5.0, 5.0], STEP),
        ([0.1, -0.2, 0.1, 0.0, 0.2, -0.1], SAME),
        ([0.0, 5.0], TOO_FEW),
        ([0.0, 0.0, 5.0], TOO_FEW),
        ([0.0, 0.3, 1.7, 2.0], EITHER),
    ],
)
def test_verdicts(y, verdict):
    assert trend(white(range(len(y)), y, 0.4)).verdict == verdict


def test_values_of_one_time_are_not_torn_apart():
    """A step between two values of the same day is none."""
    found = trend(white([0.0, 0.0, 1.0, 1.0], [0.0, 5.0, 0.0, 5.0], 0.1))
    assert found.after == 1
    assert found.verdict == SAME or found.scatter < 0.01


def test_scatter_that_nothing_describes_is_seen():
    assert trend(white(range(6), [0.0, 3.0, 0.0, 3.0, 0.0, 3.0], 0.1)).scatter < 1e-6


def test_false_alarms_are_as_many_as_asked_for():
    """400 series: 1.1 % is one standard deviation of a rate of 5 %."""
    rng = np.random.default_rng(1)
    chances = [trend(white(range(6), rng.standard_normal(6), 1.0)).chance for _ in range(400)]
    assert 0.05 - 3 * 0.011 <= np.mean(np.array(chances) <= 0.05) <= 0.05 + 3 * 0.011


def test_no_uncertainty_at_all_is_no_fault():
    found = trend(white(range(4), [1.0, 1.0, 1.0, 1.0], 0.0))
    assert found.verdict == SAME


def test_sizes_estimated_from_repeats_are_pooled():
    """σ² = (4·2·0.1² + 8·2·0.2²)/12: four and eight degrees of freedom, two connections each; a stated size stays."""
    sizes, freedoms = np.array([[0.1, 0.2], [0.3, 0.4]]), np.array([[4.0, 8.0], [np.inf, np.inf]])
    found = series_of([0.0, 1.0], [0.0, 0.0], sizes, [[0, 1], [0, 1]], freedoms, [2, 2])
    pooled = (4 * 0.1**2 + 8 * 0.2**2) / 12
    assert np.diag(found.covariance) == pytest.approx([pooled + 0.09, pooled + 0.16])
    assert found.freedoms.tolist() == [12.0, 12.0, np.inf, np.inf]


def test_a_common_root_makes_one_error():
    sizes = np.array([[0.3, 0.4, 0.5]])
    found = series_of([0, 1, 2], [0, 0, 0], sizes, [["a", "a", 2]], np.full((1, 3), np.inf), [3, 3, 3])
    both = (0.3**2 + 0.4**2) / 2
    np.testing.assert_allclose(found.covariance, [[both, both, 0.0], [both, both, 0.0], [0.0, 0.0, 0.25]])


def test_a_step_pays_for_its_place():
    """BIC of a perfect step, 3·ln n, minus that of the line, χ² + 2·ln n."""
    x, y = np.arange(5.0), np.array([0.0, 0.0, 2.0, 2.0, 2.0])
    chi_square = np.sum((y - np.polyval(np.polyfit(x, y, 1), x)) ** 2) / 0.5**2
    assert trend(white(x, y, 0.5)).preference == pytest.approx(np.log(5.0) - chi_square)
