"""Range and order: of all fits that could be made, the one that can be trusted furthest.

A parasitic resonance at the top of the sweep spoils a fit of the whole of it, so the range is part of the
choice. Each order is fitted once; from there the fits of all ranges follow from sums over the readings.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from functools import partial

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.fitting.observed import Observed
from stdfit.fitting.problem import Problem
from stdfit.fitting.roles import NOT_CHOSEN, SHAPES, Wish, build_problem, places_of, starting_values
from stdfit.uncertainty.budget import Share, expanded, radius, shares_of
from stdfit.uncertainty.push import push, weighted
from stdfit.uncertainty.sources import Source, reading_variance
from stdfit.validity.limit import first_gap
from stdfit.validity.misfit import expected_power, misfit

CUTS = 16
"""Ranges that are tried: sixteenths of the sweep."""

SCAN_POINTS = 801
"""Readings are thinned to about this many while ranges and orders are compared."""

BOUND_POINTS = 80
"""Points at which the bounds of the candidates are computed."""

FIRST_FIT = 0.6
"""Part of the sweep over which each order is fitted first, below most parasitic resonances."""

FIRST_POINTS = 200
"""About how many readings of the sweep that first fit takes: it only has to come near."""

NEAR = 0.97
"""Limits above this part of the best are as good as equal; then the simpler order is taken."""

SLACK = 1.1
"""Among those, mean bounds below this multiple of the smallest are as good as equal."""

INDEPENDENT_PIECES = 4.0
"""Independent values of a smooth error over the sweep, when readings are weighed against evidence."""


@dataclass(frozen=True, slots=True, eq=False)
class Choice:
    """What to fit, over which range.

    Attributes
    ----------
    shape : str
        A key of ``SHAPES`` of the standard's kind.
    top_hz : float
        Upper end of the fit range.
    limit_hz : float
        The limit that the scan found for it.
    offset : dict
        Offset parameters, value and standard uncertainty, for standards that share the line.
    tried : tuple of (order, limit in Hz)
        The best limit of each order that was tried, simplest first.
    explained_hz, explained : arrays of shape (m,)
        Power that the sources are expected to leave in the residual of the richest order, fitted to all readings.
    least_radius : array of shape (m,)
        95 % radius that the richest order has there, fitted to all readings: no order is surer than that.
    """

    shape: str
    top_hz: float
    limit_hz: float
    offset: dict[str, tuple[float, float | None]]
    tried: tuple[tuple[str, float], ...]
    explained_hz: FloatArray
    explained: FloatArray
    least_radius: FloatArray


def weights_for(sources: Sequence[Source], index: int, count: int) -> FloatArray:
    """Return 1/variance per component of one standard's mean readings, shape (n,).

    A smooth error has only a few independent values over the sweep, so each reading carries n/pieces of its
    variance: otherwise a thousand readings would drown a ruler that knows better.
    """
    smooth, white = reading_variance(sources, index)
    variance = white + count / INDEPENDENT_PIECES * smooth
    return np.asarray(1.0 / np.maximum(np.broadcast_to(variance, count), 1e-16))


def shapes_for(kind: str, polynomial: str, wish: Wish) -> list[str]:
    """Return the orders that may be tried for a standard, simplest first."""
    shapes = [shape for shape in SHAPES[kind] if polynomial == "chosen" or shape.split("+")[0] == polynomial]
    if kind == "load":
        shapes = list(SHAPES[kind])
        if "offset_delay_ps" in wish.given or wish.same_offset_as is not None:
            shapes = [shape for shape in shapes if "offset_delay_ps" not in SHAPES[kind][shape]]
    if "offset_z0_ohm" in wish.given or wish.same_offset_as is not None:
        shapes = [shape for shape in shapes if "offset_z0_ohm" not in SHAPES[kind][shape]]
    return [shape for shape in shapes if shape not in NOT_CHOSEN]


def thin(observed: Observed, sources: Sequence[Source], index: int) -> tuple[Observed, list[Source]]:
    """Return every k-th reading of one standard, and the sources as they act on it alone."""
    step = max(1, observed.frequency_hz.size // SCAN_POINTS)
    part = slice(None, None, step)
    return (
        Observed(
            observed.name,
            observed.kind,
            observed.frequency_hz[part],
            observed.gamma[part],
            observed.deviations[:, part],
        ),
        [source.taken([index], [part], [1]) for source in sources],
    )


def choose(
    observed: Observed,
    sources: Sequence[Source],
    wish: Wish,
    polynomial: str,
    within: float,
    reference_ohm: float,
    ceiling_hz: float = np.inf,
    *,
    tell: Callable[[], None] | None = None,
) -> Choice:
    """Choose order and range of one standard by the limit they give.

    Parameters
    ----------
    observed : Observed
        One standard, thinned.
    sources : sequence of Source
        As they act on it alone.
    wish : Wish
        Evidence; an offset line that another standard owns is evidence too.
    polynomial : str
        "chosen", or the order that the user asks for.
    within : float
        Tolerance.
    reference_ohm : float
    ceiling_hz : float
        Top of the connector family: no limit beyond it counts.
    tell : callable, optional
        Is called when an order has been fitted.
    """
    f = observed.frequency_hz
    shapes = shapes_for(observed.kind, polynomial, wish)
    most = max(len(SHAPES[observed.kind][shape]) for shape in shapes)
    cuts = [cut for cut in (round(f.size * k / CUTS) for k in range(2, CUTS + 1)) if cut >= max(8, 2 * most)]
    cuts = sorted(set(cuts)) or [f.size]
    points = slice(None, None, max(1, f.size // BOUND_POINTS))

    def fit(shape: str) -> _Order:
        return _fit_order(observed, sources, wish, shape, cuts, points, reference_ohm)

    orders = []
    for shape in shapes:
        orders.append(fit(shape))
        if tell:
            tell()
    # What the richest order can follow, fitted to all readings, is no excuse for any order and range.
    richest = shapes_for(observed.kind, "chosen", wish)[-1]
    reference = orders[-1] if richest == shapes[-1] else fit(richest)
    explained = reference.expected()[-1]
    # A simpler order is surer only because it takes the terms that it leaves out for zero, which nobody measured.
    least = reference.radius[-1]
    candidates = [
        candidate
        for rank, order in enumerate(orders)
        for candidate in _candidates(
            observed, sources, order, rank, explained, least, cuts, points, within, ceiling_hz
        )
    ]
    best = max(candidate.limit_hz for candidate in candidates)
    near = [candidate for candidate in candidates if candidate.limit_hz >= NEAR * best]
    tightest = min(candidate.mean_bound for candidate in near)
    good = [candidate for candidate in near if candidate.mean_bound <= SLACK * tightest]
    lowest = min(candidate.rank for candidate in good)
    chosen = min(
        (candidate for candidate in good if candidate.rank == lowest), key=lambda one: one.mean_bound
    )
    furthest: dict[str, float] = {}
    for candidate in candidates:
        furthest[candidate.shape] = max(candidate.limit_hz, furthest.get(candidate.shape, 0.0))
    return Choice(
        shape=chosen.shape,
        top_hz=float(f[cuts[chosen.cut] - 1]),
        limit_hz=chosen.limit_hz,
        offset=_offset(orders[chosen.rank], chosen.cut),
        tried=tuple(furthest.items()),
        explained_hz=f[points],
        explained=explained,
        least_radius=least,
    )


@dataclass(frozen=True, slots=True, eq=False)
class _Order:
    """One order, fitted once, and what follows from it for c ranges at m points."""

    shape: str
    problem: Problem
    scaled: FloatArray  # (c, p)
    shares: list[Share]
    radius: FloatArray  # (c, m)
    left: ComplexArray  # (c, n)
    expected: Callable[[], FloatArray]  # (c, m)


@dataclass(frozen=True, slots=True)
class _Candidate:
    """One order over one range."""

    shape: str
    rank: int
    cut: int
    limit_hz: float
    mean_bound: float


def _fit_order(
    observed: Observed,
    sources: Sequence[Source],
    wish: Wish,
    shape: str,
    cuts: Sequence[int],
    points: slice,
    reference_ohm: float,
) -> _Order:
    """Fit one order, then work out what every range would give."""
    f = observed.frequency_hz
    weight = weights_for(sources, 0, f.size)
    alone = replace(wish, same_offset_as=None)
    first = f <= f[0] + FIRST_FIT * (f[-1] - f[0])
    first &= np.arange(f.size) % max(1, f.size // FIRST_POINTS) == 0
    starts = starting_values([observed], reference_ohm)
    problem = build_problem(
        [observed], [alone], [shape], [np.where(first, weight, 0.0)], starts, reference_ohm
    )
    target, precision = problem.evidence()
    found = problem.nearly_solved(target)
    gamma, design = problem.model(0, problem.expand(found))
    residual = observed.gamma - gamma

    span = (float(f[0]), float(f[-1]))
    pushed = push(design, weighted(design, weight), residual, f, span, sources, 0, cuts)
    inverse, shares = shares_of([pushed], sources, precision, places_of(problem))
    pull = precision * (target - found)
    step = np.einsum("cpq,cq->cp", inverse, pushed.projected + pull)
    return _Order(
        shape=shape,
        problem=problem,
        scaled=found + step,
        shares=shares,
        radius=radius(design[points], shares),
        left=residual - step @ design.T,
        expected=partial(
            expected_power, design[points], f[points], points, span, sources, pushed, inverse, 0
        ),
    )


def _candidates(
    observed: Observed,
    sources: Sequence[Source],
    order: _Order,
    rank: int,
    explained: FloatArray,
    least: FloatArray,
    cuts: Sequence[int],
    points: slice,
    within: float,
    ceiling_hz: float,
) -> list[_Candidate]:
    """Return limit and mean bound of one order over every range."""
    f = observed.frequency_hz
    _, white = reading_variance(sources, 0)
    wrong = misfit(observed.kind, order.left, f, float(white), explained, points)
    bound = np.maximum(order.radius, least) + wrong
    candidates = []
    for cut in range(len(cuts)):
        limit = min(first_gap(f[points], bound[cut], within)[0], ceiling_hz)
        below = f[points] <= max(limit, f[points][min(4, bound.shape[1] - 1)])
        candidates.append(_Candidate(order.shape, rank, cut, limit, float(bound[cut][below].mean())))
    return candidates


def _offset(order: _Order, cut: int) -> dict[str, tuple[float, float | None]]:
    """Return the offset parameters of an order over one range, with their standard uncertainties."""
    problem = order.problem
    values = problem.expand(order.scaled[cut])
    one_cut = [replace(share, covariances=share.covariances[:, cut]) for share in order.shares]
    u, _ = expanded(np.eye(order.scaled.shape[1]), one_cut)
    place = {i: k for k, i in enumerate(problem.fitted)}
    return {
        quantity.parameter.name: (
            float(values[i]),
            float(u[place[i]] * quantity.scale) if i in place else None,
        )
        for i, quantity in enumerate(problem.quantities)
        if quantity.parameter.name.startswith("offset_")
    }
