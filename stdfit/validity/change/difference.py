"""How two characterisations of one standard differ, with the errors that they do not have in common."""

from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_complex, frozen_float
from stdfit.base.errors import RequestError
from stdfit.uncertainty.smooth import bumps, correlation_lengths
from stdfit.validity.device.pairing import Pair
from stdfit.validity.kit import Kit

FEWEST = 8
"""Common frequencies below which nothing is compared."""

OF_ANALYSER = "analyser residuals"
"""How the names of sources begin that are what the correction of the analyser left."""


@dataclass(frozen=True, slots=True, eq=False)
class Effect:
    """One error of the difference, as independent random numbers of unit variance times known functions.

    Attributes
    ----------
    name : str
    freedom : float
    vectors : tuple over correlation lengths of complex arrays of shape (n, q)
        One entry where it has no correlation length.
    """

    name: str
    freedom: float
    vectors: tuple[ComplexArray, ...]


@dataclass(frozen=True, slots=True, eq=False)
class Change:
    """New minus old.

    Attributes
    ----------
    pair : Pair
    by : str
        "readings" or "definitions".
    reference_ohm : float
    frequency_hz : array of shape (n,)
    gamma : complex array of shape (n,)
        Half way between old and new.
    difference : complex array of shape (n,)
    noise_sd : float
        White noise of the difference, per component.
    effects : tuple of Effect
        All other errors that are not common to both.
    common : tuple of Effect
        What the two would also be wrong by, were the errors that they share not the same.
    mixing : array of shape (n,)
        Standard deviation per component of what a shown change is wrong by, in parts of it.
    """

    pair: Pair
    by: str
    reference_ohm: float
    frequency_hz: FloatArray
    gamma: ComplexArray
    difference: ComplexArray
    noise_sd: float
    effects: tuple[Effect, ...]
    common: tuple[Effect, ...]
    mixing: FloatArray

    def __post_init__(self) -> None:
        for name in ("frequency_hz", "mixing"):
            object.__setattr__(self, name, frozen_float(getattr(self, name)))
        for name in ("gamma", "difference"):
            object.__setattr__(self, name, frozen_complex(getattr(self, name)))


def same_correction(old: Kit, new: Kit, same_calibration: bool = False) -> str:
    """Say what correction both sets of readings share; empty where they share none."""
    if any(corrected_by_itself(kit) for kit in (old, new)):
        told = bool(old.calibration) and old.calibration == new.calibration
        both = corrected_by_itself(old) and corrected_by_itself(new)
        return "calibration of the analyser" if both and (told or same_calibration) else ""
    parents = [frozenset(one.sha256 for one in kit.ancestors if not one.of) for kit in (old, new)]
    return "reference kit" if parents[0] and parents[0] == parents[1] else ""


def corrected_by_itself(kit: Kit) -> bool:
    """Tell whether the analyser corrected the readings of a kit."""
    return any(share.name.startswith(OF_ANALYSER) for share in kit.shares)


def smooth_effect(
    name: str, profile: FloatArray | ComplexArray, frequency_hz: FloatArray, freedom: float = np.inf
) -> Effect:
    """Return a smooth random function of unknown correlation length times a profile."""
    low, top = float(frequency_hz[0]), float(frequency_hz[-1])
    vectors = []
    for length in correlation_lengths(top - low):
        acting = profile[:, None] * bumps(frequency_hz, low, top, float(length))
        vectors.append(np.concatenate([acting, 1j * acting], axis=1))
    return Effect(name, freedom, tuple(vectors))


def enough(frequency_hz: FloatArray, pair: Pair) -> None:
    """Refuse a pair with too few common frequencies.

    Raises
    ------
    RequestError
    """
    if frequency_hz.size < FEWEST:
        raise RequestError(
            f"'{pair.label}' has fewer than {FEWEST} frequencies that both kits know",
            "compare kits that were read over the same frequencies",
        )
