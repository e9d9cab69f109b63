"""Devices that are corrected with a fitted kit, against the device bound."""

import numpy as np

from stdfit.circuits.error_box import corrected, solve_error_box
from stdfit.trials.score import Truth
from stdfit.validity.device.bound import device_bound, device_map, three_of
from stdfit.validity.kit import Kit

FREQUENCIES = 40
DEVICES = 25
"""Random devices at each frequency."""


def devices_inside(kit: Kit, simulated: Truth, rng: np.random.Generator) -> float:
    """Return the part of random passive devices whose error keeps within the device bound.

    The true standards are read by a perfect analyser and taken for what the kit says; the exact correction
    that follows is applied to devices spread evenly over |Γ| ≤ 1.

    Parameters
    ----------
    kit : Kit
    simulated : Truth
    rng : numpy Generator
    """
    three = three_of(kit)
    low = max(one.fit_low_hz for one in three)
    top = min(max(one.fit_top_hz, one.limit.limit_hz) for one in three)
    grid = np.linspace(low, max(top, low), FREQUENCIES)
    errors = device_map(kit, three, grid)
    true = np.stack([simulated.truth_at(one.name, grid) for one in three], axis=-1)
    shape = (FREQUENCIES, DEVICES)
    device = np.sqrt(rng.random(shape)) * np.exp(2j * np.pi * rng.random(shape))
    shown = corrected(solve_error_box(errors.standards, true)[:, None], device)
    return float(np.mean(np.abs(shown - device) <= device_bound(errors, device)))
