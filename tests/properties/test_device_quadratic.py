"""The quadratic map is the exact three-term correction to first order, for any standards, analyser and devices."""

import numpy as np
from hypothesis import assume, given
from hypothesis import strategies as st

from stdfit.circuits.error_box import corrected, seen_raw, solve_error_box
from stdfit.circuits.residual_map import device_weights, separation

CIRCLE = np.exp(2j * np.pi * np.arange(16) / 16)
SMALL = 1e-4

inside = st.complex_numbers(max_magnitude=1.0, allow_nan=False, allow_infinity=False)
three = st.tuples(inside, inside, inside).map(lambda values: np.array(values, dtype=complex))


def left_over(standards, errors, box, device):
    """What the exact correction shows beyond Γ and the quadratic; errors are 'defined − true'."""
    raw = seen_raw(box, standards - errors)
    shown = corrected(solve_error_box(standards, raw), seen_raw(box, device))
    first = device_weights(standards[None], device)[0] @ errors
    return np.abs(shown - device - first).max()


@given(three, three, three, st.floats(0.0, 1.0))
def test_what_is_left_falls_with_the_square_of_the_errors(standards, errors, terms, magnitude):
    assume(separation(standards).min() > 0.3)
    assume(np.abs(errors).max() > 0.1)
    box = np.array([0.3 * terms[0], 1.0 + 0.3 * terms[1], 0.3 * terms[2]])
    device = magnitude * CIRCLE
    whole = left_over(standards, SMALL * errors, box, device)
    half = left_over(standards, 0.5 * SMALL * errors, box, device)
    weight = np.abs(device_weights(standards[None], CIRCLE)).sum(axis=2).max()
    assert whole <= 4.0 * (weight * SMALL) ** 2 + 1e-12
    assert half <= 0.27 * whole + 1e-12
