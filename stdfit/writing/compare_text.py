"""Two kits side by side, in words, columns and plain data."""

import math
from collections.abc import Sequence
from typing import Any

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.validity.device.compare import Comparison, differences_at
from stdfit.validity.device.difference import Difference
from stdfit.writing.aligned import aligned
from stdfit.writing.device_text import TABLE_GHZ, round_frequencies
from stdfit.writing.numbers import frequency

COLUMNS = ("of", "what", "frequency_hz", "difference", "bound", "in_bounds")

TABLE_ROWS = 7
"""Frequencies of the table where none are asked for."""

BANDS_TOLD = 2
"""Bands that are told one by one."""

UNIT = "in bounds: over √(U1² + U2²), the 95 % bounds of both; a difference of up to 1 contradicts neither"

ROUNDING = 1e-12
"""What is smaller is no difference."""


def table_frequencies(found: Comparison, at_hz: Sequence[float] | None = None) -> FloatArray:
    """Return the frequencies of the table: those asked for, or round ones in the band of all counterparts."""
    if at_hz is not None:
        return np.unique(np.asarray(at_hz, dtype=float))
    low = max(pair.low_hz for pair in found.pairing.pairs)
    top = min(pair.top_hz for pair in found.pairing.pairs)
    return round_frequencies(low, top, TABLE_ROWS, TABLE_GHZ) if low < top else np.array([])


def compare_text(found: Comparison, at_hz: FloatArray) -> str:
    """Return where and by how much two kits differ, the verdict last."""
    lines = [f"{found.one.name} against {found.two.name}", f"({UNIT})", ""]
    lines += ["Standard by standard: |ΔΓ|", *aligned(_peaks("standard", found.standards))]
    if found.as_kits:
        lines += [
            "",
            "As kits: what an analyser shows, corrected with one in place of the other (first order)",
        ]
        lines += aligned(_peaks("change of", found.as_kits))
        if not 0.9 < _ratio(found.exactly, found.as_kits[-1].largest[0]) < 1.1:
            lines.append(f"  not to first order, the device changes by up to {_figure(found.exactly)}")
    if at_hz.size:
        told = differences_at(found, at_hz)
        lines += ["", "At some frequencies: difference (in bounds)"]
        table = [["frequency", *(one.what for one in told)]]
        table += [
            [frequency(hertz), *(f"{_figure(one.difference[k])} ({_figure(one.ratio[k])})" for one in told)]
            for k, hertz in enumerate(at_hz)
        ]
        lines += aligned(table)
    notes = _notes(found)
    if notes:
        lines += ["", "Notes", *(f"  {note}" for note in notes)]
    return "\n".join([*lines, "", compare_verdict(found)]) + "\n"


def compare_verdict(found: Comparison) -> str:
    """Return the answer in one line."""
    every = (*found.standards, *found.as_kits)
    if max(one.largest[0] for one in every) < ROUNDING:
        return "the kits do not differ"
    worst = max(every, key=lambda one: one.largest_ratio[0])
    ratio, hertz = worst.largest_ratio
    most = f"most in {worst.what}, {_figure(ratio)} bounds at {frequency(hertz)}"
    if ratio <= 1.0:
        return f"the kits differ by less than their bounds wherever they can be compared: {most}"
    # What begins outside its bounds, or has no band inside them, is within them up to nowhere.
    ends = [one.bands[0][1] if one.bands and one.bands[0][0] == one.frequency_hz[0] else 0.0 for one in every]
    if min(ends) > 0.0:
        return (
            f"the kits differ by less than their bounds up to {frequency(min(ends))}, by more above: {most}"
        )
    return f"the kits differ by more than their bounds: {most}"


