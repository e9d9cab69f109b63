"""An entry sheet as plain data, ready for JSON: whatever a program needs to use the kit as it is typed."""

from collections.abc import Sequence
from typing import Any

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.validity.entry.sheet import Entry, Sheet, ideal_cost
from stdfit.validity.entry.terms import term_of
from stdfit.validity.limit import Limit
from stdfit.writing.sheet_reading import FORMAT

IDEAL_AT_HZ = (1e9, 3e9, 6e9)
"""Where the cost of ideal standards is told."""

COLUMNS = ("standard", "kind", "item", "value", "unit")


def sheet_data(sheet: Sheet) -> dict[str, Any]:
    """Return the whole sheet; `sheet_reading` makes a kit of it."""
    kit, units = sheet.kit, sheet.wanted.units
    return {
        "format": FORMAT,
        "name": kit.name,
        "connector": kit.connector,
        "reference_impedance_ohm": kit.reference_ohm,
        "connector_top_hz": kit.top_hz if np.isfinite(kit.top_hz) else None,
        "created": kit.created,
        "program_version": kit.version,
        "within": sheet.within,
        "limit_before": _limit(sheet.before),
        "limit_left": _limit(sheet.left),
        "units": dict(units.chosen),
        "velocity_factor": units.velocity_factor,
        "standards": [_standard(entry) for entry in sheet.entries],
        "ideal_standards": [
            {"frequency_hz": hertz, "extra": error, "standard": name}
            for hertz, error, name in told_cost(sheet)
        ],
        "warnings": list(kit.warnings),
    }


def told_cost(sheet: Sheet) -> list[tuple[float, float, str]]:
    """Return what ideal standards would cost, where nothing is accepted; else nothing.

    Rows of frequency in Hz, extra error and the standard that has it; at the end of the readings where they reach
    none of the usual frequencies.
    """
    if any(entry.typed for entry in sheet.entries):
        return []
    top = min(entry.definition.read_top_hz for entry in sheet.entries)
    return ideal_cost(sheet, IDEAL_AT_HZ) or ideal_cost(sheet, [top])


def _standard(entry: Entry) -> dict[str, Any]:
    full = entry.definition
    return {
        "name": full.name,
        "kind": full.kind,
        "connections": full.connections,
        "read_from_hz": full.read_low_hz,
        "read_to_hz": full.read_top_hz,
        "fit_from_hz": full.fit_low_hz,
        "fit_to_hz": full.fit_top_hz,
        "typed": [
            {"term": term_of(one.parameter), "number": one.text, "unit": one.unit} for one in entry.typed
        ],
        "left_out": [term_of(one) for one in entry.left_out],
        "extra": {
            "largest": entry.extra,
            "at_hz": entry.extra_hz,
            "from_hz": entry.low_hz,
            "to_hz": entry.top_hz,
        },
        "limit_before": _limit(entry.before),
        "limit_left": _limit(entry.left),
        "notes": list(entry.notes),
        "bound_and_extra": {
            "frequency_hz": _numbers(entry.frequency_hz),
            "value": _numbers(entry.bound_and_extra),
        },
    }


def _numbers(values: FloatArray) -> list[float]:
    return [float(one) for one in values]


def _limit(limit: Limit) -> dict[str, Any]:
    return {"limit_hz": limit.limit_hz, "reason": limit.reason}


def sheet_rows(sheet: Sheet) -> list[Sequence[str]]:
    """Return the sheet as rows of `COLUMNS`; what is said of the kit has no standard."""
    rows: list[Sequence[str]] = []
    for entry in sheet.entries:
        own = (entry.definition.name, entry.definition.kind)
        rows += [(*own, term_of(one.parameter), one.text, one.unit) for one in entry.typed]
        rows += [
            (*own, "largest extra error", repr(entry.extra), "1"),
            (*own, "limit before", repr(entry.before.limit_hz), "Hz"),
            (*own, "limit left", repr(entry.left.limit_hz), "Hz"),
        ]
    rows += [
        ("", "", "limit before", repr(sheet.before.limit_hz), "Hz"),
        ("", "", "limit left", repr(sheet.left.limit_hz), "Hz"),
    ]
    return rows
