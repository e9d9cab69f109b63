"""Nonlinear least squares: the only door to lmfit."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import FloatArray, frozen_float
from stdfit.base.errors import FitError

Function = Callable[[FloatArray], FloatArray]

OVERFLOW = 1e100
"""Stands for a residual that is not finite."""

TIGHT = 1e-14
"""Tolerance near the rounding floor."""

FIRST_STEP = 1.0
"""First step at most this times the size of the values: a full Gauss–Newton step from far away overshoots."""


@dataclass(frozen=True, slots=True, eq=False)
class Solution:
    """Where the sum of squares is smallest.

    Attributes
    ----------
    values : array of shape (p,)
    unscaled_covariance : array of shape (p, p)
        (JᵀJ)⁻¹ at the solution; the covariance of the values where each residual has unit variance.
    residual : array of shape (n,)
    converged : bool
    message : str
        The solver's own words.
    """

    values: FloatArray
    unscaled_covariance: FloatArray
    residual: FloatArray
    converged: bool
    message: str

    def __post_init__(self) -> None:
        for name in ("values", "unscaled_covariance", "residual"):
            object.__setattr__(self, name, frozen_float(getattr(self, name)))

    @property
    def residual_variance(self) -> float:
        """Sum of squares divided by the degrees of freedom."""
        freedom = self.residual.size - self.values.size
        return float(self.residual @ self.residual) / freedom if freedom > 0 else float("nan")

    @property
    def standard_deviations(self) -> FloatArray:
        """What independent residuals of one unknown variance would give, shape (p,)."""
        return np.sqrt(np.diag(self.unscaled_covariance) * self.residual_variance)


def least_squares(
    residual: Function, jacobian: Function, start: FloatArray, *, tolerance: float = TIGHT
) -> Solution:
    """Minimise the sum of squares of `residual` with analytic derivatives.

    Parameters
    ----------
    residual : callable
        Takes values of shape (p,), returns residuals of shape (n,).
    jacobian : callable
        Takes values of shape (p,), returns derivatives of shape (n, p).
    start : array of shape (p,)
    tolerance : float
        Relative change of the sum of squares at which the search ends.

    Raises
    ------
    FitError
        The derivatives overflow where the search begins or has come to.

    Notes
    -----
    Levenberg–Marquardt as in MINPACK, through lmfit. Parameters are named by their place, so that no text
    from a file reaches lmfit's expression evaluator. K. Levenberg, Quart. Appl. Math. 2, 1944, 164–168;
    D. W. Marquardt, J. SIAM 11, 1963, 431–441.
    """
    import lmfit

    parameters = lmfit.Parameters()
    names = [f"p{i}" for i in range(start.size)]
    for name, value in zip(names, start, strict=True):
        parameters.add(name, value=float(value))

    def at(current: "lmfit.Parameters") -> FloatArray:
        return np.array([current[name].value for name in names])

    finite = _finite(residual)
    result = lmfit.Minimizer(lambda current: finite(at(current)), parameters, calc_covar=False).leastsq(
        Dfun=lambda current: _derivatives(jacobian, at(current)),
        ftol=tolerance,
        xtol=1e-12,
        factor=FIRST_STEP,
        max_nfev=2000,
    )
    values = at(result.params)
    design = jacobian(values)
    # Solver tolerances end the search near the rounding floor, which MINPACK reports as codes 6 to 8:
    # the minimum is then found as well as numbers of this length allow.
    return Solution(
        values=values,
        unscaled_covariance=inverse_of_normal(design),
        residual=residual(values),
        converged=bool(result.ier in (1, 2, 3, 4, 6, 7, 8)),
        message=str(result.lmdif_message if hasattr(result, "lmdif_message") else result.message),
    )


def load_solver() -> None:
    """Import what a fit needs, which takes longer than most fits, before work is handed to other processes."""
    import lmfit  # noqa: F401
    import scipy.optimize  # noqa: F401


def near_least(residual: Function, jacobian: Function, start: FloatArray, tolerance: float) -> FloatArray:
    """Return values near the smallest sum of squares, or where the search got stuck.

    The same search as `least_squares`, MINPACK's, asked directly: for starting points and comparisons, of which many
    are needed, lmfit's bookkeeping takes as long as the search.

    Parameters
    ----------
    residual, jacobian, start, tolerance
        As for `least_squares`.
    """
    from scipy.optimize import leastsq

    # With full output the reasons to stop come as codes, not as warnings.
    found = leastsq(
        _finite(residual),
        start,
        Dfun=jacobian,
        ftol=tolerance,
        xtol=1e-12,
        factor=FIRST_STEP,
        maxfev=2000,
        full_output=True,
    )
    return np.asarray(found[0])


def _finite(residual: Function) -> Function:
    """Return the residual with large numbers in place of overflow: such a step is refused like any bad one."""

    def finite(values: FloatArray) -> FloatArray:
        found = residual(values)
        return found if np.isfinite(found).all() else np.full(found.size, OVERFLOW)

    return finite


def _derivatives(jacobian: Function, values: FloatArray) -> FloatArray:
    """Return the derivatives, of which the search needs every one."""
    found = jacobian(values)
    if not np.isfinite(found).all():
        raise FitError("the fit ran off to values without a response", "look at lengths, kinds and readings")
    return found


def inverse_of_normal(design: FloatArray) -> FloatArray:
    """Return (JᵀJ)⁻¹ by singular values, columns scaled first; unreachable directions get none of it."""
    if design.shape[1] == 0:
        return np.zeros((0, 0))
    # The singular values of R are those of the design, and R is small.
    triangle = np.linalg.qr(design, mode="r")
    scale = np.linalg.norm(triangle, axis=0)
    scale[scale == 0.0] = 1.0
    _, singular, right = np.linalg.svd(triangle / scale, full_matrices=False)
    keep = singular > singular[0] * 1e-13
    half = (right[keep].T / singular[keep]) / scale[:, None]
    return np.asarray(half @ half.T)
