"""Is a sweep sound: finite, rising, long enough, and of a magnitude that a passive part can have?"""

from collections.abc import Callable

import numpy as np

from stdfit.base.errors import ReadingError
from stdfit.base.records import Sweep

FEWEST_POINTS = 8
HIGHEST_MAGNITUDE = 1.5
# A highest frequency outside these says that the unit was misread.
LOWEST_TOP_HZ = 1e3
HIGHEST_TOP_HZ = 2e12

LineOf = Callable[[int], int | None]


def check_sweep(
    sweep: Sweep, *, line_of: LineOf = lambda row: None, highest_magnitude: float = HIGHEST_MAGNITUDE
) -> None:
    """Refuse a sweep that cannot be a reading of a standard.

    Parameters
    ----------
    sweep : Sweep
        What was read; its name goes into the messages.
    line_of : callable
        The line of the file that holds a row (counted from 0), or None when not known.
    highest_magnitude : float
        Largest magnitude of Γ that is let through.

    Raises
    ------
    ReadingError
        Fewer than 8 points; values that are not finite; frequencies that are negative, repeated, falling or
        in a wrong unit; a magnitude far above 1; nothing but zeros.
    """
    frequency, gamma = sweep.frequency_hz, sweep.gamma

    def refuse(what: str, mend: str, row: int | None = None) -> ReadingError:
        return ReadingError(what, mend, file=sweep.name, line=None if row is None else line_of(row))

    finite = np.isfinite(frequency) & np.isfinite(gamma)
    if not finite.all():
        raise refuse("a value is not a finite number", "take the reading again", int(np.argmin(finite)))
    if frequency.size and frequency[0] < 0:
        raise refuse(f"the frequency {frequency[0]:g} Hz is negative", "mend the frequency column", 0)
    rising = np.diff(frequency) > 0
    if not rising.all():
        row = int(np.argmin(rising)) + 1
        how = "is repeated" if frequency[row] == frequency[row - 1] else "is below the one before it"
        raise refuse(
            f"the frequency {frequency[row]:.12g} Hz {how}",
            "give one sweep a file, with each frequency once and in rising order",
            row,
        )
    if frequency.size < FEWEST_POINTS:
        raise refuse(
            f"only {frequency.size} points, and at least {FEWEST_POINTS} are needed", "sweep with more points"
        )
    if not LOWEST_TOP_HZ <= frequency[-1] <= HIGHEST_TOP_HZ:
        raise refuse(
            f"the highest frequency comes out as {frequency[-1]:.4g} Hz",
            "check the unit of the frequency column",
        )
    magnitude = np.abs(gamma)
    if not magnitude.any():
        raise refuse(
            "every reflection is zero", "this port was not measured; take the other port or read again"
        )
    if magnitude.max() > highest_magnitude:
        row = int(np.argmax(magnitude > highest_magnitude))
        raise refuse(
            f"|Γ| = {magnitude[row]:.4g}, far above 1",
            "check that the stated number format (RI, MA, DB) is the one of the numbers",
            row,
        )
