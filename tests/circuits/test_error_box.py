"""Three-term correction: forth and back, exact with three standards, by least squares with more."""

import numpy as np
import pytest

from stdfit.circuits.error_box import corrected, seen_raw, solve_error_box

POINTS = 30
RNG = np.random.default_rng(1980)


def some(*shape):
    return RNG.standard_normal(shape) + 1j * RNG.standard_normal(shape)


BOX = np.stack([0.1 * some(POINTS), 1.0 + 0.1 * some(POINTS), 0.1 * some(POINTS)], axis=-1)
KNOWN = np.array([1.0, -1.0, 0.0]) * np.exp(0.3j) + 0.1 * some(POINTS, 3)
DEVICE = 0.5 * some(POINTS)


def test_forth_and_back():
    np.testing.assert_allclose(corrected(BOX, seen_raw(BOX, DEVICE)), DEVICE, rtol=0, atol=1e-13)


def test_a_raw_reading_by_the_usual_three_terms():
    """m = D + R·Γ/(1 − S·Γ) with a = D, b = R − D·S, c = S."""
    d, s = BOX[:, 0], BOX[:, 2]
    r = BOX[:, 1] + d * s
    np.testing.assert_allclose(seen_raw(BOX, DEVICE), d + r * DEVICE / (1.0 - s * DEVICE), rtol=1e-13)


def test_three_standards_give_the_terms():
    read = seen_raw(BOX[:, None], KNOWN)
    np.testing.assert_allclose(solve_error_box(KNOWN, read), BOX, rtol=0, atol=1e-12)


def test_five_standards_give_the_terms_and_average_their_errors():
    known = np.concatenate(
        [KNOWN, 0.7 * np.exp(2j * np.pi * np.array([[0.3, 0.6]])) * np.ones((POINTS, 1))], axis=1
    )
    read = seen_raw(BOX[:, None], known)
    np.testing.assert_allclose(solve_error_box(known, read), BOX, rtol=0, atol=1e-12)
    wrong = read + 1e-3 * some(POINTS, 5)
    found = solve_error_box(known, wrong)
    # Least squares: what is left is orthogonal to every column, and no other terms leave less.
    rows = np.stack([np.ones_like(known), known, known * wrong], axis=-1)
    left = wrong - (rows @ found[..., None])[..., 0]
    assert np.abs(np.swapaxes(rows.conj(), -1, -2) @ left[..., None]).max() < 1e-12
    assert np.abs(left).max() > 1e-4
    three = solve_error_box(known[:, :3], wrong[:, :3])
    assert np.abs(found - BOX).mean() < np.abs(three - BOX).mean()


def test_two_standards_that_are_the_same_give_nothing():
    known = np.array([1.0, 1.0, 0.0], dtype=complex)
    with pytest.raises(np.linalg.LinAlgError):
        solve_error_box(known, known)


def test_the_same_as_an_independent_library():
    skrf = pytest.importorskip("skrf", reason="scikit-rf is not installed")
    frequency = skrf.Frequency.from_f(np.linspace(1e9, 6e9, POINTS), unit="hz")

    def network(gamma):
        return skrf.Network(frequency=frequency, s=np.asarray(gamma).reshape(-1, 1, 1), z0=50)

    read = seen_raw(BOX[:, None], KNOWN)
    calibration = skrf.calibration.OnePort(
        ideals=[network(one) for one in KNOWN.T],
        measured=[network(one) for one in read.T],
        is_reciprocal=False,
    )
    raw = 0.4 * some(POINTS)
    ours = corrected(solve_error_box(KNOWN, read), raw)
    np.testing.assert_allclose(ours, calibration.apply_cal(network(raw)).s[:, 0, 0], rtol=0, atol=1e-9)
    terms = calibration.coefs
    np.testing.assert_allclose(terms["directivity"], BOX[:, 0], rtol=0, atol=1e-9)
    np.testing.assert_allclose(terms["source match"], BOX[:, 2], rtol=0, atol=1e-9)
