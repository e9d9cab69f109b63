"""What makes up the bound of one standard where its limit is."""

import numpy as np

from stdfit.uncertainty.budget import radius
from stdfit.validity.evidence.sharing import source_parts
from stdfit.validity.kit import Definition, Kit, misfit_at, model
from stdfit.writing.bound_rows import bound_rows
from stdfit.writing.numbers import frequency
from stdfit.writing.report.records import Table


def budget_table(kit: Kit, definition: Definition) -> Table | None:
    """Return what each source takes of the bound at the limit, or at the first reading where there is no limit.

    It is the frequency that the limit's reason speaks of, so that the parts are the same. None where the kit states
    bounds and no sources.
    """
    if not kit.shares:
        return None
    at = np.array([max(definition.limit.limit_hz, definition.read_low_hz)])
    _, design = model(kit, definition, at)
    parts = source_parts(design, kit.shares, radius(design, kit.shares))[:, 0]
    rows = bound_rows(
        [(share.name, float(part)) for share, part in zip(kit.shares, parts, strict=True)],
        float(misfit_at(definition, at)[0]),
    )
    return Table(
        f"What makes up the bound of {definition.name} at {frequency(float(at[0]))}",
        ("source", "part of the bound", ""),
        tuple(tuple(row) for row in rows),
    )
