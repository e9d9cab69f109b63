"""What it would cost to take the standards of a kit for ideal ones."""

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.circuits.error_box import corrected, solve_error_box
from stdfit.circuits.standard import IDEAL
from stdfit.validity.device.bound import DeviceMap, all_phases


def cost_of_ideal(errors: DeviceMap) -> FloatArray:
    """Return how wrong a passive device would be shown, shape (n,).

    The three standards are what the kit says, and the correction takes them for +1, −1 and 0: exactly, not to first
    order, since the errors are large.

    Parameters
    ----------
    errors : DeviceMap
    """
    ideal = np.array([IDEAL[one.kind] for one in errors.definitions], dtype=complex)
    return np.array([largest_change(ideal, standards) for standards in errors.standards])


def largest_change(taken_for: ComplexArray, standards: ComplexArray) -> float:
    """Return how far from itself a passive device is shown at most, after a correction with wrong definitions.

    What is shown is analytic in Γ, so that the worst lies on the circle |Γ| = 1, unless some device within it is
    shown as infinite, which is the case where |b| ≤ |c| of the error terms.

    Parameters
    ----------
    taken_for : complex array of shape (3,)
        What the correction takes the standards for.
    standards : complex array of shape (3,)
        What they are.

    Returns
    -------
    float
        Infinite where the correction is impossible, or shows a passive device as infinite.
    """
    if np.unique(taken_for).size < 3:
        return np.inf
    try:
        box = solve_error_box(taken_for, standards)
    except np.linalg.LinAlgError:
        return np.inf
    if not abs(box[1]) > abs(box[2]):
        return np.inf
    device = all_phases()
    return float(np.abs(corrected(box, device) - device).max())
