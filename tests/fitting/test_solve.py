"""Least squares on problems whose answer is known in closed form."""

import numpy as np
import pytest

from stdfit.base.errors import FitError
from stdfit.fitting.solve import inverse_of_normal, least_squares

X = np.linspace(0.0, 1.0, 9)
Y = np.array([0.1, 0.4, 0.2, 0.9, 1.1, 1.0, 1.5, 1.4, 2.1])
LINE = np.stack([np.ones(9), X], axis=1)


def straight_line(scale=(1.0, 1.0)):
    design = LINE * np.array(scale)
    return least_squares(lambda b: design @ b - Y, lambda b: design, np.zeros(2))


def test_a_straight_line_is_that_of_the_normal_equations():
    """Closed forms of a line: P. R. Bevington, Data Reduction and Error Analysis, sec. 6 (from memory)."""
    solution = straight_line()
    spread = np.sum((X - X.mean()) ** 2)
    slope = np.sum((X - X.mean()) * Y) / spread
    level = Y.mean() - slope * X.mean()
    variance = np.sum((Y - level - slope * X) ** 2) / 7
    np.testing.assert_allclose(solution.values, [level, slope], rtol=1e-9)
    assert solution.residual_variance == pytest.approx(variance, rel=1e-9)
    expected = np.sqrt(variance * np.array([1 / 9 + X.mean() ** 2 / spread, 1 / spread]))
    np.testing.assert_allclose(solution.standard_deviations, expected, rtol=1e-9)
    assert solution.converged


def test_scales_of_the_parameters_do_not_matter():
    plain, scaled = straight_line(), straight_line((1e-9, 1e7))
    factor = np.array([1e9, 1e-7])
    np.testing.assert_allclose(scaled.values, plain.values * factor, rtol=1e-6)
    np.testing.assert_allclose(scaled.standard_deviations, plain.standard_deviations * factor, rtol=1e-6)


def test_a_search_that_runs_off_is_told():
    """The largest double is 1.8e308: e^x has a derivative up to x = 709.78."""
    with np.errstate(over="ignore"), pytest.raises(FitError, match="ran off"):
        least_squares(lambda b: np.exp(np.minimum(b, 700.0)), lambda b: np.exp(b)[:, None], np.array([800.0]))


def test_results_are_read_only():
    with pytest.raises(ValueError, match="read-only"):
        straight_line().values[0] = 1.0


def test_as_many_readings_as_parameters_leave_no_variance():
    solution = least_squares(lambda b: b - 2.0, lambda b: np.eye(2), np.zeros(2))
    np.testing.assert_allclose(solution.values, 2.0)
    assert np.isnan(solution.residual_variance)


def test_inverse_of_a_badly_scaled_normal_matrix():
    design = LINE * np.array([1e-8, 1e9])
    expected = np.linalg.inv(LINE.T @ LINE) / np.outer([1e-8, 1e9], [1e-8, 1e9])
    np.testing.assert_allclose(inverse_of_normal(design), expected, rtol=1e-10)


def test_a_direction_that_readings_do_not_reach_gets_none():
    design = np.stack([X, X, np.zeros(9)], axis=1)
    covariance = inverse_of_normal(design)
    assert np.isfinite(covariance).all()
    assert np.array([1.0, 1.0, 0.0]) @ covariance @ np.array([1.0, 1.0, 0.0]) == pytest.approx(
        1 / np.sum(X**2)
    )
    assert covariance[2, 2] == 0.0
    assert np.array([1.0, -1.0, 0.0]) @ covariance @ np.array([1.0, -1.0, 0.0]) == pytest.approx(
        0.0, abs=1e-12
    )
