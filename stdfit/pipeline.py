"""From a bench to a kit: the one path that library users and the command share."""

import hashlib
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace
from datetime import date
from importlib.metadata import PackageNotFoundError, version
from pathlib import Path

import numpy as np

from stdfit.base.arrays import FloatArray, frozen_float
from stdfit.base.errors import FitError, ReadingError, RequestError
from stdfit.base.records import Sweep
from stdfit.circuits.connectors import Family, family_of
from stdfit.data.bench import Bench, StatedResidual, read_bench
from stdfit.data.readings import read_reading
from stdfit.data.verify import verify_standards
from stdfit.fitting.observed import Observed, noise_of, without_delay
from stdfit.fitting.roles import Wish, build_problem, places_of, starting_values
from stdfit.fitting.screen import screen_points
from stdfit.fitting.solve import least_squares
from stdfit.uncertainty.budget import Share, shares_of
from stdfit.uncertainty.connections import Repeatability, assumed_repeatability, pooled_repeatability
from stdfit.uncertainty.outlying import without_outlying
from stdfit.uncertainty.push import push
from stdfit.uncertainty.sources import Source, analyser_sources, connection_sources, reading_variance
from stdfit.validity.choose import Choice, choose, thin, weights_for
from stdfit.validity.define import Settled, define
from stdfit.validity.kit import Definition, Kit, SourceFile
from stdfit.validity.limits import ladder, limits
from stdfit.validity.misfit import expected_power, misfit

ASSUMED_RESIDUAL = StatedResidual(
    frequency_hz=frozen_float([1e9, 6e9]),
    directivity=frozen_float([10 ** (-36 / 20), 10 ** (-32 / 20)]),
    source_match=frozen_float([10 ** (-34 / 20), 10 ** (-28 / 20)]),
    reflection_tracking=frozen_float([10 ** (0.1 / 20) - 1, 10 ** (0.2 / 20) - 1]),
)
"""Residuals that are assumed where a bench states none: those of an analyser corrected with a kit of modest,
unverified standards (common practice, no source)."""

MISFIT_POINTS = 200
"""About how many values of the misfit a kit keeps for each standard."""

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
    if bench.state != "corrected":
        raise RequestError(
            "the bench holds raw readings, and this version takes corrected ones",
            'correct the readings with the analyser\'s own calibration and set state = "corrected"',
            file=bench.path,
            key="analyser.state",
        )
    if not 0.0 < bench.within < 1.0:
        raise RequestError("the tolerance must lie between 0 and 1", "try 0.02", key="within")
    warnings = list(
        verify_standards({entry.name: (entry.kind, sweeps[entry.name]) for entry in bench.standards})
    )
    observed, left_out = _observe(bench, sweeps)
    wishes = [
        Wish({name: (given.value, given.u) for name, given in entry.given.items()}, entry.same_offset_as)
        for entry in bench.standards
    ]
    family = family_of(bench.connector)
    scatter = _repeatability(observed, family, bench.reference_ohm)
    residual = bench.residual if bench.residual is not None else ASSUMED_RESIDUAL
    sources = analyser_sources(observed, residual) + connection_sources(
        observed, scatter, bench.reference_ohm
    )
    warnings += left_out + _cautions(bench, observed, scatter, family)

    choices = _choose_all(bench, observed, wishes, sources)
    settled = settle(bench, observed, wishes, sources, choices)
    kit = Kit(
        name=bench.name,
        connector=bench.connector,
        reference_ohm=bench.reference_ohm,
        within=bench.within,
        top_hz=family.top_hz,
        created=created or date.today().isoformat(),
        version=program_version(),
        limit=settled.definitions[0].limit,
        definitions=settled.definitions,
        order=settled.order,
        shares=settled.shares,
        ladder=(),
        files=files,
        warnings=tuple(warnings),
    )
    return with_limits(kit)


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


def _observe(bench: Bench, sweeps: Mapping[str, Sequence[Sweep]]) -> tuple[list[Observed], list[str]]:
    """Reduce the readings of each standard; leave out what does not belong, and say so."""
    observed, told = [], []
    for entry in bench.standards:
        grid = sweeps[entry.name][0].frequency_hz
        inside = grid > 0.0
        if bench.highest_hz is not None:
            inside &= grid <= bench.highest_hz
        if np.count_nonzero(inside) < 8:
            raise ReadingError(
                f"fewer than 8 readings of '{entry.name}' lie in the band that is asked for",
                "raise goal.highest_hz or take more points",
                file=sweeps[entry.name][0].name,
            )
        readings = np.array([sweep.gamma[inside] for sweep in sweeps[entry.name]])
        screened = screen_points(grid[inside], readings)
        for sweep, row in zip(sweeps[entry.name], screened.replaced, strict=True):
            if row.any():
                told.append(_single_points(sweep.name, grid[inside][row]))
        observed.append(Observed.from_readings(entry.name, entry.kind, grid[inside], screened.readings))
    kept, left_out = without_outlying(observed, bench.reference_ohm)
    for s, k, distance in left_out:
        name = sweeps[bench.standards[s].name][k].name
        told.append(
            f"{name}: this connection lies {distance:.2g} from the others, far beyond their scatter, and is left out. "
            "Clean and tighten, and read it again."
        )
    return kept, told


def _single_points(name: str, frequencies: FloatArray) -> str:
    """Say which single points were left out."""
    some = ", ".join(f"{f / 1e9:.4g}" for f in frequencies[:4]) + (", …" if frequencies.size > 4 else "")
    return (
        f"{name}: {frequencies.size} single point{'s' if frequencies.size > 1 else ''} ({some} GHz) left out: "
        "off from their neighbours in this connection alone, as beside an analyser's band edges"
    )


