"""A kit as data: a Touchstone file for each standard, and tables of covariances and bounds.

Everything here returns text; `export_targets` tells what may be overwritten by it.
"""

import csv
import io
import math
from collections.abc import Iterable, Sequence

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.base.errors import RequestError
from stdfit.data.exported import FIRST_LINE
from stdfit.validity.device.joint import joint_covariance, own_covariance
from stdfit.validity.entry.error import rounded_up as round_up
from stdfit.validity.kit import Definition, Kit, curve, misfit_at
from stdfit.writing.plain_names import as_ascii, file_names

POINTS = 201
"""Points of the grid where none are asked for."""

STANDARDS = "standards.csv"
STANDARD_COLUMNS = (
    "standard",
    "frequency_hz",
    "gamma_re",
    "gamma_im",
    "var_re",
    "var_im",
    "cov_re_im",
    "misfit",
    "bound",
    "degrees_of_freedom",
)

JOINT = "joint-covariance.csv"
JOINT_COLUMNS = ("frequency_hz", "standard", "part", "other_standard", "other_part", "covariance")

HEADER_ROWS = 9
"""Frequencies at which the head of a Touchstone file gives the bound."""


def common_band(kit: Kit) -> tuple[float, float]:
    """Return the band in which all standards of a kit were read, in Hz.

    Raises
    ------
    RequestError
        There is none.
    """
    low = max(one.read_low_hz for one in kit.definitions)
    top = min(one.read_top_hz for one in kit.definitions)
    if not low < top:
        raise RequestError(
            "the readings of the standards have no band in common", "name the frequencies with --at"
        )
    return low, top


def export_grid(
    kit: Kit,
    *,
    low_hz: float | None = None,
    top_hz: float | None = None,
    points: int = POINTS,
    logarithmic: bool = False,
) -> FloatArray:
    """Return rising frequencies, by default from the first to the last common reading of all standards.

    Parameters
    ----------
    kit : Kit
    low_hz, top_hz : float, optional
        Ends in Hz.
    points : int
        At least 2.
    logarithmic : bool
        Equal ratios of frequencies, instead of equal steps.

    Raises
    ------
    RequestError
        The ends make no band or lie outside the readings of a standard, or the points are no grid.
    """
    if low_hz is None or top_hz is None:
        low, top = common_band(kit)
        low_hz, top_hz = low if low_hz is None else low_hz, top if top_hz is None else top_hz
    if not 0.0 < low_hz < top_hz < math.inf:
        raise RequestError(
            f"there is no band from {low_hz:.10g} to {top_hz:.10g} Hz",
            "start above 0 Hz, and end above the start",
        )
    for definition in kit.definitions:  # refuse the end that was asked for, not some point before it
        curve(kit, definition, np.array([low_hz, top_hz]))
    if points < 2:
        raise RequestError(
            "a grid with two ends has at least two points", "name a single frequency with --at"
        )
    spaced = np.geomspace if logarithmic else np.linspace
    grid = spaced(low_hz, top_hz, points)
    if not (np.diff(grid) > 0.0).all():
        raise RequestError(f"the band is too narrow for {points} points", "ask for fewer")
    return np.asarray(grid)


def export_files(kit: Kit, frequency_hz: FloatArray) -> dict[str, str]:
    """Return the text of each file of an export, by its name.

    Parameters
    ----------
    kit : Kit
    frequency_hz : array of shape (n,)
        Taken in rising order, each once.

    Raises
    ------
    RequestError
        There is no frequency, or one lies outside the readings of a standard or too close to zero.
    """
    grid = np.unique(np.asarray(frequency_hz, dtype=float))
    if grid.size == 0:
        raise RequestError("there is no frequency to export", "name one or more")
    files, rows = {}, []
    for definition, name in zip(kit.definitions, file_names(kit), strict=True):
        gamma, bound = curve(kit, definition, grid)
        files[name] = touchstone_text(kit, definition, grid, gamma, bound)
        rows += _standard_rows(kit, definition, grid, gamma, bound)
    files[STANDARDS] = _csv(STANDARD_COLUMNS, rows)
    files[JOINT] = _csv(JOINT_COLUMNS, _joint_rows(kit, grid))
    return files


def touchstone_text(
    kit: Kit, definition: Definition, frequency_hz: FloatArray, gamma: ComplexArray, bound: FloatArray
) -> str:
    """Return a Touchstone 1 file of one standard: hertz, real and imaginary part, bound and limit as comments.

    Comments are ASCII, as the format asks for.
    """
    limit = definition.limit
    places = np.unique(np.linspace(0, frequency_hz.size - 1, HEADER_ROWS).round().astype(int))
    head = [
        f"kit: {kit.name}",
        f"standard: {definition.name} ({definition.kind})",
        f"connector: {kit.connector or 'not named'}",
        f"kit made: {kit.created}, stdfit {kit.version}",
        f"limit: {math.floor(limit.limit_hz)} Hz within {limit.within:g}: {limit.reason}",
        *(f"warning: {warning}" for warning in kit.warnings),
        "bound: 95 % on the error of the reflection as a complex number, misfit included",
        f"covariances: {STANDARDS}, {JOINT}",
        "",
        "frequency_hz bound (at some of the frequencies)",
        *(f"{_plain(frequency_hz[k])} {rounded_up(float(bound[k]))}" for k in places),
    ]
    rows = [
        f"{_plain(f)} {_plain(g.real)} {_plain(g.imag)}" for f, g in zip(frequency_hz, gamma, strict=True)
    ]
    lines = [
        FIRST_LINE,
        *(f"! {as_ascii(line)}".rstrip() for line in head),
        f"# Hz S RI R {_plain(kit.reference_ohm)}",
        *rows,
    ]
    return "\n".join(lines) + "\n"


def rounded_up(value: float) -> str:
    """Return a bound with three digits, rounded up: a bound may not shrink.

    Examples
    --------
    >>> rounded_up(0.0123401), rounded_up(0.02), rounded_up(0.0)
    ('0.0124', '0.02', '0')
    """
    return f"{round_up(value, 3):.3g}" if 0.0 < value < math.inf else f"{value:g}"


def _standard_rows(
    kit: Kit, definition: Definition, grid: FloatArray, gamma: ComplexArray, bound: FloatArray
) -> list[list[object]]:
    covariance, freedom = own_covariance(kit, definition, grid)
    figures = np.column_stack(
        [grid, gamma.real, gamma.imag, covariance, misfit_at(definition, grid), bound, freedom]
    )
    return [[definition.name, *row] for row in figures.tolist()]


def _joint_rows(kit: Kit, grid: FloatArray) -> Iterable[list[object]]:
    """Yield the lower triangles: each pair of parts once."""
    labels = [(one.name, part) for one in kit.definitions for part in ("re", "im")]
    covariances = joint_covariance(kit, grid)
    for hertz, covariance in zip(grid.tolist(), covariances.tolist(), strict=True):
        for i, first in enumerate(labels):
            for j in range(i + 1):
                yield [hertz, *first, *labels[j], covariance[i][j]]


def _csv(names: Sequence[str], rows: Iterable[Sequence[object]]) -> str:
    stream = io.StringIO()
    writer = csv.writer(stream, lineterminator="\n")
    writer.writerow(names)
    writer.writerows(rows)
    return stream.getvalue()


def _plain(value: float) -> str:
    """Return a number with all its digits and nothing that is not needed.

    Examples
    --------
    >>> _plain(50.0), _plain(0.1)
    ('50', '0.1')
    """
    return repr(float(value)).removesuffix(".0")
