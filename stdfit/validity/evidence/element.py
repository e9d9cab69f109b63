"""The element at the end of a standard's offset line, over frequency, with its 95 % band."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import FloatArray, frozen_float
from stdfit.circuits.load import load
from stdfit.circuits.standard import PARAMETERS
from stdfit.uncertainty.budget import Share, expanded
from stdfit.validity.kit import Definition, Kit, total_covariance

QUANTITIES = {
    "open": (("C", "fF", 1e15),),
    "short": (("L", "pH", 1e12),),
    "load": (("Re Z", "Ω", 1.0), ("Im Z", "Ω", 1.0)),
}
"""Of each kind: symbol, unit and how many units make one in SI."""

TRADED = 0.5
"""The band is said to come from the trade-off with the delay where it would be less than this part without it."""


@dataclass(frozen=True, slots=True, eq=False)
class Element:
    """The element of a definition over frequency.

    Attributes
    ----------
    symbols, units : tuple of r str
        C in fF, L in pH, or Re Z and Im Z in Ω.
    values, u95 : arrays of shape (r, n)
        Value and its 95 % uncertainty; zero where a kit states no sources.
    u95_of_rest : array of shape (r, n) or None
        The uncertainty that would be left if the delay were known exactly; None where the delay is not uncertain.
    """

    symbols: tuple[str, ...]
    units: tuple[str, ...]
    values: FloatArray
    u95: FloatArray
    u95_of_rest: FloatArray | None

    def __post_init__(self) -> None:
        for name in ("values", "u95"):
            object.__setattr__(self, name, frozen_float(getattr(self, name)))
        if self.u95_of_rest is not None:
            object.__setattr__(self, "u95_of_rest", frozen_float(self.u95_of_rest))

    @property
    def traded(self) -> bool:
        """Whether most of the band comes from the trade-off with the delay."""
        return self.u95_of_rest is not None and bool(
            self.u95_of_rest[-1].mean() < TRADED * self.u95[-1].mean()
        )


def element_of(kit: Kit, definition: Definition, frequency_hz: FloatArray) -> Element:
    """Return the element of a definition and its band.

    C(f) = Σ C_k·f^k of an open, L(f) = Σ L_k·f^k of a short, Z = (R + jωL)/(1 + jωC·(R + jωL)) of a load. The band is
    the 95 % uncertainty of the linear form through the joint covariance. With the delay τ known, the part that goes
    with it drops out: d − τ·(dᵀVe_τ)/(e_τᵀVe_τ) is left, V the joint covariance.

    Parameters
    ----------
    kit : Kit
    definition : Definition
    frequency_hz : array of shape (n,)
    """
    quantities = QUANTITIES[definition.kind]
    values, own = _with_derivatives(definition, frequency_hz)
    scale = np.array([size for _, _, size in quantities])
    values, own = values * scale[:, None], own * scale[:, None, None]
    place = {name: k for k, name in enumerate(kit.order)}
    direction = np.zeros((*values.shape, len(kit.order)))
    for k, parameter in enumerate(definition.parameters):
        if parameter.of in place:
            direction[..., place[parameter.of]] += own[..., k]
    delay = place.get(definition.parameters[0].of)
    return Element(
        symbols=tuple(symbol for symbol, _, _ in quantities),
        units=tuple(unit for _, unit, _ in quantities),
        values=values,
        u95=_u95(direction, kit.shares),
        u95_of_rest=None if delay is None else _u95(_without(direction, delay, kit.shares), kit.shares),
    )


def _with_derivatives(definition: Definition, frequency_hz: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return the element in SI units, shape (r, n), and its derivatives by the parameters in trade units."""
    known = PARAMETERS[definition.kind]
    units = np.array([one.si for one in known])
    si = definition.values * units
    own = np.zeros((len(QUANTITIES[definition.kind]), frequency_hz.size, len(known)))
    if definition.kind != "load":
        powers = frequency_hz[:, None] ** np.array([one.power for one in known[3:]])
        own[0, :, 3:] = powers
        return (powers @ si[3:])[None], own * units
    reference = max(float(si[3]), 1.0)
    gamma, by_part = load(frequency_hz, float(si[3]), float(si[4]), float(si[5]), reference)
    z = reference * (1.0 + gamma) / (1.0 - gamma)
    by_part = by_part * ((z + reference) ** 2 / (2.0 * reference))[:, None]
    own[0, :, 3:], own[1, :, 3:] = by_part.real, by_part.imag
    return np.stack([z.real, z.imag]), own * units


def _u95(direction: FloatArray, shares: Sequence[Share]) -> FloatArray:
    """Return the 95 % uncertainty of linear forms of shape (r, n, p), shape (r, n)."""
    if not shares:
        return np.zeros(direction.shape[:-1])
    return expanded(direction.reshape(-1, direction.shape[-1]), shares)[1].reshape(direction.shape[:-1])


def _without(direction: FloatArray, place: int, shares: Sequence[Share]) -> FloatArray:
    """Return linear forms without the part that goes with one quantity."""
    covariance = total_covariance(shares)
    variance = float(covariance[place, place])
    rest = direction.copy()
    if variance > 0.0:
        rest[..., place] -= direction @ covariance[:, place] / variance
    return rest
