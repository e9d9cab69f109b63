"""The quadratic through three errors: published closed forms, and what any quadratic must do."""

import numpy as np
import pytest

from stdfit.circuits.residual_map import PAIRS, device_weights, separation, term_weights

RNG = np.random.default_rng(2007)


def some(*shape):
    return RNG.standard_normal(shape) + 1j * RNG.standard_normal(shape)


def test_closed_forms_at_plus_one_minus_one_and_zero():
    """D = −δL, T = −(δO − δS)/2, M = −[(δO + δS)/2 − δL], δ = true − defined.

    U. Stumper, Adv. Radio Sci. 1, 2003, 1–8; N. Yannopoulou, P. Zimourtopoulos, Radioengineering 16(2), 2007, 1–8.
    """
    opened, short, load = some(3)
    wrong = -np.array([opened, short, load])  # defined − true
    d, t, m = wrong @ term_weights(np.array([1.0, -1.0, 0.0], dtype=complex))
    assert d == pytest.approx(-load, abs=1e-15)
    assert t == pytest.approx(-(opened - short) / 2, abs=1e-15)
    assert m == pytest.approx(-((opened + short) / 2 - load), abs=1e-15)


def test_each_standard_shows_its_own_error_and_no_other():
    standards = some(20, 3)
    np.testing.assert_allclose(
        device_weights(standards, standards), np.broadcast_to(np.eye(3), (20, 3, 3)), atol=1e-10
    )


@pytest.mark.parametrize("power", [0, 1, 2])
def test_an_error_that_is_a_quadratic_is_carried_over_whole(power):
    """Directivity, tracking and match errors come out as such, whatever the three standards are."""
    standards = some(20, 3)
    terms = np.einsum("ns,nsq->nq", standards**power, term_weights(standards))
    np.testing.assert_allclose(terms, np.broadcast_to(np.eye(3)[power], (20, 3)), atol=1e-9)
    device = some(7)
    shown = np.einsum("nks,ns->nk", device_weights(standards, device), standards**power)
    np.testing.assert_allclose(shown, np.broadcast_to(device**power, (20, 7)), atol=1e-8)


def test_devices_of_their_own_at_each_frequency():
    standards, device = some(4, 3), some(4, 2)
    both = device_weights(standards, device)
    for n in range(4):
        np.testing.assert_allclose(both[n], device_weights(standards[[n]], device[n])[0])


def test_standards_that_are_the_same_have_no_finite_weights():
    same = np.array([[1.0, 1.0, 0.0]], dtype=complex)
    assert not np.isfinite(term_weights(same)).all(axis=(1, 2)).any()
    assert not np.isfinite(device_weights(same, np.array([0.0, 0.5j]))).all(axis=2).any()


def test_distances_come_in_the_order_of_the_pairs():
    assert PAIRS == ((0, 1), (0, 2), (1, 2))
    np.testing.assert_allclose(separation(np.array([1.0, -1.0, 0.5j])), [2.0, np.sqrt(1.25), np.sqrt(1.25)])
    np.testing.assert_allclose(separation(np.array([1.0, 0.0, -2.0])), [1.0, 3.0, 2.0])
