"""Raw readings through unknown error terms: these are eliminated at each frequency, the rest is fitted at once.

At each frequency the raw readings m of all standards share three unknown error terms, m = a + b·Γ + c·Γ·m. For any
set of parameters the best a, b and c follow by linear least squares, so that they never enter the fit as unknowns:
variable projection, G. H. Golub and V. Pereyra, SIAM J. Numer. Anal. 10, 1973, 413–432.
"""

from dataclasses import dataclass, field, replace

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, as_pairs, frozen_complex
from stdfit.circuits.error_box import corrected
from stdfit.fitting.latest import Latest
from stdfit.fitting.observed import Observed
from stdfit.fitting.problem import Problem

COINCIDE = 1e-10
"""Smallest singular part, against the largest, that is more than rounding."""


@dataclass(frozen=True, slots=True, eq=False)
class RawProblem:
    """A problem whose readings lie behind unknown error terms.

    Attributes
    ----------
    problem : Problem
        Its standards share one grid of frequencies; of its observed readings only the frequencies are used.
    raw : complex array of shape (n, s)
        Mean raw readings of the s standards.
    """

    problem: Problem
    raw: ComplexArray
    model: Latest[tuple[ComplexArray, ComplexArray]] = field(init=False, repr=False)
    """Takes scaled values, returns Γ of all standards, shape (n, s), and its derivatives, shape (n, s, p)."""

    def __post_init__(self) -> None:
        object.__setattr__(self, "raw", frozen_complex(self.raw))
        object.__setattr__(self, "model", Latest(self._model))

    @property
    def weights(self) -> FloatArray:
        """1/variance per component in the plane of Γ, shape (n, s)."""
        return np.stack(self.problem.weights, axis=1)

    @property
    def everywhere(self) -> FloatArray:
        """The same, beyond the fit range as large as the largest within it: all above zero."""
        weights = self.weights
        return np.where(weights > 0.0, weights, weights.max(axis=0))

    def thinned(self, step: int) -> "RawProblem":
        """Return the problem on every so many-th reading, each with the weight of those it stands for."""
        part = slice(None, None, step)
        observed = tuple(
            Observed(one.name, one.kind, one.frequency_hz[part], one.gamma[part], one.deviations[:, part])
            for one in self.problem.observed
        )
        weights = tuple(own[part] * step for own in self.problem.weights)
        return RawProblem(replace(self.problem, observed=observed, weights=weights), self.raw[part])

    def _model(self, scaled: FloatArray) -> tuple[ComplexArray, ComplexArray]:
        values = self.problem.expand(scaled)
        each = [self.problem.model(k, values) for k in range(len(self.problem.observed))]
        return np.stack([gamma for gamma, _ in each], axis=1), np.stack([own for _, own in each], axis=1)

    def residual(self, scaled: FloatArray) -> FloatArray:
        """Return weighted residuals of the corrected readings, then of evidence."""
        gamma, _ = self.model(scaled)
        weights = self.weights
        shown = corrected(fitted_box(gamma, self.raw, self.everywhere)[:, None], self.raw)
        inside = weights.sum(axis=1) > 0.0
        off = ((gamma - shown) * np.sqrt(weights))[inside]
        target, precision = self.problem.evidence()
        told = precision > 0.0
        return np.concatenate([as_pairs(off.ravel()), ((scaled - target) * np.sqrt(precision))[told]])

    def jacobian(self, scaled: FloatArray) -> FloatArray:
        """Return the derivatives of `residual`, in which the error terms follow the parameters.

        The change of the eliminated terms with the residual itself is left out (L. Kaufman, BIT 15, 1975, 49–57).
        """
        gamma, design = self.model(scaled)
        weights = self.weights
        inside = weights.sum(axis=1) > 0.0
        root = np.sqrt(weights[inside])[..., None]
        basis, _ = np.linalg.qr(root * box_directions(gamma[inside]))
        rows = root * design[inside]
        rows = rows - basis @ (np.swapaxes(basis.conj(), 1, 2) @ rows)
        _, precision = self.problem.evidence()
        pairs = as_pairs(rows.reshape(-1, rows.shape[-1]))
        return np.concatenate([pairs, np.diag(np.sqrt(precision))[precision > 0.0]])


