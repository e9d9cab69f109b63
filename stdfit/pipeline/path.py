"""The whole path, from a bench file to a kit."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from pathlib import Path

import numpy as np

from stdfit.base.errors import BenchError, RequestError
from stdfit.base.records import Sweep
from stdfit.data.bench import Bench, read_bench
from stdfit.data.ordinary import digest
from stdfit.data.readings import read_reading
from stdfit.data.soundness import HIGHEST_MAGNITUDE
from stdfit.pipeline.adapters.brought import refuse_behind
from stdfit.pipeline.adapters.known import thru_of
from stdfit.pipeline.drawn import drawing_notes, drawn_contradictions, with_drawings
from stdfit.pipeline.finished import finished, program_version, with_limits
from stdfit.pipeline.kept_readings import session_of
from stdfit.pipeline.prepare import Prepared, analyser_told, prepare
from stdfit.pipeline.raw.inherited import never_surer
from stdfit.pipeline.raw.referenced import prepare_referenced
from stdfit.pipeline.raw.references import FEWEST, count_references
from stdfit.pipeline.raw.unreferenced import characterise_unreferenced
from stdfit.pipeline.settle import choose_all, settle
from stdfit.uncertainty.monte_carlo import compare_with_linear
from stdfit.validity.define import Settled, define, given_contradictions
from stdfit.validity.kit import ADAPTER, DRAWING, Kit, SourceFile
from stdfit.validity.linear_check import check_lines

__all__ = [
    "characterise",
    "fit_bench",
    "kit_of",
    "prepare_bench",
    "program_version",
    "read_sweeps",
    "with_limits",
]

Told = Callable[[int, int], None]

HIGHEST_RAW = 10.0
"""Largest |m| of a raw reading: receivers without any correction may be of unequal gain."""

CHECK_SEED = 1
"""The check draws the same numbers every time, so that a kit can be made again."""


def fit_bench(
    path: Path | str | Bench,
    *,
    within: float | None = None,
    created: str | None = None,
    draws: int = 0,
    tell: Told | None = None,
) -> Kit:
    """Read a bench file with all its readings and characterise the kit.

    Parameters
    ----------
    path : path
        A bench file, a folder that holds one, or a bench that was read already.
    within : float, optional
        Tolerance on |error of Γ| instead of the bench file's.
    created : str, optional
        Date to write into the kit; today's by default.
    draws : int
        Draws of a Monte Carlo check of the linear bounds; 0 for none.
    tell : callable, optional
        Is told how many are done: (done, total), of the draws, of the ranges that are fitted without references, or
        else of the orders of all standards.

    Raises
    ------
    InputError
        Something in the bench or in the readings is wrong.
    FitError
        No fit came out of sound readings.
    """
    bench = path if isinstance(path, Bench) else read_bench(path)
    if within is not None:
        bench = replace(bench, within=within)
    sweeps = read_sweeps(bench)
    kit = characterise(bench, sweeps, files=source_files(bench), created=created, draws=draws, tell=tell)
    notes = [f"{Path(one.name).name}: {note}" for own in sweeps.values() for one in own for note in one.notes]
    return replace(kit, warnings=(*kit.warnings, *notes), thru=thru_of(bench))


def source_files(bench: Bench) -> tuple[SourceFile, ...]:
    """Return the files of readings, drawings and adapters that a bench names, with their digests."""
    named = [(entry.name, file) for entry in bench.standards for file in entry.files]
    named += [
        (f"{DRAWING}{entry.name}", entry.from_drawing.file) for entry in bench.standards if entry.from_drawing
    ]
    named += [(f"{ADAPTER}{one.name}", one.file) for one in bench.adapters if one.file is not None]
    return tuple(SourceFile(whose, _relative(file, bench.path.parent), digest(file)) for whose, file in named)


def read_sweeps(bench: Bench) -> dict[str, list[Sweep]]:
    """Read all readings of a bench.

    Raises
    ------
    InputError
        A standard without readings, or readings that are not sound.
    """
    for entry in bench.standards:
        if not entry.files:
            raise BenchError(
                f"'{entry.name}' has no readings yet",
                "name them; before they exist, 'stdfit plan' predicts what they will give",
                file=bench.path,
                key=f"standard[{entry.name}].readings",
            )
    highest = HIGHEST_RAW if bench.state == "raw" else HIGHEST_MAGNITUDE
    return {
        entry.name: [
            read_reading(file, port=entry.port, reference_ohm=bench.reference_ohm, highest_magnitude=highest)
            for file in entry.files
        ]
        for entry in bench.standards
    }


def characterise(
    bench: Bench,
    sweeps: Mapping[str, Sequence[Sweep]],
    *,
    files: tuple[SourceFile, ...] = (),
    created: str | None = None,
    draws: int = 0,
    tell: Told | None = None,
) -> Kit:
    """Turn readings into a kit.

    Parameters
    ----------
    bench : Bench
        What was measured, and with what.
    sweeps : mapping
        For each standard of the bench, one sweep for each connection, at the bench's reference impedance.
    files : tuple of SourceFile
        Where the readings came from.
    created : str, optional
        Date to write into the kit.
    draws, tell
        As for `fit_bench`.

    Raises
    ------
    InputError, FitError
    """
    if has_few_references(bench):
        refuse_behind(bench)
        if draws:
            raise too_few_references(bench)
        bench = with_drawings(bench, sweeps)
        kit = characterise_unreferenced(bench, sweeps, files=files, created=created, tell=tell)
        return replace(kit, warnings=(*kit.warnings, *drawing_notes(bench)))
    prepared = prepare_bench(bench, sweeps)
    settled = settle(prepared, choose_all(prepared, None if draws else tell))
    kit = kit_of(prepared, settled, files=files, created=created)
    kit = replace(
        kit,
        warnings=(*kit.warnings, *drawing_notes(prepared.bench), *drawn_contradictions(prepared, settled)),
    )
    if draws:
        rng = np.random.default_rng(CHECK_SEED)
        compared = compare_with_linear(settled.problem, settled.values, prepared.sources, draws, rng, tell)
        kit = replace(kit, checks=check_lines(compared, draws))
    return kit


def prepare_bench(bench: Bench, sweeps: Mapping[str, Sequence[Sweep]]) -> Prepared:
    """Return a bench ready to be fitted; raw readings are corrected with their known standards first.

    Parameters
    ----------
    bench, sweeps
        As for `characterise`.

    Raises
    ------
    InputError
    """
    if has_few_references(bench):
        raise too_few_references(bench)
    bench = with_drawings(bench, sweeps)
    if bench.state == "corrected":
        return prepare(bench, sweeps)
    return prepare_referenced(bench, sweeps)


def has_few_references(bench: Bench) -> bool:
    """Tell whether readings are raw and too few standards known to correct them: error terms are then eliminated."""
    return bench.state == "raw" and count_references(bench) < FEWEST


def too_few_references(bench: Bench) -> RequestError:
    """Return what is said where raw readings would have to be corrected first, and cannot be."""
    return RequestError(
        f"fewer than three known standards ({count_references(bench)}) among raw readings",
        "'stdfit fit' takes such a bench, without --monte-carlo; a plan or that check needs three standards from a kit",
        file=bench.path,
        key="standard",
    )


def kit_of(
    prepared: Prepared, settled: Settled, *, files: tuple[SourceFile, ...] = (), created: str | None = None
) -> Kit:
    """Return the kit of a finished fit, with its limits."""
    definitions, order, shares = define(settled)
    kit = finished(
        prepared.bench,
        prepared.family.top_hz,
        definitions,
        order,
        shares,
        warnings=(*prepared.warnings, *given_contradictions(settled)),
        files=files,
        created=created,
    )
    kit = replace(
        kit, ancestors=prepared.ancestors, session=session_of(prepared), analyser=analyser_told(prepared)
    )
    return never_surer(kit, prepared)


def _relative(file: Path, folder: Path) -> str:
    """Return a path relative to the bench file where it lies below it, else the name alone."""
    try:
        return file.resolve().relative_to(folder.resolve()).as_posix()
    except ValueError:
        return file.name
