"""Frequency-validity limits of a kit and of its standards, with their reasons."""

from collections.abc import Callable, Sequence

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.circuits.standard import PARAMETERS
from stdfit.uncertainty.budget import Share, parts_of_variance, radius
from stdfit.validity.kit import Definition, Kit, Rung, misfit_at, model
from stdfit.validity.limit import Limit, first_gap

TOLERANCES = (0.005, 0.01, 0.02, 0.03, 0.05, 0.1)
"""The ladder."""

GRID_POINTS = 400
"""Points at which a bound is compared with a tolerance, besides those of the misfit."""


GIVEN = "given values"
"""The source that stands for what the user gave."""

TOLD_PART = 0.01
"""An extra error is told of from this part of the tolerance on."""

Extra = Callable[[Definition, FloatArray], FloatArray]
"""An error of Γ over frequency that comes on top of a standard's bound, shape (n,)."""


def limits(
    kit: Kit, tolerances: Sequence[float], extra: Extra | None = None
) -> list[tuple[Limit, list[Limit]]]:
    """Return, for each tolerance, the limit of the kit and those of its standards.

    The limit is the highest frequency up to which the bound, with the extra error if there is one, keeps within the
    tolerance without a gap, from the first reading on; never beyond the last reading nor beyond the connector
    family's top.
    """
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
    if extra[place] > max(misfit[place], spread[place]):
        return Limit(within, limit_hz, "what is typed differs from the full definition here")
    part = extra[place] / within
    told = f"{100 * part:.0f} %" if part < 1.0 else "all"
    more = f", and what is typed takes {told} of the tolerance" if part >= TOLD_PART else ""
    if not kit.shares:
        reason = "the stated bound reaches it here"
    elif misfit[place] >= spread[place]:
        reason = "the readings leave the model here (misfit)"
    else:
        reason = cause(kit, design[place])
    return Limit(within, limit_hz, reason + more)


def shares_at(design: ComplexArray, shares: Sequence[Share]) -> FloatArray:
    """Return each source's part of the variance of Γ at one frequency.

    Parameters
    ----------
    design : complex array of shape (p,)
    shares : sequence of Share
    """
    return parts_of_variance(design[None], shares)[:, 0]


def largest_source(design: ComplexArray, shares: Sequence[Share]) -> str:
    """Say which kind of source has the largest part of the variance of Γ at one frequency, and which of that kind.

    Sources whose names begin alike, "analyser residuals (directivity)" and so on, are of one kind.
    """
    parts = shares_at(design, shares)
    kinds: dict[str, list[tuple[float, str]]] = {}
    for share, part in zip(shares, parts, strict=True):
        kind, _, member = share.name.partition(" (")
        kinds.setdefault(kind, []).append((float(part), member.rstrip(")")))
    kind = max(kinds, key=lambda one: sum(part for part, _ in kinds[one]))
    total = sum(part for part, _ in kinds[kind])
    _, most = max(kinds[kind])
    said = f"{kind}, {100 * total:.0f} % of the variance"
    return f"{said}, most of it {most}" if most and len(kinds[kind]) > 1 else said


def cause(kit: Kit, design: ComplexArray) -> str:
    """Say which kind of source has the largest part of the variance of Γ at one frequency; of given values, which.

    Parameters
    ----------
    kit : Kit
        With shares.
    design : complex array of shape (p,)
    """
    said = largest_source(design, kit.shares)
    given = [share for share in kit.shares if share.name == GIVEN]
    values = [
        (f"{parameter.label} of {definition.name}", kit.order.index(own.of))
        for definition in kit.definitions
        for own, parameter in zip(definition.parameters, PARAMETERS[definition.kind], strict=True)
        if own.role == "given" and own.of in kit.order
    ]
    if not said.startswith(GIVEN) or not given or not values:
        return said
    if len(values) == 1:
        return said.replace(GIVEN, f"{GIVEN} ({values[0][0]})", 1)
    covariance = given[0].covariances[0]
    # A value kept by its evidence has the evidence's error: the one that the error of Γ goes along with is the cause.
    along = np.array([design.real, design.imag]) @ covariance
    size = np.sqrt(np.maximum(np.diag(covariance), 1e-300))
    most = max(values, key=lambda value: float(np.hypot(*along[:, value[1]]) / size[value[1]]))
    return f"{said}, most of it {most[0]}"
