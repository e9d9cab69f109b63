"""The fit through unknown error terms: these eliminated, all standards at once, every source pushed through."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.base.errors import FitError
from stdfit.circuits.error_box import corrected
from stdfit.fitting.observed import Observed
from stdfit.fitting.problem import NEAR_TOLERANCE
from stdfit.fitting.roles import places_of
from stdfit.fitting.solve import Solution, least_squares, near_least
from stdfit.fitting.unknown_box import RawProblem, coupled, fitted_box
from stdfit.pipeline.prepare import repeatability
from stdfit.pipeline.raw.anchors import Gathered, starting_problem
from stdfit.pipeline.raw.known_standards import known_sources
from stdfit.uncertainty.budget import Share, shares_of
from stdfit.uncertainty.connections import Repeatability
from stdfit.uncertainty.push import Pushed, push
from stdfit.uncertainty.sources import SmoothSource, Source, connection_sources
from stdfit.validity.choose import weights_for
from stdfit.validity.misfit import vanishing_at_zero
from stdfit.validity.over_determined import Explained, explain, model_error

ROUNDS = 3
"""Fits; each has weights from the scatter that the fit before has shown."""

ROUNDS_AGAIN = 2
"""The same, where a fit over another range has shown the scatter already."""

FIRST_SIZE = 1e-3
"""Size of errors that the first fit takes all readings to have."""

LOAD_DELAYS_PS = (0.0, 15.0, 30.0, 45.0, 60.0, 75.0)
"""Lengths at which a load of unknown length is started."""

FIRST_POINTS = 50
"""About how many readings of each standard those first fits take."""

FIT_POINTS = 100
"""About how many readings of each standard the search takes; its last steps take all of them."""

LAST_STEPS = 2

MISFIT_POINTS = 100
"""About how many values of the models' errors a kit keeps."""


@dataclass(frozen=True, slots=True, eq=False)
class Eliminated:
    """A finished fit through unknown error terms, over one range.

    Attributes
    ----------
    raw : RawProblem
        Its observed readings are those corrected with the fitted error terms.
    solution : Solution
    bounded : tuple of int
        Quantities that are held at a bound.
    sources : tuple of Source
    scatter : Repeatability
    shares : tuple of Share
        Covariances of the scaled fitted quantities; what is left of the over-determination among them.
    left : SmoothSource
        The models' errors, as the over-determination shows them.
    explained : Explained
        What the sources leave of a fit to all readings.
    errors : array of shape (m,)
        Their size at `points`, if all standards are wrong alike.
    misfits : array of shape (s, m)
        The same for each standard, if it alone may be wrong.
    points : slice
    """

    raw: RawProblem
    solution: Solution
    bounded: tuple[int, ...]
    sources: tuple[Source, ...]
    scatter: Repeatability
    shares: tuple[Share, ...]
    left: SmoothSource
    explained: Explained
    errors: FloatArray
    misfits: FloatArray
    points: slice


def eliminate(gathered: Gathered, highest_hz: float = np.inf, before: Eliminated | None = None) -> Eliminated:
    """Fit all standards through unknown error terms, up to a frequency, and push every source through the fit.

    Parameters
    ----------
    gathered : Gathered
    highest_hz : float
        Top of the fit range, the same for all standards: they share the error terms.
    before : Eliminated, optional
        A fit of the same standards to all readings, or begun with one, to begin with.

    Raises
    ------
    InputError
        Too little is known to begin with.
    FitError
        The fit does not settle on finite values.
    """
    try:
        with np.errstate(all="ignore"):
            return _eliminated(gathered, highest_hz, before)
    except np.linalg.LinAlgError as fault:
        raise FitError(
            "the given values do not fit the readings at all",
            "check lengths (ps one way, not mm), resistances, and which file is whose",
        ) from fault


def _eliminated(gathered: Gathered, highest_hz: float, before: Eliminated | None) -> Eliminated:
    """Fit and push."""
    bench, f = gathered.bench, gathered.frequency_hz
    inside = f <= highest_hz
    mean = np.stack([stack.mean(axis=0) for stack in gathered.stacks], axis=1)
    if before is None:
        problem = starting_problem(gathered, 1.0 / FIRST_SIZE**2)
        weights = problem.weights
        scaled = _best_start(RawProblem(problem, mean))
    else:
        problem, scaled = before.raw.problem, before.solution.values
        weights = tuple(before.raw.everywhere.T)
    problem = replace(problem, weights=tuple(np.where(inside, own, 0.0) for own in weights))
    known = known_sources(gathered.known, f, len(gathered.stacks))
    found = None
    for _ in range(ROUNDS if before is None else ROUNDS_AGAIN):
        raw = RawProblem(problem, mean)
        solution, bounded = _fit_without_gain(raw, scaled)
        scaled = solution.values
        gamma, _ = raw.model(scaled)
        box = fitted_box(gamma, mean, raw.everywhere)
        observed = tuple(
            Observed.from_readings(entry.name, entry.kind, f, corrected(box, stack))
            for entry, stack in zip(bench.standards, gathered.stacks, strict=True)
        )
        scatter = repeatability(observed, gathered.family, bench.reference_ohm)
        sources = (*connection_sources(observed, scatter, bench.reference_ohm), *known)
        problem = replace(problem, observed=observed)
        explained = None if before is None else before.explained
        found = _pushed(RawProblem(problem, mean), solution, bounded, sources, scatter, explained)
        # What the models leave is an error of the readings too: a ruler must not yield to it. It counts alike at all
        # frequencies of the range, so that none of them drops out of the fit because it is not followed there.
        within = found.errors[inside[found.points]]
        level = np.full(f.size, np.sqrt(0.5 * np.mean(within**2)), dtype=complex)
        acting = (*sources, replace(found.left, profiles=(level,) * len(observed)))
        weights = tuple(np.where(inside, weights_for(acting, k, f.size), 0.0) for k in range(len(observed)))
        problem = replace(problem, weights=weights)
    assert found is not None
    return found


