"""How far two values of one thing lie apart over frequency, in units of their bounds.

A ratio |x₁ − x₂|/√(U₁² + U₂²) up to 1 says that the difference is within the bounds: the normalised error Eₙ of
ISO 13528 (from memory), with the misfit in U.
"""

from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import FloatArray, frozen_float


@dataclass(frozen=True, slots=True, eq=False)
class Difference:
    """How far two values of one thing lie apart, over frequency; each array has the shape (n,).

    Attributes
    ----------
    what : str
    frequency_hz : array
    difference : array
        |x₁ − x₂|.
    bound : array
        √(U₁² + U₂²), 95 %, misfit included.
    ratio : array
        Difference over bound; infinite where the bound is zero and the difference is not. Of a device at any
        phase each of the three is the largest over the phases.
    """

    what: str
    frequency_hz: FloatArray
    difference: FloatArray
    bound: FloatArray
    ratio: FloatArray

    def __post_init__(self) -> None:
        for name in ("frequency_hz", "difference", "bound", "ratio"):
            object.__setattr__(self, name, frozen_float(getattr(self, name)))

    @property
    def largest(self) -> tuple[float, float]:
        """The largest difference and its frequency in Hz."""
        return _peak(self.difference, self.frequency_hz)

    @property
    def largest_ratio(self) -> tuple[float, float]:
        """The largest ratio and its frequency in Hz."""
        return _peak(self.ratio, self.frequency_hz)

    @property
    def bands(self) -> tuple[tuple[float, float], ...]:
        """The bands in which the difference is within the bounds, (from, to) in Hz."""
        return bands_within(self.frequency_hz, self.ratio)


def ratio_of(difference: FloatArray, bound: FloatArray) -> FloatArray:
    """Return difference over bound: 0 where there is no difference or no end to the bound, infinite for no bound.

    Examples
    --------
    >>> import numpy as np
    >>> ratio_of(np.array([0.0, 1.0, 1.0, 1.0]), np.array([0.0, 0.0, 2.0, np.inf])).tolist()
    [0.0, inf, 0.5, 0.0]
    """
    ratio = np.where(difference > 0.0, np.inf, 0.0)
    np.divide(difference, bound, out=ratio, where=(bound > 0.0) & np.isfinite(difference))
    return np.where(np.isinf(bound), 0.0, ratio)


def bands_within(frequency_hz: FloatArray, ratio: FloatArray) -> tuple[tuple[float, float], ...]:
    """Return the bands in which a ratio is at most 1; between points it is taken as a straight line.

    Examples
    --------
    >>> import numpy as np
    >>> bands_within(np.array([1.0, 2.0, 3.0, 4.0]), np.array([0.5, 1.5, 1.5, 0.0]))
    ((1.0, 1.5), (3.3333333333333335, 4.0))
    """
    inside = ratio <= 1.0
    ends = [float(frequency_hz[0])] if inside[0] else []
    for k in np.flatnonzero(inside[1:] != inside[:-1]):
        rise = ratio[k + 1] - ratio[k]
        part = (1.0 - ratio[k]) / rise if np.isfinite(rise) else float(inside[k + 1])
        ends.append(float(frequency_hz[k] + part * (frequency_hz[k + 1] - frequency_hz[k])))
    ends += [float(frequency_hz[-1])] if inside[-1] else []
    return tuple(zip(ends[::2], ends[1::2], strict=True))


def _peak(values: FloatArray, frequency_hz: FloatArray) -> tuple[float, float]:
    place = int(np.argmax(values))
    return float(values[place]), float(frequency_hz[place])