def _repeatability(observed: Sequence[Observed], family: Family, reference_ohm: float) -> Repeatability:
    """Measure how connections scatter, or assume it where nothing was connected twice."""
    if any(one.connections > 1 for one in observed):
        return pooled_repeatability(observed, reference_ohm)
    noise = float(np.median([noise_of(without_delay(one.frequency_hz, one.gamma)) for one in observed]))
    return assumed_repeatability(observed, family.repeatability, np.inf, noise)


def _cautions(
    bench: Bench, observed: Sequence[Observed], scatter: Repeatability, family: Family
) -> list[str]:
    """Say loudly what had to be assumed."""
    cautions = []
    if bench.residual is None:
        cautions.append(
            "no analyser residuals are stated: those of a modest calibration are assumed "
            "(36 … 32 dB directivity, 34 … 28 dB source match, 0.1 … 0.2 dB tracking; common practice, no source). "
            "State yours under [analyser.residual]."
        )
    if not scatter.measured:
        resistance, shift, _ = family.repeatability
        cautions.append(
            f"one connection of each standard says nothing about how well it repeats: {1e3 * resistance:.0f} mΩ and "
            f"{shift:g} ps (one standard deviation) are assumed (common practice, no source). "
            "Connect each standard at least three times."
        )
    elif any(one.connections == 1 for one in observed):
        names = ", ".join(one.name for one in observed if one.connections == 1)
        cautions.append(
            f"one connection only of {names}: the scatter of the other standards is taken for it."
        )
    if family.name == "":
        cautions.append(
            f"the connector '{bench.connector}' is not in the table of families: no limit is set by its next mode."
        )
    return cautions


def _choose_all(
    bench: Bench, observed: Sequence[Observed], wishes: Sequence[Wish], sources: Sequence[Source]
) -> list[Choice]:
    """Choose order and range of each standard, owners of a shared offset line first."""
    choices: dict[str, Choice] = {}
    by_name = {entry.name: k for k, entry in enumerate(bench.standards)}

    def settle_one(name: str) -> Choice:
        if name in choices:
            return choices[name]
        k = by_name[name]
        wish = wishes[k]
        if wish.same_offset_as is not None:
            wish = replace(wish, given={**settle_one(wish.same_offset_as).offset, **wish.given})
        thinned, alone = thin(observed[k], sources, k)
        choices[name] = choose(
            thinned, alone, wish, bench.standards[k].polynomial, bench.within, bench.reference_ohm
        )
        return choices[name]

    return [settle_one(entry.name) for entry in bench.standards]


@dataclass(frozen=True, slots=True, eq=False)
class Characterised:
    """Definitions with their joint covariance, in trade units."""

    definitions: tuple[Definition, ...]
    order: tuple[str, ...]
    shares: tuple[Share, ...]


def settle(
    bench: Bench,
    observed: Sequence[Observed],
    wishes: Sequence[Wish],
    sources: Sequence[Source],
    choices: Sequence[Choice],
) -> Characterised:
    """Fit all standards jointly over the chosen ranges and push every source through the fit."""
    weights = [
        np.where(one.frequency_hz <= choice.top_hz, weights_for(sources, k, one.frequency_hz.size), 0.0)
        for k, (one, choice) in enumerate(zip(observed, choices, strict=True))
    ]
    shapes = [choice.shape for choice in choices]
    starts = starting_values(observed, bench.reference_ohm)
    problem = build_problem(observed, wishes, shapes, weights, starts, bench.reference_ohm)
    target, precision = problem.evidence()
    solution = least_squares(problem.residual, problem.jacobian, target)
    if not np.isfinite(solution.values).all():
        raise FitError("the fit did not settle on finite values", "look at the readings of the standards")
    values = problem.expand(solution.values)
    bounded = [
        i
        for i in problem.fitted
        if problem.quantities[i].parameter.name == "offset_loss_gohm_per_s" and values[i] < 0.0
    ]
    if bounded:
        held = problem
        for i in bounded:
            held = held.changed(i, role="held", value=0.0)
        start, _ = held.evidence()
        solution = least_squares(held.residual, held.jacobian, start)
        values = held.expand(solution.values)

    span = (
        min(float(one.frequency_hz[0]) for one in observed),
        max(float(one.frequency_hz[-1]) for one in observed),
    )
    models = [problem.model(k, values) for k in range(len(observed))]
    pushed = [
        push(design, weight, one.gamma - gamma, one.frequency_hz, span, sources, k, [one.frequency_hz.size])
        for k, ((gamma, design), weight, one) in enumerate(zip(models, weights, observed, strict=True))
    ]
    inverse, stacked = shares_of(pushed, sources, precision, places_of(problem))
    shares = [replace(share, covariances=share.covariances[:, 0]) for share in stacked]
    misfits = []
    for k, ((gamma, design), one) in enumerate(zip(models, observed, strict=True)):
        points = slice(None, None, max(1, one.frequency_hz.size // MISFIT_POINTS))
        f = one.frequency_hz[points]
        expected = expected_power(design[points], f, points, span, sources, pushed, inverse, k)
        misfits.append(
            (
                f,
                misfit(
                    one.gamma - gamma,
                    one.frequency_hz,
                    float(reading_variance(sources, k)[1]),
                    expected,
                    points,
                )[0],
            )
        )
    return Characterised(
        *define(
            Settled(problem, values, tuple(bounded), solution, tuple(shares), tuple(choices), tuple(misfits))
        )
    )
