"""What is fitted to what: the quantities of all standards, and the readings and evidence that fix them."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, as_pairs
from stdfit.circuits.standard import Parameter, reflection
from stdfit.fitting.observed import Observed


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
        values = self.expand(scaled)
        parts = []
        for index, (observed, weight) in enumerate(zip(self.observed, self.weights, strict=True)):
            inside = weight > 0.0
            gamma, _ = self.model(index, values, observed.frequency_hz[inside])
            parts.append(as_pairs((gamma - observed.gamma[inside]) * np.sqrt(weight[inside])))
        target, precision = self.evidence()
        told = precision > 0.0
        parts.append(((scaled - target) * np.sqrt(precision))[told])
        return np.concatenate(parts)

    def jacobian(self, scaled: FloatArray) -> FloatArray:
        """Return the derivatives of `residual`."""
        values = self.expand(scaled)
        parts = []
        for index, (observed, weight) in enumerate(zip(self.observed, self.weights, strict=True)):
            inside = weight > 0.0
            _, design = self.model(index, values, observed.frequency_hz[inside])
            parts.append(as_pairs(design * np.sqrt(weight[inside])[:, None]))
        _, precision = self.evidence()
        parts.append(np.diag(np.sqrt(precision))[precision > 0.0])
        return np.concatenate(parts)

    def changed(self, place: int, **fields: object) -> "Problem":
        """Return a copy in which one quantity has other fields."""
        quantities = list(self.quantities)
        quantities[place] = replace(quantities[place], **fields)  # type: ignore[arg-type]
        return replace(self, quantities=tuple(quantities))

    def names(self) -> Sequence[str]:
        """Name of each quantity as standard.parameter."""
        return [f"{quantity.standard}.{quantity.parameter.name}" for quantity in self.quantities]