def _fit_without_gain(raw: RawProblem, scaled: FloatArray) -> tuple[Solution, tuple[int, ...]]:
    """Fit, and hold losses at zero that came out below: lines do not amplify.

    Their uncertainty stays that of the free fit, which is on the safe side.
    """
    problem = raw.problem
    solution = _fit(raw, scaled)
    values = problem.expand(solution.values)
    names = {i: problem.quantities[i].parameter.name for i in problem.fitted}
    bounded = tuple(i for i in problem.fitted if names[i] == "offset_loss_gohm_per_s" and values[i] < 0.0)
    if not bounded:
        return solution, ()
    held = problem
    for i in bounded:
        held = held.changed(i, role="held", value=0.0)
    free = [k for k, i in enumerate(problem.fitted) if i not in bounded]
    rest = _fit(RawProblem(held, raw.raw), solution.values[free])
    whole = np.zeros_like(solution.values)
    whole[free] = rest.values
    return replace(solution, values=whole), bounded


def _fit(raw: RawProblem, scaled: FloatArray) -> Solution:
    """Fit at some of the readings, then take the last steps at all of them.

    Raises
    ------
    FitError
        The fit does not settle on finite values.
    """
    step = max(1, raw.raw.shape[0] // FIT_POINTS)
    some = raw.thinned(step)
    solution = least_squares(some.residual, some.jacobian, scaled)
    if step > 1:
        values = solution.values
        for _ in range(LAST_STEPS):
            design = raw.jacobian(values)
            values = values - np.linalg.lstsq(design, raw.residual(values), rcond=None)[0]
        solution = replace(solution, values=values, residual=raw.residual(values))
    if not np.isfinite(solution.values).all():
        raise FitError("the fit did not settle on finite values", "look at lengths, kinds and readings")
    return solution


def _best_start(raw: RawProblem) -> FloatArray:
    """Return the best of several first fits.

    The small reflection of a good load turns with its delay, so that the sum of squares has a minimum for every
    turn: each load is started at several lengths.
    """
    raw = raw.thinned(max(1, raw.raw.shape[0] // FIRST_POINTS))
    problem = raw.problem
    start, _ = problem.evidence()
    turning = [
        k
        for k, i in enumerate(problem.fitted)
        if problem.quantities[i].parameter.name == "offset_delay_ps"
        and problem.quantities[i].role == "assumed"
    ]
    found = []
    for delay_ps in LOAD_DELAYS_PS if turning else (0.0,):
        first = start.copy()
        first[turning] = delay_ps / problem.scales[turning]
        found.append(near_least(raw.residual, raw.jacobian, first, NEAR_TOLERANCE))
    return min(found, key=lambda values: _power(raw.residual(values)))


def _power(residual: FloatArray) -> float:
    """Return the sum of squares, without end where it is no number: a search may run off."""
    found = float(residual @ residual)
    return found if np.isfinite(found) else np.inf


def _pushed(
    raw: RawProblem,
    solution: Solution,
    bounded: tuple[int, ...],
    sources: tuple[Source, ...],
    scatter: Repeatability,
    explained: Explained | None,
) -> Eliminated:
    """Push every source, and what is left of the over-determination, through a finished fit."""
    problem = raw.problem
    f = problem.observed[0].frequency_hz
    span = (float(f[0]), float(f[-1]))
    gamma, design = raw.model(solution.values)
    rest, weight = coupled(gamma, raw.everywhere)
    weight = weight * (raw.weights > 0.0)[:, :, None]
    acting = np.einsum("nsp,nst->ntp", design.conj(), weight)
    off = np.stack([one.gamma for one in problem.observed], axis=1) - gamma

    def push_all(those: Sequence[Source]) -> list[Pushed]:
        return [
            push(design[:, k], acting[:, k], off[:, k], f, span, those, k, [f.size])
            for k in range(len(problem.observed))
        ]

    _, precision = problem.evidence()
    inverse, stacked = shares_of(push_all(sources), sources, precision, places_of(problem))
    told = np.flatnonzero(precision > 0.0)
    points = slice(None, None, max(1, f.size // MISFIT_POINTS))
    if explained is None:
        evidence = inverse[0][:, told] * np.sqrt(precision[told])
        explained = explain(rest, design, acting @ inverse[0], f, span, sources, evidence, points)
    errors, misfits = (vanishing_at_zero(one, f[points]) for one in model_error(off, rest, explained, points))
    profile = np.asarray(np.interp(f, f[points], errors) / np.sqrt(2.0), dtype=complex)
    left = SmoothSource(
        "model errors (left of the over-determination)", (profile,) * gamma.shape[1], common=False
    )
    _, more = shares_of(push_all([left]), [left], precision, [])
    shares = tuple(replace(one, covariances=one.covariances[:, 0]) for one in (*stacked, *more))
    return Eliminated(
        raw, solution, bounded, sources, scatter, shares, left, explained, errors, misfits, points
    )
