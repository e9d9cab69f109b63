"""Raw readings with fewer than three known standards: error terms eliminated, all standards fitted at once.

What takes the place of known standards is evidence: lengths from a ruler, a resistance from a multimeter, and more
standards than unknown error terms.
"""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from pathlib import Path

import numpy as np

from stdfit.base.errors import PhysicsError
from stdfit.base.records import Sweep
from stdfit.circuits.standard import reflection
from stdfit.data.bench import Bench
from stdfit.data.verify import MEND_KIND, unlike_its_kind
from stdfit.pipeline.finished import finished
from stdfit.pipeline.prepare import scatter_cautions
from stdfit.pipeline.raw.anchors import FEWEST_POINTS, Gathered, gather, shapes_of
from stdfit.pipeline.raw.eliminate import Eliminated, eliminate
from stdfit.uncertainty.outlying import without_outlying
from stdfit.validity.ancestry import Origin, ancestors_by, distinct
from stdfit.validity.choose import NEAR, Choice
from stdfit.validity.contradicted import contradicted
from stdfit.validity.define import Settled, define, given_contradictions
from stdfit.validity.kit import Kit, SourceFile
from stdfit.validity.undetermined import undetermined

UNCHECKED = (
    "the bounds rest on the given lengths and resistances being right within their uncertainties: the readings check "
    "them poorly, and a wrong one may go unseen. Measure them twice"
)
"""Said of every such kit: a length wrong by ten of its uncertainties may pass for an error of the models."""

SHORTER = (0.8, 0.6, 0.45)
"""Parts of the sweep over which the set is fitted too; a shorter one is kept where its limit is clearly higher."""


def characterise_unreferenced(
    bench: Bench,
    sweeps: Mapping[str, Sequence[Sweep]],
    *,
    files: tuple[SourceFile, ...] = (),
    created: str | None = None,
    tell: Callable[[int, int], None] | None = None,
) -> Kit:
    """Turn raw readings with fewer than three known standards into a kit of the others.

    Parameters
    ----------
    bench, sweeps, files, created
        As for `characterise`.
    tell : callable, optional
        Is told how many of the ranges are fitted: (done, total).

    Raises
    ------
    InputError, FitError
    """
    kit, _ = eliminated(bench, sweeps, files=files, created=created, tell=tell)
    return kit


def eliminated(
    bench: Bench,
    sweeps: Mapping[str, Sequence[Sweep]],
    *,
    files: tuple[SourceFile, ...] = (),
    created: str | None = None,
    origins: Mapping[Path, Origin] | None = None,
    tell: Callable[[int, int], None] | None = None,
) -> tuple[Kit, Eliminated]:
    """Return the kit and the fit that it comes from, over the range in which its limit is highest.

    Parameters
    ----------
    bench, sweeps, files, created
        As for `characterise`.
    origins : mapping, optional
        Kits that were read already, by the path under which the bench names them.
    tell : callable, optional
        As for `characterise_unreferenced`.

    Raises
    ------
    InputError, FitError
    """
    gathered = gather(bench, sweeps, origins)
    found = eliminate(gathered)
    kept = _without_outlying(gathered, found)
    if kept is not gathered:
        gathered, found = kept, eliminate(kept)
    f = gathered.frequency_hz
    each = [(_kit(gathered, found, files, created), found)]
    for done, part in enumerate(SHORTER, start=1):
        if tell:
            tell(done, 1 + len(SHORTER))
        top = float(f[0] + part * (f[-1] - f[0]))
        if np.count_nonzero(f <= top) >= FEWEST_POINTS:
            found = eliminate(gathered, top, found)
            each.append((_kit(gathered, found, files, created), found))
    best = max(kit.limit.limit_hz for kit, _ in each)
    chosen = next(one for one in each if one[0].limit.limit_hz >= NEAR * best)
    _refuse_other_kinds(chosen[0], bench.path)
    return chosen


def _refuse_other_kinds(kit: Kit, path: Path) -> None:
    """Refuse standards that come out as what they are not called: raw readings do not show it before the fit."""
    for one in kit.definitions:
        gamma, _ = reflection(one.kind, one.values, np.array([one.read_low_hz]), kit.reference_ohm)
        fault = unlike_its_kind(one.name, one.kind, float(np.abs(gamma[0])))
        if fault is not None:
            raise PhysicsError(f"{fault}, as far as lengths and resistances tell", MEND_KIND, file=path)


def _without_outlying(gathered: Gathered, found: Eliminated) -> Gathered:
    """Leave out connections that do not belong with the others, and say so."""
    observed = found.raw.problem.observed
    _, odd = without_outlying(observed, gathered.bench.reference_ohm, gathered.family.repeatability)
    if not odd:
        return gathered
    stacks = tuple(
        np.delete(stack, [k for s, k, _ in odd if s == place], axis=0)
        for place, stack in enumerate(gathered.stacks)
    )
    told = [
        f"{gathered.files[s][k]}: this connection lies {distance:.2g} from the others, far beyond their scatter, and "
        "is left out. Clean and tighten, and read it again."
        for s, k, distance in odd
    ]
    return replace(gathered, stacks=stacks, warnings=(*gathered.warnings, *told))


def _kit(gathered: Gathered, found: Eliminated, files: tuple[SourceFile, ...], created: str | None) -> Kit:
    """Return the kit of what one fit has found, without the known standards."""
    problem, f = found.raw.problem, gathered.frequency_hz
    top = float(f[np.flatnonzero(problem.weights[0] > 0.0)[-1]])
    settled = Settled(
        problem,
        problem.expand(found.solution.values),
        found.bounded,
        found.solution,
        found.shares,
        # The models' errors act on all standards and are among the shares already.
        replace(found.shares[-1], covariances=np.zeros_like(found.shares[-1].covariances)),
        tuple(Choice(shape, top, 0.0, {}, (), f[:1], f[:1], f[:1]) for shape in shapes_of(gathered)),
        tuple((f[found.points], own) for own in found.misfits),
    )
    definitions, order, shares = define(settled)
    kept = tuple(one for k, one in enumerate(definitions) if k not in gathered.known)
    kit = finished(
        gathered.bench,
        gathered.family.top_hz,
        kept,
        order,
        shares,
        warnings=(
            *gathered.warnings,
            *scatter_cautions(problem.observed, found.scatter, gathered.family, gathered.bench.connector),
            *undetermined(found.raw, found.solution.values),
            UNCHECKED,
            *given_contradictions(settled),
            *contradicted(
                problem, settled.values, found.errors[f[found.points] <= top], gathered.bench.within
            ),
        ),
        files=files,
        created=created,
    )
    origins = distinct([one.origin for one in gathered.known.values()])
    return replace(kit, ancestors=ancestors_by(origins))
