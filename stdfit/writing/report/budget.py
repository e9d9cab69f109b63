"""What makes up the bound of one standard where its limit is."""

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.uncertainty.budget import radius
from stdfit.validity.kit import Definition, Kit, misfit_at, model
from stdfit.validity.limit import first_gap
from stdfit.validity.limits import limit_grid, shares_at
from stdfit.writing.numbers import frequency
from stdfit.writing.report.records import Table

SMALL = 0.005
"""Sources with a smaller part of the variance share a line."""


def budget_table(kit: Kit, definition: Definition) -> Table | None:
    """Return the sources at the frequency at which the bound first exceeds the tolerance, and how they add up.

    It is the frequency that the limit's reason speaks of, so that the parts are the same; where the bound never
    exceeds the tolerance it is the last one that was looked at. None where the kit states bounds and no sources.
    """
    if not kit.shares:
        return None
    grid = limit_grid(kit, definition)
    _, design = model(kit, definition, grid)
    spread, misfit = radius(design, kit.shares), misfit_at(definition, grid)
    _, place = first_gap(grid, spread + misfit, kit.within)
    place = grid.size - 1 if place is None else place
    here = design[[place]]
    parts = shares_at(here[0], kit.shares)
    order = [int(k) for k in np.argsort(-parts, kind="stable")]
    told = [k for k in order if parts[k] >= SMALL]
    rest = [k for k in order if parts[k] < SMALL]
    rows = [_row(kit.shares[k].name, parts[k], radius(here, [kit.shares[k]])) for k in told]
    if rest:
        name = f"{len(rest)} smaller sources" if len(rest) > 1 else kit.shares[rest[0]].name
        rows.append(_row(name, parts[rest].sum(), radius(here, [kit.shares[k] for k in rest])))
    rows += [
        ("all sources together", "100 %", f"{spread[place]:.4f}"),
        ("misfit, added to them", "", f"{misfit[place]:.4f}"),
        ("bound", "", f"{spread[place] + misfit[place]:.4f}"),
    ]
    caption = f"What makes up the bound of {definition.name} at {frequency(float(grid[place]))}"
    return Table(caption, ("source", "part of variance", "alone (95 %)"), tuple(rows))


def _row(name: str, part: float, alone: FloatArray) -> tuple[str, str, str]:
    return name, f"{100.0 * part:.0f} %" if part >= SMALL else "< 0.5 %", f"{float(alone[0]):.4f}"
