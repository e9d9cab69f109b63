"""From a bench of known standards behind an adapter to the adapter."""

from collections.abc import Mapping, Sequence
from dataclasses import replace
from datetime import date
from pathlib import Path

import numpy as np
import numpy.typing as npt

from stdfit.base.arrays import FloatArray
from stdfit.base.errors import ReadingError
from stdfit.base.records import Sweep
from stdfit.circuits.connectors import family_of
from stdfit.circuits.error_box import corrected
from stdfit.circuits.reference_map import quadratic_terms
from stdfit.circuits.two_port import product_of, s_by_terms
from stdfit.data.bench import Bench, read_bench
from stdfit.data.verify import verify_standards
from stdfit.fitting.observed import Observed
from stdfit.fitting.screen import screen_points
from stdfit.fitting.unknown_box import fitted_box
from stdfit.pipeline.adapters.bench import cautions, check_bench, known_standards, not_passive
from stdfit.pipeline.adapters.errors import adapter_sources, covariance_of_terms
from stdfit.pipeline.adapters.line import line_terms
from stdfit.pipeline.finished import program_version
from stdfit.pipeline.path import read_sweeps, source_files
from stdfit.pipeline.prepare import ASSUMED_RESIDUAL, repeatability, scatter_cautions, single_points
from stdfit.pipeline.raw.agreement import disagreements
from stdfit.pipeline.raw.correction import SUREST, SolvedSet
from stdfit.pipeline.raw.references import Reference, stacked
from stdfit.uncertainty.outlying import without_outlying
from stdfit.validity.adapter import Adapter, bounds_of, carried
from stdfit.validity.adapter_sign import signed_root
from stdfit.validity.ancestry import Origin, ancestors_by, distinct

FEWEST_POINTS = 8
"""Readings that must lie in the band in which the adapter can be determined."""

KEPT_POINTS = 200
"""About how many frequencies an adapter file keeps the covariance at."""

TOO_UNSURE = 0.2
"""Where the known standards leave more open in a full reflection, as root mean square over its phases, the band ends:
there first order no longer holds."""

Rows = dict[str, npt.NDArray[np.complex128]]
"""Readings of each standard by name, shape (k, n): one row for each connection."""


def determine_adapter(path: Path | str | Bench, *, created: str | None = None) -> Adapter:
    """Read a bench of known standards behind an adapter, with all its readings, and determine the adapter.

    Parameters
    ----------
    path : path
        A bench file, a folder that holds one, or a bench that was read already.
    created : str, optional
        Date to write; today's by default.

    Raises
    ------
    InputError
        Something in the bench or in the readings is wrong.
    FitError
        The sign of S21 cannot be told.
    """
    bench = path if isinstance(path, Bench) else read_bench(path)
    check_bench(bench)
    sweeps = read_sweeps(bench)
    found = adapter_from(bench, sweeps, created=created)
    notes = [f"{Path(one.name).name}: {note}" for own in sweeps.values() for one in own for note in one.notes]
    return replace(found, files=source_files(bench), warnings=(*found.warnings, *notes))


