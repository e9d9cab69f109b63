"""Coverage factors and 95 % radii against printed tables and independent integrals."""

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.special import stdtrit
from scipy.stats import f as f_distribution

from stdfit.uncertainty.budget import Share, expanded
from stdfit.uncertainty.region import CIRCULAR, LINE, circular, effective_freedom, radius_95, student


@pytest.mark.parametrize(
    ("freedom", "factor"), [(1, 12.71), (2, 4.30), (3, 3.18), (4, 2.78), (9, 2.26), (15, 2.13)]
)
def test_student_factors(freedom, factor):
    """JCGM 100:2008, table G.2, 95 % (published)."""
    assert student(freedom) == pytest.approx(factor, abs=0.005)


def test_factors_without_end_of_freedom():
    """1.960 on a line: JCGM 100:2008, table G.2 (published); 2.448 = √(−2 ln 0.05) for a circle (derived)."""
    assert student(np.inf) == pytest.approx(1.960, abs=5e-4)
    assert circular(np.inf) == pytest.approx(2.448, abs=5e-4)
    assert (student(np.inf), circular(np.inf)) == (LINE, CIRCULAR)
    assert student(1e5) == pytest.approx(LINE, rel=1e-4)
    assert circular(1e5) == pytest.approx(CIRCULAR, rel=1e-4)


def test_students_series_is_the_librarys_function():
    freedom = np.geomspace(1.0, 9e5, 2000)
    np.testing.assert_allclose(student(freedom), stdtrit(freedom, 0.975), rtol=1e-12)


def exact_radius_probability(radius, ratio):
    """P(|z| ≤ radius) for variances 1 and `ratio`: the angle is integrated, the radius is closed."""
    if ratio == 0.0:
        return quad(lambda x: np.exp(-0.5 * x * x) / np.sqrt(2.0 * np.pi), -radius, radius, epsabs=1e-13)[0]

    def by_angle(angle):
        a = np.cos(angle) ** 2 + np.sin(angle) ** 2 / ratio
        return (1.0 - np.exp(-0.5 * radius**2 * a)) / (2.0 * np.pi * a * np.sqrt(ratio))

    return 4.0 * quad(by_angle, 0.0, 0.5 * np.pi, epsabs=1e-13, epsrel=1e-13, limit=200)[0]


def density(radius, ratio):
    step = 1e-4
    both = exact_radius_probability(radius + step, ratio), exact_radius_probability(radius - step, ratio)
    return (both[0] - both[1]) / (2 * step)


RATIOS = [0.0, 0.01, 0.02, 0.05, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0]


@pytest.mark.parametrize("ratio", RATIOS)
def test_radii_hold_95_per_cent(ratio):
    """The radius found is right to 1e-6 when its excess of probability over its density is."""
    radius = radius_95(np.array([1.0, ratio, 0.0]))
    error = (exact_radius_probability(radius, ratio) - 0.95) / density(radius, ratio)
    assert abs(error) < 1e-6


@pytest.mark.parametrize("ratio", [0.005, 0.015, 0.035, 0.075, 0.15, 0.25, 0.45, 0.95])
def test_radii_between_the_tabulated_ratios(ratio):
    radius = radius_95(np.array([1.0, ratio, 0.0]))
    assert exact_radius_probability(radius, ratio) == pytest.approx(0.95, abs=2e-4)


def test_radius_does_not_depend_on_the_orientation():
    turn = np.array([[np.cos(0.7), -np.sin(0.7)], [np.sin(0.7), np.cos(0.7)]])
    turned = turn @ np.diag([0.3, 2.0]) @ turn.T
    plain = np.array([0.3, 2.0, 0.0])
    found = radius_95(np.array([turned[0, 0], turned[1, 1], turned[0, 1]]))
    assert found == pytest.approx(radius_95(plain), rel=1e-12)
    assert radius_95(9.0 * plain) == pytest.approx(3.0 * radius_95(plain), rel=1e-12)
    assert radius_95(np.zeros(3)) == 0.0


@pytest.mark.parametrize("freedom", [1, 2, 4, 9, 15, 100])
def test_circular_factor_is_the_f_distribution(freedom):
    """√(2·F0.95(2, ν)): scipy.stats.f as the independent implementation."""
    assert circular(freedom) == pytest.approx(np.sqrt(2.0 * f_distribution.ppf(0.95, 2, freedom)), rel=1e-9)


@pytest.mark.parametrize("freedom", [3.0, 8.5])
def test_few_degrees_of_freedom_reach_the_two_limits(freedom):
    assert radius_95(np.array([4.0, 0.0, 0.0]), freedom) == pytest.approx(
        2.0 * stdtrit(freedom, 0.975), rel=1e-9
    )
    assert radius_95(np.array([4.0, 4.0, 0.0]), freedom) == pytest.approx(
        2.0 * np.sqrt(2.0 * f_distribution.ppf(0.95, 2, freedom)), rel=1e-9
    )


def test_welch_satterthwaite_of_three_inputs():
    """JCGM 100:2008, G.4.1, example (from memory, reproduced numerically): Y = b·X1·X2·X3.

    Relative standard uncertainties 0.25 %, 0.57 %, 0.82 % from 10, 5 and 15 readings: 1.03 %, ν = 19.0,
    and 2.09 · 1.03 % = 2.2 %.
    """
    relative, freedoms = np.array([0.25, 0.57, 0.82]), np.array([9.0, 4.0, 14.0])
    assert effective_freedom(relative**2, freedoms) == pytest.approx(19.0, abs=0.05)
    shares = [
        Share(str(i), freedoms[i], np.diag(np.eye(3)[i] * relative[i] ** 2)[None])
        for i in range(relative.size)
    ]
    u, u95 = expanded(np.ones((1, 3)), shares)
    assert u[0] == pytest.approx(1.03, abs=0.005)
    assert u95[0] / u[0] == pytest.approx(2.09, abs=0.005)
    assert u95[0] == pytest.approx(2.2, abs=0.05)


def test_effective_freedom_keeps_its_bounds():
    rng = np.random.default_rng(1947)
    variances, freedoms = rng.exponential(size=(4, 300)), np.array([3.0, 5.0, 8.0, 20.0])
    nu = effective_freedom(variances, freedoms)
    assert nu.min() >= freedoms.min()
    assert nu.max() <= freedoms.sum()


def test_effective_freedom_of_one_and_of_stated_sources():
    assert effective_freedom(np.array([2.0]), np.array([7.0])) == pytest.approx(7.0)
    assert effective_freedom(np.array([2.0, 0.0]), np.array([7.0, 1.0])) == pytest.approx(7.0)
    assert effective_freedom(np.array([2.0, 3.0]), np.array([np.inf, np.inf])) == np.inf
    assert effective_freedom(np.array([0.0, 0.0]), np.array([4.0, np.inf])) == np.inf
    assert effective_freedom(np.array([1.0, 1.0]), np.array([4.0, np.inf])) == pytest.approx(16.0)
