"""Connections reduced to mean and deviations, and the noise of readings."""

import numpy as np
import pytest

from stdfit.fitting.observed import Observed, noise_of, without_delay

FREQUENCY = np.linspace(10e6, 6e9, 401)


def noise(rng, shape, sigma):
    return sigma * (rng.standard_normal(shape) + 1j * rng.standard_normal(shape))


def test_mean_and_deviations():
    readings = [np.array([1.0, 2j]), np.array([3.0, 0j])]
    observed = Observed.from_readings("a", "open", FREQUENCY[:2], readings)
    np.testing.assert_allclose(observed.gamma, [2.0, 1j])
    np.testing.assert_allclose(observed.deviations, [[-1.0, 1j], [1.0, -1j]])
    assert observed.connections == 2


def test_arrays_are_read_only_copies():
    gamma = np.ones(FREQUENCY.size, dtype=complex)
    observed = Observed("a", "open", FREQUENCY, gamma, np.zeros((1, FREQUENCY.size)))
    gamma[0] = 7.0
    assert observed.gamma[0] == 1.0
    with pytest.raises(ValueError, match="read-only"):
        observed.gamma[0] = 2.0


def test_noise_is_recovered_on_smooth_readings():
    """Over 200 seeds the mean is right within 2 %."""
    smooth = np.exp(-4j * np.pi * FREQUENCY * 20e-12) * (1 + 0.05 * np.cos(FREQUENCY / 4e8))
    rng = np.random.default_rng(11)
    found = [noise_of(smooth + noise(rng, FREQUENCY.size, 3e-4)) for _ in range(200)]
    assert np.mean(found) == pytest.approx(3e-4, rel=0.02)


def test_noise_of_several_rows_is_one_number():
    rng = np.random.default_rng(12)
    assert noise_of(noise(rng, (6, 401), 2e-3)) == pytest.approx(2e-3, rel=0.1)


def test_single_outlying_points_hardly_move_the_noise():
    rng = np.random.default_rng(13)
    values = noise(rng, FREQUENCY.size, 1e-3)
    spoilt = values.copy()
    spoilt[50::100] += 0.2
    assert noise_of(spoilt) == pytest.approx(noise_of(values), rel=0.15)


def test_smooth_readings_have_no_noise():
    assert noise_of(np.exp(-4j * np.pi * FREQUENCY * 50e-12)) < 1e-6


@pytest.mark.parametrize("delay_s", [-5e-12, 0.0, 80e-12, 900e-12])
def test_turning_back_a_delay_leaves_a_constant(delay_s):
    gamma = np.exp(0.4j) * np.exp(-4j * np.pi * FREQUENCY * delay_s)
    flat = without_delay(FREQUENCY, gamma)
    np.testing.assert_allclose(flat, np.full(flat.size, flat[0]), rtol=0, atol=1e-9)
