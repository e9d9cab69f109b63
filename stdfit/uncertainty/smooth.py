"""Smooth random functions of frequency with a known size and an unknown correlation length."""

import numpy as np

from stdfit.base.arrays import FloatArray

LENGTHS_PER_SPAN = (4.0, 1.0, 1 / 2, 1 / 8, 1 / 32)
"""Correlation lengths that are tried, in units of the span of the readings."""

REACH = 3.0
"""How many standard deviations of a bump beyond the span still matter."""


def correlation_lengths(span_hz: float) -> FloatArray:
    """Return the correlation lengths that are tried, in Hz."""
    return span_hz * np.array(LENGTHS_PER_SPAN)


def bumps(frequency_hz: FloatArray, low_hz: float, high_hz: float, length_hz: float) -> FloatArray:
    """Return basis functions of a stationary random function of unit variance, shape (n, q).

    A sum of equal Gaussian bumps with independent random heights, one bump width apart, has the covariance
    exp(−Δ²/2ℓ²) to 1 part in 10⁴: q grows with span/ℓ and not with the number of points.

    Parameters
    ----------
    frequency_hz : array of shape (n,)
    low_hz, high_hz : float
        The span over which the function is wanted.
    length_hz : float
        Correlation length ℓ.
    """
    width = length_hz / np.sqrt(2.0)
    count = int(np.ceil((high_hz - low_hz) / width + 2.0 * REACH)) + 1
    centres = 0.5 * (low_hz + high_hz) + (np.arange(count) - 0.5 * (count - 1)) * width
    return np.asarray(np.pi**-0.25 * np.exp(-0.5 * ((frequency_hz[:, None] - centres) / width) ** 2))
