"""The highest frequency up to which a bound keeps within a tolerance."""

from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import FloatArray


@dataclass(frozen=True, slots=True)
class Limit:
    """A frequency-validity limit.

    Attributes
    ----------
    within : float
        The tolerance on the error of Γ.
    limit_hz : float
        0 where the bound fails from the first reading on.
    reason : str
        Why it ends there.
    """

    within: float
    limit_hz: float
    reason: str


def first_gap(frequency_hz: FloatArray, bound: FloatArray, within: float) -> tuple[float, int | None]:
    """Return the highest frequency with bound ≤ within and no gap below it, and the place of the first failure.

    Between points the bound is taken as a straight line.

    Parameters
    ----------
    frequency_hz, bound : array of shape (n,)
    within : float

    Returns
    -------
    limit_hz : float
        0 where the first point fails, the last frequency where none does.
    place : int or None
        First failing point.
    """
    failing = np.flatnonzero(~(bound <= within))
    if failing.size == 0:
        return float(frequency_hz[-1]), None
    k = int(failing[0])
    if k == 0:
        return 0.0, 0
    rise = bound[k] - bound[k - 1]
    part = (within - bound[k - 1]) / rise if np.isfinite(rise) and rise > 0.0 else 0.0
    return float(frequency_hz[k - 1] + part * (frequency_hz[k] - frequency_hz[k - 1])), k
