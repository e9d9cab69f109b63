"""What the mean readings keep beyond the model and beyond what the sources of error explain."""

from collections.abc import Sequence

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.uncertainty.connections import running_mean
from stdfit.uncertainty.push import Pushed
from stdfit.uncertainty.smooth import bumps, correlation_lengths
from stdfit.uncertainty.sources import LumpedSource, SharedSource, SmoothSource, Source

NOISE_WINDOWS = 200
"""Residuals are averaged over 1/NOISE_WINDOWS of the sweep before their size is taken."""

REACH_WINDOWS = 50
"""The largest size within 1/REACH_WINDOWS of the sweep counts, since phase and ripple are accidental."""

ELECTRICALLY_SHORT = 0.1
"""Part of the sweep in which what the models leave out is still proportional to √f or f."""

EULER = 0.5772
"""Mean of the standard Gumbel law: the largest of k exponential variables has the mean ln k + 0.5772."""


def expected_power(
    design: ComplexArray,
    frequency_hz: FloatArray,
    points: slice,
    span: tuple[float, float],
    sources: Sequence[Source],
    pushed: Pushed,
    inverse: FloatArray,
    index: int,
) -> FloatArray:
    """Return E|r|² that smooth and lumped sources leave in one standard's residual after the fit.

    r = δ − J·M⁻¹·Σ Re(Jᴴ W δ): what the fit cannot follow of each basis vector of each source. The correlation
    length of a smooth source is not known; the power is the mean over the lengths that are tried.

    Parameters
    ----------
    design : complex array of shape (m, p)
        Derivatives at the chosen points.
    frequency_hz : array of shape (m,)
        The chosen points.
    points : slice
        Where they lie in the readings.
    span : (float, float)
    sources : sequence of Source
    pushed : Pushed
        The sums over the readings of this standard, fitted on its own.
    inverse : array of shape (c, p, p)
        M⁻¹ at each cut.
    index : int
        Which standard.

    Returns
    -------
    array of shape (c, m)
    """
    power = np.zeros((inverse.shape[0], frequency_hz.size))
    lengths = correlation_lengths(span[1] - span[0])
    for k, source in enumerate(sources):
        if isinstance(source, SmoothSource):
            for image, length in zip(pushed.images[k], lengths, strict=True):
                acting = source.profiles[index][points, None] * bumps(frequency_hz, *span, float(length))
                direct = np.concatenate([acting, 1j * acting], axis=1)
                power += _left(direct, design, inverse @ image) / lengths.size
        elif isinstance(source, LumpedSource):
            direct = source.vectors[index][points, None]
            power += _left(direct, design, inverse @ pushed.images[k][0])
        elif isinstance(source, SharedSource):
            for image, vectors in zip(pushed.images[k], source.vectors, strict=True):
                power += _left(vectors[index][points], design, inverse @ image) / len(source.vectors)
    return power


def _left(direct: ComplexArray, design: ComplexArray, step: FloatArray) -> FloatArray:
    """Return the summed power of what is left of some vectors after the fit has made its steps."""
    left = direct - design @ step
    return np.asarray(np.sum(left.real**2 + left.imag**2, axis=-1))


def misfit(
    kind: str,
    residual: ComplexArray,
    frequency_hz: FloatArray,
    noise_variance: float,
    expected: FloatArray,
    points: slice,
) -> FloatArray:
    """Return a bound on what the model itself is wrong by, at the chosen points.

    The residual is r = e + η, the model's error and what the sources leave: |e|² ≈ |r|² − E|η|², the power that
    the sources do not explain. The largest power in the neighbourhood counts. An error that hides within E|η|²
    is no larger than what the readings cannot exclude, which the radius of the richest order holds.

    Parameters
    ----------
    kind : str
        Of an open and a short the bound falls towards f = 0.
    residual : complex array of shape (..., n)
        Mean reading minus model, at all readings.
    frequency_hz : array of shape (n,)
    noise_variance : float
        White noise of the mean reading, per component.
    expected : array of shape (m,)
        From `expected_power`.
    points : slice
        Which of the n readings are wanted.
    """
    count = residual.shape[-1]
    window = 1 + 2 * (count // (2 * NOISE_WINDOWS))
    averaged = running_mean(residual, window)
    reach = max(1, count // REACH_WINDOWS)
    largest = running_maximum(np.abs(averaged) ** 2, reach)[..., points]
    # The largest of k independent powers of noise is about ln k + 0.58 times their mean (Gumbel's law).
    independent = max(1.0, (2 * reach + 1) / window)
    explained = expected + (np.log(independent) + EULER) * 2.0 * noise_variance / window
    excess: FloatArray = np.sqrt(np.maximum(largest - explained, 0.0))
    return excess if kind == "load" else vanishing_at_zero(excess, frequency_hz[points])


def vanishing_at_zero(bound: FloatArray, frequency_hz: FloatArray) -> FloatArray:
    """Let a bound on the model's error fall towards f = 0 as physics makes it fall.

    At f → 0 an open and a short are exactly what their models say; what is left out grows in proportion to f
    (reactance, delay) or to √f (skin effect). A load has a fitted resistance, which takes up errors from all of
    the sweep, and is no such case. In the lowest part of the sweep, where the parts
    are electrically short, the bound therefore need not exceed √(f/f₀) times its largest value about f₀: what
    the readings show beyond that is the analyser's.

    Parameters
    ----------
    bound : array of shape (..., m)
    frequency_hz : array of shape (m,)
    """
    start = frequency_hz[-1] * ELECTRICALLY_SHORT
    around = (frequency_hz >= 0.5 * start) & (frequency_hz <= 1.5 * start)
    if not around.any():
        return bound
    ceiling = bound[..., around].max(axis=-1, keepdims=True) * np.sqrt(frequency_hz / start)
    return np.where(frequency_hz < start, np.minimum(bound, ceiling), bound)


def running_maximum(values: FloatArray, reach: int) -> FloatArray:
    """Return the largest value within `reach` places, along the last axis."""
    padded = np.pad(values, [(0, 0)] * (values.ndim - 1) + [(reach, reach)], mode="edge")
    result = padded[..., : values.shape[-1]].copy()
    for shift in range(1, 2 * reach + 1):
        np.maximum(result, padded[..., shift : shift + values.shape[-1]], out=result)
    return result
