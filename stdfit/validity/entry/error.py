"""What typing costs: the distance between two definitions over frequency."""

import numpy as np
import numpy.typing as npt

from stdfit.base.arrays import FloatArray
from stdfit.circuits.standard import reflection

POINTS = 2001
"""Points at which the distance is looked at first."""

PER_TURN = 64
"""Points for each turn of the phase, for very long lines."""

MOST_POINTS = 20_001

CLOSER = 33
"""Points within each highest stretch, looked at again."""

CLOSER_TIMES = 2

STRETCHES = 4
"""How many of the highest stretches are looked at again."""

ROUNDING = 1e-15
"""What the computation of a Γ may be wrong by."""

MARGIN = 1e-6
"""Part by which a maximum between points may exceed the largest one found."""


def distance(
    kind: str, values: FloatArray, other: FloatArray, frequency_hz: FloatArray, reference_ohm: float
) -> FloatArray:
    """Return |Γ − Γ'| of two definitions in trade units, shape (n,); infinite where one of them is not finite."""
    pair, _ = reflection(kind, np.stack([values, other]), frequency_hz, reference_ohm)
    found = np.abs(pair[0] - pair[1])
    return np.where(np.isfinite(found), found, np.inf)


def largest_distance(
    kind: str, values: FloatArray, other: FloatArray, low_hz: float, top_hz: float, reference_ohm: float
) -> tuple[float, float]:
    """Return the largest |Γ − Γ'| between two frequencies, and where it is.

    A dense grid first, then the surroundings of its highest points, so that no finer grid finds more.
    """
    turns = 2e-12 * top_hz * float(max(abs(values[0]), abs(other[0])))
    points = int(np.clip(PER_TURN * turns, POINTS, MOST_POINTS)) if np.isfinite(turns) else POINTS
    # Evenly spaced, and by ratio for what grows as √f near the low end.
    grid = np.unique(
        np.concatenate([np.linspace(low_hz, top_hz, points), np.geomspace(low_hz, top_hz, points // 4)])
    ).clip(low_hz, top_hz)
    found = distance(kind, values, other, grid, reference_ohm)
    for _ in range(CLOSER_TIMES):
        around = _highest_peaks(found)
        left, right = grid[np.maximum(around - 1, 0)], grid[np.minimum(around + 1, grid.size - 1)]
        grid = np.unique(np.linspace(left, right, CLOSER))
        found = distance(kind, values, other, grid, reference_ohm)
    best = int(np.argmax(found))
    return float(found[best]), float(grid[best])


def stated(largest: float) -> float:
    """Return a largest distance as it is stated: rounded up to two digits, and never below what another grid finds."""
    return rounded_up(largest * (1.0 + MARGIN) + ROUNDING) if largest > 0.0 else 0.0


def _highest_peaks(found: FloatArray) -> npt.NDArray[np.intp]:
    """Return the places of the highest local maxima."""
    padded = np.concatenate([[-1.0], found, [-1.0]])
    peaks = np.flatnonzero((padded[1:-1] >= padded[:-2]) & (padded[1:-1] >= padded[2:]))
    return np.asarray(peaks[np.argsort(-found[peaks], kind="stable")[:STRETCHES]])


def rounded_up(value: float, digits: int = 2) -> float:
    """Return the next number with so many significant digits that is not below a value.

    Examples
    --------
    >>> rounded_up(0.00121), rounded_up(0.0012), rounded_up(0.0), rounded_up(0.0995)
    (0.0013, 0.0012, 0.0, 0.1)
    """
    if value <= 0.0:
        return 0.0
    exponent = int(np.floor(np.log10(value))) - digits + 1
    whole = int(np.ceil(value / 10.0**exponent * (1.0 - 1e-12)))
    return float(f"{whole}e{exponent}")
