"""Bumps that add up to a stationary random function."""

import numpy as np
import pytest

from stdfit.uncertainty.smooth import LENGTHS_PER_SPAN, bumps, correlation_lengths

LOW, HIGH = 1e9, 7e9
FREQUENCY = np.linspace(LOW, HIGH, 97)


@pytest.mark.parametrize("length", correlation_lengths(HIGH - LOW))
def test_covariance_is_gaussian(length):
    """exp(−Δ²/2ℓ²) to 2 parts in 10⁴, everywhere in the span and up to its ends."""
    basis = bumps(FREQUENCY, LOW, HIGH, length)
    expected = np.exp(-0.5 * ((FREQUENCY[:, None] - FREQUENCY) / length) ** 2)
    np.testing.assert_allclose(basis @ basis.T, expected, rtol=0, atol=2e-4)


def test_lengths_follow_the_span():
    np.testing.assert_allclose(correlation_lengths(6e9), 6e9 * np.array(LENGTHS_PER_SPAN))
    assert correlation_lengths(6e9).max() > 6e9 > correlation_lengths(6e9).min()


def test_the_number_of_bumps_does_not_grow_with_the_points():
    few = bumps(FREQUENCY[::8], LOW, HIGH, 2e9)
    many = bumps(FREQUENCY, LOW, HIGH, 2e9)
    np.testing.assert_array_equal(few, many[::8])


def test_drawn_functions_have_the_stated_size():
    """Mean square over 4000 draws of a function of unit variance, within 5 standard errors."""
    rng = np.random.default_rng(5)
    basis = bumps(FREQUENCY, LOW, HIGH, 1.5e9)
    drawn = basis @ rng.standard_normal((basis.shape[1], 4000))
    np.testing.assert_allclose(np.mean(drawn**2, axis=1), 1.0, atol=5 * np.sqrt(2 / 4000))
