"""Scatter of connections: what is put in comes out, with the degrees of freedom that it has."""

import numpy as np
import pytest

from stdfit.circuits.standard import reflection
from stdfit.fitting.observed import Observed
from stdfit.uncertainty.connections import (
    assumed_repeatability,
    pooled_repeatability,
    responses,
    running_mean,
)

FREQUENCY = np.linspace(10e6, 6e9, 201)
SD = np.array([0.02, 0.2, 0.1])
ASSUMED = (0.02, 0.2, 0.1)
NOISE = 1e-4
VALUES = {
    "open": [25.0, 1.0, 50.0, 45.0, 0.0, 0.0, 0.0],
    "short": [25.0, 1.0, 50.0, 3.0, 0.0, 0.0, 0.0],
    "load": [0.0, 0.0, 50.0, 50.3, 20.0, 0.0],
}
CONNECTIONS = 5


def bench_of(rng, extra=0.0, sigma=NOISE):
    """Readings with lumped scatter, noise, and `extra` of a slow ripple of its own on each connection."""
    observed = []
    for kind, values in VALUES.items():
        gamma, _ = reflection(kind, values, FREQUENCY, 50.0)
        acts = responses(gamma, FREQUENCY, 50.0)
        readings = []
        for _ in range(CONNECTIONS):
            noise = sigma * (rng.standard_normal(FREQUENCY.size) + 1j * rng.standard_normal(FREQUENCY.size))
            turn = np.exp(2j * np.pi * (rng.uniform() + rng.choice([-1, 1]) * FREQUENCY / 0.9e9))
            readings.append(gamma + acts @ (SD * rng.standard_normal(3)) + noise + np.sqrt(2) * extra * turn)
        observed.append(Observed.from_readings(kind, kind, FREQUENCY, readings))
    return observed


@pytest.fixture(scope="module")
def seeds():
    """What is found on 150 simulated benches."""
    rng = np.random.default_rng(2009)
    return [pooled_repeatability(bench_of(rng), 50.0, ASSUMED) for _ in range(150)]


def test_responses_are_the_derivatives_of_the_circuits():
    """Series impedance, shift of the plane and imbalance, by differences of exact transformations."""
    gamma, _ = reflection("load", [10.0, 1.0, 50.0, 20.0, 200.0, 30.0], FREQUENCY, 50.0)
    omega, small = 2 * np.pi * FREQUENCY, 1e-6

    def through(series, shunt):
        z = 50.0 * (1 + gamma) / (1 - gamma) + series
        y = 1 / z + shunt
        return (1 - 50.0 * y) / (1 + 50.0 * y)

    def by(changed):
        return (changed(small) - changed(-small)) / (2 * small)

    expected = np.stack(
        [
            by(lambda x: through(x, 0.0)),
            by(lambda x: gamma * np.exp(-2j * omega * x * 1e-12)),
            by(lambda x: through(0.5j * omega * x * 1e-12 * 50.0, -0.5j * omega * x * 1e-12 / 50.0)),
        ],
        axis=1,
    )
    np.testing.assert_allclose(responses(gamma, FREQUENCY, 50.0), expected, rtol=0, atol=1e-7)


def test_scatter_is_recovered(seeds):
    """Mean variance over the seeds, within 4 of its standard errors: its spread is √(2/ν) for ν degrees of freedom."""
    variance = np.array([one.sd**2 for one in seeds])
    freedom = np.array([one.freedom for one in seeds]).mean(axis=0)
    error = 4 * np.sqrt(2 / freedom / len(seeds))
    assert (np.abs(variance.mean(axis=0) / SD**2 - 1) < error).all()


def test_scatter_near_the_noise_is_not_lost_in_it():
    """With noise of 0.02 a shift of the plane is told to two thirds: its mean variance must still be right."""
    rng = np.random.default_rng(22)
    found = [pooled_repeatability(bench_of(rng, sigma=0.02), 50.0, ASSUMED) for _ in range(120)]
    freedom = np.mean([one.freedom[1] for one in found])
    assert 5.0 < freedom < 10.0
    mean = np.mean([one.sd[1] ** 2 for one in found])
    assert mean / SD[1] ** 2 == pytest.approx(1.0, abs=4 * np.sqrt(2 / freedom / 120))


