"""The fit itself: range and order of each standard, then all of them at once."""

from collections.abc import Callable, Sequence
from dataclasses import replace
from itertools import count

import numpy as np

from stdfit.base.errors import FitError
from stdfit.fitting.roles import build_problem, places_of, starting_values
from stdfit.pipeline.prepare import Prepared
from stdfit.uncertainty.budget import radius, shares_of
from stdfit.uncertainty.push import push, weighted
from stdfit.uncertainty.region import CIRCULAR
from stdfit.uncertainty.sources import SmoothSource, reading_variance
from stdfit.validity.choose import Choice, choose, shapes_for, thin, weights_for
from stdfit.validity.define import Settled
from stdfit.validity.misfit import misfit

MISFIT_POINTS = 200
"""About how many values of the misfit a kit keeps for each standard."""


def choose_all(prepared: Prepared, tell: Callable[[int, int], None] | None = None) -> list[Choice]:
    """Choose order and range of each standard, owners of a shared offset line first.

    Parameters
    ----------
    prepared : Prepared
    tell : callable, optional
        Is told how many orders of how many standards' are fitted: (done, total).
    """
    bench, observed, wishes, sources = prepared.bench, prepared.observed, prepared.wishes, prepared.sources
    choices: dict[str, Choice] = {}
    by_name = {entry.name: k for k, entry in enumerate(bench.standards)}
    total = sum(
        len(shapes_for(one.kind, entry.polynomial, wish))
        for one, entry, wish in zip(observed, bench.standards, wishes, strict=True)
    )
    done = count(1)

    def fitted() -> None:
        if tell:
            tell(next(done), total)

    def settle_one(name: str) -> Choice:
        if name in choices:
            return choices[name]
        k = by_name[name]
        wish = wishes[k]
        if wish.same_offset_as is not None:
            wish = replace(wish, given={**settle_one(wish.same_offset_as).offset, **wish.given})
        thinned, alone = thin(observed[k], sources, k)
        choices[name] = choose(
            thinned,
            alone,
            wish,
            bench.standards[k].polynomial,
            bench.within,
            bench.reference_ohm,
            prepared.family.top_hz,
            tell=fitted,
        )
        return choices[name]

    return [settle_one(entry.name) for entry in bench.standards]


def settle(prepared: Prepared, choices: Sequence[Choice]) -> Settled:
    """Fit all standards jointly over the chosen ranges and push every source through the fit.

    Raises
    ------
    FitError
        The fit does not settle on finite values.
    """
    bench, observed, sources = prepared.bench, prepared.observed, prepared.sources
    weights = [
        np.where(one.frequency_hz <= choice.top_hz, weights_for(sources, k, one.frequency_hz.size), 0.0)
        for k, (one, choice) in enumerate(zip(observed, choices, strict=True))
    ]
    shapes = [choice.shape for choice in choices]
    starts = starting_values(observed, bench.reference_ohm)
    problem = build_problem(observed, prepared.wishes, shapes, weights, starts, bench.reference_ohm)
    target, precision = problem.evidence()
    solution = problem.solved(target)
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
        solution = held.solved(start)
        values = held.expand(solution.values)

    span = (
        min(float(one.frequency_hz[0]) for one in observed),
        max(float(one.frequency_hz[-1]) for one in observed),
    )
    models = [problem.model(k, values) for k in range(len(observed))]
    pushed = [
        push(
            design,
            weighted(design, weight),
            one.gamma - gamma,
            one.frequency_hz,
            span,
            sources,
            k,
            [one.frequency_hz.size],
        )
        for k, ((gamma, design), weight, one) in enumerate(zip(models, weights, observed, strict=True))
    ]
    _, stacked = shares_of(pushed, sources, precision, places_of(problem))
    shares = [replace(share, covariances=share.covariances[:, 0]) for share in stacked]
    misfits = []
    for k, ((gamma, design), one, choice) in enumerate(zip(models, observed, choices, strict=True)):
        f = one.frequency_hz
        points = slice(None, None, max(1, f.size // MISFIT_POINTS))
        explained = np.interp(f[points], choice.explained_hz, choice.explained)
        _, white = reading_variance(sources, k)
        wrong = misfit(one.kind, one.gamma - gamma, f, float(white), explained, points)
        # What the order's own uncertainty lacks against the richest order's goes to the error of the model.
        least = np.interp(f[points], choice.explained_hz, choice.least_radius)
        lacking = np.maximum(least - radius(design[points], shares), 0.0)
        misfits.append((f[points], wrong + lacking))
    profiles = [
        np.asarray(np.interp(one.frequency_hz, *own) / CIRCULAR, dtype=complex)
        for one, own in zip(observed, misfits, strict=True)
    ]
    model_error = SmoothSource("misfit", tuple(profiles), common=False)
    repushed = [
        push(
            design,
            weighted(design, weight),
            one.gamma - gamma,
            one.frequency_hz,
            span,
            [model_error],
            k,
            [one.frequency_hz.size],
        )
        for k, ((gamma, design), weight, one) in enumerate(zip(models, weights, observed, strict=True))
    ]
    _, (misfit_stack,) = shares_of(repushed, [model_error], precision, [])
    misfit_share = replace(misfit_stack, covariances=misfit_stack.covariances[:, 0])
    return Settled(
        problem, values, tuple(bounded), solution, tuple(shares), misfit_share, tuple(choices), tuple(misfits)
    )
