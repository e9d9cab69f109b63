"""The whole path, from a bench file to a kit."""

import hashlib
from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from datetime import date
from importlib.metadata import PackageNotFoundError, version
from pathlib import Path

import numpy as np

from stdfit.base.errors import BenchError
from stdfit.base.records import Sweep
from stdfit.data.bench import Bench, read_bench
from stdfit.data.readings import read_reading
from stdfit.pipeline.prepare import Prepared, prepare
from stdfit.pipeline.settle import choose_all, settle
from stdfit.uncertainty.monte_carlo import compare_with_linear
from stdfit.validity.define import Settled, define, given_contradictions
from stdfit.validity.kit import Kit, SourceFile
from stdfit.validity.limits import ladder, limits
from stdfit.validity.linear_check import check_lines

Told = Callable[[int, int], None]

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
        Is told how many of the draws are done: (done, total).

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
    files = tuple(
        SourceFile(
            entry.name, _relative(file, bench.path.parent), hashlib.sha256(file.read_bytes()).hexdigest()
        )
        for entry in bench.standards
        for file in entry.files
    )
    kit = characterise(bench, sweeps, files=files, created=created, draws=draws, tell=tell)
    notes = [f"{Path(one.name).name}: {note}" for own in sweeps.values() for one in own for note in one.notes]
    return replace(kit, warnings=(*kit.warnings, *notes))


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
    return {
        entry.name: [
            read_reading(file, port=entry.port, reference_ohm=bench.reference_ohm) for file in entry.files
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
    prepared = prepare(bench, sweeps)
    settled = settle(prepared, choose_all(prepared))
    kit = kit_of(prepared, settled, files=files, created=created)
    if draws:
        rng = np.random.default_rng(CHECK_SEED)
        compared = compare_with_linear(settled.problem, settled.values, prepared.sources, draws, rng, tell)
        kit = replace(kit, checks=check_lines(compared, draws))
    return kit


def kit_of(
    prepared: Prepared, settled: Settled, *, files: tuple[SourceFile, ...] = (), created: str | None = None
) -> Kit:
    """Return the kit of a finished fit, with its limits."""
    bench = prepared.bench
    definitions, order, shares = define(settled)
    return with_limits(
        Kit(
            name=bench.name,
            connector=bench.connector,
            reference_ohm=bench.reference_ohm,
            within=bench.within,
            top_hz=prepared.family.top_hz,
            created=created or date.today().isoformat(),
            version=program_version(),
            limit=definitions[0].limit,
            definitions=definitions,
            order=order,
            shares=shares,
            ladder=(),
            files=files,
            warnings=(
                *prepared.warnings,
                *given_contradictions(settled),
            ),
        )
    )


def with_limits(kit: Kit) -> Kit:
    """Return the kit with its limits and its ladder worked out from the rest of it."""
    ((whole, each),) = limits(kit, [kit.within])
    definitions = tuple(
        replace(definition, limit=limit) for definition, limit in zip(kit.definitions, each, strict=True)
    )
    kit = replace(kit, limit=whole, definitions=definitions)
    return replace(kit, ladder=ladder(kit))


def program_version() -> str:
    """Return the version of the installed program."""
    try:
        return version("stdfit")
    except PackageNotFoundError:
        return "unknown"


def _relative(file: Path, folder: Path) -> str:
    """Return a path relative to the bench file where it lies below it, else the name alone."""
    try:
        return file.resolve().relative_to(folder.resolve()).as_posix()
    except ValueError:
        return file.name
