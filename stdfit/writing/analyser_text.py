"""The analyser's residuals that a kit rests on: their table in a kit file, and in words."""

from collections.abc import Iterator
from typing import Any, Literal

import msgspec
import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.validity.analyser import ASSUMED, LARGEST_DB, NUMBERS, Analyser
from stdfit.writing.numbers import frequency
from stdfit.writing.toml_tables import table_of


class AnalyserTable(msgspec.Struct, forbid_unknown_fields=True):
    """The table `analyser` of a kit file."""

    residuals: Literal["stated", "assumed"]
    frequency_hz: list[float]
    directivity_db: list[float]
    source_match_db: list[float]
    reflection_tracking_db: list[float]


def analyser_table(one: Analyser) -> Any:
    """Return the table of a kit file."""
    return table_of(**residuals_data(one))


def analyser_from(table: AnalyserTable) -> Analyser:
    """Return what a table says; lists of different lengths are left to `analyser_faults`."""
    return Analyser(table.residuals, *(np.array(getattr(table, name), dtype=float) for name in NUMBERS))


def analyser_faults(one: Analyser | None) -> Iterator[tuple[str, str]]:
    """Yield (key, what is wrong) of the residuals that a kit names."""
    if one is None:
        return
    count = one.frequency_hz.size
    for name in NUMBERS:
        values: FloatArray = getattr(one, name)
        if count < 1 or values.shape != (count,):
            yield f"analyser.{name}", "the lists must be equally long"
        elif not np.isfinite(values).all():
            yield f"analyser.{name}", "a value is not a finite number"
        elif name != NUMBERS[0] and ((values < 0.0) | (values > LARGEST_DB)).any():
            yield f"analyser.{name}", f"residuals lie between 0 and {LARGEST_DB:g} dB"
    if (one.frequency_hz <= 0.0).any() or (np.diff(one.frequency_hz) <= 0.0).any():
        yield "analyser.frequency_hz", "the frequencies must be above 0 Hz and rise"


def residuals_said(one: Analyser) -> str:
    """Return the residuals in one line."""
    told = ", ".join(
        f"{name} {_span(values, sign)}"
        for name, values, sign in (
            ("directivity", one.directivity_db, ""),
            ("source match", one.source_match_db, ""),
            ("reflection tracking", one.reflection_tracking_db, "± "),
        )
    )
    first, last = float(one.frequency_hz[0]), float(one.frequency_hz[-1])
    where = f"{frequency(first)} … {frequency(last)}" if last > first else "at all frequencies"
    return f"{told} ({where})"


def residual_rows(one: Analyser) -> list[tuple[str, ...]]:
    """Return frequency, directivity, source match and reflection tracking, row by row."""
    return [
        (frequency(float(f)), f"{d:g} dB", f"{m:g} dB", f"± {t:.3g} dB")
        for f, d, m, t in zip(
            *(one.frequency_hz, one.directivity_db, one.source_match_db, one.reflection_tracking_db),
            strict=True,
        )
    ]


def residuals_data(one: Analyser) -> dict[str, Any]:
    """Return the residuals as data, with the keys of the kit file."""
    return {"residuals": one.residuals, **{name: getattr(one, name).tolist() for name in NUMBERS}}


def are_assumed(one: Analyser | None) -> bool:
    """Tell whether nobody stated the residuals."""
    return one is not None and one.residuals == ASSUMED


def _span(values: FloatArray, sign: str) -> str:
    first, last = (f"{float(values[place]):.3g}" for place in (0, -1))
    return f"{sign}{first} dB" if first == last else f"{sign}{first} … {last} dB"
