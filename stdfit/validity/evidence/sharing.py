"""The bound on Γ shared out among the kinds of sources that make it."""

from collections.abc import Sequence

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.uncertainty.budget import Share, kind_of, parts_of_variance

MISFIT = "misfit"
"""The part of the bound that is no source of uncertainty: the model's own error."""

STATED = "stated bound"
"""What stands for all parts where a kit states bounds and no sources, as an entry sheet that was read back does."""


def source_parts(design: ComplexArray, shares: Sequence[Share], u95: FloatArray) -> FloatArray:
    """Return what each source takes of the 95 % radius, U95·v_k/Σv, in the order of the shares.

    Parameters
    ----------
    design : complex array of shape (n, p)
        Derivatives of Γ by the quantities of the joint covariance.
    shares : sequence of m Share
    u95 : array of shape (n,)
        The radius.

    Returns
    -------
    array of shape (m, n)
        Parts that add up to the radius.
    """
    return parts_of_variance(design, shares) * u95 if shares else np.zeros((0, design.shape[0]))


def shared_out(
    design: ComplexArray, shares: Sequence[Share], u95: FloatArray, misfit: FloatArray
) -> tuple[tuple[str, ...], FloatArray]:
    """Return the kinds of sources and their parts of the bound, which add up to it at every frequency.

    A radius is no sum: it is shared out in proportion to variance, part_k = U95·v_k/Σv, where v is the variance of
    real and imaginary part together at the correlation length with the largest total at that frequency. The misfit
    is a part as it is.

    Parameters
    ----------
    design : complex array of shape (n, p)
        Derivatives of Γ by the quantities of the joint covariance.
    shares : sequence of Share
    u95, misfit : arrays of shape (n,)

    Returns
    -------
    kinds : tuple of m str
        In the order of the shares, the misfit last.
    parts : array of shape (m, n)
    """
    if not shares:
        return (STATED,), misfit[None].copy()
    kinds = tuple(dict.fromkeys(kind_of(share.name) for share in shares))
    each = source_parts(design, shares, u95)
    gathered = [
        sum(part for share, part in zip(shares, each, strict=True) if kind_of(share.name) == kind)
        for kind in kinds
    ]
    return (*kinds, MISFIT), np.array([*gathered, misfit])
