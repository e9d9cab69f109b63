"""95 % radii in the complex plane and coverage factors for few degrees of freedom."""

from functools import cache
from typing import TYPE_CHECKING

import numpy as np

from stdfit.base.arrays import FloatArray

if TYPE_CHECKING:
    from numpy.polynomial import Chebyshev

CIRCULAR = float(np.sqrt(-2.0 * np.log(0.05)))
"""95 % radius of a circular normal variable, per component standard deviation: 2.448."""

LINE = 1.959963984540054
"""95 % bound of a normal variable on a line."""

STUDENT_TERMS = 24
"""Degree of the series for Student's factor: with 20 it is exact to 1e-12, with 24 as well as numbers allow."""

# Radius that holds 95 % of a bivariate normal, by the ratio of its smaller to its larger variance, in units
# of the larger standard deviation. Computed from the polar form P(r) = ∮ (1 − exp(−r²a/2))/(2πa√ρ) dφ,
# a = cos²φ + sin²φ/ρ; a test repeats the integral.
_RATIO = np.array([0.0, 0.01, 0.02, 0.05, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0])
_RADIUS = np.array(
    [
        1.9599639845,
        1.9625295968,
        1.9651248292,
        1.9730967260,
        1.9870624119,
        2.0181715256,
        2.0553587067,
        2.1000786533,
        2.1513444649,
        2.2071245885,
        2.2656588273,
        2.3257376846,
        2.3865927818,
        2.4477468307,
    ]
)


def student(freedom: FloatArray | float) -> FloatArray:
    """Return the two-sided 95 % factor of Student's t; infinite degrees of freedom give 1.960.

    Student (W. S. Gosset), Biometrika 6, 1908, 1–25.
    """
    nu = np.asarray(freedom, dtype=float)
    factor = np.full(nu.shape, LINE)
    few = np.isfinite(nu) & (nu < 1e6)
    if few.any():
        factor[few] = _student_series()(1.0 / np.maximum(nu[few], 1.0))
    return factor


@cache
def _student_series() -> "Chebyshev":
    """Return Student's factor as a Chebyshev series in 1/ν from 0 to 1, exact to 1e-13.

    The library inverts an integral for each value, and curves ask for thousands.
    """
    from numpy.polynomial import Chebyshev
    from scipy.special import stdtrit

    return Chebyshev.interpolate(
        lambda inverse: stdtrit(1.0 / inverse, 0.975), STUDENT_TERMS, domain=[0.0, 1.0]
    )


def circular(freedom: FloatArray | float) -> FloatArray:
    """Return the 95 % radius of a circular complex value whose variance per component has ν degrees of freedom.

    √(2·F0.95(2, ν)) = √(ν·(0.05^(−2/ν) − 1)), from the closed form of the F distribution with 2 and ν
    degrees of freedom; 2.448 for infinite ν, and infinite for so few that the radius has no number.
    """
    nu = np.asarray(freedom, dtype=float)
    radius = np.full(nu.shape, CIRCULAR)
    few = np.isfinite(nu) & (nu < 1e6)
    with np.errstate(over="ignore", divide="ignore"):
        radius[few] = np.sqrt(nu[few] * np.expm1(-2.0 / nu[few] * np.log(0.05)))
    return radius


def effective_freedom(variances: FloatArray, freedoms: FloatArray) -> FloatArray:
    """Return the degrees of freedom of a sum of variances of shape (sources, ...).

    ν = (Σ vᵢ)² / Σ (vᵢ²/νᵢ): B. L. Welch, Biometrika 34, 1947, 28–35; F. E. Satterthwaite, Biometrics
    Bulletin 2, 1946, 110–114; JCGM 100:2008, G.4.1. Never below the smallest νᵢ.
    """
    variances = np.asarray(variances, dtype=float)
    freedoms = np.asarray(freedoms, dtype=float)
    inverse = np.where(np.isfinite(freedoms), 1.0 / freedoms, 0.0)
    total = variances.sum(axis=0)
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        nu = total**2 / np.tensordot(inverse, variances**2, axes=(0, 0))
    return np.where(np.isnan(nu), np.inf, nu)


def radius_95(covariance: FloatArray, freedom: FloatArray | float = np.inf) -> FloatArray:
    """Return the radius about zero that holds 95 % of a complex value.

    Parameters
    ----------
    covariance : array of shape (..., 3)
        Variance of the real part, variance of the imaginary part, and their covariance.
    freedom : array of shape (...) or float
        Degrees of freedom of the covariance.

    Notes
    -----
    The radius is 1.960 standard deviations where the error lies on a line and 2.448 per component where
    it is circular; in between it follows the exact integral. For few degrees of freedom the factors of
    the two limits, Student's t and √(2F), are joined in proportion to the ratio of the variances.

    Examples
    --------
    >>> import numpy as np
    >>> round(float(radius_95(np.array([1.0, 1.0, 0.0]))), 3)
    2.448
    """
    real, imag, cross = covariance[..., 0], covariance[..., 1], covariance[..., 2]
    middle, half = 0.5 * (real + imag), np.hypot(0.5 * (real - imag), cross)
    largest = middle + half
    smallest = np.maximum(middle - half, 0.0)
    ratio = np.divide(smallest, largest, out=np.zeros_like(largest), where=largest > 0.0)
    few = (1.0 - ratio) * student(freedom) / LINE + ratio * circular(freedom) / CIRCULAR
    return np.asarray(np.sqrt(np.maximum(largest, 0.0)) * np.interp(ratio, _RATIO, _RADIUS) * few)
