"""Residual errors: the stated bound holds for 95 % of sessions at every frequency, however they are built."""

import numpy as np
import pytest

from stdfit.trials.analyser import (
    LENGTHS,
    Residuals,
    StatedDecibels,
    draw_residuals,
    gaussian_process,
    imperfect_correction,
    ripple,
)
from stdfit.trials.families import economy_residual

SWEEP = np.linspace(50e6, 6e9, 61)
SESSIONS = 2500


@pytest.mark.parametrize("kind", ["gaussian", "ripple", "any"])
@pytest.mark.parametrize("correlation", ["any", "long", "short"])
def test_bound_holds_for_95_percent_of_sessions(kind, correlation):
    rng = np.random.default_rng(31)
    stated = economy_residual()
    bounds = np.array(stated.bounds(SWEEP))
    below = np.zeros((3, SWEEP.size))
    for _ in range(SESSIONS):
        drawn = draw_residuals(stated, SWEEP, rng, kind=kind, correlation=correlation)
        below += np.abs([drawn.directivity, drawn.tracking, drawn.source_match]) < bounds
    share = below / SESSIONS
    assert np.all(np.abs(share - 0.95) < 0.02)  # at every frequency; one standard error is 0.0044
    assert abs(share.mean() - 0.95) < 0.01


def process_correlation(x):
    """Half exp(-x²/2), half the rougher kernel (1+u)exp(-u) smoothed with itself, u = 2x (derived)."""
    u = 2 * x
    return 0.5 * np.exp(-(x**2) / 2) + 0.5 * np.exp(-u) * (1 + u + 0.4 * u**2 + u**3 / 15)


def ripple_correlation(x):
    """Real part of the characteristic function of |N(0, 1)|."""
    return np.exp(-(x**2) / 2)


@pytest.mark.parametrize(
    ("build", "expected"), [(gaussian_process, process_correlation), (ripple, ripple_correlation)]
)
@pytest.mark.parametrize("share", [*LENGTHS["long"], *LENGTHS["short"]])
def test_correlation_length_is_what_it_is_called(build, expected, share):
    rng = np.random.default_rng(32)
    drawn = np.array([build(SWEEP, share * np.ptp(SWEEP), rng) for _ in range(3000)])
    for step in (2, 4, 12, 60):
        product = np.mean(drawn[:, step:] * drawn[:, :-step].conj()).real / 2
        assert product == pytest.approx(expected(step / 60 / share), abs=0.05)


def test_long_residuals_are_smoother_than_short_ones():
    rng = np.random.default_rng(33)
    roughness = {}
    for correlation in ("long", "short"):
        steps = [
            np.abs(
                np.diff(draw_residuals(economy_residual(), SWEEP, rng, correlation=correlation).directivity)
            )
            for _ in range(50)
        ]
        roughness[correlation] = np.mean(np.abs(steps))
    assert roughness["short"] > 5 * roughness["long"]


def test_bounds_at_the_stated_frequencies_and_between():
    d, t, m = economy_residual().bounds(np.array([1e6, 50e6, 4.5e9, 6e9, 9e9]))
    np.testing.assert_allclose(-20 * np.log10(d), [46, 46, 42, 40, 40])
    np.testing.assert_allclose(-20 * np.log10(m), [46, 46, 36.5, 34, 34])
    np.testing.assert_allclose(20 * np.log10(1 + t), [0.01, 0.01, 0.135, 0.18, 0.18])


def test_correction_is_the_inverse_of_the_three_term_model():
    # Solve the shown value for the device with the same three terms: Γ = (m − D)/(T' + M(m − D)).
    rng = np.random.default_rng(34)
    drawn = draw_residuals(economy_residual(), SWEEP, rng)
    gamma = 0.9 * np.exp(2j * np.pi * rng.random(SWEEP.size))
    shown = imperfect_correction(gamma, drawn) - drawn.directivity
    back = shown / (1 + drawn.tracking + drawn.source_match * shown)
    np.testing.assert_allclose(back, gamma, atol=1e-13)


def test_correction_of_ideal_standards_to_first_order():
    # δ = D + TΓ + MΓ² (EURAMET cg-12 v3.0, 2018; from memory).
    tiny = np.array([1e-5 + 2e-5j])
    residuals = Residuals(tiny, 2 * tiny, -1j * tiny, ("ripple",) * 3)
    for gamma in (1.0, -1.0, 0.0, 0.5j):
        error = imperfect_correction(np.array([gamma + 0j]), residuals) - gamma
        np.testing.assert_allclose(error, tiny * (1 + 2 * gamma - 1j * gamma**2), atol=3e-9)


def test_perfect_correction_does_nothing_visible():
    drawn = draw_residuals(StatedDecibels.perfect(), SWEEP, np.random.default_rng(35))
    gamma = np.full(SWEEP.size, 0.8 - 0.3j)
    np.testing.assert_allclose(imperfect_correction(gamma, drawn), gamma, atol=1e-15)


def test_scale_makes_the_statement_dishonest():
    honest = draw_residuals(economy_residual(), SWEEP, np.random.default_rng(36))
    double = draw_residuals(economy_residual(), SWEEP, np.random.default_rng(36), scale=2.0)
    np.testing.assert_allclose(double.source_match, 2 * honest.source_match)
