"""What has moved: the smallest set of physical causes that explains a change, with figures."""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import combinations

import numpy as np

from stdfit.base.arrays import FloatArray, as_pairs
from stdfit.uncertainty.budget import Share, expanded
from stdfit.validity.change.difference import smooth_effect
from stdfit.validity.change.statistic import Projected, Tested, share_of, totals

LIGHT_UM_PER_PS = 299.792458
"""Vacuum: a pin is moved through air."""

LEFT = 0.01
"""Causes explain a change when what they leave would come about by chance more often than this."""

APART = 0.05
"""Two causes are told apart when the likelihood of one is lower than this level allows by chance."""


@dataclass(frozen=True, slots=True)
class Kind:
    """A physical cause.

    Attributes
    ----------
    name : str
    parts : tuple of three floats
        What a unit of it is in contact resistance (Ω), plane shift (ps) and contact reactance (ps).
    unit : str
    per_unit : str
        "" or "Zr" or "1/Zr": by what the unit is multiplied to give the unit that is told.
    """

    name: str
    parts: tuple[float, float, float]
    unit: str
    per_unit: str = ""


CONTACT = Kind("contact resistance", (1.0, 0.0, 0.0), "Ω")
LOAD_RESISTANCE = Kind("resistance of the load or of its contact", (1.0, 0.0, 0.0), "Ω")
SHIFT = Kind("plane shift", (0.0, 1.0, 0.0), "ps")
# A series inductance L is t = l/2 and x = l with l = L/Zr; a shunt capacitance t = c/2 and x = −c with c = C·Zr.
CAPACITANCE = Kind("capacitance at the connector", (0.0, 0.5, -1.0), "fF", "1/Zr")
INDUCTANCE = Kind("inductance at the connector", (0.0, 0.5, 1.0), "pH", "Zr")
REACTANCE = Kind("reactance L − C·Zr² at the connector", (0.0, 0.0, 1.0), "pH", "Zr")

CAUSES = {
    "open": (CONTACT, SHIFT, CAPACITANCE),
    "short": (CONTACT, SHIFT, INDUCTANCE),
    "load": (LOAD_RESISTANCE, SHIFT, REACTANCE),
}
"""What can move in a standard of each kind. Contact and load resistance of a load do the same to its reflection."""


@dataclass(frozen=True, slots=True)
class Cause:
    """A physical cause with its size.

    Attributes
    ----------
    name, unit : str
    value, u95 : float
        Change, new minus old, and its 95 % uncertainty.
    """

    name: str
    unit: str
    value: float
    u95: float

    @property
    def length_um(self) -> tuple[float, float] | None:
        """A plane shift as a length in vacuum, with its 95 % uncertainty."""
        if self.unit != "ps":
            return None
        return LIGHT_UM_PER_PS * self.value, LIGHT_UM_PER_PS * self.u95


@dataclass(frozen=True, slots=True)
class Explained:
    """What explains a change.

    Attributes
    ----------
    causes : tuple of Cause
        Together they explain it.
    instead : tuple of tuple of Cause
        Each of these explains it as well, within chance.
    """

    causes: tuple[Cause, ...]
    instead: tuple[tuple[Cause, ...], ...]


def explain(projected: Projected, tested: Tested) -> Explained:
    """Return the smallest set of causes that explains a change, and sets of the same size that do as well.

    For each set V the change is fitted by generalised least squares; what is left, βᵀC⁻¹β − βᵀC⁻¹V(VᵀC⁻¹V)⁻¹VᵀC⁻¹β, is
    compared with chi-squared, widened by what few degrees of freedom cost. C is the mean over the correlation lengths,
    and holds what the correction of the analyser makes of a change itself.
    """
    from scipy.special import chdtri

    shares = [*projected.shares, mixing_share(projected)]
    weight = np.linalg.pinv(totals(shares).mean(axis=0), rcond=1e-12, hermitian=True)
    kinds = CAUSES[projected.change.pair.one.kind]
    total = float(projected.found @ weight @ projected.found)
    near = tested.inflation * float(chdtri(1, APART))
    for size in (1, 2, len(kinds)):
        sets = [(total - _taken(projected, chosen, weight), chosen) for chosen in combinations(kinds, size)]
        sets.sort(key=lambda one: one[0])
        freedom = max(tested.rank - size, 0)
        allowed = tested.inflation * float(chdtri(freedom, LEFT)) if freedom else np.inf
        if sets[0][0] <= allowed or size == len(kinds):
            others = [chosen for left, chosen in sets[1:] if left <= min(allowed, sets[0][0] + near)]
            return Explained(
                sizes(projected, sets[0][1], weight, shares),
                tuple(sizes(projected, chosen, weight, shares) for chosen in others),
            )
    raise AssertionError("all causes together always explain a change")


def mixing_share(projected: Projected) -> Share:
    """Return what the imperfect correction makes of a change, as one of its errors."""
    change = projected.change
    profile = change.mixing * np.abs(projected.explained)
    return share_of(projected.projector, smooth_effect("mixing", profile, change.frequency_hz))


def sizes(
    projected: Projected, kinds: Sequence[Kind], weight: FloatArray, shares: Sequence[Share]
) -> tuple[Cause, ...]:
    """Return causes with their sizes, as generalised least squares gives them.

    Parameters
    ----------
    projected : Projected
    kinds : sequence of Kind
    weight : array of shape (k, k)
        C⁻¹.
    shares : sequence of Share
        Errors of the projected change; the largest uncertainty over their lengths counts.
    """
    images = images_of(projected, kinds)
    direction = np.linalg.pinv(images.T @ weight @ images, rcond=1e-12, hermitian=True) @ images.T @ weight
    value = direction @ projected.found
    _, u95 = expanded(direction, shares)
    zr = projected.change.reference_ohm
    factors = {"": 1.0, "Zr": zr, "1/Zr": 1e3 / zr}
    return tuple(
        Cause(kind.name, kind.unit, float(own * factors[kind.per_unit]), float(wide * factors[kind.per_unit]))
        for kind, own, wide in zip(kinds, value, u95, strict=True)
    )


def images_of(projected: Projected, kinds: Sequence[Kind]) -> FloatArray:
    """Return what a unit of each cause does to the projected difference, shape (k, causes)."""
    units = np.array([kind.parts for kind in kinds]).T
    return np.asarray(projected.projector @ as_pairs(projected.basis @ units))


def visible(projected: Projected) -> tuple[Cause, ...]:
    """Return each cause alone, with the size that the readings would give it: its uncertainty is what could be seen."""
    weight = np.linalg.pinv(projected.covariances.mean(axis=0), rcond=1e-12, hermitian=True)
    return tuple(
        sizes(projected, (kind,), weight, projected.shares)[0]
        for kind in CAUSES[projected.change.pair.one.kind]
    )


def visible_shift(projected: Projected) -> Cause:
    """Return the plane shift alone, with the size that the readings would give it."""
    return next(cause for cause in visible(projected) if cause.unit == SHIFT.unit)


def _taken(projected: Projected, kinds: Sequence[Kind], weight: FloatArray) -> float:
    """Return how much of βᵀC⁻¹β some causes take."""
    images = images_of(projected, kinds)
    pull = images.T @ weight @ projected.found
    return float(pull @ np.linalg.pinv(images.T @ weight @ images, rcond=1e-12, hermitian=True) @ pull)
