"""What errors of references do to a corrected reading: exactly for small errors, whatever their number."""

import numpy as np
import pytest

from stdfit.circuits.error_box import corrected, seen_raw
from stdfit.circuits.reference_map import quadratic_terms, reference_weights
from stdfit.circuits.residual_map import device_weights, term_weights
from stdfit.fitting.unknown_box import fitted_box

POINTS = 20
RNG = np.random.default_rng(1996)


def some(*shape):
    return RNG.standard_normal(shape) + 1j * RNG.standard_normal(shape)


BOX = np.stack([0.06 * some(POINTS), 0.8 * np.exp(1j * np.arange(POINTS)), 0.1 * some(POINTS)], axis=-1)
THREE = np.array([1.0, -1.0, 0.0]) * np.exp(0.3j) + 0.1 * some(POINTS, 3)
FIVE = np.concatenate([THREE, 0.6j + 0.1 * some(POINTS, 1), -0.5j + 0.1 * some(POINTS, 1)], axis=1)
BOUND = np.array([0.01, 0.02, 0.005, 0.03, 0.01]) * np.ones((POINTS, 1))
DEVICES = 0.5 * some(POINTS, 4)


def test_three_references_are_the_polynomials_of_a_kit():
    np.testing.assert_allclose(
        quadratic_terms(THREE, BOUND[:, :3]), np.swapaxes(term_weights(THREE), 1, 2), rtol=1e-14
    )
    np.testing.assert_allclose(
        reference_weights(THREE, BOUND[:, :3], DEVICES), device_weights(THREE, DEVICES), rtol=1e-9, atol=1e-12
    )


def test_errors_that_are_a_quadratic_are_handed_on_whole():
    """Errors of five references that error terms can follow are not averaged away."""
    terms = some(POINTS, 3)
    at = (FIVE[..., None] ** np.arange(3) @ terms[..., None])[..., 0]
    seen = (reference_weights(FIVE, BOUND, DEVICES) @ at[..., None])[..., 0]
    np.testing.assert_allclose(
        seen, (DEVICES[..., None] ** np.arange(3) @ terms[..., None])[..., 0], rtol=1e-9
    )


def test_independent_errors_weigh_least_with_their_own_bounds():
    """Gauss and Markov: no other weights give a smaller variance of any device."""
    own = (np.abs(reference_weights(FIVE, BOUND, DEVICES)) ** 2 * BOUND[:, None] ** 2).sum(axis=-1)
    even = (np.abs(reference_weights(FIVE, np.ones_like(BOUND), DEVICES)) ** 2 * BOUND[:, None] ** 2).sum(
        axis=-1
    )
    assert (own <= even * (1.0 + 1e-12)).all()
    assert own.mean() < 0.8 * even.mean()


@pytest.mark.parametrize("references", [THREE, FIVE], ids=["three", "five"])
def test_first_order_is_what_an_exact_correction_shows(references):
    """Definitions wrong by ε and readings wrong by η move a device by Σ w·(ε − η); the rest falls fourfold."""
    bound = BOUND[:, : references.shape[1]]
    defined, read = some(*references.shape), some(*references.shape)
    raw = seen_raw(BOX[:, None], DEVICES)

    def left(size):
        box = fitted_box(
            references + size * defined, seen_raw(BOX[:, None], references + size * read), bound**-2.0
        )
        error = corrected(box[:, None], raw) - DEVICES
        weights = reference_weights(references, bound, DEVICES)
        first = (weights @ (size * (defined - read))[..., None])[..., 0]
        return np.median(np.abs(error - first)), np.median(np.abs(error))

    (whole, error), (half, _) = left(1e-4), left(5e-5)
    assert whole < 2e-3 * error
    assert half / whole == pytest.approx(0.25, rel=0.05)
