"""What a determined adapter is as a thru: the line most like it, and how sure its three numbers are."""

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.circuits.two_port import s_by_terms
from stdfit.fitting.line_like import most_like_line
from stdfit.uncertainty.region import student
from stdfit.uncertainty.smooth import bumps, correlation_lengths
from stdfit.validity.adapter import bounds_of, carried, symmetric_root
from stdfit.validity.thru import LineTerm


def line_terms(
    s: ComplexArray, covariance: FloatArray, freedom: float, frequency_hz: FloatArray, reference_ohm: float
) -> tuple[LineTerm, LineTerm, LineTerm]:
    """Return delay, loss and impedance of the line most like an adapter, with their uncertainty.

    Errors of S are smooth functions of frequency with the given covariance and an unknown correlation length; so is
    what the line leaves of S, as an adapter with steps is no line. The largest uncertainty over the lengths counts.

    Parameters
    ----------
    s : complex array of shape (n, 3)
    covariance : array of shape (n, 6, 6)
        Of the three terms of the error on a standard.
    freedom : float
    frequency_hz : array of shape (n,)
    reference_ohm : float
    """
    of_s = carried(covariance, s_by_terms(s))
    bounds = bounds_of(of_s, np.inf)
    line = most_like_line(s, frequency_hz, bounds, reference_ohm)
    # Steps make reflections that no line has; the second time these count for as little as they are like a line's.
    unlike = np.sqrt(np.mean(np.abs(line.left) ** 2, axis=0))
    line = most_like_line(s, frequency_hz, np.hypot(bounds, unlike), reference_ohm)
    stray = np.repeat(0.5 * np.abs(line.left) ** 2, 2, axis=1)
    root = symmetric_root(of_s + stray[..., None] * np.eye(6))
    acting = np.einsum("pnc,nck->pkn", line.follow, root)
    span = float(frequency_hz[-1] - frequency_hz[0])
    variance = [
        ((acting @ bumps(frequency_hz, frequency_hz[0], frequency_hz[-1], float(length))) ** 2).sum(
            axis=(1, 2)
        )
        for length in correlation_lengths(span)
    ]
    u = np.sqrt(np.max(variance, axis=0))
    half = u * float(student(freedom))
    # No passive line has a gain: a loss that comes out below 0 is 0 with the same uncertainty.
    values = np.maximum(line.values, [-np.inf, 0.0, -np.inf])
    delay, loss, z0 = (
        LineTerm(float(value), float(own), float(value - reach), float(value + reach))
        for value, own, reach in zip(values, u, half, strict=True)
    )
    return delay, loss, z0