def adapter_from(
    bench: Bench,
    sweeps: Mapping[str, Sequence[Sweep]],
    *,
    created: str | None = None,
    origins: Mapping[Path, Origin] | None = None,
) -> Adapter:
    """Turn readings of known standards behind an adapter into the adapter.

    Γin = S11 + S21²·Γ/(1 − S22·Γ) is what an analyser without correction does to Γ, with a = S11, b = S21² − S11·S22
    and c = S22: solved from three known standards, by weighted least squares from more.

    Parameters
    ----------
    bench : Bench
    sweeps : mapping
        For each standard, one sweep for each connection; all on one grid.
    created : str, optional
    origins : mapping, optional
        Kits that were read already, by the path under which the bench names them.

    Raises
    ------
    InputError, FitError
    """
    entry, references, zr = check_bench(bench), known_standards(bench, origins), bench.reference_ohm
    # Seen through an adapter a standard may have any phase: only grids and doubles are checked.
    verify_standards({one.name: (one.kind, sweeps[one.name]) for one in bench.standards}, state="raw")
    f, rows, warnings = _in_band(bench, references, sweeps)
    family = family_of(bench.connector)
    apart = without_outlying(
        _in_own_plane(references, f, rows, _solved(references, f, rows)), zr, family.repeatability
    )[1]
    for place, k, distance in apart:
        name = bench.standards[place].name
        rows[name] = np.delete(rows[name], k, axis=0)
        warnings.append(
            f"{sweeps[name][k].name}: this connection lies {distance:.2g} from the others, far beyond their scatter, "
            "and is left out. Clean and tighten, and read it again."
        )
    solved = _solved(references, f, rows)
    known = _in_own_plane(references, f, rows, solved)
    scatter = repeatability(known, family, zr)
    product = product_of(solved.box)
    root = np.stack([solved.box[:, 0], np.sqrt(product), solved.box[:, 2]], axis=-1)
    covariance, freedom = covariance_of_terms(
        adapter_sources(
            references,
            known,
            [replace(one, gamma=rows[one.name].mean(axis=0)) for one in known],
            quadratic_terms(solved.known, solved.bound),
            solved.box,
            bench.residual if bench.residual is not None else ASSUMED_RESIDUAL,
            scatter,
            zr,
        )
    )
    # An error of S21 turns its phase by at most its part of |S21|, whichever root it is of.
    turned = bounds_of(carried(covariance, s_by_terms(root)), freedom)[:, 1] / np.abs(root[:, 1])
    s21 = signed_root(product, f, turned, entry.delay_ps, entry.name)
    s = np.stack([root[:, 0], s21, root[:, 2]], axis=-1)
    warnings += disagreements(references, known, (solved,), scatter, zr)
    warnings += scatter_cautions(known, scatter, family, bench.connector) + cautions(bench, references)
    kept = np.unique(np.append(np.arange(0, f.size, max(1, f.size // KEPT_POINTS)), f.size - 1))
    found = Adapter(
        name=entry.name,
        reference_ohm=zr,
        created=created or date.today().isoformat(),
        version=program_version(),
        frequency_hz=f,
        s=s,
        known_hz=f[kept],
        covariance=covariance[kept],
        freedom=freedom,
        line=line_terms(s, covariance, freedom, f, zr),
        ancestors=ancestors_by(distinct([one.origin for one in references])),
    )
    return replace(found, warnings=(*warnings, *not_passive(found)))


def _solved(references: Sequence[Reference], frequency_hz: FloatArray, rows: Rows) -> SolvedSet:
    """Return the error terms that the adapter stands for."""
    known, bound = stacked(references, frequency_hz)
    bound = np.maximum(bound, SUREST)
    read = np.stack([rows[one.entry.name].mean(axis=0) for one in references], axis=1)
    box = fitted_box(known, read, bound**-2.0)
    places = tuple(range(len(references)))
    return SolvedSet("", places, known, bound, corrected(box[:, None], read), box)


def _in_own_plane(
    references: Sequence[Reference], frequency_hz: FloatArray, rows: Rows, solved: SolvedSet
) -> list[Observed]:
    """Return the known standards as they read once the adapter is removed."""
    return [
        Observed.from_readings(
            one.entry.name, one.entry.kind, frequency_hz, corrected(solved.box, rows[one.entry.name])
        )
        for one in references
    ]


def _in_band(
    bench: Bench, references: Sequence[Reference], sweeps: Mapping[str, Sequence[Sweep]]
) -> tuple[FloatArray, Rows, list[str]]:
    """Return the band that can be used, the connections of each standard in it, and what was left out in words."""
    first = sweeps[bench.standards[0].name][0]
    grid = first.frequency_hz
    inside = (grid > 0.0) & (grid <= (bench.highest_hz or np.inf))
    known_to = min(one.definition.read_top_hz for one in references)
    told = []
    if (grid[inside] > known_to).any():
        told.append(
            f"the readings above {known_to / 1e9:.4g} GHz are left out: no higher are all standards known"
        )
    inside &= grid <= known_to
    sure = _sure(references, grid[inside])
    if not sure.all():
        edges = grid[inside][sure]
        band = (
            f"only {edges[0] / 1e9:.4g} to {edges[-1] / 1e9:.4g} GHz is used"
            if edges.size
            else "nothing is used"
        )
        told.append(
            f"{band}: elsewhere two of the known standards reflect nearly the same, or are hardly known"
        )
    inside[inside] = sure
    if np.count_nonzero(inside) < FEWEST_POINTS:
        raise ReadingError(
            f"fewer than {FEWEST_POINTS} readings lie in the band in which three different standards are known",
            "sweep lower, or take an open, a short and a load that are known further up",
            file=first.name,
        )
    rows = {}
    for entry in bench.standards:
        screened = screen_points(
            grid[inside], np.array([sweep.gamma[inside] for sweep in sweeps[entry.name]])
        )
        rows[entry.name] = screened.readings
        told += [
            single_points(sweep.name, grid[inside][row])
            for sweep, row in zip(sweeps[entry.name], screened.replaced, strict=True)
            if row.any()
        ]
    return grid[inside], rows, told


def _sure(references: Sequence[Reference], frequency_hz: FloatArray) -> npt.NDArray[np.bool_]:
    """Return where the terms of the adapter are fixed: the longest run of frequencies without a gap."""
    if frequency_hz.size == 0:
        return np.zeros(0, dtype=bool)
    known, bound = stacked(references, frequency_hz)
    with np.errstate(all="ignore"):
        taken = np.abs(quadratic_terms(known, np.maximum(bound, SUREST))) * bound[:, None]
        fixed = np.sqrt((taken**2).sum(axis=(1, 2))) <= TOO_UNSURE
    edges = np.flatnonzero(np.diff(np.concatenate([[False], fixed, [False]]).astype(int)))
    runs = list(zip(edges[::2], edges[1::2], strict=True))
    longest = max(runs, key=lambda run: run[1] - run[0], default=(0, 0))
    places = np.arange(fixed.size)
    return np.asarray((places >= longest[0]) & (places < longest[1]))
