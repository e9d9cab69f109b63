"""Residual errors of a one-port correction, to first order and exactly.

Exact three-term model m = D + RΓ/(1 − SΓ); with errors δ of the definitions of open, short and load at +1,
−1, 0 the corrected readings are wrong by D + TΓ + MΓ² with D = −δL, T = −(δO − δS)/2, M = −[(δO + δS)/2 − δL]
to first order. Counterparts in print: U. Stumper, Adv. Radio Sci. 1, 2003, 1–8; N. Yannopoulou,
P. Zimourtopoulos, Radioengineering 16(2), 2007, 1–8. scikit-rf's OnePort is the independent implementation.
"""

import numpy as np
import pytest

from stdfit.data.bench_records import StatedResidual
from stdfit.fitting.observed import Observed
from stdfit.uncertainty.region import CIRCULAR
from stdfit.uncertainty.sources import analyser_sources

FREQUENCY = np.linspace(1e9, 6e9, 24)
DEVICES = [0.9 * np.exp(2j * np.pi * np.arange(24) / 24), np.full(24, 0.5j), np.full(24, -0.2 + 0.1j)]
RNG = np.random.default_rng(2003)
DELTA = {name: RNG.standard_normal(24) + 1j * RNG.standard_normal(24) for name in ("open", "short", "load")}
BOUND = 0.01


def first_order(device, directivity, tracking, match):
    """Return what residual errors add to a reading of `device`, by the profiles of the budget's sources."""
    observed = [Observed("device", "load", FREQUENCY, device, np.zeros((1, FREQUENCY.size)))]
    stated = StatedResidual(np.array([1e9]), np.array([BOUND]), np.array([BOUND]), np.array([BOUND]))
    amounts = {"directivity": directivity, "tracking": tracking, "source match": match}
    return sum(
        amount * source.profiles[0] * CIRCULAR / BOUND
        for source in analyser_sources(observed, stated)
        for word, amount in amounts.items()
        if word in source.name
    )


def corrected_by_library(device, delta):
    """Return the corrected reading of a device after a calibration whose definitions are wrong by −δ."""
    skrf = pytest.importorskip("skrf", reason="scikit-rf is not installed")
    frequency = skrf.Frequency.from_f(FREQUENCY, unit="hz")

    def network(gamma):
        return skrf.Network(
            frequency=frequency, s=np.broadcast_to(gamma, FREQUENCY.shape).reshape(-1, 1, 1), z0=50
        )

    nominal = {"open": 1.0 + 0j, "short": -1.0 + 0j, "load": 0j}
    calibration = skrf.calibration.OnePort(
        ideals=[network(gamma) for gamma in nominal.values()],
        measured=[network(gamma + delta[name]) for name, gamma in nominal.items()],
        is_reciprocal=False,
    )
    return calibration.apply_cal(network(device)).s[:, 0, 0]


def closed_forms(delta):
    """Return D, T, M of the published closed forms."""
    middle = (delta["open"] + delta["short"]) / 2
    return -delta["load"], -(delta["open"] - delta["short"]) / 2, -(middle - delta["load"])


@pytest.mark.parametrize("device", DEVICES, ids=["near full", "half", "small"])
def test_profiles_are_the_three_term_model_to_first_order(device):
    """What is left over falls fourfold with half the errors."""

    def left(size):
        d, t, m = (size * DELTA[name] for name in DELTA)
        exact = d + (1 + t) * device / (1 - m * device) - device
        return np.abs(exact - first_order(device, d, t, m)).max()

    assert left(1e-3) < 0.02 * 1e-3
    assert left(5e-4) / left(1e-3) == pytest.approx(0.25, rel=0.02)


@pytest.mark.parametrize("device", DEVICES, ids=["near full", "half", "small"])
def test_errors_of_definitions_by_their_closed_forms(device):
    def left(size):
        delta = {name: size * value for name, value in DELTA.items()}
        error = corrected_by_library(device, delta) - device
        return np.abs(error - first_order(device, *closed_forms(delta))).max(), np.abs(error).max()

    (whole, error), (half, _) = left(1e-3), left(5e-4)
    assert whole < 0.01 * error
    assert half / whole == pytest.approx(0.25, rel=0.02)


def test_equal_delays_of_open_and_short_shift_the_reference_plane():
    """δO = −2jωt, δS = +2jωt, δL = 0 give T = 2jωt: every device is turned, none is distorted."""
    phase = 2j * np.pi * FREQUENCY * 2 * 0.1e-12
    d, t, m = closed_forms({"open": -phase, "short": phase, "load": np.zeros(FREQUENCY.size)})
    device = DEVICES[0]
    np.testing.assert_allclose(first_order(device, d, t, m), phase * device, rtol=1e-12)
    exact = corrected_by_library(
        device, {"open": np.exp(-phase) - 1, "short": 1 - np.exp(-phase), "load": np.zeros(FREQUENCY.size)}
    )
    np.testing.assert_allclose(exact, device * np.exp(phase), rtol=0, atol=1e-12)


@pytest.mark.parametrize(("return_loss", "needed"), [(10.0, 29.3), (20.0, 39.3), (30.0, 49.3)])
def test_directivity_needed_for_one_decibel(return_loss, needed):
    """Directivity alone, worst case, within ± 1 dB (derived from first principles: not a publication)."""
    device = np.full(FREQUENCY.size, 10 ** (-return_loss / 20) + 0j)
    error = first_order(device, 10 ** (-needed / 20), 0.0, 0.0)
    worst = np.max(np.abs(20 * np.log10(np.abs(np.stack([device - error, device + error]) / device))))
    assert worst == pytest.approx(1.0, abs=0.01)
