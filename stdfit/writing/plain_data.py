"""A kit and its limits as plain data, ready for JSON."""

from collections.abc import Sequence
from typing import Any

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.validity.kit import Kit, curve
from stdfit.validity.limit import Limit
from stdfit.validity.next_steps import next_steps
from stdfit.writing.adapter_words import line_data
from stdfit.writing.analyser_text import residuals_data


def kit_data(kit: Kit) -> dict[str, Any]:
    """Return what `summary` says, as data."""
    return {
        "name": kit.name,
        "connector": kit.connector,
        "reference_impedance_ohm": kit.reference_ohm,
        "within": kit.within,
        "limit_hz": kit.limit.limit_hz,
        "reason": kit.limit.reason,
        "standards": [
            {
                "name": one.name,
                "kind": one.kind,
                "order": one.shape,
                "connections": one.connections,
                "fit_to_hz": one.fit_top_hz,
                "read_to_hz": one.read_top_hz,
                "limit_hz": one.limit.limit_hz,
                "reason": one.limit.reason,
                "parameters": [
                    {
                        "name": p.name,
                        "value": p.value,
                        "unit": p.unit,
                        "u": p.u,
                        "low_95": p.low,
                        "high_95": p.high,
                        "role": p.role,
                    }
                    for p in one.parameters
                ],
                "combinations": [
                    {
                        "label": c.label,
                        "value": c.value,
                        "unit": c.unit,
                        "u": c.u,
                        "low_95": c.low,
                        "high_95": c.high,
                        "correlation_of_parts": c.correlation,
                    }
                    for c in one.combinations
                ],
                "orders_tried": dict(one.tried),
                "notes": list(one.notes),
            }
            for one in kit.definitions
        ],
        "ladder": [
            {
                "within": rung.within,
                "kit_limit_hz": rung.kit_hz,
                "standards": {
                    one.name: hertz for one, hertz in zip(kit.definitions, rung.standards_hz, strict=True)
                },
            }
            for rung in kit.ladder
        ],
        "next_steps": [
            {"kind": one.kind, "action": one.action, "limit_hz": one.limit_hz} for one in next_steps(kit)
        ],
        "analyser": None if kit.analyser is None else residuals_data(kit.analyser),
        "warnings": list(kit.warnings),
        "checks": list(kit.checks),
        "ancestors": [
            {"name": one.name, "created": one.created, "sha256": one.sha256, "of": one.of}
            for one in kit.ancestors
        ],
        "thru": None
        if kit.thru is None
        else {"name": kit.thru.name, "sha256": kit.thru.sha256, **line_data(kit.thru.line)},
    }


def limit_data(kit: Kit, found: Sequence[tuple[Limit, Sequence[Limit]]]) -> dict[str, Any]:
    """Return the limits for each tolerance."""
    return {
        "limits": [
            {
                "within": whole.within,
                "kit": {"limit_hz": whole.limit_hz, "reason": whole.reason},
                "standards": [
                    {"name": definition.name, "limit_hz": one.limit_hz, "reason": one.reason}
                    for definition, one in zip(kit.definitions, each, strict=True)
                ],
            }
            for whole, each in found
        ]
    }


COLUMNS = ("standard", "frequency_hz", "gamma_re", "gamma_im", "bound")


def curve_rows(
    kit: Kit, names: Sequence[str], points: int, at_hz: FloatArray | None
) -> list[tuple[str, float, float, float, float]]:
    """Return the rows of `COLUMNS` for the named standards, over the fit range or at given frequencies."""
    rows = []
    for name in names:
        definition = kit.definition(name)
        top = definition.fit_top_hz
        grid = np.linspace(top / points, top, points) if at_hz is None else at_hz
        gamma, bound = curve(kit, definition, grid)
        rows += [
            (name, float(f), float(g.real), float(g.imag), float(b))
            for f, g, b in zip(grid, gamma, bound, strict=True)
        ]
    return rows
