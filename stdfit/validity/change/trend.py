"""Values over time whose errors are partly common: do they stay, drift, or step, and by how much?"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import FloatArray, frozen_float
from stdfit.uncertainty.region import effective_freedom, student

FEWEST_KINDS = 4
"""Values from which on a step can be told from a drift."""

APART = 2.0
"""Difference of the information criteria from which on one of two descriptions is preferred (R. E. Kass, A. E. Raftery,
J. Amer. Statist. Assoc. 90, 1995, 773–795: "positive" evidence)."""

DRAWS = 10000
SEED = 1
"""The same numbers are drawn every time, so that a history says the same twice."""

FLOOR = 1e-6
"""Uncertainty that every value has of its own, against the largest of all: less is rounding."""

ALARM = 0.05
"""Chance of finding a change where nothing changed."""

TOO_FEW, SAME, DRIFT, STEP, EITHER = "too few", "no change", "drift", "step", "step or drift"


@dataclass(frozen=True, slots=True, eq=False)
class Series:
    """Values over time with their errors, source by source.

    Attributes
    ----------
    x : array of shape (n,)
        Time or matings, not falling.
    y : array of shape (n,)
        Values.
    parts : array of shape (s, n, n)
        Covariance of the values from each independent group of errors.
    freedoms : array of shape (s,)
        Degrees of freedom of each.
    """

    x: FloatArray
    y: FloatArray
    parts: FloatArray
    freedoms: FloatArray

    def __post_init__(self) -> None:
        for name in ("x", "y", "parts", "freedoms"):
            object.__setattr__(self, name, frozen_float(getattr(self, name)))

    @property
    def covariance(self) -> FloatArray:
        """All of it, shape (n, n)."""
        return np.asarray(self.parts.sum(axis=0))


@dataclass(frozen=True, slots=True)
class Interval:
    """A value with its 95 % interval."""

    value: float
    low: float
    high: float


@dataclass(frozen=True, slots=True)
class Trend:
    """What a series says.

    Attributes
    ----------
    verdict : str
        `TOO_FEW`, `SAME`, `DRIFT`, `STEP` or `EITHER`.
    slope : Interval
        Of the straight line, a unit of x.
    step : Interval or None
        Size of the best step; None where there is none to be had.
    after : int or None
        Index of the last value before it.
    chance : float
        Of as large a change where nothing changed.
    preference : float
        Information criterion of the step minus that of the drift: negative for a step.
    scatter : float
        Chance of a scatter about the verdict's description that is as large or larger.
    """

    verdict: str
    slope: Interval
    step: Interval | None
    after: int | None
    chance: float
    preference: float
    scatter: float


def trend(series: Series, alarm: float = ALARM) -> Trend:
    """Return whether values stay, drift or step.

    Generalised least squares (A. C. Aitken, Proc. R. Soc. Edinburgh 55, 1936, 42–48; from memory) with the covariance V
    of the values: an error that all values share is a multiple of 1·1ᵀ in V and moves neither slope nor step.

    Change. With r = V^(−1/2)·y, without its part along V^(−1/2)·1, each description (a line, a step at each place) is
    one unit vector m, and (m·r)² is what it saves of χ². The largest of all is compared with its distribution where
    nothing changed, which is drawn; so the chance of a false alarm is `alarm` for all descriptions together.

    Step or drift. BIC = χ² + k·ln n (G. Schwarz, Ann. Statist. 6, 1978, 461–464), k = 2 for the line, 3 for a step
    since its place is found too. Where they differ by less than `APART`, the two are not told apart.

    Parameters
    ----------
    series : Series
        Two or more values, at two or more different x.
    alarm : float
    """
    n = series.x.size
    root = np.asarray(np.linalg.cholesky(_positive(series.covariance)), dtype=float)
    columns = [series.x - series.x.mean()]
    places = [k for k in range(n - 1) if series.x[k + 1] > series.x[k]]
    columns += [np.where(np.arange(n) > k, 1.0, 0.0) for k in places]
    white = np.linalg.solve(root, np.column_stack([np.ones(n), series.y, *columns]))
    ones = white[:, 0] / np.linalg.norm(white[:, 0])
    rest = white[:, 1:] - np.outer(ones, ones @ white[:, 1:])
    r, units = rest[:, 0], rest[:, 1:] / np.linalg.norm(rest[:, 1:], axis=0)
    saved = (units.T @ r) ** 2
    slope, freedom = _estimate(series, root, columns[0])
    best = int(np.argmax(saved[1:]))
    step, _ = _estimate(series, root, columns[1 + best])
    chance = _chance(float(saved.max()), units, freedom)
    total = float(r @ r)
    preference = float(saved[0] - saved[1 + best] + np.log(n))
    verdict = _verdict(n, chance <= alarm, preference)
    left = {SAME: total, TOO_FEW: total - saved.max(), DRIFT: total - saved[0], STEP: total - saved[1 + best]}
    told = {SAME: 1, TOO_FEW: 2, DRIFT: 2, STEP: 3}
    kind = (STEP if preference < 0.0 else DRIFT) if verdict == EITHER else verdict
    return Trend(
        verdict,
        slope,
        step,
        places[best],
        chance,
        preference,
        _chi2_tail(float(left[kind]), n - told[kind]),
    )


def own_uncertainty(series: Series) -> FloatArray:
    """Return the standard uncertainty of each value without what all values share, shape (n,)."""
    total = np.diag(series.covariance).copy()
    for part in series.parts:
        size = np.sqrt(np.maximum(np.diag(part), 0.0))
        if size.all() and np.allclose(part, np.outer(size, size), rtol=1e-9):
            total -= size**2
    return np.asarray(np.sqrt(np.maximum(total, 0.0)))


def _verdict(n: int, changed: bool, preference: float) -> str:
    if n < FEWEST_KINDS:
        return TOO_FEW
    if not changed:
        return SAME
    if abs(preference) < APART:
        return EITHER
    return STEP if preference < 0.0 else DRIFT


def _estimate(series: Series, root: FloatArray, column: FloatArray) -> tuple[Interval, float]:
    """Return the coefficient of a column beside a constant, and its degrees of freedom by Welch and Satterthwaite."""
    design = np.linalg.solve(root, np.column_stack([np.ones(column.size), column]))
    inverse = np.linalg.pinv(design)
    weights = np.linalg.solve(root.T, inverse[1])
    variances = np.maximum(np.einsum("i,sij,j->s", weights, series.parts, weights), 0.0)
    freedom = float(effective_freedom(variances, series.freedoms))
    value = float(weights @ series.y)
    half = float(np.sqrt(variances.sum()) * student(freedom))
    return Interval(value, value - half, value + half), freedom


def _chance(most: float, units: FloatArray, freedom: float) -> float:
    """Return the chance of max (m·z)² ≥ `most` for white z; of Student's where its scale was estimated."""
    rng = np.random.default_rng(SEED)
    z = rng.standard_normal((DRAWS, units.shape[0])) @ units
    drawn = (z**2).max(axis=1)
    if np.isfinite(freedom) and freedom < 1e6:
        drawn = drawn * freedom / rng.chisquare(freedom, DRAWS)
    return float(np.mean(drawn >= most))