def compare_data(found: Comparison, at_hz: FloatArray) -> dict[str, Any]:
    """Return what `compare_text` says, as data; what is infinite or not there is null."""
    pairing = found.pairing
    return {
        "kits": [found.one.name, found.two.name],
        "reference_impedance_ohm": found.one.reference_ohm,
        "standards": [
            {"names": [pair.one.name, pair.two.name], "matched_by": pair.by, **_summary(one)}
            for pair, one in zip(pairing.pairs, found.standards, strict=True)
        ],
        "as_kits": [{"what": one.what, **_summary(one)} for one in found.as_kits],
        "device_exactly": _finite(found.exactly),
        "without_counterpart": [list(pairing.alone_one), list(pairing.alone_two)],
        "without_common_band": [[pair.one.name, pair.two.name] for pair in pairing.apart],
        "table": [
            {name: _finite(value) for name, value in zip(COLUMNS, row, strict=True)}
            for row in compare_rows(found, at_hz)
        ]
        if at_hz.size
        else [],
        "notes": list(found.notes),
        "verdict": compare_verdict(found),
    }


def compare_rows(found: Comparison, at_hz: FloatArray | None = None) -> list[list[Any]]:
    """Return the rows of `COLUMNS`, at given frequencies or at all that were compared."""
    every = (*found.standards, *found.as_kits) if at_hz is None else differences_at(found, at_hz)
    rows: list[list[Any]] = []
    for k, one in enumerate(every):
        of = "standard" if k < len(found.standards) else "kit"
        figures = np.column_stack([one.frequency_hz, one.difference, one.bound, one.ratio])
        rows += [[of, one.what, *row] for row in figures.tolist()]
    return rows


def _peaks(title: str, differences: Sequence[Difference]) -> list[list[str]]:
    """Return the table of largest differences."""
    rows = [[title, "largest", "largest in bounds", "within the bounds", "compared"]]
    for one in differences:
        (size, at), (ratio, ratio_at) = one.largest, one.largest_ratio
        rows.append(
            [
                one.what,
                f"{_figure(size)} at {frequency(at)}",
                f"{_figure(ratio)} at {frequency(ratio_at)}",
                _bands(one),
                f"{frequency(one.frequency_hz[0])} to {frequency(one.frequency_hz[-1])}",
            ]
        )
    return rows


def _bands(one: Difference) -> str:
    if not one.bands:
        return "nowhere"
    if one.bands == ((one.frequency_hz[0], one.frequency_hz[-1]),):
        return "everywhere"
    told = [f"{frequency(low)} to {frequency(top)}" for low, top in one.bands[:BANDS_TOLD]]
    more = len(one.bands) - BANDS_TOLD
    return ", ".join([*told, *([f"{more} more"] if more > 0 else [])])


def _notes(found: Comparison) -> list[str]:
    """Return what was matched how, what was left out, and what makes the comparison wide."""
    pairing = found.pairing
    notes = [
        f"{pair.label}: matched by their kind, {pair.one.kind}" for pair in pairing.pairs if pair.by == "kind"
    ]
    notes += [f"{pair.label}: left out, no band in common" for pair in pairing.apart]
    for kit, alone in ((found.one, pairing.alone_one), (found.two, pairing.alone_two)):
        if alone:
            notes.append(f"without a counterpart in the other kit: {', '.join(alone)} of {kit.name}")
    return [*notes, *found.notes]


def _summary(one: Difference) -> dict[str, Any]:
    (size, at), (ratio, ratio_at) = one.largest, one.largest_ratio
    return {
        "from_hz": float(one.frequency_hz[0]),
        "to_hz": float(one.frequency_hz[-1]),
        "largest": _finite(size),
        "largest_at_hz": at,
        "largest_in_bounds": _finite(ratio),
        "largest_in_bounds_at_hz": ratio_at,
        "within_bounds_hz": [list(band) for band in one.bands],
    }


def _finite(value: Any) -> Any:
    """Return a value for JSON, which knows no infinity."""
    return None if isinstance(value, float) and not math.isfinite(value) else value


def _ratio(exact: float, first_order: float) -> float:
    """Return how far the first order holds; 1 where there is nothing to compare."""
    return exact / first_order if first_order > 1e-9 and math.isfinite(exact) else 1.0


def _figure(value: float) -> str:
    """Return a figure with two digits."""
    if value < ROUNDING:
        return "0"
    if not math.isfinite(value):
        return "without end"
    return f"{value:.2g}" if value < 99.5 else f"{value:.0f}"
