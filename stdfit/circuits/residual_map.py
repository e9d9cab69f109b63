"""What errors of three standards do to a device: the quadratic of residual errors.

An analyser that is corrected with standards whose definitions are wrong by ε₁, ε₂, ε₃ shows a device Γ, to first order,
wrong by the quadratic through those errors, δ(Γ) = Σᵢ εᵢ Πⱼ≠ᵢ (Γ − Γⱼ)/(Γᵢ − Γⱼ) = D + T·Γ + M·Γ².
"""

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray

PAIRS = ((0, 1), (0, 2), (1, 2))
"""The pairs of three standards, by their places."""


def term_weights(standards: ComplexArray) -> ComplexArray:
    """Return how much the error of each standard puts into each residual term.

    D = Σᵢ wᵢ₀·εᵢ, T = Σᵢ wᵢ₁·εᵢ, M = Σᵢ wᵢ₂·εᵢ: the coefficients of the Lagrange polynomials through the standards.

    Parameters
    ----------
    standards : complex array of shape (..., 3)
        Reflections of the standards; infinite weights come out where two are the same.

    Returns
    -------
    complex array of shape (..., 3, 3)
        By standard, then by power of Γ: effective directivity, reflection tracking, source match.

    Notes
    -----
    ε is "defined − true". For standards at +1, −1 and 0, with δ = −ε the deviation of the true standard from its
    definition, D = −δL, T = −(δO − δS)/2 and M = −[(δO + δS)/2 − δL]: U. Stumper, Adv. Radio Sci. 1, 2003, 1–8;
    N. Yannopoulou, P. Zimourtopoulos, Radioengineering 16(2), 2007, 1–8.

    Examples
    --------
    >>> import numpy as np
    >>> term_weights(np.array([1.0, -1.0, 0.0], dtype=complex)).real.tolist()
    [[0.0, 0.5, 0.5], [0.0, -0.5, 0.5], [1.0, 0.0, -1.0]]
    """
    weights = np.empty((*standards.shape, 3), dtype=complex)
    for own in range(3):
        one, two = (standards[..., other] for other in range(3) if other != own)
        with np.errstate(divide="ignore", invalid="ignore"):
            scale = 1.0 / ((standards[..., own] - one) * (standards[..., own] - two))
            weights[..., own, 0] = one * two * scale
            weights[..., own, 1] = -(one + two) * scale
            weights[..., own, 2] = scale
    return weights + 0j  # no minus before a zero


def device_weights(standards: ComplexArray, device: ComplexArray) -> ComplexArray:
    """Return how much of the error of each standard a device shows: the Lagrange polynomials at Γ.

    Parameters
    ----------
    standards : complex array of shape (n, 3)
    device : complex array of shape (n, k) or (k,)
        Reflections of devices at each frequency.

    Returns
    -------
    complex array of shape (n, k, 3)
    """
    powers = np.asarray(device)[..., None] ** np.arange(3)
    with np.errstate(invalid="ignore"):
        return np.asarray(np.einsum("...kq,...sq->...ks", powers, term_weights(standards)))


def separation(standards: ComplexArray) -> FloatArray:
    """Return |Γᵢ − Γⱼ| of each pair of standards, shape (..., 3).

    Parameters
    ----------
    standards : complex array of shape (..., 3)
        The pairs come in the order of `PAIRS`.
    """
    return np.stack([np.abs(standards[..., one] - standards[..., two]) for one, two in PAIRS], axis=-1)
