"""Single readings and whole connections that do not belong with the others, found and named.

Low-cost analysers switch bands, and a point beside a band edge can be off in one sweep and right in the next (common
practice, no source). A resonance, however narrow, comes back in every connection of its standard: what all
connections show is never left out.
"""

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import numpy.typing as npt

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.fitting.observed import without_delay

NEIGHBOURS = 3
"""Points on each side from which a reading is foretold."""

SCALE_WINDOW = 50
"""Points in a block from which the usual error of that foretelling is taken."""

TIMES_USUAL = 12.0
"""A point stands out beyond this multiple of the usual error,"""

LONGEST_RUN = 2
"""More points than these in a row are no glitch."""

SMALLEST = 2e-3
"""and beyond this: smaller ones harm nothing."""


@dataclass(frozen=True, slots=True, eq=False)
class Screened:
    """Readings with outlying single points replaced by what their neighbours foretell.

    Attributes
    ----------
    readings : complex array of shape (k, n)
    replaced : bool array of shape (k, n)
    """

    readings: ComplexArray
    replaced: npt.NDArray[np.bool_]


def screen_points(frequency_hz: FloatArray, readings: ComplexArray) -> Screened:
    """Replace single points that stand out in one connection and not in the others.

    A point is foretold by the median of its neighbours, after the phase that grows with frequency is turned
    back. It is left out when it is off by more than `TIMES_USUAL` times what is usual about it, its deviation
    differs from the median deviation of the connections by more than half of itself, and it is off from both
    of its sides. Readings of one connection are returned as they are: a narrow resonance would look the same.

    Parameters
    ----------
    frequency_hz : array of shape (n,)
    readings : complex array of shape (k, n)
    """
    count, points = readings.shape
    replaced = np.zeros((count, points), dtype=bool)
    if count < 2 or points < 4 * NEIGHBOURS:
        return Screened(readings, replaced)
    mean = readings.mean(axis=0)
    straight = readings * (without_delay(frequency_hz, mean) / np.where(mean == 0.0, 1.0, mean))
    foretold = _median_of_neighbours(straight)
    off = straight - foretold
    size = np.abs(off)
    usual = np.array([_running_median(row) for row in size])
    typical = np.median(off.real, axis=0) + 1j * np.median(off.imag, axis=0)
    if count == 2:
        # Of two there is no majority: the calmer one tells what is usual.
        typical = np.where(size[0] < size[1], off[0], off[1])
    bar = np.maximum(TIMES_USUAL * usual, SMALLEST)
    replaced = (size > bar) & (np.abs(off - typical) > 0.5 * size)
    replaced &= _off_from_both_sides(straight, replaced, size)
    replaced &= ~_in_long_runs(replaced)
    mended = readings.copy()
    for k, row in enumerate(replaced):
        for i in np.flatnonzero(row):
            mended[k, i] = _bridge(frequency_hz, readings[k], row, int(i))
    return Screened(mended, replaced)


def _off_from_both_sides(
    straight: ComplexArray, marked: npt.NDArray[np.bool_], size: FloatArray
) -> npt.NDArray[np.bool_]:
    """Return which marked points are far from what stands to their left and to their right.

    Where a connection jumps and stays there, the points beside the jump are off from the median of their
    neighbours, and belong to one side all the same. Common structure is taken out first, as the median of the
    connections; of two that leaves half a glitch, so a quarter of its size is asked for.
    """
    apart = straight - np.median(straight.real, axis=0) - 1j * np.median(straight.imag, axis=0)
    stands = np.zeros_like(marked)
    for k, row in enumerate(marked):
        if not row.any():
            continue
        sound = np.flatnonzero(~row)
        for i in np.flatnonzero(row):
            sides = [sound[sound < i][-NEIGHBOURS:], sound[sound > i][:NEIGHBOURS]]
            levels = [
                np.median(apart[k, side].real) + 1j * np.median(apart[k, side].imag)
                for side in sides
                if side.size
            ]
            stands[k, i] = all(abs(apart[k, i] - level) > 0.25 * size[k, i] for level in levels)
    return stands


def _in_long_runs(marked: npt.NDArray[np.bool_]) -> npt.NDArray[np.bool_]:
    """Return which marked points stand in runs longer than `LONGEST_RUN`."""
    long = np.zeros_like(marked)
    width = marked.shape[1] - LONGEST_RUN
    starts = np.ones((marked.shape[0], width), dtype=bool)
    for step in range(LONGEST_RUN + 1):
        starts &= marked[:, step : step + width]
    for step in range(LONGEST_RUN + 1):
        long[:, step : step + width] |= starts
    return long


def _median_of_neighbours(values: ComplexArray) -> ComplexArray:
    """Return the median of the neighbours of each point, itself left out, real and imaginary part apart."""
    padded = np.pad(values, [(0, 0), (NEIGHBOURS, NEIGHBOURS)], mode="reflect")
    around = np.stack(
        [
            padded[:, NEIGHBOURS + shift : NEIGHBOURS + shift + values.shape[1]]
            for shift in range(-NEIGHBOURS, NEIGHBOURS + 1)
            if shift
        ]
    )
    return np.asarray(np.median(around.real, axis=0) + 1j * np.median(around.imag, axis=0))


def _running_median(size: FloatArray) -> FloatArray:
    """Return the median over blocks about each point."""
    blocks = max(1, size.size // SCALE_WINDOW)
    edges = np.linspace(0, size.size, blocks + 1).astype(int)
    middle = 0.5 * (edges[:-1] + edges[1:])
    medians = [float(np.median(size[low:high])) for low, high in pairwise(edges)]
    return np.interp(np.arange(size.size), middle, medians)


def _bridge(
    frequency_hz: FloatArray, reading: ComplexArray, replaced: npt.NDArray[np.bool_], place: int
) -> complex:
    """Return the reading that the nearest sound neighbours give by a straight line in magnitude and phase."""
    sound = np.flatnonzero(~replaced)
    left, right = sound[sound < place], sound[sound > place]
    if left.size == 0 or right.size == 0:
        return complex(reading[right[0] if left.size == 0 else left[-1]])
    a, b = int(left[-1]), int(right[0])
    part = (frequency_hz[place] - frequency_hz[a]) / (frequency_hz[b] - frequency_hz[a])
    turn = np.angle(reading[b] * np.conj(reading[a]))
    magnitude = abs(reading[a]) + part * (abs(reading[b]) - abs(reading[a]))
    return complex(magnitude * np.exp(1j * (np.angle(reading[a]) + part * turn)))
