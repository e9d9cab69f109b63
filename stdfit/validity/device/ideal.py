"""What it would cost to take the standards of a kit for ideal ones."""

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.circuits.error_box import corrected, solve_error_box
from stdfit.circuits.standard import IDEAL
from stdfit.validity.device.bound import DeviceMap, all_phases


def cost_of_ideal(errors: DeviceMap) -> FloatArray:
    """Return how wrong a passive device would be shown, at the worst phase of |Γ| = 1, shape (n,).

    The three standards are what the kit says, and the correction takes them for +1, −1 and 0: exactly, not to first
    order, since the errors are large. What is shown is analytic in Γ, so that the worst lies on the circle, unless
    some device within it is shown as infinite, which is the case where |b| ≤ |c| of the error terms.

    Parameters
    ----------
    errors : DeviceMap
    """
    ideal = np.array([IDEAL[one.kind] for one in errors.definitions], dtype=complex)
    if np.unique(ideal).size < 3:  # two of a kind: taken for ideal, they are the same
        return np.full(errors.frequency_hz.size, np.inf)
    device = all_phases()
    cost = np.full(errors.frequency_hz.size, np.inf)
    for k, standards in enumerate(errors.standards):
        try:
            box = solve_error_box(ideal, standards)
        except np.linalg.LinAlgError:
            continue
        if abs(box[1]) > abs(box[2]):
            cost[k] = np.abs(corrected(box, device) - device).max()
    return cost
