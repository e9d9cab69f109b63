"""How well connections repeat, in words and plain data."""

import math
from collections.abc import Sequence
from typing import Any

from stdfit.data.repeat_file import RepeatFile
from stdfit.validity.change.nested import GAIN, LEVELS, Components
from stdfit.validity.change.repeat_study import Repeats, Scatter
from stdfit.writing.aligned import aligned
from stdfit.writing.numbers import frequency

MEANS = (1, 2, 3, 5, 10)
"""Connections whose mean is told."""

LACKS = "; the calibration's part is not known, and not in it"


def repeat_text(described: RepeatFile, found: Sequence[Repeats]) -> str:
    """Return the components of each standard, and how many connections are worth making, the verdict last."""
    lines = [f"{described.name}: how readings scatter (one standard deviation, 95 % intervals)"]
    for one in found:
        lines += ["", f"{one.standard}: {_design(one)}"]
        rows = [["", *(f"from {level} to {level}" for level in LEVELS), "connections worth making"]]
        rows += [[_what(row), *_cells(row), _worth(row.found)] for row in one.rows]
        lines += aligned(rows)
        for part in one.unseen:
            lines.append(f"  {part}: these readings do not tell it apart from the other parts")
        lacks = "" if all(_knows_calibrations(row.found) for row in one.rows) else LACKS
        lines += ["", f"  standard uncertainty of a mean of so many connections in one calibration{lacks}"]
        means = [["", *map(str, MEANS), "the calibration alone"]]
        for row in one.rows:
            scale, unit = _scale(row)
            told = [*(row.found.of_mean(n) for n in MEANS), float(row.found.sd[0])]
            each = ["not known" if math.isnan(u) else f"{_figure(scale * u)}{unit}" for u in told]
            means.append([_what(row), *each])
        lines += aligned(means)
    return "\n".join([*lines, "", repeat_verdict(found)]) + "\n"


def repeat_verdict(found: Sequence[Repeats]) -> str:
    """Return how many connections are worth making, in one line."""
    asked = [
        (one, row)
        for one in found
        for row in one.rows
        if row.at_hz is not None and _knows_connections(row.found)
    ]
    if not asked:
        return "connections are not told apart from calibrations: make two or more in one calibration"
    one, row = max(asked, key=lambda pair: pair[1].found.worth[0])
    worth, low, high = row.found.worth
    told = f"worth making: {worth} connections ({low} … {high}) in one calibration, for {one.standard} at {_at(row)}"
    if not _knows_calibrations(row.found):
        return f"{told}; with one calibration only, what it leaves is not known, and averaging alone decides"
    return f"{told}; one more makes the mean surer by less than {100 * GAIN:.0f} %"


def repeat_data(described: RepeatFile, found: Sequence[Repeats], warnings: Sequence[str]) -> dict[str, Any]:
    """Return what `repeat_text` says, as data; what the design does not tell is null."""
    return {
        "name": described.name,
        "standards": [
            {
                "name": one.standard,
                "kind": one.kind,
                "readings": [list(own) for own in one.counts],
                "not_told_apart": list(one.unseen),
                "components": [_row_data(row) for row in one.rows],
            }
            for one in found
        ],
        "verdict": repeat_verdict(found),
        "warnings": list(warnings),
    }


def _row_data(row: Scatter) -> dict[str, Any]:
    found = row.found
    known = _knows_connections(found)
    return {
        "what": row.what,
        "frequency_hz": row.at_hz,
        "unit": row.unit,
        **{
            level: None
            if math.isnan(found.sd[k])
            else {
                "sd": float(found.sd[k]),
                "low_95": float(found.low[k]),
                "high_95": float(found.high[k]),
                "degrees_of_freedom": float(found.freedoms[k]),
            }
            for k, level in enumerate(LEVELS)
        },
        "worth_making": found.worth[0] if known else None,
        "worth_making_95": list(found.worth[1:]) if known else None,
        "u_of_mean": {str(n): None if math.isnan(u := found.of_mean(n)) else u for n in MEANS},
        "u_of_mean_holds_calibration": _knows_calibrations(found),
    }


def _design(one: Repeats) -> str:
    connections = sum(len(own) for own in one.counts)
    readings = sum(sum(own) for own in one.counts)
    counts = ((one.calibrations, "calibration"), (connections, "connection"), (readings, "reading"))
    return ", ".join(_counted(*count) for count in counts)


def _counted(count: int, what: str) -> str:
    return f"{count} {what}{'' if count == 1 else 's'}"


def _what(row: Scatter) -> str:
    return row.what if row.at_hz is None else f"|ΔΓ| at {_at(row)}"


def _at(row: Scatter) -> str:
    return frequency(row.at_hz or 0.0)


def _scale(row: Scatter) -> tuple[float, str]:
    """Return the factor to the unit that is shown, and the unit."""
    return (1e3, " mΩ") if row.unit == "Ω" else (1.0, f" {row.unit}" if row.unit else "")


def _cells(row: Scatter) -> list[str]:
    scale, unit = _scale(row)
    found = row.found
    cells = []
    for sd, low, high in zip(found.sd.tolist(), found.low.tolist(), found.high.tolist(), strict=True):
        ends = f"{_figure(scale * low)} … {_figure(scale * high)}"
        cells.append("not told apart" if math.isnan(sd) else f"{_figure(scale * sd)}{unit} ({ends})")
    return cells


def _knows_calibrations(found: Components) -> bool:
    return not math.isnan(found.sd[0])


def _knows_connections(found: Components) -> bool:
    return not math.isnan(found.sd[1])


def _worth(found: Components) -> str:
    worth, low, high = found.worth
    return f"{worth} ({low} … {high})" if _knows_connections(found) else "not known"


def _figure(value: float) -> str:
    return f"{value:.2g}" if value < 99.5 else f"{value:.0f}"
