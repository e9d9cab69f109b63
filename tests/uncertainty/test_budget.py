"""Radii and expanded uncertainties out of the shares."""

import numpy as np
import pytest
from scipy.special import stdtrit

from stdfit.uncertainty.budget import Share, expanded, inverse_of, outer, plane, radius
from stdfit.uncertainty.region import CIRCULAR, LINE, circular

RNG = np.random.default_rng(8)
HALF = RNG.standard_normal((3, 3))
COVARIANCE = HALF @ HALF.T
DESIGN = RNG.standard_normal((5, 3)) + 1j * RNG.standard_normal((5, 3))


def test_plane_is_the_covariance_of_real_and_imaginary_part():
    found = plane(DESIGN, np.stack([COVARIANCE, 2 * COVARIANCE]))
    for k, row in enumerate(DESIGN):
        pair = np.stack([row.real, row.imag])
        expected = pair @ COVARIANCE @ pair.T
        np.testing.assert_allclose(found[0, k], [expected[0, 0], expected[1, 1], expected[0, 1]], rtol=1e-12)
    np.testing.assert_allclose(found[1], 2 * found[0], rtol=1e-12)


def test_uncertainties_of_several_sources_add_in_quadrature():
    shares = [Share("a", np.inf, COVARIANCE[None]), Share("b", np.inf, 3 * COVARIANCE[None])]
    u, u95 = expanded(np.eye(3), shares)
    np.testing.assert_allclose(u, 2 * np.sqrt(np.diag(COVARIANCE)), rtol=1e-12)
    np.testing.assert_allclose(u95, LINE * u, rtol=1e-12)


def test_the_worst_length_counts_for_each_combination():
    """Each combination has its own worst length, and a source without lengths is added to each."""
    lengths = np.stack([np.diag([4.0, 0.0]), np.diag([0.0, 9.0])])
    shares = [Share("smooth", np.inf, lengths), Share("fixed", np.inf, np.diag([5.0, 7.0])[None])]
    u, _ = expanded(np.eye(2), shares)
    np.testing.assert_allclose(u, [3.0, 4.0])
    wide = radius(np.array([[1.0, 0.0], [0.0, 1.0]]) + 0j, shares)
    np.testing.assert_allclose(wide, LINE * np.array([3.0, 4.0]))


@pytest.mark.parametrize("freedom", [2.0, 4.0, 11.0])
def test_few_degrees_of_freedom_take_students_factor(freedom):
    share = [Share("repeats", freedom, np.eye(2)[None])]
    u, u95 = expanded(np.array([[3.0, 4.0]]), share)
    assert u[0] == pytest.approx(5.0)
    assert u95[0] == pytest.approx(5.0 * stdtrit(freedom, 0.975), rel=1e-9)
    line = radius(np.array([[2.0, 0.0]]) + 0j, share)
    assert line[0] == pytest.approx(2.0 * stdtrit(freedom, 0.975), rel=1e-9)
    circle = radius(np.array([[1.0, 1j]]), share)
    assert circle[0] == pytest.approx(circular(freedom), rel=1e-9)


def test_mixed_sources_take_the_effective_freedom():
    """ν = (1 + 1)²/(1²/4) = 16 for two equal variances, one of them stated."""
    shares = [Share("repeats", 4.0, np.eye(1)[None]), Share("stated", np.inf, np.eye(1)[None])]
    _, u95 = expanded(np.eye(1), shares)
    assert u95[0] == pytest.approx(np.sqrt(2.0) * stdtrit(16.0, 0.975), rel=1e-9)


def test_the_freedom_of_a_radius_looks_at_both_parts():
    """One source in the real part with ν = 4, one as large and stated in the imaginary part: ν = 16, a circle."""
    shares = [
        Share("repeats", 4.0, np.diag([1.0, 0.0])[None]),
        Share("stated", np.inf, np.diag([0.0, 1.0])[None]),
    ]
    assert radius(np.array([[1.0, 1j]]), shares)[0] == pytest.approx(circular(16.0), rel=1e-9)


@pytest.mark.parametrize("ratio", [0.0, 0.3, 1.0])
def test_the_radius_holds_95_per_cent_of_draws(ratio):
    """200 000 draws; the tolerance is 4 standard errors of the count."""
    rng = np.random.default_rng(95)
    parts = rng.standard_normal((200_000, 2)) * np.sqrt([1.0, ratio])
    design = np.array([[1.0, 1j]])
    found = radius(design, [Share("s", np.inf, np.diag([1.0, ratio])[None])])
    inside = np.mean(np.abs(parts @ design[0]) <= found[0])
    assert inside == pytest.approx(0.95, abs=4 * np.sqrt(0.95 * 0.05 / 200_000))


def test_doubling_all_sources_doubles_the_radius():
    once = radius(DESIGN, [Share("s", 7.0, COVARIANCE[None])])
    twice = radius(DESIGN, [Share("s", 7.0, 4 * COVARIANCE[None])])
    np.testing.assert_allclose(twice, 2 * once, rtol=1e-12)
    assert (once > 0.0).all()
    assert CIRCULAR > LINE


def test_cuts_keep_their_own_radius():
    stack = np.stack([COVARIANCE, 9 * COVARIANCE])[None]
    found = radius(DESIGN, [Share("s", np.inf, stack)])
    assert found.shape == (2, 5)
    np.testing.assert_allclose(found[1], 3 * found[0], rtol=1e-12)


def test_inverse_of_badly_scaled_matrices():
    scale = np.array([1e-9, 1.0, 1e8])
    found = inverse_of(np.stack([COVARIANCE * np.outer(scale, scale), COVARIANCE]))
    expected = np.linalg.inv(COVARIANCE)
    np.testing.assert_allclose(found[0] * np.outer(scale, scale), expected, rtol=1e-8)
    np.testing.assert_allclose(found[1], expected, rtol=1e-8)


def test_outer_of_a_stack():
    np.testing.assert_allclose(outer(np.stack([HALF, 2 * HALF])), np.stack([COVARIANCE, 4 * COVARIANCE]))


def test_so_few_degrees_of_freedom_that_no_radius_is_a_number():
    assert circular(1e-3) == np.inf
    assert np.isfinite(circular(0.1))
