"""The whole path, from a bench file to a kit."""

import hashlib
from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from datetime import date
from importlib.metadata import PackageNotFoundError, version
from pathlib import Path

from stdfit.base.records import Sweep
from stdfit.data.bench import Bench, read_bench
from stdfit.data.readings import read_reading
from stdfit.pipeline.prepare import Prepared, prepare
from stdfit.pipeline.settle import choose_all, settle
from stdfit.validity.define import Settled, define
from stdfit.validity.kit import Kit, SourceFile
from stdfit.validity.limits import ladder, limits

Told = Callable[[str], None]


def fit_bench(
    path: Path | str | Bench,
    *,
    within: float | None = None,
    created: str | None = None,
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
    tell : callable, optional
        Is told in words what is being done.

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
    if tell:
        tell("reading")
    sweeps = {
        entry.name: [
            read_reading(file, port=entry.port, reference_ohm=bench.reference_ohm) for file in entry.files
        ]
        for entry in bench.standards
    }
    if tell:
        tell("fitting")
    files = tuple(
        SourceFile(
            entry.name, _relative(file, bench.path.parent), hashlib.sha256(file.read_bytes()).hexdigest()
        )
        for entry in bench.standards
        for file in entry.files
    )
    return characterise(bench, sweeps, files=files, created=created)


def characterise(
    bench: Bench,
    sweeps: Mapping[str, Sequence[Sweep]],
    *,
    files: tuple[SourceFile, ...] = (),
    created: str | None = None,
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

    Raises
    ------
    InputError, FitError
    """
    prepared = prepare(bench, sweeps)
    return kit_of(prepared, settle(prepared, choose_all(prepared)), files=files, created=created)


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
            warnings=prepared.warnings,
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
