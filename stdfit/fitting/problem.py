"""What is fitted to what: the quantities of all standards, the readings and evidence that fix them, and the misses."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.circuits.standard import Parameter, reflection
from stdfit.fitting.latest import Latest
from stdfit.fitting.observed import Observed
from stdfit.fitting.solve import Solution, least_squares, near_least

COARSE_POINTS = 100
"""About how many readings of each standard are fitted first."""

NEAR_TOLERANCE = 1e-6
TOLERANCE = 1e-8
"""Relative change of the sum of squares at which a search ends. A step near the end leaves some thousandths of what it
found, so the sum is then known to better than 1e-10, and the values to far below a thousandth of any uncertainty."""


@dataclass(frozen=True, slots=True)
class Quantity:
    """One parameter of one standard in the joint fit.

    Attributes
    ----------
    standard : str
        The standard that owns it; others may share it.
    parameter : Parameter
    role : {"free", "given", "assumed", "held", "unused"}
        "given" is evidence from the user, "assumed" weak evidence of the program's own, "held" is not
        fitted, "unused" stays at zero in the chosen order.
    value : float
        In the trade's unit.
    evidence_u : float or None
        Standard uncertainty of `value` where it is evidence.
    scale : float
        How many trade units make a change of the size that the fit works in.
    """

    standard: str
    parameter: Parameter
    role: str
    value: float
    evidence_u: float | None = None
    scale: float = 1.0

    @property
    def fitted(self) -> bool:
        """Whether the fit may move it."""
        return self.role in ("free", "given", "assumed")


@dataclass(frozen=True, slots=True, eq=False)
class Problem:
    """Readings of all standards, their weights, and the quantities that describe them.

    Attributes
    ----------
    observed : tuple of Observed
    quantities : tuple of Quantity
    columns : tuple of int arrays
        For each standard, the place in `quantities` of each parameter of its kind.
    weights : tuple of arrays
        For each standard, 1/variance per component of the mean reading; zero outside the fit range.
    reference_ohm : float
    """

    observed: tuple[Observed, ...]
    quantities: tuple[Quantity, ...]
    columns: tuple[tuple[int, ...], ...]
    weights: tuple[FloatArray, ...]
    reference_ohm: float

    @property
    def fitted(self) -> list[int]:
        """Places of the quantities that the fit may move."""
        return [i for i, quantity in enumerate(self.quantities) if quantity.fitted]

    @property
    def values(self) -> FloatArray:
        """All values, in trade units."""
        return np.array([quantity.value for quantity in self.quantities])

    @property
    def scales(self) -> FloatArray:
        """Scale of each fitted quantity."""
        return np.array([self.quantities[i].scale for i in self.fitted])

    def expand(self, scaled: FloatArray) -> FloatArray:
        """Return all values in trade units from the scaled fitted ones."""
        values = self.values
        values[self.fitted] = scaled * self.scales
        return values

    def model(
        self, index: int, values: FloatArray, frequency_hz: FloatArray | None = None
    ) -> tuple[ComplexArray, ComplexArray]:
        """Return Γ of a standard, shape (n,), and its derivatives by the scaled fitted quantities, shape (n, p)."""
        observed = self.observed[index]
        columns = list(self.columns[index])
        grid = observed.frequency_hz if frequency_hz is None else frequency_hz
        gamma, by_own = reflection(observed.kind, values[columns], grid, self.reference_ohm)
        place = {quantity: k for k, quantity in enumerate(self.fitted)}
        design = np.zeros((grid.size, len(place)), dtype=complex)
        for own, quantity in enumerate(columns):
            if quantity in place:
                design[:, place[quantity]] += by_own[:, own] * self.quantities[quantity].scale
        return gamma, design

    def evidence(self) -> tuple[FloatArray, FloatArray]:
        """Return scaled target and precision (1/u², zero for none) of each fitted quantity."""
        target = np.array([self.quantities[i].value / self.quantities[i].scale for i in self.fitted])
        precision = np.zeros(target.size)
        for k, i in enumerate(self.fitted):
            u = self.quantities[i].evidence_u
            if u is not None:
                precision[k] = (self.quantities[i].scale / u) ** 2
        return target, precision

    def residual(self, scaled: FloatArray) -> FloatArray:
        """Return weighted residuals of readings, then of evidence."""
        return Evaluation(self).residual(scaled)

    def jacobian(self, scaled: FloatArray) -> FloatArray:
        """Return the derivatives of `residual`."""
        return Evaluation(self).jacobian(scaled)

    def solved(self, start: FloatArray) -> Solution:
        """Return where the sum of squares is smallest, searched from the scaled values `start`.

        Of many readings a part is fitted first: it comes as near for a part of the time.
        """
        near = self._thinned().nearly_solved(start)
        both = Evaluation(self)
        start = near if np.isfinite(near).all() else start
        return least_squares(both.residual, both.jacobian, start, tolerance=TOLERANCE)

    def nearly_solved(self, start: FloatArray) -> FloatArray:
        """Return scaled values near the smallest sum of squares, searched from `start`."""
        both = Evaluation(self)
        return near_least(both.residual, both.jacobian, start, NEAR_TOLERANCE)

    def _thinned(self) -> "Problem":
        """Return the problem with every k-th reading of each standard, weighing as much as k."""
        weights = []
        for weight in self.weights:
            inside = np.flatnonzero(weight > 0.0)
            step = max(1, inside.size // COARSE_POINTS)
            kept = np.zeros(weight.size)
            kept[inside[::step]] = step * weight[inside[::step]]
            weights.append(weight if step == 1 else kept)
        return replace(self, weights=tuple(weights))

    def changed(self, place: int, **fields: object) -> "Problem":
        """Return a copy in which one quantity has other fields."""
        quantities = list(self.quantities)
        quantities[place] = replace(quantities[place], **fields)  # type: ignore[arg-type]
        return replace(self, quantities=tuple(quantities))

    def names(self) -> Sequence[str]:
        """Name of each quantity as standard.parameter."""
        return [f"{quantity.standard}.{quantity.parameter.name}" for quantity in self.quantities]


class Evaluation:
    """Weighted residuals of a problem with their derivatives.

    Rows stand in the order of the standards, readings inside the fit range alone, real and imaginary part in turn, then
    the evidence.

    Parameters
    ----------
    problem : Problem
    """

    def __init__(self, problem: Problem) -> None:
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
        self._both = Latest(self._computed)

    def residual(self, scaled: FloatArray) -> FloatArray:
        """Return the weighted residuals, shape (n,)."""
        return self._both(scaled)[0]

    def jacobian(self, scaled: FloatArray) -> FloatArray:
        """Return the derivatives of `residual`, shape (n, p)."""
        return self._both(scaled)[1].T

    def _computed(self, scaled: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return residuals, shape (n,), and derivatives, shape (p, n)."""
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
        return residual, jacobian
