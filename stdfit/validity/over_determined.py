"""What readings through unknown error terms keep beyond the model: the misfit of a whole set.

With s standards and three unknown error terms, s − 3 complex values at each frequency are left to contradict the
models. Which standard is to blame cannot be told, since an error of one is shared out among all. So two sizes count:
that of independent errors of all standards, and for each standard that which it would have if it alone were wrong.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.uncertainty.connections import running_mean
from stdfit.uncertainty.smooth import bumps, correlation_lengths
from stdfit.uncertainty.sources import LumpedSource, SharedSource, SmoothSource, Source, WhiteSource
from stdfit.validity.misfit import EULER, NOISE_WINDOWS, REACH_WINDOWS, running_maximum

LEAST_SHOWN = 0.1
"""Part of the power of model errors that is taken to be left of them at least: what shows less is not divided by."""


@dataclass(frozen=True, slots=True, eq=False)
class Explained:
    """What the sources leave in the residuals of a set, as summed power Σ|η|² over its standards at m frequencies.

    Attributes
    ----------
    power : array of shape (m,)
        Of smooth sources and evidence.
    white : array of shape (m,)
        Of white noise.
    shown : array of shape (m,)
        Of smooth errors of unit size, one for each standard: what the residuals show of errors of the models.
    """

    power: FloatArray
    white: FloatArray
    shown: FloatArray


def model_error(
    residual: ComplexArray, rest: ComplexArray, explained: Explained, points: slice
) -> tuple[FloatArray, FloatArray]:
    """Return the size of the model errors that the residuals of a set speak for, at the chosen points.

    |e|² = (Σ|r|² − E Σ|η|²)/E Σ|u|² of all standards alike: the power that the sources do not explain, against what
    errors u of unit size leave. Of standard k alone |e_k| = |b_kᴴ·r|/|b_k|², b_k its column of B, the least squares
    fit of such an error to the residuals; the part of them that the sources explain is taken off.

    Parameters
    ----------
    residual : complex array of shape (n, s)
        Corrected readings minus models.
    rest : complex array of shape (n, s, s)
        B, as for `explain`.
    explained : Explained
        Of a fit to all readings: what a fit leaves beyond its range explains nothing.
    points : slice
        Which of the n readings are wanted.

    Returns
    -------
    common : array of shape (m,)
        Of all standards alike.
    each : array of shape (s, m)
        The larger of this and what each would have alone.
    """
    count, standards = residual.shape
    window = 1 + 2 * (count // (2 * NOISE_WINDOWS))
    averaged = running_mean(residual.T, window)
    power = (np.abs(averaged) ** 2).sum(axis=0)
    reach = max(1, count // REACH_WINDOWS)
    largest = running_maximum(power, reach)[points]
    freedom = max(standards - 3, 1)
    # The largest of k independent powers: Gumbel's law for one complex value, less for the mean of several.
    independent = max(1.0, (2 * reach + 1) / window)
    raised = 1.0 + (np.log(independent) + EULER - 1.0) / np.sqrt(freedom) if independent > 1.0 else 1.0
    excess = np.maximum(largest - explained.power - explained.white * raised / window, 0.0)
    common = np.sqrt(excess / np.maximum(explained.shown, LEAST_SHOWN * freedom))
    seen = np.maximum((np.abs(rest) ** 2).sum(axis=1).T, LEAST_SHOWN)
    alone = np.abs(np.einsum("nsk,sn->kn", rest.conj(), averaged)) / seen
    unexplained = np.sqrt(excess / np.maximum(largest, 1e-300))
    return np.asarray(common), np.maximum(common, running_maximum(alone, reach)[:, points] * unexplained)


def explain(
    rest: ComplexArray,
    design: ComplexArray,
    step: ComplexArray,
    frequency_hz: FloatArray,
    span: tuple[float, float],
    sources: Sequence[Source],
    evidence: FloatArray,
    points: slice,
) -> Explained:
    """Return what sources, evidence, and errors of unit size leave at the chosen points.

    η = B·(δ − J·δθ): what neither error terms nor definitions follow. All correlation lengths count alike, as for
    misfits of single standards. Of errors of unit size no more counts than is left without following: a fit that is
    drawn by other frequencies makes them larger, but no better seen.

    Parameters
    ----------
    rest : complex array of shape (n, s, s)
        What is left of errors of the readings once the error terms have followed them, B (`coupled`).
    design : complex array of shape (n, s, p)
    step : complex array of shape (n, s, p)
        M⁻¹·Jᴴ·W·B at each reading: δθ = Σ Re(step·δ).
    frequency_hz : array of shape (n,)
    span : (float, float)
    sources : sequence of Source
    evidence : array of shape (p, q)
        Change of the quantities for one standard uncertainty of each of q pieces of evidence.
    points : slice
        Which of the n readings are wanted.
    """
    unit = SmoothSource(
        "unit", (np.full(rest.shape[0], np.sqrt(0.5), dtype=complex),) * rest.shape[1], common=False
    )
    nothing = np.zeros((design.shape[2], 0))
    shown, _ = _left(rest, design, step, frequency_hz, span, [unit], nothing, points)
    power, white = _left(rest, design, step, frequency_hz, span, sources, evidence, points)
    unfollowed = (np.abs(rest[points]) ** 2).sum(axis=(1, 2))
    return Explained(power, white, np.minimum(shown, unfollowed))


def _left(
    rest: ComplexArray,
    design: ComplexArray,
    step: ComplexArray,
    frequency_hz: FloatArray,
    span: tuple[float, float],
    sources: Sequence[Source],
    evidence: FloatArray,
    points: slice,
) -> tuple[FloatArray, FloatArray]:
    """Return the power that smooth sources with evidence, and that white noise leave."""
    here, slope, f = rest[points], design[points], frequency_hz[points]
    standards = rest.shape[1]

    def left(direct: ComplexArray | None, image: FloatArray) -> FloatArray:
        """Return the power left of vectors: `direct` (m, s, q) at the points, `image` (p, q) on the quantities."""
        moved = -(slope @ image) if direct is None else direct - slope @ image
        return np.asarray((np.abs(here @ moved) ** 2).sum(axis=(1, 2)))

    def on(standard: int, vectors: ComplexArray) -> ComplexArray:
        spread = np.zeros((vectors.shape[0], standards, vectors.shape[1]), dtype=complex)
        spread[:, standard] = vectors
        return spread

    power = left(None, evidence) if evidence.size else np.zeros(f.size)
    white = np.zeros(f.size)
    lengths = correlation_lengths(span[1] - span[0])
    for source in sources:
        if isinstance(source, WhiteSource):
            variances = np.array(source.variances)
            white += 2.0 * (np.abs(here) ** 2 * variances).sum(axis=(1, 2))
        elif isinstance(source, SmoothSource):
            for length in lengths:
                basis = bumps(frequency_hz, *span, float(length))
                for k in range(standards):
                    acting = source.profiles[k][:, None] * basis
                    real = (step[:, k].T @ acting).real
                    imag = -(step[:, k].T @ acting).imag
                    direct = np.concatenate([acting[points], 1j * acting[points]], axis=1)
                    power += left(on(k, direct), np.concatenate([real, imag], axis=1)) / lengths.size
        elif isinstance(source, LumpedSource):
            for k in range(standards):
                vector = source.vectors[k][:, None]
                power += left(on(k, vector[points]), (step[:, k].T @ vector).real)
        elif isinstance(source, SharedSource):
            for own in source.vectors:
                image = sum((step[:, k].T @ own[k]).real for k in range(standards))
                direct = np.stack([own[k][points] for k in range(standards)], axis=1)
                power += left(direct, np.asarray(image)) / len(source.vectors)
    return power, white