def box_directions(gamma: ComplexArray) -> ComplexArray:
    """Return how corrected readings change with the three error terms, to first order: 1, Γ, Γ².

    Parameters
    ----------
    gamma : complex array of shape (n, s)

    Returns
    -------
    complex array of shape (n, s, 3)
    """
    return np.asarray(gamma[..., None] ** np.arange(3))


def apart(gamma: ComplexArray) -> FloatArray:
    """Return how well standards are told from each other, shape (n,): the smallest singular value of (1, Γ, Γ²).

    It is 1 for +1, −1 and 0, and 0 where only two different reflections are left.

    Parameters
    ----------
    gamma : complex array of shape (n, s)
        Reflections of s ≥ 3 standards.
    """
    ideal = np.array([[1.0, -1.0, 0.0]], dtype=complex)
    smallest, of_ideal = (
        np.linalg.svd(box_directions(one), compute_uv=False)[:, -1] for one in (gamma, ideal)
    )
    return np.asarray(smallest / of_ideal)


def fitted_box(gamma: ComplexArray, raw: ComplexArray, weights: FloatArray) -> ComplexArray:
    """Return the error terms that fit known reflections and their raw readings best in the plane of Γ.

    The equation m = a + b·Γ + c·Γ·m is in the plane of the readings; a second pass divides by |b + c·m|, which
    turns its errors into those of Γ.

    Parameters
    ----------
    gamma, raw : complex arrays of shape (n, s)
    weights : array of shape (n, s)
        1/variance in the plane of Γ, above zero.

    Returns
    -------
    complex array of shape (n, 3)
    """
    rows = np.stack([np.ones_like(raw), gamma, gamma * raw], axis=-1)
    root = np.sqrt(weights)
    for _ in range(2):
        box = _least_squares(rows * root[..., None], raw * root)
        steepness = np.abs(box[:, None, 1] + box[:, None, 2] * raw)
        root = np.sqrt(weights) / np.maximum(steepness, 1e-12)
    return np.asarray(box)


def _least_squares(rows: ComplexArray, target: ComplexArray) -> ComplexArray:
    """Return the solution of each of n small systems; the shortest one where standards coincide."""
    basis, triangle = np.linalg.qr(rows)
    diagonal = np.abs(np.diagonal(triangle, axis1=1, axis2=2))
    if (diagonal.min(axis=1) <= COINCIDE * diagonal.max(axis=1)).any():
        return np.asarray((np.linalg.pinv(rows, rcond=COINCIDE) @ target[..., None])[..., 0])
    projected = np.swapaxes(basis.conj(), 1, 2) @ target[..., None]
    return np.asarray(np.linalg.solve(triangle, projected)[..., 0])


def coupled(gamma: ComplexArray, weights: FloatArray) -> tuple[ComplexArray, ComplexArray]:
    """Return how the elimination couples the standards at each frequency.

    Parameters
    ----------
    gamma : complex array of shape (n, s)
    weights : array of shape (n, s)
        1/variance in the plane of Γ, above zero.

    Returns
    -------
    rest : complex array of shape (n, s, s)
        B = 1 − V·(Vᴴ·W·V)⁻¹·Vᴴ·W, V from `box_directions`: what is left of errors of the readings once the error
        terms have followed them.
    weight : complex array of shape (n, s, s)
        W·B, the Hermitian weight of the readings in the normal equations.
    """
    root = np.sqrt(weights)
    # With √W·V = Q·R, B = 1 − W^(−1/2)·Q·Qᴴ·W^(1/2), whatever the rank of V.
    basis, _ = np.linalg.qr(root[..., None] * box_directions(gamma))
    hat = basis @ np.swapaxes(basis.conj(), 1, 2)
    rest = np.eye(gamma.shape[1]) - hat * root[:, None, :] / root[:, :, None]
    return np.asarray(rest), np.asarray(weights[:, :, None] * rest)
