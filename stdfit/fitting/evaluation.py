"""Residuals and derivatives of a problem in one pass, as a solver asks for them many times."""

from typing import TYPE_CHECKING

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.circuits.standard import reflection

if TYPE_CHECKING:
    from stdfit.fitting.problem import Problem


class Evaluation:
    """Weighted residuals of a problem with their derivatives.

    A solver asks for the residuals of a point and then, mostly, for the derivatives there; the model gives
    both at once, so the last point is kept.

    Rows stand in the order of the standards, readings inside the fit range alone, real and imaginary part in turn, then
    the evidence.

    Parameters
    ----------
    problem : Problem
    """

    def __init__(self, problem: "Problem") -> None:
        self._problem = problem
        place = {quantity: k for k, quantity in enumerate(problem.fitted)}
        self._parts = []
        first = 0
        for observed, columns, weight in zip(problem.observed, problem.columns, problem.weights, strict=True):
            inside = weight > 0.0
            root = np.sqrt(weight[inside])
            own = [k for k, quantity in enumerate(columns) if quantity in place]
            rows = slice(first, first + 2 * root.size)
            first = rows.stop
            self._parts.append(
                (
                    observed.kind,
                    list(columns),
                    observed.frequency_hz[inside],
                    observed.gamma[inside],
                    root,
                    [(k, place[columns[k]], problem.quantities[columns[k]].scale * root) for k in own],
                    rows,
                )
            )
        target, precision = problem.evidence()
        told = precision > 0.0
        self._target, self._told, self._root = target, told, np.sqrt(precision[told])
        self._evidence = np.zeros((target.size, self._root.size))
        self._evidence[told] = np.diag(self._root)
        self._size = first + self._root.size
        self._at: FloatArray | None = None
        self._found: tuple[FloatArray, FloatArray] = (np.zeros(0), np.zeros((0, 0)))

    def residual(self, scaled: FloatArray) -> FloatArray:
        """Return the weighted residuals, shape (n,)."""
        return self._both(scaled)[0]

    def jacobian(self, scaled: FloatArray) -> FloatArray:
        """Return the derivatives of `residual`, shape (n, p)."""
        return self._both(scaled)[1].T

    def _both(self, scaled: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return residuals, shape (n,), and derivatives, shape (p, n)."""
        if self._at is not None and np.array_equal(scaled, self._at):
            return self._found
        values = self._problem.expand(scaled)
        residual, jacobian = np.empty(self._size), np.zeros((scaled.size, self._size))
        for kind, columns, frequency_hz, target, root, moved, rows in self._parts:
            gamma, by_own = reflection(kind, values[columns], frequency_hz, self._problem.reference_ohm)
            residual[rows] = ((gamma - target) * root).view(float)
            for own, place, factor in moved:
                jacobian[place, rows] = (by_own[:, own] * factor).view(float)
        evidence = slice(self._size - self._root.size, None)
        residual[evidence] = (scaled - self._target)[self._told] * self._root
        jacobian[:, evidence] = self._evidence
        self._at, self._found = scaled.copy(), (residual, jacobian)
        return self._found
