"""Raw readings against three or more known standards: corrected with these, then fitted like corrected readings."""

from collections.abc import Mapping, Sequence
from dataclasses import replace
from pathlib import Path

import numpy as np
import numpy.typing as npt

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.base.errors import ReadingError, RequestError
from stdfit.base.records import Sweep
from stdfit.data.bench import Bench
from stdfit.data.verify import verify_standards
from stdfit.fitting.observed import Observed
from stdfit.fitting.roles import Wish
from stdfit.fitting.screen import screen_points
from stdfit.pipeline.adapters.acting import adapter_sources_on
from stdfit.pipeline.adapters.brought import in_own_planes
from stdfit.pipeline.adapters.known import adapter_ancestors, adapter_cautions, shared_cautions
from stdfit.pipeline.adapters.planes import planes_of
from stdfit.pipeline.ceiling import family_on
from stdfit.pipeline.prepare import CORRECTED_HERE, Prepared, repeatability, scatter_cautions, single_points
from stdfit.pipeline.raw.agreement import disagreements
from stdfit.pipeline.raw.correction import Readings, by_set, observe, solve_sets, unsureness
from stdfit.pipeline.raw.known_standards import known_cautions
from stdfit.pipeline.raw.references import Reference, references_of, sets_of
from stdfit.pipeline.raw.sources import drift_sources, kit_sources, reading_sources, weights_on
from stdfit.uncertainty.outlying import without_outlying
from stdfit.uncertainty.sources import connection_sources
from stdfit.validity.ancestry import Origin, ancestors_by, distinct

FEWEST_POINTS = 8
"""Readings that must lie in the band in which all references are known."""

TOO_UNSURE = 0.2
"""Readings that the references may put off by more are left out: there first order no longer holds."""

SURE = 0.05
"""Only where the references put readings off by less are these asked whether they can be what they are called."""


def prepare_referenced(
    bench: Bench, sweeps: Mapping[str, Sequence[Sweep]], origins: Mapping[Path, Origin] | None = None
) -> Prepared:
    """Correct raw readings with their references, and gather the sources of error of what comes out.

    Parameters
    ----------
    bench : Bench
        With three or more standards from kit files.
    sweeps : mapping
        For each standard, one raw sweep for each connection; all on one grid.
    origins : mapping, optional
        Kits that were read already, by the path under which the bench names them.

    Returns
    -------
    Prepared
        Of the other standards alone.

    Raises
    ------
    InputError
        The references cannot serve, or the readings cannot be what they are called.
    """
    references, planes = references_of(bench, origins), planes_of(bench)
    verify_standards({one.name: (one.kind, sweeps[one.name]) for one in bench.standards}, state="raw")
    inside, warnings = _common_band(bench, references, sweeps)
    family, zr = family_on(bench), bench.reference_ohm
    f = sweeps[bench.standards[0].name][0].frequency_hz[inside]
    raw = {
        entry.name: np.array([sweep.gamma[inside] for sweep in sweeps[entry.name]])
        for entry in bench.standards
    }
    solved = solve_sets(references, f, raw)
    known, others = observe(bench, references, solved, f, raw)
    unsure = unsureness(others, solved)
    kept = unsure <= TOO_UNSURE
    warnings += _gaps(bench, f, kept)
    f, unsure, raw = f[kept], unsure[kept], {name: own[:, kept] for name, own in raw.items()}

    known, others = observe(bench, references, solve_sets(references, f, raw), f, raw)
    passages = [planes.passage(one.name, f) for one in others]
    warnings += verify_standards(_as_sweeps(in_own_planes(others, passages), sweeps, zr, unsure <= SURE))
    raw, told = _without_single_points([*known, *others], raw, sweeps, unsure <= SURE)
    warnings += told
    known, others = observe(bench, references, solve_sets(references, f, raw), f, raw)
    raw, told = _without_outlying(
        [*known, *in_own_planes(others, passages)], raw, sweeps, zr, family.repeatability
    )
    warnings += told
    solved = solve_sets(references, f, raw)
    known, corrected = observe(bench, references, solved, f, raw)
    others = in_own_planes(corrected, passages)

    scatter = repeatability([*known, *others], family, zr)
    of_known = replace(scatter, leftover=scatter.leftover[: len(known)])
    of_others = replace(scatter, leftover=scatter.leftover[len(known) :])
    weights = [
        weight * own.slopes(np.asarray(one.gamma))[0][:, None]
        for weight, own, one in zip(
            weights_on(corrected, solved, len(references)), passages, others, strict=True
        )
    ]
    drift = drift_sources(
        [own.on(each) for own, each in zip(passages, by_set(corrected, solved, raw), strict=True)]
    )
    warnings += disagreements(references, known, solved, of_known, zr)
    warnings += scatter_cautions([*known, *others], scatter, family, bench.connector)
    warnings += _reference_cautions(references) + adapter_cautions(bench, planes.in_use)
    warnings += shared_cautions(planes.in_use, {root for one in references for root in one.origin.roots})
    entries = tuple(entry for entry in bench.standards if entry.from_kit is None)
    return Prepared(
        bench=replace(bench, standards=entries),
        observed=tuple(others),
        wishes=tuple(
            Wish({name: (given.value, given.u) for name, given in entry.given.items()}, entry.same_offset_as)
            for entry in entries
        ),
        residual=CORRECTED_HERE,
        scatter=of_others,
        sources=(
            *kit_sources(references, weights, f),
            *reading_sources(known, weights, of_known, zr),
            *drift,
            *connection_sources(others, of_others, zr),
            *adapter_sources_on(others, passages, planes, of_others, zr),
        ),
        family=family,
        warnings=tuple(warnings),
        ancestors=adapter_ancestors(
            planes.in_use, ancestors_by(distinct([one.origin for one in references]))
        ),
        reference_connections=min(one.connections for one in known),
    )


