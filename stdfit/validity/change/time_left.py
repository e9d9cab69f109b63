"""How long a drifting standard stays within a tolerance."""

import math
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.base.errors import RequestError
from stdfit.uncertainty.budget import radius
from stdfit.validity.change.followed import Followed, effect
from stdfit.validity.change.trend import Interval
from stdfit.validity.kit import Definition, Kit, misfit_at, model
from stdfit.validity.limit import first_gap
from stdfit.validity.limits import limit_grid

PART_OF_LIMIT = 0.75
"""Part of a standard's limit up to which it is to stay within the tolerance, where no frequency is asked for."""


@dataclass(frozen=True, slots=True)
class TimeLeft:
    """How much longer a definition serves, from the newest kit on.

    Attributes
    ----------
    value, low, high : float
        In the unit of the trend; infinite where the drift never gets there.
    at_hz : float
        Frequency at which the tolerance is used up first.
    to_hz, within : float
        Up to which frequency, and within what, it has to serve.
    """

    value: float
    low: float
    high: float
    at_hz: float
    to_hz: float
    within: float


def time_left(
    kit: Kit,
    definition: Definition,
    one: Followed,
    slope: Interval,
    within: float,
    to_hz: float | None = None,
) -> TimeLeft | None:
    """Return when bound(f) + |∂Γ/∂q·b|·t reaches the tolerance, b the drift of the quantity q in a unit of t.

    The interval is that of b: the drift may be as fast as the end of its interval that is further from zero, and as
    slow as the nearer end; "never" where zero lies inside.

    Parameters
    ----------
    kit : Kit
        The newest one: its definition is what is typed in, and its bound holds on the day when it was read.
    definition : Definition
    one : Followed
    slope : Interval
    within : float
    to_hz : float, optional
        Up to which frequency; `PART_OF_LIMIT` of the standard's limit within the tolerance where it is not given.

    Returns
    -------
    TimeLeft or None
        None where the definition does not keep within the tolerance from its first reading on, and no frequency is
        asked for.

    Raises
    ------
    RequestError
        `to_hz` lies outside the readings.
    """
    grid = limit_grid(kit, definition)
    if to_hz is None:
        limit_hz, _ = first_gap(grid, _bound(kit, definition, grid), within)
        if limit_hz <= grid[0]:
            return None
        to_hz = max(PART_OF_LIMIT * limit_hz, float(grid[0]))
    if not grid[0] <= to_hz <= grid[-1]:
        raise RequestError(
            f"{to_hz:.10g} Hz lies outside the readings of '{definition.name}'",
            f"ask for a frequency from {grid[0]:.10g} to {grid[-1]:.10g} Hz",
        )
    grid = np.append(grid[grid < to_hz], to_hz)
    room = np.maximum(within - _bound(kit, definition, grid), 0.0)
    grows = np.abs(effect(kit, definition, one, grid))
    with np.errstate(divide="ignore", invalid="ignore"):
        lasts = np.where(room > 0.0, room / grows, 0.0)
    first = int(np.argmin(lasts))
    fastest, slowest = max(abs(slope.low), abs(slope.high)), min(abs(slope.low), abs(slope.high))
    slowest = 0.0 if slope.low <= 0.0 <= slope.high else slowest
    amount = float(lasts[first])
    value, low, high = (_over(amount, rate) for rate in (abs(slope.value), fastest, slowest))
    return TimeLeft(value, low, high, float(grid[first]), to_hz, within)


def _bound(kit: Kit, definition: Definition, grid: FloatArray) -> FloatArray:
    _, design = model(kit, definition, grid)
    return np.asarray(radius(design, kit.shares) + misfit_at(definition, grid))


def _over(amount: float, rate: float) -> float:
    if amount == 0.0:
        return 0.0
    return amount / rate if rate > 0.0 else math.inf
