"""Has a standard changed? One test over the whole curve, in the space of what a connector can do to a reflection.

Contact resistance, shift of the plane and contact reactance: what wear does to a connector is what a connection does
differently every time, only larger. The difference d of two readings is projected on these, β = P·d, and the size of β
is compared with that of its errors. Their law is no plain F: correlation lengths are not known, and variances of
different sources have few degrees of freedom of their own. So it is drawn (JCGM 101:2008).
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, as_pairs, frozen_float
from stdfit.base.errors import RequestError
from stdfit.uncertainty.budget import Share, radius, radius_of_planes
from stdfit.uncertainty.connections import responses, running_mean
from stdfit.validity.change.difference import Change, Effect

UNITS = np.array([0.01, 0.1, 0.1])
"""Sizes of the three parts that matter about equally, in Ω, ps and ps: they only scale the numbers."""

SEEN = 1e-4
"""Directions with a power below this part of the largest are not told by the readings, and are left out."""

PIECES = 4.0
"""Independent values of a smooth error over the band, when frequencies are weighed against each other."""

DRAWS = 10_000
"""Draws of the law of the errors; the test can tell probabilities down to one in so many."""

SEED = 1
"""The same numbers every time, so that a verdict can be had again."""

WINDOWS = 50
"""What the parts do not explain is averaged over 1/WINDOWS of the band."""


@dataclass(frozen=True, slots=True, eq=False)
class Projected:
    """A difference in the space of the connector's parts.

    Attributes
    ----------
    change : Change
    basis : complex array of shape (n, 3)
        What a unit of each part does: Ω, ps and ps.
    parts : array of shape (3, k)
        The k directions that the readings tell, in these units.
    projector : array of shape (k, 2n)
    found : array of shape (k,)
        The difference in these directions.
    shares : tuple of Share
        Its errors, source by source.
    """

    change: Change
    basis: ComplexArray
    parts: FloatArray
    projector: FloatArray
    found: FloatArray
    shares: tuple[Share, ...]

    def __post_init__(self) -> None:
        for name in ("parts", "projector", "found"):
            object.__setattr__(self, name, frozen_float(getattr(self, name)))

    @property
    def explained(self) -> ComplexArray:
        """The part of the difference that the connector's parts explain, shape (n,)."""
        return np.asarray(self.basis @ (self.parts @ self.found))

    @property
    def covariances(self) -> FloatArray:
        """Covariance of `found` for each correlation length, shape (a, k, k)."""
        return totals(self.shares)

    def unsure(self, shares: Sequence[Share] | None = None) -> FloatArray:
        """Return the 95 % radius of the explained part over frequency, shape (n,)."""
        return radius(self.basis @ self.parts, self.shares if shares is None else shares)


def project(change: Change) -> Projected:
    """Project a difference on what a connector can do.

    β = (Re BᴴWB)⁻¹·Re BᴴW·d with B from `responses` and W = 1/(σ² + (n/4)·s²), white noise σ and smooth errors s.

    Parameters
    ----------
    change : Change
    """
    f, n = change.frequency_hz, change.frequency_hz.size
    basis = responses(change.gamma, f, change.reference_ohm)
    weight = 1.0 / np.maximum(change.noise_sd**2 + n / PIECES * smooth_variance(change)[0], 1e-16)
    scaled = as_pairs(basis) * UNITS
    both = np.concatenate([weight, weight])
    size, direction = np.linalg.eigh(scaled.T @ (both[:, None] * scaled))
    told = size > SEEN * size[-1]
    parts = UNITS[:, None] * direction[:, told]
    projector = (direction[:, told].T @ (scaled.T * both)) / size[told][:, None]
    found = projector @ as_pairs(change.difference)
    shares = [share_of(projector, effect) for effect in change.effects]
    if change.noise_sd > 0.0:
        shares.append(Share("noise", np.inf, (change.noise_sd**2 * projector @ projector.T)[None]))
    return Projected(change, basis, parts, projector, found, tuple(shares))


def smooth_variance(change: Change) -> tuple[FloatArray, FloatArray]:
    """Return the variance v per component of all errors with a correlation length, and Σ v²/ν, each of shape (n,)."""
    variance = np.zeros(change.frequency_hz.size)
    estimated = np.zeros(change.frequency_hz.size)
    for effect in change.effects:
        if len(effect.vectors) > 1:
            own = 0.5 * np.max([(np.abs(one) ** 2).sum(axis=1) for one in effect.vectors], axis=0)
            variance += own
            estimated += own**2 / effect.freedom
    return variance, estimated


def share_of(projector: FloatArray, effect: Effect) -> Share:
    """Return what an error does to the projected difference."""
    images = [projector @ as_pairs(vectors) for vectors in effect.vectors]
    return Share(effect.name, effect.freedom, np.array([image @ image.T for image in images]))


def totals(shares: Sequence[Share]) -> FloatArray:
    """Return the sum of all shares for each correlation length, shape (a, k, k)."""
    lengths = max(share.covariances.shape[0] for share in shares)
    return np.asarray(
        sum(np.broadcast_to(one.covariances, (lengths, *one.covariances.shape[1:])) for one in shares)
    )


