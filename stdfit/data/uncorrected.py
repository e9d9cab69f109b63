"""Do readings that are called corrected look as if an analyser had shown them raw? That is asked, never refused."""

from collections.abc import Mapping

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.data.verify import Readings, low_end, phase_at_zero

LONGEST_PS = 1000.0
"""No standard is longer, 300 mm of air line one way; a test cable is (common practice, no source)."""

EXPLAINS = 0.5
"""A given delay explains the one that is seen from this part of it on."""

PALE = 0.8
"""|Γ| of an open or short at the low end: a correction leaves it near 1."""

TURNED = 60.0
"""Phase of an open or short at f → 0, in degrees off; a correction leaves it near 0."""

MOST_STEP = 2.0
"""Radians from point to point: faster turns cannot be followed."""


def like_uncorrected(readings: Readings, given_ps: Mapping[str, float]) -> tuple[str, ...]:
    """Return a warning where opens and shorts read like those of an analyser without its correction.

    A delay above `LONGEST_PS` that no given one explains, or |Γ| and phase at the low end far from ±1, tell so.

    Parameters
    ----------
    readings : mapping of str to (kind, sweeps)
        As for `verify_standards`.
    given_ps : mapping of str to float
        Offset delays that are known of standards, in ps.
    """
    odd: list[str] = []
    far: dict[str, float] = {}
    for name, (kind, sweeps) in readings.items():
        if kind == "load":
            continue
        grid = sweeps[0].frequency_hz
        mean = np.mean([sweep.gamma for sweep in sweeps], axis=0)
        delay = delay_ps(grid, mean)
        size = float(np.median(np.abs(mean[low_end(grid)])))
        phase = phase_at_zero(grid, mean)
        off = 0.0 if phase is None else abs(phase) if kind == "open" else 180.0 - abs(phase)
        if delay is not None and delay > LONGEST_PS and given_ps.get(name, 0.0) < EXPLAINS * delay:
            far[name] = delay
        elif size < PALE:
            odd.append(f"|Γ| of '{name}' is {size:.2f} at the low end")
        elif off > TURNED:
            odd.append(f"the phase of '{name}' is off by {off:.0f}° at f → 0")
    if far:
        names = ", ".join(f"'{name}'" for name in far)
        odd.insert(0, f"{names} seen behind {max(far.values()):.0f} ps of line, as with a cable")
    if not odd:
        return ()
    return (
        f'were these read without the analyser\'s correction? {"; ".join(odd)}. If so, say state = "raw"; '
        "if a line is that long, give its length (given.offset_delay_ps).",
    )


def delay_ps(frequency_hz: FloatArray, gamma: ComplexArray) -> float | None:
    """Return the delay of the line before a reflector, one way: −(dφ/df)/4π by a straight line, in ps.

    Parameters
    ----------
    frequency_hz : array of shape (n,)
        Rising.
    gamma : complex array of shape (n,)

    Returns
    -------
    float or None
        None where the phase turns too fast from point to point to be followed.
    """
    if not np.abs(gamma).all() or np.median(np.abs(np.angle(gamma[1:] / gamma[:-1]))) > MOST_STEP:
        return None
    slope = float(np.polyfit(1e-9 * (frequency_hz - frequency_hz[0]), np.unwrap(np.angle(gamma)), 1)[0])
    return -1e3 * slope / (4.0 * np.pi)
