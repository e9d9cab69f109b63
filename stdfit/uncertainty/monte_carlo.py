"""Monte Carlo check of what was propagated linearly: JCGM 101:2008 and JCGM 102:2011.

Every source of error is drawn, the readings are changed by it, and the whole problem is fitted again, many thousand
times at once. Nothing but the fit's own equations is used in between.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.circuits.standard import reflection
from stdfit.fitting.observed import Observed
from stdfit.fitting.problem import Problem
from stdfit.fitting.roles import places_of
from stdfit.uncertainty.budget import Share, inverse_of, radius, shares_of
from stdfit.uncertainty.push import push, weighted
from stdfit.uncertainty.smooth import LENGTHS_PER_SPAN, bumps, correlation_lengths
from stdfit.uncertainty.sources import LumpedSource, SharedSource, SmoothSource, Source

FIT_POINTS = 100
"""Readings of each standard that are refitted; the linear band is computed on the same ones."""

BAND_POINTS = 40
"""Frequencies at which bands are compared."""

BATCH = 200
"""Fits done at once."""

ROUNDS = 60
"""Most iterations of a fit; four do where the problem is nearly linear."""

FULL_STEPS = 6
DAMPED = 0.5
"""After so many full steps, steps are shortened by this factor."""

SETTLED = 1e-3
"""Largest step of a settled fit, in units of the fit."""


@dataclass(frozen=True, slots=True, eq=False)
class Compared:
    """Monte Carlo against linear propagation for one standard.

    Attributes
    ----------
    standard : str
    frequency_hz : array of shape (m,)
    drawn, linear : arrays of shape (m,)
        95 % radius on Γ by Monte Carlo and by linear propagation, at the same correlation length.
    drawn_magnitude_u, linear_magnitude_u : arrays of shape (m,)
        Standard uncertainty of |Γ|.
    magnitude : array of shape (m,)
        |Γ| of the fitted model.
    unsettled : float
        Part of the fits that did not settle.
    """

    standard: str
    frequency_hz: FloatArray
    drawn: FloatArray
    linear: FloatArray
    drawn_magnitude_u: FloatArray
    linear_magnitude_u: FloatArray
    magnitude: FloatArray
    unsettled: float


def compare_with_linear(
    problem: Problem,
    values: FloatArray,
    sources: Sequence[Source],
    draws: int,
    rng: np.random.Generator,
    tell: Callable[[int, int], None] | None = None,
) -> list[Compared]:
    """Draw all sources, fit again, and compare bands with those of linear propagation.

    Parameters
    ----------
    problem : Problem
    values : array
        All quantities at the solution, in trade units; the model there is taken for the truth.
    sources : sequence of Source
    draws : int
    rng : numpy Generator
    tell : callable, optional
        Is told (done, total).
    """
    trial = _Trial.of(problem, values, sources)
    clouds: list[list[ComplexArray]] = [[] for _ in problem.observed]
    straight: list[list[ComplexArray]] = [[] for _ in problem.observed]
    designs = [trial.model(s, trial.start[None], grid)[1][0] for s, grid in enumerate(trial.grids)]
    unsettled = 0
    for first in range(0, draws, BATCH):
        count = min(BATCH, draws - first)
        fitted, first_step, settled = trial.fit(*trial.draw(count, rng))
        unsettled += int(np.count_nonzero(~settled))
        for s, grid in enumerate(trial.grids):
            clouds[s].append(trial.model(s, fitted[settled], grid)[0])
            straight[s].append(first_step[settled] @ designs[s].T)
        if tell:
            tell(min(first + count, draws), draws)
    return [
        _compare(trial, s, np.concatenate(cloud), np.concatenate(line), unsettled / draws)
        for s, (cloud, line) in enumerate(zip(clouds, straight, strict=True))
    ]


def _compare(trial: "_Trial", s: int, cloud: ComplexArray, line: ComplexArray, unsettled: float) -> Compared:
    """Return the figures of one standard from its curves and from their linear changes, each of shape (draws, m).

    Both come from the same draws, so that neither chance nor the tails of Student's t pass for curvature.
    """
    grid = trial.grids[s]
    best = trial.model(s, trial.start[None], grid)[0][0]
    along = (line * np.exp(-1j * np.angle(best))).real
    return Compared(
        standard=trial.problem.observed[s].name,
        frequency_hz=grid,
        drawn=np.quantile(np.abs(cloud - best), 0.95, axis=0),
        linear=np.quantile(np.abs(line), 0.95, axis=0),
        drawn_magnitude_u=np.abs(cloud).std(axis=0),
        linear_magnitude_u=along.std(axis=0),
        magnitude=np.abs(best),
        unsettled=unsettled,
    )


@dataclass(frozen=True, slots=True, eq=False)
class _Trial:
    """A thinned problem with its sources, ready to be drawn and refitted many times."""

    problem: Problem
    start: FloatArray
    sources: tuple[Source, ...]
    place: int
    length: float
    span: tuple[float, float]
    grids: list[FloatArray]

    @classmethod
    def of(cls, problem: Problem, values: FloatArray, sources: Sequence[Source]) -> "_Trial":
        """Thin the problem, push the sources through it, and pick the length with the widest bands."""
        thin_problem, thin_sources = _thinned(problem, sources)
        span = (
            min(float(one.frequency_hz[0]) for one in problem.observed),
            max(float(one.frequency_hz[-1]) for one in problem.observed),
        )
        pushed, grids, designs = [], [], []
        for s, (one, weight) in enumerate(zip(thin_problem.observed, thin_problem.weights, strict=True)):
            gamma, design = thin_problem.model(s, values)
            pushed.append(
                push(
                    design,
                    weighted(design, weight),
                    one.gamma - gamma,
                    one.frequency_hz,
                    span,
                    thin_sources,
                    s,
                    [weight.size],
                )
            )
            grids.append(np.linspace(one.frequency_hz[0], one.frequency_hz[-1], BAND_POINTS))
            designs.append(thin_problem.model(s, values, grids[-1])[1])
        _, precision = thin_problem.evidence()
        _, stacked = shares_of(pushed, thin_sources, precision, places_of(thin_problem))
        shares = [replace(share, covariances=share.covariances[:, 0]) for share in stacked]
        by_length = [[_at(share, k) for share in shares] for k in range(len(LENGTHS_PER_SPAN))]
        size = [sum(float(radius(design, chosen).mean()) for design in designs) for chosen in by_length]
        widest = int(np.argmax(size))
        return cls(
            problem=thin_problem,
            start=values[thin_problem.fitted] / thin_problem.scales,
            sources=tuple(thin_sources),
            place=widest,
            length=float(correlation_lengths(span[1] - span[0])[widest]),
            span=span,
            grids=grids,
        )

    def model(
        self, s: int, scaled: FloatArray, frequency_hz: FloatArray
    ) -> tuple[ComplexArray, ComplexArray]:
        """Return Γ, shape (b, n), and derivatives by the scaled quantities, shape (b, n, p), of many sets."""
        problem = self.problem
        values = np.tile(problem.values, (scaled.shape[0], 1))
        values[:, problem.fitted] = scaled * problem.scales
        columns = list(problem.columns[s])
        kind = problem.observed[s].kind
        gamma, own = reflection(kind, values[:, columns], frequency_hz, problem.reference_ohm)
        design = np.zeros((*gamma.shape, scaled.shape[1]), dtype=complex)
        place = {quantity: k for k, quantity in enumerate(problem.fitted)}
        for k, quantity in enumerate(columns):
            if quantity in place:
                design[..., place[quantity]] += own[..., k] * problem.quantities[quantity].scale
        return gamma, design

    def draw(self, count: int, rng: np.random.Generator) -> tuple[list[ComplexArray], FloatArray]:
        """Return changed readings of each standard, shape (b, n), and changed evidence, shape (b, p).

        A source whose size was estimated with ν degrees of freedom is drawn from the t distribution: normal
        values divided by √(χ²_ν/ν) (JCGM 101:2008, 6.4.9).
        """
        problem = self.problem
        readings = [
            np.repeat(self.model(s, self.start[None], one.frequency_hz)[0], count, axis=0)
            for s, one in enumerate(problem.observed)
        ]
        bases = [bumps(one.frequency_hz, *self.span, self.length) for one in problem.observed]
        for source in self.sources:
            tail = np.ones((count, 1))
            if np.isfinite(source.freedom):
                tail = np.sqrt(source.freedom / rng.chisquare(source.freedom, (count, 1)))
            shared = _complex_normal(rng, (count, bases[0].shape[1]))
            if isinstance(source, SharedSource):
                numbers = tail * rng.standard_normal((count, source.at_length(self.place)[0].shape[1]))
            for s, one in enumerate(problem.observed):
                if isinstance(source, SmoothSource):
                    heights = shared if source.common else _complex_normal(rng, (count, bases[s].shape[1]))
                    readings[s] = readings[s] + tail * (heights @ bases[s].T) * source.profiles[s]
                elif isinstance(source, SharedSource):
                    readings[s] = readings[s] + numbers @ source.at_length(self.place)[s].T
                elif isinstance(source, LumpedSource):
                    readings[s] = readings[s] + tail * rng.standard_normal((count, 1)) * source.vectors[s]
                else:
                    white = _complex_normal(rng, (count, one.frequency_hz.size))
                    readings[s] = readings[s] + np.sqrt(source.variances[s]) * white
        target, precision = problem.evidence()
        u = np.where(precision > 0.0, 1.0 / np.sqrt(np.where(precision > 0.0, precision, 1.0)), 0.0)
        return readings, self.start + u * rng.standard_normal((count, target.size))

    def fit(
        self, readings: Sequence[ComplexArray], evidence: FloatArray
    ) -> tuple[FloatArray, FloatArray, npt.NDArray[np.bool_]]:
        """Fit all draws by Gauss and Newton, each with its own derivatives.

        Returns
        -------
        values : array of shape (b, p)
        first_step : array of shape (b, p)
            What linear propagation gives: the step from the solution with the derivatives there.
        settled : bool array of shape (b,)
        """
        _, precision = self.problem.evidence()
        scaled = np.repeat(self.start[None], evidence.shape[0], axis=0)
        first_step = np.zeros_like(scaled)
        moving = np.arange(scaled.shape[0])
        for turn in range(ROUNDS):
            pull = precision * (evidence[moving] - scaled[moving])
            normal = np.tile(np.diag(precision), (moving.size, 1, 1))
            for s, (one, weight) in enumerate(zip(self.problem.observed, self.problem.weights, strict=True)):
                gamma, design = self.model(s, scaled[moving], one.frequency_hz)
                root = np.sqrt(weight)
                rows = np.concatenate([design.real, design.imag], axis=1) * np.tile(root, 2)[:, None]
                off = (readings[s][moving] - gamma) * root
                across = np.swapaxes(rows, 1, 2)
                pull = pull + (across @ np.concatenate([off.real, off.imag], axis=1)[..., None])[..., 0]
                normal = normal + across @ rows
            step = (inverse_of(normal) @ pull[..., None])[..., 0]
            if turn == 0:
                first_step = step
            # Full steps that have not settled by then swing from side to side: shorter ones do not.
            scaled[moving] += step if turn < FULL_STEPS else DAMPED * step
            moving = moving[np.abs(step).max(axis=1) > SETTLED]
            if moving.size == 0:
                break
        settled = np.ones(scaled.shape[0], dtype=bool)
        settled[moving] = False
        return scaled, first_step, settled


def _at(share: Share, length: int) -> Share:
    """Return a share at one correlation length."""
    place = min(length, share.covariances.shape[0] - 1)
    return replace(share, covariances=share.covariances[place : place + 1])


def _complex_normal(rng: np.random.Generator, shape: tuple[int, int]) -> ComplexArray:
    """Return complex values with unit variance per component."""
    return np.asarray(rng.standard_normal(shape) + 1j * rng.standard_normal(shape))


def _thinned(problem: Problem, sources: Sequence[Source]) -> tuple[Problem, list[Source]]:
    """Return the problem on fewer readings within the fit range, each with the weight of those it stands for."""
    parts, observed, weights, steps = [], [], [], []
    for one, weight in zip(problem.observed, problem.weights, strict=True):
        inside = np.flatnonzero(weight > 0.0)
        step = max(1, inside.size // FIT_POINTS)
        part = inside[::step]
        parts.append(part)
        steps.append(step)
        observed.append(
            Observed(one.name, one.kind, one.frequency_hz[part], one.gamma[part], one.deviations[:, part])
        )
        weights.append(weight[part] * step)
    # One reading stands for `step` of them, whose mean has less noise.
    everything = range(len(parts))
    thinned = [source.taken(everything, parts, steps) for source in sources]
    return replace(problem, observed=tuple(observed), weights=tuple(weights)), thinned
