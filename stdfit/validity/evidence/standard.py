"""What there is to see of one standard: readings, model, bound and what makes it."""

from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_complex, frozen_float
from stdfit.circuits.standard import IDEAL
from stdfit.uncertainty.budget import radius
from stdfit.validity.evidence.element import Element, element_of
from stdfit.validity.evidence.kept import KeptReadings, kept_readings
from stdfit.validity.evidence.sharing import shared_out
from stdfit.validity.kit import Definition, Kit, misfit_at, model

POINTS = 201
"""Of the frequency grid, from the first reading to the last."""


@dataclass(frozen=True, slots=True, eq=False)
class StandardEvidence:
    """One standard over frequency.

    Attributes
    ----------
    name, kind : str
    within, limit_hz, fit_low_hz, fit_top_hz : float
        The tolerance, up to where it is kept, and the range of the fit.
    reason : str
        Why the limit is where it is.
    frequency_hz : array of shape (n,)
        From the first reading to the last.
    ideal : complex
        Γ of a standard of this kind that has no definition: 1, −1 or 0.
    gamma : complex array of shape (n,)
        Of the model.
    u95, misfit, bound : arrays of shape (n,)
        95 % radius of all sources, bound on the model's own error, and their sum.
    kinds : tuple of m str
    parts : array of shape (m, n)
        What each kind of source takes of the bound; they add up to it.
    element : Element
    readings : KeptReadings or None
        None where the kit keeps none.
    """

    name: str
    kind: str
    within: float
    limit_hz: float
    reason: str
    fit_low_hz: float
    fit_top_hz: float
    frequency_hz: FloatArray
    ideal: complex
    gamma: ComplexArray
    u95: FloatArray
    misfit: FloatArray
    bound: FloatArray
    kinds: tuple[str, ...]
    parts: FloatArray
    element: Element
    readings: KeptReadings | None

    def __post_init__(self) -> None:
        object.__setattr__(self, "gamma", frozen_complex(self.gamma))
        for name in ("frequency_hz", "u95", "misfit", "bound", "parts"):
            object.__setattr__(self, name, frozen_float(getattr(self, name)))


def standard_evidence(kit: Kit, definition: Definition) -> StandardEvidence:
    """Return what there is to see of one standard of a kit.

    Parameters
    ----------
    kit : Kit
    definition : Definition
        One of the kit's own.

    Raises
    ------
    RequestError
        The definition gives no finite reflection somewhere between its first reading and its last.
    """
    grid = np.linspace(definition.read_low_hz, definition.read_top_hz, POINTS)
    gamma, design = model(kit, definition, grid)
    u95 = radius(design, kit.shares)
    misfit = misfit_at(definition, grid)
    kinds, parts = shared_out(design, kit.shares, u95, misfit)
    return StandardEvidence(
        name=definition.name,
        kind=definition.kind,
        within=kit.within,
        limit_hz=definition.limit.limit_hz,
        reason=definition.limit.reason,
        fit_low_hz=definition.fit_low_hz,
        fit_top_hz=definition.fit_top_hz,
        frequency_hz=grid,
        ideal=IDEAL[definition.kind],
        gamma=gamma,
        u95=u95,
        misfit=misfit,
        bound=u95 + misfit,
        kinds=kinds,
        parts=parts,
        element=element_of(kit, definition, grid),
        readings=kept_readings(kit, definition),
    )
