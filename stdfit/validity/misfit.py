"""What the mean readings keep beyond the model and beyond what the sources of error explain."""

from collections.abc import Sequence

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.uncertainty.connections import running_mean
from stdfit.uncertainty.push import Pushed
from stdfit.uncertainty.region import CIRCULAR
from stdfit.uncertainty.smooth import LENGTHS_PER_SPAN, bumps
from stdfit.uncertainty.sources import LumpedSource, SmoothSource, Source

NOISE_WINDOWS = 200
"""Residuals are averaged over 1/NOISE_WINDOWS of the sweep before their size is taken."""

REACH_WINDOWS = 50
"""The largest size within 1/REACH_WINDOWS of the sweep counts, since phase and ripple are accidental."""

ELECTRICALLY_SHORT = 0.1
"""Part of the sweep in which what the models leave out is still proportional to √f or f."""

LINE_PER_POWER = float(CIRCULAR / np.sqrt(2.0))
"""95 % radius of a circular complex value in units of its total standard deviation: 1.73."""

LONGEST = 0
"""Place of the longest correlation length, which explains the least once the fit has followed it."""


def expected_power(
    design: ComplexArray,
    frequency_hz: FloatArray,
    points: slice,
    span: tuple[float, float],
    sources: Sequence[Source],
    pushed: Sequence[Pushed],
    inverse: FloatArray,
    index: int,
) -> FloatArray:
    """Return E|r|² that smooth and lumped sources leave in one standard's residual after the fit.

    r = δ − J·M⁻¹·Σ Re(Jᴴ W δ): what the fit cannot follow of each basis vector of each source. Smooth sources
    are taken at the longest correlation length: it leaves the least, so that nothing is explained away which
    only a convenient choice of length would explain.

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
    pushed : sequence of Pushed
        One for each standard.
    inverse : array of shape (c, p, p)
        M⁻¹ at each cut.
    index : int
        Which standard.

    Returns
    -------
    array of shape (c, m)
    """
    power = np.zeros((inverse.shape[0], frequency_hz.size))
    basis = bumps(frequency_hz, span[0], span[1], LENGTHS_PER_SPAN[LONGEST] * (span[1] - span[0]))
    for k, source in enumerate(sources):
        if isinstance(source, SmoothSource):
            acting = source.profiles[index][points, None] * basis
            direct = np.concatenate([acting, 1j * acting], axis=1)
            images = [one.images[k][LONGEST] for one in pushed]
            image = sum(images) if source.common else images[index]
        elif isinstance(source, LumpedSource):
            direct = source.vectors[index][points, None]
            image = pushed[index].images[k][0]
        else:
            continue
        left = direct - design @ (inverse @ image)
        power += np.sum(left.real**2 + left.imag**2, axis=-1)
    return power


def misfit(
    residual: ComplexArray,
    frequency_hz: FloatArray,
    noise_variance: float,
    expected: FloatArray,
    points: slice,
) -> FloatArray:
    """Return a bound on what the model itself is wrong by, at the chosen points.

    The residual is r = e + η, the model's error and what the sources leave. With s² = |r|² − E|η|², the power
    that the sources do not explain (the largest in the neighbourhood counts), and both parts normal, e given r
    has the mean r·s²/|r|² and the variance s²·E|η|²/|r|²; the bound is |mean| + 1.73 standard deviations:
    s·(s + 1.73·√E|η|²)/|r|. It is s where the sources explain little, and 0 where they explain all.

    Parameters
    ----------
    residual : complex array of shape (..., n)
        Mean reading minus model, at all readings.
    frequency_hz : array of shape (n,)
    noise_variance : float
        White noise of the mean reading, per component.
    expected : array of shape (..., m)
        From `expected_power`.
    points : slice
        Which of the n readings are wanted.
    """
    count = residual.shape[-1]
    window = 1 + 2 * (count // (2 * NOISE_WINDOWS))
    flat = residual.reshape(-1, count)
    averaged = np.array(
        [running_mean(row.real, window) + 1j * running_mean(row.imag, window) for row in flat]
    )
    reach = max(1, count // REACH_WINDOWS)
    largest = running_maximum(np.abs(averaged) ** 2, reach)[:, points].reshape(expected.shape)
    explained = expected + 2.0 * noise_variance / window
    excess = np.sqrt(np.maximum(largest - explained, 0.0))
    bound = excess * (excess + LINE_PER_POWER * np.sqrt(explained)) / np.sqrt(np.maximum(largest, 1e-300))
    return vanishing_at_zero(np.asarray(bound), frequency_hz[points])


def vanishing_at_zero(bound: FloatArray, frequency_hz: FloatArray) -> FloatArray:
    """Let a bound on the model's error fall towards f = 0 as physics makes it fall.

    At f → 0 an open, a short and a resistor are exactly what their models say; what is left out grows in
    proportion to f (reactance, delay) or to √f (skin effect). In the lowest part of the sweep, where the parts
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
