"""Error terms from raw readings, against scikit-rf's one-port correction on the same standards."""

import numpy as np
import pytest

from stdfit.circuits.error_box import corrected, seen_raw
from stdfit.circuits.standard import reflection
from stdfit.fitting.unknown_box import fitted_box

F = np.linspace(50e6, 6e9, 40)
PARTS = [
    ("short", [0.0, 1.5, 50.0, 0.4, 0.0, 0.0, 0.0]),
    ("open", [5.0, 1.4, 49.7, 38.0, 0.0, 120.0, 0.0]),
    ("load", [5.0, 0.0, 50.3, 50.2, 20.0, 0.0]),
    ("short", [33.3, 1.6, 50.1, 0.2, 0.0, 0.0, 0.0]),
    ("short", [66.7, 1.5, 49.8, 0.0, 0.0, 0.0, 0.0]),
]
GAMMA = np.stack([reflection(kind, values, F, 50.0)[0] for kind, values in PARTS], axis=1)
BOX = np.stack(
    [
        0.06 * np.exp(-4j * np.pi * F * 0.3e-9 + 0.3j),
        0.8 * np.exp(-4j * np.pi * F * 1.1e-9),
        0.12 * np.exp(-4j * np.pi * F * 0.2e-9 - 1j),
    ],
    axis=-1,
)
RAW = seen_raw(BOX[:, None], GAMMA)
DEVICE = 0.5 * np.exp(-4j * np.pi * F * 20e-12) + 0.1
DEVICE_RAW = seen_raw(BOX, DEVICE)


def corrected_by_library(ideals, measured):
    skrf = pytest.importorskip("skrf", reason="scikit-rf is not installed")
    frequency = skrf.Frequency.from_f(F, unit="hz")

    def network(gamma):
        return skrf.Network(frequency=frequency, s=gamma.reshape(-1, 1, 1), z0=50)

    calibration = skrf.calibration.OnePort(
        ideals=[network(gamma) for gamma in ideals.T],
        measured=[network(raw) for raw in measured.T],
        is_reciprocal=False,
    )
    return calibration.apply_cal(network(DEVICE_RAW)).s[:, 0, 0]


def corrected_here(ideals, measured, weights):
    return corrected(fitted_box(ideals, measured, weights), DEVICE_RAW)


@pytest.mark.parametrize("standards", [(0, 1, 2), (1, 2, 3), (0, 1, 2, 3, 4)])
def test_the_same_device_comes_out(standards):
    """Of exact standards any three or more give the same terms, by whatever weights."""
    ideals, measured = GAMMA[:, standards], RAW[:, standards]
    weights = 10.0 ** np.random.default_rng(1).uniform(0.0, 4.0, ideals.shape)
    found = corrected_here(ideals, measured, weights)
    np.testing.assert_allclose(found, corrected_by_library(ideals, measured), rtol=0, atol=1e-9)
    np.testing.assert_allclose(found, DEVICE, rtol=0, atol=1e-9)


def test_three_wrong_standards_give_the_same_wrong_device():
    """With three there is nothing to weigh: errors of the definitions go the same way through both."""
    rng = np.random.default_rng(2)
    wrong = GAMMA[:, :3] + 0.01 * (rng.standard_normal((F.size, 3)) + 1j * rng.standard_normal((F.size, 3)))
    found = corrected_here(wrong, RAW[:, :3], np.ones(wrong.shape))
    np.testing.assert_allclose(found, corrected_by_library(wrong, RAW[:, :3]), rtol=0, atol=1e-9)
    assert np.abs(found - DEVICE).max() > 1e-3
