"""Frequency-validity limits of a kit and of its standards, with their reasons."""

from collections.abc import Callable, Sequence

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.base.errors import RequestError
from stdfit.uncertainty.budget import radius
from stdfit.validity.evidence.causes import (
    DIFFERS,
    LEAVES,
    TYPED,
    TYPED_FROM,
    cause,
    parts_of_bound,
    percent,
)
from stdfit.validity.evidence.sharing import MISFIT
from stdfit.validity.kit import Definition, Kit, Rung, misfit_at, model
from stdfit.validity.limit import Limit, first_gap

TOLERANCES = (0.005, 0.01, 0.02, 0.03, 0.05, 0.1)
"""The ladder."""

GRID_POINTS = 400
"""Points at which a bound is compared with a tolerance, besides those of the misfit."""


STEPS = "the readings leave the model just above (misfit)"
"""How a reason begins where the misfit is the largest part above the limit and not yet at it."""

Extra = Callable[[Definition, FloatArray], FloatArray]
"""An error of Γ over frequency that comes on top of a standard's bound, shape (n,)."""


def limits(
    kit: Kit, tolerances: Sequence[float], extra: Extra | None = None
) -> list[tuple[Limit, list[Limit]]]:
    """Return, for each tolerance, the limit of the kit and those of its standards.

    The limit is the highest frequency up to which the bound, with the extra error if there is one, keeps within the
    tolerance without a gap, from the first reading on; never beyond the last reading nor beyond the connector
    family's top.

    Raises
    ------
    RequestError
        The tolerances are no list of numbers between 0 and 1.
    """
    tolerances = _checked(tolerances)
    bounds = []
    for definition in kit.definitions:
        grid = limit_grid(kit, definition)
        _, design = model(kit, definition, grid)
        more = np.zeros(grid.size) if extra is None else extra(definition, grid)
        bounds.append((grid, design, radius(design, kit.shares), misfit_at(definition, grid), more))
    result = []
    for within in tolerances:
        each = [
            _limit(kit, definition, within, *bound)
            for definition, bound in zip(kit.definitions, bounds, strict=True)
        ]
        lowest = min(range(len(each)), key=lambda k: each[k].limit_hz)
        reason = f"{kit.definitions[lowest].name}: {each[lowest].reason}"
        result.append((Limit(within, each[lowest].limit_hz, reason), each))
    return result


def _checked(tolerances: Sequence[float]) -> list[float]:
    """Return tolerances, which must be several numbers between 0 and 1."""
    try:
        each = [float(within) for within in tolerances]
    except (TypeError, ValueError) as fault:
        raise RequestError("tolerances are a list of numbers", "write limits(kit, [0.02])") from fault
    for within in each:
        if not 0.0 < within < 1.0:
            raise RequestError(f"the tolerance {within:g} does not lie between 0 and 1", "try 0.02")
    return each


def ladder(kit: Kit) -> tuple[Rung, ...]:
    """Return the limits over a ladder of tolerances, the asked one among them."""
    tolerances = sorted({*TOLERANCES, kit.within})
    return tuple(
        Rung(whole.within, whole.limit_hz, tuple(one.limit_hz for one in each))
        for whole, each in limits(kit, tolerances)
    )


def limit_grid(kit: Kit, definition: Definition) -> FloatArray:
    """Return where the bound is looked at, up to the last reading or the connector's top."""
    low = definition.read_low_hz
    high = max(min(definition.read_top_hz, kit.top_hz), low)
    points = np.concatenate([np.linspace(low, high, GRID_POINTS), definition.misfit_hz])
    return np.unique(points[(points >= low) & (points <= high)])


def _limit(
    kit: Kit,
    definition: Definition,
    within: float,
    grid: FloatArray,
    design: ComplexArray,
    spread: FloatArray,
    misfit: FloatArray,
    extra: FloatArray,
) -> Limit:
    """Return the limit of one standard."""
    if kit.top_hz < definition.read_low_hz:
        return Limit(
            within, 0.0, f"the readings begin above the top of the connector family, {kit.top_hz / 1e9:g} GHz"
        )
    limit_hz, place = first_gap(grid, spread + misfit + extra, within)
    if place is None:
        if kit.top_hz < definition.read_top_hz:
            return Limit(within, limit_hz, "the next mode begins, or the connector family ends, here")
        return Limit(within, limit_hz, "the readings end here")
    if not kit.shares:
        part = extra[place] / max(misfit[place] + extra[place], 1e-300)
        if part > 0.5:
            return Limit(within, limit_hz, f"{DIFFERS}, {percent(part)} of the bound")
        more = f"; {TYPED} {percent(part)} of the bound" if part >= TYPED_FROM else ""
        return Limit(within, limit_hz, f"the stated bound reaches it here{more}")
    at = np.array([max(limit_hz, grid[0])])
    _, there = model(kit, definition, at)
    own = float(radius(there, kit.shares)[0]), float(misfit_at(definition, at)[0])
    typed = float(np.interp(at[0], grid, extra))
    reason = cause(kit, there[0], *own, typed)
    if not reason.startswith(LEAVES):
        # A step of the misfit ends it although the parts at the limit do not show it yet.
        beyond = parts_of_bound(kit, design[place], spread[place], misfit[place], extra[place])
        if next(iter(beyond)) == MISFIT:
            reason = f"{STEPS}; at the limit {reason}"
    return Limit(within, limit_hz, reason)
