"""Sources of error as they act on the readings."""

import numpy as np
import pytest

from stdfit.data.bench_records import StatedResidual
from stdfit.fitting.observed import Observed
from stdfit.uncertainty.connections import PARTS, Repeatability, responses
from stdfit.uncertainty.region import radius_95
from stdfit.uncertainty.sources import (
    LumpedSource,
    SmoothSource,
    WhiteSource,
    analyser_sources,
    connection_sources,
    reading_variance,
)

FREQUENCY = np.linspace(1e9, 6e9, 26)
GAMMA = 0.7 * np.exp(-1j * FREQUENCY / 1e9)
STATED = StatedResidual(
    np.array([1e9, 3e9, 6e9]),
    np.array([0.005, 0.01, 0.02]),
    np.array([0.01, 0.02, 0.03]),
    np.array([0.001, 0.01, 0.02]),
)
SD = np.array([0.02, 0.2, 0.1])


def observed(count):
    return Observed("one", "open", FREQUENCY, GAMMA, np.zeros((count, FREQUENCY.size)))


def scatter(leftover=0.0):
    return Repeatability(SD, np.array([8.0, 12.0, 11.0]), True, (np.full(FREQUENCY.size, leftover),), 2e-4)


@pytest.mark.parametrize(
    ("word", "field", "power"),
    [
        ("directivity", "directivity", 0),
        ("tracking", "reflection_tracking", 1),
        ("source match", "source_match", 2),
    ],
)
def test_the_stated_bound_is_a_95_per_cent_radius(word, field, power):
    (source,) = (source for source in analyser_sources([observed(1)], STATED) if word in source.name)
    variance = np.abs(source.profiles[0]) ** 2
    circle = radius_95(np.stack([variance, variance, np.zeros(FREQUENCY.size)], axis=-1))
    bound = getattr(STATED, field)
    # Straight lines in the decibels in which each is stated: of |δ|, but of 1 + |δ| for tracking.
    if word == "tracking":
        expected = np.interp(FREQUENCY, STATED.frequency_hz, 20 * np.log10(1 + bound))
        expected = (10 ** (expected / 20) - 1) * 0.7**power
    else:
        expected = np.interp(FREQUENCY, STATED.frequency_hz, 20 * np.log10(bound))
        expected = 10 ** (expected / 20) * 0.7**power
    np.testing.assert_allclose(circle, expected, rtol=1e-9)
    assert source.common
    assert source.freedom == np.inf


def test_the_phase_of_the_profiles_is_that_of_the_powers():
    for power, source in enumerate(analyser_sources([observed(1)], STATED)):
        turned = source.profiles[0] / GAMMA**power
        np.testing.assert_allclose(turned.imag, 0.0, atol=1e-15)
        assert (turned.real > 0.0).all()


def test_one_element_holds_for_all_frequencies():
    flat = StatedResidual(np.array([1e9]), np.array([0.01]), np.array([0.01]), np.array([0.01]))
    profile = analyser_sources([observed(1)], flat)[0].profiles[0]
    np.testing.assert_allclose(profile, profile[0])


@pytest.mark.parametrize("count", [1, 4])
def test_the_mean_of_connections_scatters_less(count):
    sources = connection_sources([observed(count)], scatter(), 50.0)
    lumped = [source for source in sources if isinstance(source, LumpedSource)]
    assert len(lumped) == len(PARTS)
    assert all(part in source.name for part, source in zip(PARTS, lumped, strict=True))
    assert [source.freedom for source in lumped] == [8.0, 12.0, 11.0]
    expected = responses(GAMMA, FREQUENCY, 50.0) * SD / np.sqrt(count)
    for i, source in enumerate(lumped):
        np.testing.assert_allclose(source.vectors[0], expected[:, i], rtol=1e-12)
    white = next(source for source in sources if isinstance(source, WhiteSource))
    assert white.variances[0] == pytest.approx(2e-4**2 / count)


def test_other_scatter_is_a_source_where_there_is_any():
    assert not any(isinstance(s, SmoothSource) for s in connection_sources([observed(4)], scatter(), 50.0))
    sources = connection_sources([observed(4)], scatter(1e-3), 50.0)
    (smooth,) = (source for source in sources if isinstance(source, SmoothSource))
    assert not smooth.common
    assert smooth.freedom == 3.0
    np.testing.assert_allclose(smooth.profiles[0], 1e-3 / 2)


def test_variance_of_the_mean_reading():
    """Against draws: each source simulated 20 000 times, mean square per component within 5 %."""
    sources = [
        SmoothSource("smooth", (0.01 * GAMMA,), common=True),
        LumpedSource("lumped", (0.02 * GAMMA**2,), 4.0),
        WhiteSource("white", (3e-5,)),
    ]
    smooth, white = reading_variance(sources, 0)
    rng = np.random.default_rng(6)
    circle = rng.standard_normal((20_000, 1)) + 1j * rng.standard_normal((20_000, 1))
    drawn = sources[0].profiles[0] * circle + sources[1].vectors[0] * rng.standard_normal((20_000, 1))
    np.testing.assert_allclose(smooth, 0.5 * np.mean(np.abs(drawn) ** 2, axis=0), rtol=0.05)
    assert white == pytest.approx(3e-5)