def _chi2_tail(value: float, freedom: int) -> float:
    """Return the chance that χ² is as large or larger; 1 where there is no degree of freedom left."""
    if freedom < 1:
        return 1.0
    from scipy.special import chdtrc

    return float(chdtrc(freedom, max(value, 0.0)))


def _positive(covariance: FloatArray) -> FloatArray:
    """Return a covariance that has a Cholesky factor: what is singular gets a floor of rounding's size."""
    floor = FLOOR * max(float(np.sqrt(np.diag(covariance).max())), FLOOR)
    return np.asarray(covariance + floor**2 * np.eye(covariance.shape[0]))


def series_of(
    x: Sequence[float],
    y: Sequence[float],
    sizes: FloatArray,
    groups: Sequence[Sequence[object]],
    freedoms: FloatArray,
    repeats: Sequence[int],
) -> Series:
    """Return a series from the sources of each value.

    A size that was estimated from repeats is pooled over the values, σ² = Σ ν·n·s²/Σ ν: the same parts in the same
    hands. Weights that follow each single estimate would prefer values whose scatter happens to look small.

    Parameters
    ----------
    x, y : sequences of n numbers
    sizes : array of shape (s, n)
        Standard uncertainty of each value from each source.
    groups : sequence of s sequences of n keys
        Values whose key for a source is the same have the same error from it: the root mean square of their sizes.
    freedoms : array of shape (s, n)
        Infinite where a size is stated. Of a group the smallest counts.
    repeats : sequence of n ints
        Of how many connections each value is the mean.
    """
    parts, told = [], []
    sizes, freedoms = _pooled(sizes, freedoms, np.array(repeats, dtype=float))
    for own, keys, nu in zip(sizes, groups, freedoms, strict=True):
        for key in dict.fromkeys(keys):
            inside = np.array([one == key for one in keys])
            size = np.where(inside, np.sqrt(np.mean(own[inside] ** 2)), 0.0)
            if size.any():
                parts.append(np.outer(size, size))
                told.append(float(nu[inside].min()))
    n = len(x)
    return Series(
        np.array(x),
        np.array(y),
        np.array(parts) if parts else np.zeros((1, n, n)),
        np.array(told or [np.inf]),
    )


def _pooled(sizes: FloatArray, freedoms: FloatArray, repeats: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return sizes and degrees of freedom with what was estimated from repeats pooled, source by source."""
    sizes, freedoms = sizes.copy(), freedoms.copy()
    for own, nu in zip(sizes, freedoms, strict=True):
        told = np.isfinite(nu) & (own > 0.0)
        if told.any():
            total = nu[told].sum()
            own[told] = np.sqrt(np.sum(nu[told] * repeats[told] * own[told] ** 2) / total / repeats[told])
            nu[told] = total
    return sizes, freedoms
