"""The bound on Γ shared out among the kinds of sources that make it."""

from collections.abc import Sequence

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.uncertainty.budget import Share, plane

MISFIT = "misfit"
"""The part of the bound that is no source of uncertainty: the model's own error."""

STATED = "stated bound"
"""What stands for all parts where a kit states bounds and no sources, as an entry sheet that was read back does."""


def kind_of(name: str) -> str:
    """Return the kind of a source: its name before the bracket.

    Examples
    --------
    >>> kind_of("analyser residuals (source match)"), kind_of("noise")
    ('analyser residuals', 'noise')
    """
    return name.partition(" (")[0]


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
    variances = [plane(design, share.covariances)[..., :2].sum(axis=-1) for share in shares]
    lengths = max(one.shape[0] for one in variances)
    stack = np.maximum([np.broadcast_to(one, (lengths, u95.size)) for one in variances], 0.0)
    worst = stack.sum(axis=0).argmax(axis=0)
    chosen = stack[:, worst, np.arange(u95.size)]
    total = chosen.sum(axis=0)
    part = np.divide(chosen, total, out=np.zeros_like(chosen), where=total > 0.0) * u95
    gathered = [
        sum(own for share, own in zip(shares, part, strict=True) if kind_of(share.name) == kind)
        for kind in kinds
    ]
    return (*kinds, MISFIT), np.array([*gathered, misfit])