def test_noise_is_recovered(seeds):
    assert np.mean([one.noise for one in seeds]) == pytest.approx(NOISE, rel=0.03)


def test_degrees_of_freedom_are_those_of_the_spread(seeds):
    """A variance with ν degrees of freedom scatters by √(2/ν): the stated ν must fit within a third."""
    variance = np.array([one.sd**2 for one in seeds])
    shown = 2 * variance.mean(axis=0) ** 2 / variance.var(axis=0, ddof=1)
    stated = np.array([one.freedom for one in seeds]).mean(axis=0)
    np.testing.assert_allclose(stated, shown, rtol=0.34)


def test_degrees_of_freedom_keep_their_bounds(seeds):
    freedom = np.array([one.freedom for one in seeds])
    assert (freedom <= 3 * (CONNECTIONS - 1) + 1e-9).all()
    assert (freedom >= 1.0).all()


def test_an_ideal_open_does_not_tell_contact_resistance():
    """No current flows at its end: the degrees of freedom are those of the other standards."""
    rng = np.random.default_rng(20)
    whole = bench_of(rng)
    noise = NOISE * (rng.standard_normal((5, 201)) + 1j * rng.standard_normal((5, 201)))
    ideal = Observed.from_readings("open", "open", FREQUENCY, 1.0 + noise)
    told = pooled_repeatability(whole[1:], 50.0, ASSUMED).freedom[0]
    assert pooled_repeatability([ideal, *whole[1:]], 50.0, ASSUMED).freedom[0] == pytest.approx(
        told, abs=0.05
    )


def test_lumped_scatter_leaves_nothing_over(seeds):
    left = np.array([np.mean([leftover.mean() for leftover in one.leftover]) for one in seeds])
    assert np.median(left) < 0.1 * NOISE


def test_other_scatter_is_found():
    """A ripple of 20 times the noise on every connection: its size per component is recovered within 15 %."""
    rng = np.random.default_rng(17)
    extra = 20 * NOISE
    found = [pooled_repeatability(bench_of(rng, extra), 50.0, ASSUMED).leftover for _ in range(20)]
    power = np.mean([np.mean([leftover**2 for leftover in one]) for one in found])
    assert np.sqrt(power) == pytest.approx(extra, rel=0.15)


def test_a_standard_connected_once_takes_the_others_leftover_and_does_not_count():
    rng = np.random.default_rng(18)
    whole = bench_of(rng)
    once = Observed.from_readings("open", "open", FREQUENCY, [whole[0].gamma])
    found = pooled_repeatability([once, *whole[1:]], 50.0, ASSUMED)
    usual = np.sqrt(np.mean([np.mean(own**2) for own in found.leftover[1:]]))
    np.testing.assert_allclose(found.leftover[0], usual)
    assert found.measured
    assert found.freedom.max() <= 2 * (CONNECTIONS - 1)


def test_the_stated_default_is_marked_as_such():
    whole = bench_of(np.random.default_rng(19))
    found = assumed_repeatability(whole, ASSUMED, NOISE)
    assert not found.measured
    assert found.noise == NOISE
    assert np.isinf(found.freedom).all()
    assert not any(leftover.any() for leftover in found.leftover)


def test_running_mean_is_shorter_at_the_ends():
    values = np.array([1.0, 2.0, 6.0, 4.0, 0.0])
    np.testing.assert_allclose(running_mean(values, 3), [1.5, 3.0, 4.0, 10 / 3, 2.0])
    np.testing.assert_allclose(running_mean(np.full(50, 7.0), 9), 7.0)


def test_a_part_that_no_repeated_standard_shows_is_assumed():
    """An ideal open shows no contact resistance: the stated default stands in, and is not called measured."""
    frequency = np.linspace(50e6, 6e9, 101)
    rng = np.random.default_rng(5)
    readings = np.ones((3, 101)) + NOISE * (
        rng.standard_normal((3, 101)) + 1j * rng.standard_normal((3, 101))
    )
    found = pooled_repeatability([Observed.from_readings("open", "open", frequency, readings)], 50.0, ASSUMED)
    assert found.sd[0] == ASSUMED[0]
    assert np.isinf(found.freedom[0])
