"""A kit's figures as pandas tables, for notebooks."""

import numpy as np
import pandas as pd

from stdfit.uncertainty.budget import radius
from stdfit.validity.evidence.sharing import MISFIT, source_parts
from stdfit.validity.kit import Definition, Kit, curve, misfit_at, model
from stdfit.writing.numbers import label_of

BOUND = "bound"


def parameters_table(kit: Kit) -> pd.DataFrame:
    """Return all parameters of a kit, and the sums that the readings fix better than their parts.

    Returns
    -------
    DataFrame
        Rows by standard and parameter. Columns: ``value``, ``unit``, ``u`` (standard uncertainty), ``low`` and
        ``high`` (95 %), ``role`` ("free", "given", "assumed", "held", "unused", "at its bound", or "sum").
    """
    rows = []
    for one in kit.definitions:
        rows += [
            (one.name, label_of(one.kind, p.name), p.value, p.unit, p.u, p.low, p.high, p.role)
            for p in one.parameters
        ]
        rows += [(one.name, c.label, c.value, c.unit, c.u, c.low, c.high, "sum") for c in one.combinations]
    columns = ["standard", "parameter", "value", "unit", "u", "low", "high", "role"]
    return pd.DataFrame(rows, columns=columns).set_index(["standard", "parameter"])


def budget_table(kit: Kit, at_hz: float | None = None) -> pd.DataFrame:
    """Return what makes up the bound of each standard at one frequency.

    Parameters
    ----------
    kit : Kit
    at_hz : float, optional
        In Hz; each standard's own limit where it is not given, or its first reading where it has no limit.

    Returns
    -------
    DataFrame
        Rows by standard and source, largest first; then the misfit, which is added to the rest, and the whole bound.
        Columns: ``frequency_hz``, ``part`` (of the bound, 0 … 1; those of sources and misfit add up to 1; NaN for the
        bound), ``alone`` (95 % radius of that source alone).

    Raises
    ------
    RequestError
        The frequency lies outside the readings of a standard.
    """
    rows = []
    for one in kit.definitions:
        hertz = max(one.limit.limit_hz, one.read_low_hz) if at_hz is None else at_hz
        rows += [(one.name, source, hertz, *figures) for source, *figures in _sources(kit, one, hertz)]
    columns = ["standard", "source", "frequency_hz", "part", "alone"]
    return pd.DataFrame(rows, columns=columns).set_index(["standard", "source"])


def _sources(kit: Kit, definition: Definition, hertz: float) -> list[tuple[str, float, float]]:
    """Return name, part of the bound and 95 % radius of each source at one frequency."""
    at = np.array([hertz])
    _, bound = curve(kit, definition, at)
    _, design = model(kit, definition, at)
    wrong = float(misfit_at(definition, at)[0])
    whole = max(float(bound[0]), 1e-300)
    parts = source_parts(design, kit.shares, bound - wrong)[:, 0] / whole
    found = [
        (share.name, float(part), float(radius(design, [share])[0]))
        for share, part in zip(kit.shares, parts, strict=True)
    ]
    found.sort(key=lambda one: -one[1])
    return [*found, (MISFIT, wrong / whole, wrong), (BOUND, float("nan"), float(bound[0]))]