@dataclass(frozen=True, slots=True)
class Tested:
    """The test over the whole curve.

    Attributes
    ----------
    statistic : float
        βᵀ·C⁻¹·β, the smallest over the correlation lengths.
    rank : int
        Directions that the readings tell.
    chance : float
        Probability of a value as large where nothing has changed.
    inflation : float
        The 95 % quantile of the statistic where nothing has changed ÷ that of chi-squared: what few degrees of
        freedom and unknown lengths cost; at least 1.
    """

    statistic: float
    rank: int
    chance: float
    inflation: float


def has_moved(projected: Projected) -> Tested:
    """Test whether a projected difference is larger than its errors.

    The statistic is the smallest T² = βᵀ·C⁻¹·β over the correlation lengths. Its law is drawn from the errors: all
    smooth ones at one of the lengths, each length equally likely, and each variance with its degrees of freedom (JCGM
    101:2008, 6.4.9).

    Raises
    ------
    RequestError
        The law is not finite.
    """
    from scipy.special import chdtri

    covariances = projected.covariances
    rank = projected.found.size
    inverse = np.asarray(np.linalg.pinv(covariances, rcond=1e-12, hermitian=True), dtype=float)
    with np.errstate(all="ignore"):  # what is not finite is refused
        law = _smallest(_drawn(projected), inverse)
        statistic = float(_smallest(projected.found[None], inverse)[0])
    if not (np.isfinite(law).all() and np.isfinite(statistic)):
        raise RequestError(
            f"the errors of '{projected.change.pair.label}' are too large or too little known to compare with",
            "look at the sizes and degrees of freedom in the tables 'session' of both kit files, or fit again",
        )
    usual = float(chdtri(rank, 0.05))
    return Tested(
        statistic,
        rank,
        float((1 + np.count_nonzero(law >= statistic)) / (1 + DRAWS)),
        max(1.0, float(np.quantile(law, 0.95)) / usual),
    )


def _drawn(projected: Projected) -> FloatArray:
    """Return differences drawn from their errors, shape (`DRAWS`, k)."""
    count, rank = projected.covariances.shape[0], projected.found.size
    rng = np.random.default_rng(SEED)
    drawn = np.zeros((DRAWS, rank))
    lengths = rng.integers(count, size=DRAWS)
    for share in projected.shares:
        value, vector = np.linalg.eigh(share.covariances)
        roots = vector * np.sqrt(np.maximum(value, 0.0))[:, None, :]
        numbers = rng.standard_normal((DRAWS, rank))
        if np.isfinite(share.freedom):
            numbers *= np.sqrt(share.freedom / rng.chisquare(share.freedom, DRAWS))[:, None]
        for length in range(count):
            root = roots[min(length, roots.shape[0] - 1)]
            drawn[lengths == length] += numbers[lengths == length] @ root.T
    return drawn


def _smallest(values: FloatArray, inverse: FloatArray) -> FloatArray:
    return np.asarray(np.einsum("ni,aij,nj->na", values, inverse, values).min(axis=1))


@dataclass(frozen=True, slots=True)
class Rest:
    """What the connector's parts do not explain.

    Attributes
    ----------
    size : float
        Its largest size |Δ|, averaged over a fiftieth of the band.
    at_hz : float
        Where it exceeds its errors most.
    chance : float
        Bound on the probability of so much where nothing else has changed.
    """

    size: float
    at_hz: float
    chance: float


def unexplained(projected: Projected) -> Rest:
    """Compare what the parts do not explain with noise, smooth errors, and the correction's own part of a change.

    One |r|²/σ² exceeds q with a probability of (1 + q/ν)^(−ν/2), e^(−q/2) for infinite degrees of freedom ν (Welch and
    Satterthwaite), and any of n with n times that at most, however they go together (C. E. Bonferroni). Of definitions
    nothing is said: what their models do not follow is not in them.
    """
    change = projected.change
    rest = change.difference - projected.explained
    window = 1 + 2 * (rest.size // (2 * WINDOWS))
    averaged = running_mean(rest, window)
    places = np.arange(rest.size)
    # Windows are shorter at the ends.
    taken = np.minimum(places + window // 2, rest.size - 1) - np.maximum(places - window // 2, 0) + 1
    known = change.noise_sd**2 / taken + (change.mixing * np.abs(projected.explained)) ** 2
    smooth, estimated = smooth_variance(change)
    variance = np.maximum(known + smooth, 1e-18)
    freedom = variance**2 / np.maximum(estimated, 1e-300)
    ratio = np.abs(averaged) ** 2 / variance
    logarithm = -0.5 * freedom * np.log1p(ratio / freedom)
    place = int(np.argmin(logarithm))
    chance = min(1.0, rest.size * float(np.exp(logarithm[place])))
    if change.by == "definitions":
        chance = 1.0
    return Rest(float(np.abs(averaged[place])), float(change.frequency_hz[place]), chance)


def pointwise_bound(change: Change) -> FloatArray:
    """Return the 95 % radius of the difference at each frequency, shape (n,)."""
    planes = [
        np.stack(
            [
                np.stack([(own.real**2).sum(1), (own.imag**2).sum(1), (own.real * own.imag).sum(1)], axis=-1)
                for own in effect.vectors
            ]
        )
        for effect in change.effects
    ]
    freedoms = [effect.freedom for effect in change.effects]
    white = change.noise_sd**2 * np.array([1.0, 1.0, 0.0])
    planes.append(np.broadcast_to(white, (1, change.frequency_hz.size, 3)))
    return radius_of_planes(planes, [*freedoms, np.inf])
