"""Reflections at single frequencies with their covariances: of one standard, and of all standards of a kit jointly.

The correlation length of the smooth errors is not known. Bounds take the largest radius over the lengths that were
tried; a covariance has to come from one of them, and here it comes from the one with the largest total variance.
"""

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.uncertainty.budget import Share, planes_of
from stdfit.uncertainty.region import effective_freedom
from stdfit.validity.kit import Definition, Kit, model


def own_covariance(
    kit: Kit, definition: Definition, frequency_hz: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return the covariance of Γ of one standard, all sources together, and its degrees of freedom.

    Parameters
    ----------
    kit : Kit
    definition : Definition
    frequency_hz : array of shape (n,)

    Returns
    -------
    covariance : array of shape (n, 3)
        Variance of the real part, variance of the imaginary part, and their covariance; zero without sources.
    freedom : array of shape (n,)
        By Welch and Satterthwaite; infinite where nothing was estimated from repeats.
    """
    if not kit.shares:
        return np.zeros((frequency_hz.size, 3)), np.full(frequency_hz.size, np.inf)
    _, design = model(kit, definition, frequency_hz)
    planes = planes_of(design, kit.shares)
    lengths = max(one.shape[0] for one in planes)
    stack = np.array([np.broadcast_to(one, (lengths, *one.shape[1:])) for one in planes])
    total = stack[..., :2].sum(axis=(0, -1))
    chosen = stack[:, np.argmax(total, axis=0), np.arange(frequency_hz.size)]
    freedom = effective_freedom(chosen[..., :2].sum(axis=-1), np.array([one.freedom for one in kit.shares]))
    return chosen.sum(axis=0), freedom


def joint_covariance(kit: Kit, frequency_hz: FloatArray) -> FloatArray:
    """Return the joint covariance of Γ of all standards of a kit, all sources together.

    V = P·C·Pᵀ, with C the covariance of the fitted quantities at one correlation length for each frequency, and P the
    derivatives of real and imaginary parts: so V is positive semidefinite.

    Parameters
    ----------
    kit : Kit
    frequency_hz : array of shape (n,)

    Returns
    -------
    array of shape (n, 2s, 2s)
        For the s standards in the order of the kit: real part, imaginary part, real part, …; zero without sources.
    """
    size = 2 * len(kit.definitions)
    if not kit.shares:
        return np.zeros((frequency_hz.size, size, size))
    designs = [model(kit, one, frequency_hz)[1] for one in kit.definitions]
    design = np.stack([part for one in designs for part in (one.real, one.imag)], axis=1)
    totals = _totals(kit.shares)
    trace = np.einsum("nip,apq,niq->na", design, totals, design, optimize=True)
    chosen = totals[np.argmax(trace, axis=1)]
    joint = design @ chosen @ np.swapaxes(design, 1, 2)
    return np.asarray(
        0.5 * (joint + np.swapaxes(joint, 1, 2))
    )  # products leave it symmetric but for rounding


def _totals(shares: tuple[Share, ...]) -> FloatArray:
    """Return the sum of all shares for each correlation length, shape (a, p, p)."""
    lengths = max(share.covariances.shape[0] for share in shares)
    total = np.zeros((lengths, *shares[0].covariances.shape[1:]))
    for share in shares:
        total += share.covariances
    return total
