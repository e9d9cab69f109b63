"""What there is to see of a kit as a kit: its three standards together, and what they do to devices."""

from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_complex, frozen_float
from stdfit.base.errors import RequestError
from stdfit.circuits.residual_map import PAIRS, separation
from stdfit.validity.device.bound import by_magnitude, common_top, device_map, three_of
from stdfit.validity.kit import Kit

MAGNITUDES = (0.0, 0.1, 0.3, 1.0)
"""|Γ| of the devices whose bound is shown."""

POINTS = 121
"""Of the frequency grid, over the band that the three standards have in common."""


@dataclass(frozen=True, slots=True, eq=False)
class KitEvidence:
    """Three standards of a kit over frequency.

    Attributes
    ----------
    names, kinds : tuple of three str
    within, limit_hz : float
        The tolerance, and up to where the kit keeps it.
    frequency_hz : array of shape (n,)
    standards : complex array of shape (n, 3)
        Γ of each.
    separation : array of shape (n, 3)
        |Γi − Γj| of the pairs, in the order of `PAIRS`.
    magnitudes : tuple of k float
    bounds : array of shape (n, k)
        95 % bound on devices of these |Γ| at the worst phase; infinite where two standards are the same.
    """

    names: tuple[str, str, str]
    kinds: tuple[str, str, str]
    within: float
    limit_hz: float
    frequency_hz: FloatArray
    standards: ComplexArray
    separation: FloatArray
    magnitudes: tuple[float, ...]
    bounds: FloatArray

    def __post_init__(self) -> None:
        object.__setattr__(self, "standards", frozen_complex(self.standards))
        for name in ("frequency_hz", "separation", "bounds"):
            object.__setattr__(self, name, frozen_float(getattr(self, name)))

    def pair(self, place: int) -> tuple[str, str]:
        """Return the names of a pair of standards."""
        one, two = PAIRS[place]
        return self.names[one], self.names[two]


def kit_evidence(kit: Kit) -> KitEvidence | None:
    """Return what there is to see of a kit as a whole.

    Parameters
    ----------
    kit : Kit

    Returns
    -------
    KitEvidence or None
        None where the kit has no open, short and load, nor just three standards, or where they have no band in common.
    """
    try:
        three = three_of(kit)
    except RequestError:
        return None
    low, top = max(one.read_low_hz for one in three), common_top(three)
    if not low < top:
        return None
    errors = device_map(kit, three, np.linspace(low, top, POINTS))
    worst, _ = by_magnitude(errors, MAGNITUDES)
    first, second, third = three
    return KitEvidence(
        names=(first.name, second.name, third.name),
        kinds=(first.kind, second.kind, third.kind),
        within=kit.within,
        limit_hz=kit.limit.limit_hz,
        frequency_hz=errors.frequency_hz,
        standards=errors.standards,
        separation=separation(errors.standards),
        magnitudes=MAGNITUDES,
        bounds=worst,
    )