def _common_band(
    bench: Bench, references: Sequence[Reference], sweeps: Mapping[str, Sequence[Sweep]]
) -> tuple[npt.NDArray[np.bool_], list[str]]:
    """Return which readings lie where every reference is known, and what was cut off in words."""
    first = sweeps[bench.standards[0].name][0]
    lowest = min(references, key=lambda one: one.definition.read_top_hz)
    known_to = lowest.definition.read_top_hz
    asked = (first.frequency_hz > 0.0) & (first.frequency_hz <= (bench.highest_hz or np.inf))
    inside = asked & (first.frequency_hz <= known_to)
    of_kit = f"'{lowest.definition.name}' of the kit '{lowest.origin.kit.name}' is known up to {known_to / 1e9:.4g} GHz"
    if np.count_nonzero(inside) < FEWEST_POINTS:
        raise ReadingError(
            f"fewer than {FEWEST_POINTS} readings lie in the band that is asked for and in which all references are "
            f"known: {of_kit}",
            "sweep lower, or take references that are known further up",
            file=first.name,
        )
    cut = int(np.count_nonzero(asked & ~inside))
    return inside, [f"the readings above {known_to / 1e9:.4g} GHz are left out: {of_kit}"] if cut else []


def _gaps(bench: Bench, frequency_hz: FloatArray, kept: npt.NDArray[np.bool_]) -> list[str]:
    """Say where readings are left out because the references do not tell what they are."""
    if np.count_nonzero(kept) < FEWEST_POINTS:
        raise RequestError(
            f"readings corrected with these known standards could be wrong by more than {TOO_UNSURE:g} nearly "
            "everywhere: two of them reflect nearly the same, or their kit does not know them better",
            "take known standards that differ, an open, a short and a load for instance, or a better known kit",
            file=bench.path,
            key="standard",
        )
    edges = np.flatnonzero(np.diff(np.concatenate([[True], kept, [True]]).astype(int)))
    runs = [
        f"{frequency_hz[start] / 1e9:.4g} … {frequency_hz[stop - 1] / 1e9:.4g} GHz"
        for start, stop in zip(edges[::2], edges[1::2], strict=True)
    ]
    if not runs:
        return []
    some = ", ".join(runs[:3]) + (", …" if len(runs) > 3 else "")
    return [
        f"{some}: left out, since readings corrected with the references could be wrong by more than {TOO_UNSURE:g} "
        "there: two of them reflect nearly the same, or are hardly known. What the standards do there is not seen."
    ]


def _as_sweeps(
    others: Sequence[Observed],
    sweeps: Mapping[str, Sequence[Sweep]],
    reference_ohm: float,
    sure: npt.NDArray[np.bool_],
) -> dict[str, tuple[str, list[Sweep]]]:
    """Return corrected connections, where they are sure, as sweeps under the names of their files."""
    if np.count_nonzero(sure) < FEWEST_POINTS:
        return {}
    return {
        one.name: (
            one.kind,
            [
                Sweep(one.frequency_hz[sure], (one.gamma + off)[sure], reference_ohm, sweep.name)
                for off, sweep in zip(one.deviations, sweeps[one.name], strict=True)
            ],
        )
        for one in others
    }


def _without_single_points(
    observed: Sequence[Observed],
    raw: Readings,
    sweeps: Mapping[str, Sequence[Sweep]],
    sure: npt.NDArray[np.bool_],
) -> tuple[dict[str, ComplexArray], list[str]]:
    """Replace single points that stand out when corrected by the mean of the other connections, and say so.

    Corrected they are told better than raw, where a cable turns the phase fast. In a reference such a point spoils the
    error terms of all others, but alike in all their connections, which is how it is known not to be theirs. Where
    the references tell little, noise is large and nothing stands out.
    """
    cleaned, told = dict(raw), []
    for one in observed:
        replaced = screen_points(one.frequency_hz, one.gamma + one.deviations).replaced & sure
        replaced &= ~replaced.all(axis=0)
        readings = raw[one.name].copy()
        for column in np.flatnonzero(replaced.any(axis=0)):
            odd = replaced[:, column]
            readings[odd, column] = readings[~odd, column].mean()
        cleaned[one.name] = readings
        for sweep, row in zip(sweeps[one.name], replaced, strict=True):
            if row.any():
                told.append(single_points(sweep.name, one.frequency_hz[row]))
    return cleaned, told


def _without_outlying(
    observed: Sequence[Observed],
    raw: Readings,
    sweeps: Mapping[str, Sequence[Sweep]],
    reference_ohm: float,
    assumed_sd: Sequence[float],
) -> tuple[dict[str, ComplexArray], list[str]]:
    """Leave out raw connections that stand apart when corrected, and say so."""
    left: dict[str, list[int]] = {one.name: list(range(one.connections)) for one in observed}
    told = []
    for s, k, distance in without_outlying(observed, reference_ohm, assumed_sd)[1]:
        name = observed[s].name
        left[name].remove(k)
        told.append(
            f"{sweeps[name][k].name}: this connection lies {distance:.2g} from the others, far beyond their scatter, "
            "and is left out. Clean and tighten, and read it again."
        )
    return {name: raw[name][kept] for name, kept in left.items()}, told


def _reference_cautions(references: Sequence[Reference]) -> list[str]:
    """Say what the references do not tell: their own warnings, drift, and errors that two kits may share."""
    cautions = known_cautions(references)
    if len(sets_of(references)) == 1:
        cautions.append(
            "the references were read in one set: drift of the analyser is not in the bounds. Read them before and "
            'after the others, and name the sets: set = "before", set = "after".'
        )
    return cautions
