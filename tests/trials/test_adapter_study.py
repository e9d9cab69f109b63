"""Simulated adapters: do bounds of an adapter and of standards behind it cover the truth? Fixed seeds."""

import numpy as np
import pytest

from stdfit.trials.adapters import draw_adapter, draw_trial, s_parameters, through

F = np.linspace(50e6, 6e9, 41)
TRIALS = 5

CURVES = 0.987
"""Mean part of curves inside their bounds over 100 trials; it spreads by 0.05 from trial to trial."""

PARAMETERS = 0.966
SPREAD_CURVES, SPREAD_PARAMETERS = 0.05, 0.08


@pytest.fixture(scope="module")
def trials(tmp_path_factory):
    folder = tmp_path_factory.mktemp("trials")
    return [
        draw_trial(folder, np.random.default_rng([77, seed]), removed=seed % 2 == 1) for seed in range(TRIALS)
    ]


def test_the_simulated_two_port_is_what_is_seen_through_it():
    """Γin = S11 + S21²·Γ/(1 − S22·Γ), and its inverse: the truth does not use the models that are fitted."""
    elements = draw_adapter(np.random.default_rng(1))
    s11, s21, s22 = s_parameters(elements, F).T
    gamma = 0.7 * np.exp(-1j * F / 1e9)
    seen = through(elements, gamma, F)
    np.testing.assert_allclose(seen, s11 + s21**2 * gamma / (1 - s22 * gamma), atol=1e-13)
    np.testing.assert_allclose(through(elements, seen, F, removed=True), gamma, atol=1e-12)
    assert (np.linalg.norm(np.stack([s11, s21]), axis=0) <= 1.0).all()


def test_bounds_of_standards_cover_the_truth(trials):
    """Three standard deviations of the mean are allowed below the long run."""
    inside = np.array([one.curves_inside for one in trials])
    assert inside.mean() >= CURVES - 3.0 * SPREAD_CURVES / np.sqrt(TRIALS)
    assert all(one.kit.limit.limit_hz > 0.0 for one in trials)


def test_bounds_of_s_parameters_cover_the_truth(trials):
    inside = np.array([one.s_inside for one in trials])
    assert inside.mean() >= PARAMETERS - 3.0 * SPREAD_PARAMETERS / np.sqrt(TRIALS)


def test_bounds_are_not_bought_with_width(trials):
    """A 95 % radius of a circular error is 2.08 times its median: a fair bound has a ratio of 0.48."""
    ratio = [
        np.abs(one.adapter.s - one.s)[np.isin(one.adapter.frequency_hz, one.adapter.known_hz)]
        / one.adapter.s_bounds
        for one in trials
    ]
    assert 0.15 <= np.median(np.concatenate(ratio)) <= 0.6


def test_the_sign_is_never_wrong(trials):
    """A wrong sign is off by 2."""
    assert all(np.abs(one.adapter.s[:, 1] - one.s[:, 1]).max() < 0.3 for one in trials)
