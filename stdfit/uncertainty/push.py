"""Sources pushed through the linearised fit: δθ = M⁻¹ Σ Re(Jᴴ W δΓ), with M = Σ Re(Jᴴ W J) + P.

Everything is summed up once along frequency and kept at a number of cuts, so that fits of many ranges cost no
more than one. A smooth source is pushed through by its basis functions: no matrix of the size of the readings.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.uncertainty.smooth import LENGTHS_PER_SPAN, bumps, correlation_lengths
from stdfit.uncertainty.sources import LumpedSource, SharedSource, SmoothSource, Source, WhiteSource

BLOCK = 4096
"""Points handled at once, which bounds the memory of the basis functions."""


@dataclass(frozen=True, slots=True, eq=False)
class Pushed:
    """Sums over the readings of one standard up to each of c cuts.

    Attributes
    ----------
    normal : array of shape (c, p, p)
        Re(Jᴴ W J).
    projected : array of shape (c, p)
        Re(Jᴴ W r) of the residual r.
    images : tuple over sources of tuple over correlation lengths of arrays of shape (c, p, q)
        Image of each basis vector; white noise has one image whose outer product is its covariance.
    """

    normal: FloatArray
    projected: FloatArray
    images: tuple[tuple[FloatArray, ...], ...]


def weighted(design: ComplexArray, weight: FloatArray) -> ComplexArray:
    """Return Jᴴ W of one standard whose readings stand for themselves, transposed: shape (n, p).

    Parameters
    ----------
    design : complex array of shape (n, p)
    weight : array of shape (n,)
        1/variance per component.
    """
    return np.asarray(design.conj() * weight[:, None])


def push(
    design: ComplexArray,
    acting: ComplexArray,
    residual: ComplexArray,
    frequency_hz: FloatArray,
    span: tuple[float, float],
    sources: Sequence[Source],
    index: int,
    cuts: Sequence[int],
) -> Pushed:
    """Sum up what the fit needs to know of one standard.

    Parameters
    ----------
    design : complex array of shape (n, p)
        Derivatives of Γ by the scaled fitted quantities.
    acting : complex array of shape (n, p)
        How a change of each reading of this standard acts on the fit: the rows of Jᴴ W that belong to it.
    residual : complex array of shape (n,)
        Mean reading minus model.
    frequency_hz : array of shape (n,)
    span : (float, float)
        Lowest and highest frequency of all standards, the same for each of them.
    sources : sequence of Source
    index : int
        Which standard this is, in the profiles of the sources.
    cuts : sequence of c ints
        Rising numbers of points after which a sum is kept.
    """
    lengths = correlation_lengths(span[1] - span[0])
    smooth = [k for k, source in enumerate(sources) if isinstance(source, SmoothSource)]
    # All smooth sources side by side, so that each basis function is computed once.
    smoothly = np.concatenate(
        [acting * source.profiles[index][:, None] for source in sources if isinstance(source, SmoothSource)]
        or [np.zeros((frequency_hz.size, 0), dtype=complex)],
        axis=1,
    )
    pieces: list[list[list[FloatArray]]] = [[[] for _ in range(lengths_of(source))] for source in sources]
    normal, projected = [], []
    start = 0
    for stop in cuts:
        part = slice(start, stop)
        rows = acting[part]
        normal.append((rows.T @ design[part]).real)
        projected.append((rows.T @ residual[part]).real)
        for source, kept in zip(sources, pieces, strict=True):
            if isinstance(source, WhiteSource):
                kept[0].append(source.variances[index] * (rows.T @ rows.conj()).real)
            elif isinstance(source, LumpedSource):
                kept[0].append((rows.T @ source.vectors[index][part]).real[:, None])
            elif isinstance(source, SharedSource):
                for own, vectors in zip(kept, source.vectors, strict=True):
                    own.append((rows.T @ vectors[index][part]).real)
        for place, length in enumerate(lengths):
            images = _image(smoothly[part], frequency_hz[part], span, float(length))
            by_source = images.reshape(len(smooth), acting.shape[1], images.shape[1])
            for k, image in zip(smooth, by_source, strict=True):
                pieces[k][place].append(image)
        start = stop
    summed = [[np.cumsum(np.array(kept), axis=0) for kept in by_length] for by_length in pieces]
    images_of = tuple(
        tuple(_roots(sums) if isinstance(source, WhiteSource) else sums for sums in by_length)
        for source, by_length in zip(sources, summed, strict=True)
    )
    return Pushed(np.cumsum(normal, axis=0), np.cumsum(projected, axis=0), images_of)


def lengths_of(source: Source) -> int:
    """Return for how many correlation lengths a source has an image."""
    if isinstance(source, SmoothSource):
        return len(LENGTHS_PER_SPAN)
    return len(source.vectors) if isinstance(source, SharedSource) else 1


def _image(
    acting: ComplexArray, frequency_hz: FloatArray, span: tuple[float, float], length: float
) -> FloatArray:
    """Return the image of the real and of the imaginary basis functions, shape (p, 2q)."""
    real: FloatArray | float = 0.0
    imag: FloatArray | float = 0.0
    for first in range(0, max(frequency_hz.size, 1), BLOCK):
        piece = slice(first, first + BLOCK)
        basis = bumps(frequency_hz[piece], span[0], span[1], length)
        real = real + acting[piece].real.T @ basis
        imag = imag - acting[piece].imag.T @ basis
    return np.concatenate([np.asarray(real), np.asarray(imag)], axis=1)


def _roots(squares: FloatArray) -> FloatArray:
    """Return factors R with R Rᵀ = S for each of a stack of covariances."""
    value, vector = np.linalg.eigh(squares)
    return np.asarray(vector * np.sqrt(np.maximum(value, 0.0))[..., None, :])
