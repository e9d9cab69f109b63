"""Joint covariance of all fitted quantities, source by source."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.uncertainty.push import Pushed
from stdfit.uncertainty.region import effective_freedom, radius_95, student
from stdfit.uncertainty.sources import SharedSource, SmoothSource, Source

UNREACHED = 1e-14
"""Smallest eigenvalue of a normal matrix, against its largest, that is more than rounding."""


@dataclass(frozen=True, slots=True, eq=False)
class Share:
    """What one source contributes to the joint covariance.

    Attributes
    ----------
    name : str
    freedom : float
        Degrees of freedom, infinite where the size of the source is stated and not estimated.
    covariances : array of shape (a, ..., p, p)
        One for each correlation length that is tried; a = 1 where the source has none.
    """

    name: str
    freedom: float
    covariances: FloatArray


def shares_of(
    pushed: Sequence[Pushed],
    sources: Sequence[Source],
    precision: FloatArray,
    evidence: Sequence[tuple[str, Sequence[int]]],
) -> tuple[FloatArray, list[Share]]:
    """Return M⁻¹ and the share of each source; the axis after the lengths runs over the cuts.

    Parameters
    ----------
    pushed : sequence of Pushed
        One for each standard, all with the same p and number of cuts.
    sources : sequence of Source
    precision : array of shape (p,)
        1/u² of evidence on each quantity, zero for none.
    evidence : sequence of (name, places)
        How pieces of evidence are gathered in the budget.
    """
    normal = sum(one.normal for one in pushed) + np.diag(precision)
    inverse = inverse_of(np.asarray(normal))
    shares = []
    for k, source in enumerate(sources):
        common = isinstance(source, SharedSource) or (isinstance(source, SmoothSource) and source.common)
        choices = []
        for length in range(len(pushed[0].images[k])):
            images = [one.images[k][length] for one in pushed]
            joint = [sum(images)] if common else images
            choices.append(sum(outer(inverse @ image) for image in joint))
        shares.append(Share(source.name, source.freedom, np.array(choices)))
    for name, places in evidence:
        if places:
            image = inverse[..., :, list(places)] * np.sqrt(precision[list(places)])
            shares.append(Share(name, np.inf, outer(image)[None]))
    return inverse, shares


def outer(image: FloatArray) -> FloatArray:
    """Return T·Tᵀ of a stack of images."""
    return np.asarray(image @ np.swapaxes(image, -1, -2))


def factor_of(covariance: FloatArray) -> FloatArray:
    """Return R with R·Rᵀ = C, shape (p, p); quantities of very different units are scaled first."""
    size = np.sqrt(np.maximum(np.diag(covariance), 0.0))
    size = np.where(size > 0.0, size, 1.0)
    value, vector = np.linalg.eigh(covariance / size[:, None] / size)
    return np.asarray(size[:, None] * vector * np.sqrt(np.maximum(value, 0.0)))


def inverse_of(normal: FloatArray) -> FloatArray:
    """Return inverses of a stack of normal matrices, scaled first.

    A direction that neither readings nor evidence reach gets a variance that is large, not zero.
    """
    size = np.sqrt(np.maximum(np.einsum("...ii->...i", normal), 0.0))
    size = np.where(size > 0.0, size, 1.0)
    scale = size[..., :, None] * size[..., None, :]
    value, vector = np.linalg.eigh(normal / scale)
    value = np.maximum(value, UNREACHED * value[..., -1:])
    return np.asarray((vector / value[..., None, :]) @ np.swapaxes(vector, -1, -2) / scale)


def radius(design: ComplexArray, shares: Sequence[Share]) -> FloatArray:
    """Return the 95 % radius on Γ, the largest over the correlation lengths.

    Parameters
    ----------
    design : complex array of shape (n, p)
        Derivatives of Γ by the quantities that the covariances are of.
    shares : sequence of Share

    Returns
    -------
    array of shape (..., n)
        Zero where there are no shares: nothing is known of the uncertainty.
    """
    if not shares:
        return np.zeros(design.shape[:-1])
    return radius_of_planes(planes_of(design, shares), [share.freedom for share in shares])


def radius_of_planes(planes: Sequence[FloatArray], freedoms: Sequence[float]) -> FloatArray:
    """Return the 95 % radius of a sum of sources, the largest over the correlation lengths.

    Parameters
    ----------
    planes : sequence of arrays of shape (a, ..., 3)
        For each source the variance of the real part, of the imaginary part, and their covariance, for each
        correlation length; a = 1 where the source has none.
    freedoms : sequence of float
        Degrees of freedom of each source.

    Returns
    -------
    array of shape (...)
    """
    lengths = max(own.shape[0] for own in planes)
    stack = np.array([np.broadcast_to(own, (lengths, *own.shape[1:])) for own in planes])
    freedom = effective_freedom(stack[..., 0] + stack[..., 1], np.array(freedoms))
    return np.asarray(radius_95(stack.sum(axis=0), freedom).max(axis=0))


def planes_of(design: ComplexArray, shares: Sequence[Share]) -> list[FloatArray]:
    """Return the `plane` of each share, for each correlation length; one product serves them all."""
    every = plane(design, np.concatenate([share.covariances for share in shares]))
    ends = np.cumsum([len(share.covariances) for share in shares])
    return np.split(every, ends[:-1])


def plane(design: ComplexArray, covariance: FloatArray) -> FloatArray:
    """Return variance of the real part, of the imaginary part, and their covariance, shape (..., n, 3).

    Parameters
    ----------
    design : complex array of shape (n, p)
    covariance : array of shape (..., p, p)
    """
    # One product of matrices over all pairs of quantities: several times faster than sums over single rows.
    flat = covariance.reshape(*covariance.shape[:-2], -1)
    pairs = ((design.real, design.real), (design.imag, design.imag), (design.real, design.imag))
    products = [(one[:, :, None] * other[:, None, :]).reshape(len(design), -1) for one, other in pairs]
    return np.stack([flat @ product.T for product in products], axis=-1)


def kind_of(source: str) -> str:
    """Return the kind of a source: what its name says before the bracket.

    Examples
    --------
    >>> kind_of("analyser residuals (source match)"), kind_of("noise")
    ('analyser residuals', 'noise')
    """
    return source.partition(" (")[0]


def parts_of_variance(design: ComplexArray, shares: Sequence[Share]) -> FloatArray:
    """Return each source's part of the variance of Γ, v_k/Σv, at the length with the largest total at that frequency.

    Parameters
    ----------
    design : complex array of shape (n, p)
        Derivatives of Γ by the quantities that the covariances are of.
    shares : sequence of m Share
        One or more.

    Returns
    -------
    array of shape (m, n)
        Parts that add up to 1; zero where nothing is uncertain.
    """
    variances = [own[..., 0] + own[..., 1] for own in planes_of(design, shares)]
    lengths, points = max(own.shape[0] for own in variances), design.shape[0]
    stack = np.maximum([np.broadcast_to(own, (lengths, points)) for own in variances], 0.0)
    worst = stack[:, stack.sum(axis=0).argmax(axis=0), np.arange(points)]
    total = worst.sum(axis=0)
    return np.asarray(np.divide(worst, total, out=np.zeros_like(worst), where=total > 0.0))


def expanded(direction: FloatArray, shares: Sequence[Share]) -> tuple[FloatArray, FloatArray]:
    """Return standard uncertainty and 95 % uncertainty of linear combinations, the largest over the lengths.

    Parameters
    ----------
    direction : array of shape (m, p)
        Each row one combination of the quantities.
    shares : sequence of Share

    Returns
    -------
    u, u95 : arrays of shape (m,)
    """
    variances = [np.einsum("mp,apq,mq->am", direction, share.covariances, direction) for share in shares]
    lengths = max(variance.shape[0] for variance in variances)
    stack = np.maximum(
        [np.broadcast_to(variance, (lengths, variance.shape[1])) for variance in variances], 0.0
    )
    freedom = effective_freedom(stack, np.array([share.freedom for share in shares]))
    u = np.sqrt(stack.sum(axis=0))
    return u.max(axis=0), (u * student(freedom)).max(axis=0)
