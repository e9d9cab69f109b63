"""What the references leave in readings that are corrected with them, as sources of error.

To first order a corrected standard is wrong by Σᵢ wᵢ(Γ)·(εᵢ − ηᵢ), with εᵢ the error of a reference's definition, ηᵢ
that of its reading, and wᵢ how much of either the standard shows. The same εᵢ and ηᵢ act on all standards.
"""

from collections.abc import Sequence

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.base.errors import RequestError
from stdfit.fitting.observed import Observed
from stdfit.pipeline.raw.correction import SolvedSet
from stdfit.pipeline.raw.references import Reference
from stdfit.uncertainty.budget import factor_of
from stdfit.uncertainty.connections import PARTS, Repeatability, responses
from stdfit.uncertainty.region import CIRCULAR
from stdfit.uncertainty.smooth import LENGTHS_PER_SPAN
from stdfit.uncertainty.sources import SharedSource, SmoothSource, Source, WhiteSource
from stdfit.validity.ancestry import Origin, distinct, related
from stdfit.validity.kit import misfit_at

Weights = Sequence[ComplexArray]
"""For each standard how much of each reference's error it shows, shape (n, r)."""


def weights_on(others: Sequence[Observed], solved: Sequence[SolvedSet], count: int) -> list[ComplexArray]:
    """Return how much of the error of each of the references the mean over the sets shows, for each standard.

    Parameters
    ----------
    others : sequence of Observed
    solved : sequence of SolvedSet
    count : int
        How many references the bench has in all.

    Returns
    -------
    list of complex arrays of shape (n, count)
    """
    gamma = np.stack([one.gamma for one in others], axis=1)
    weights = np.zeros((*gamma.shape, count), dtype=complex)
    for one in solved:
        weights[..., list(one.places)] = one.weights(gamma) / len(solved)
    return [weights[:, s] for s in range(len(others))]


def kit_sources(references: Sequence[Reference], weights: Weights, frequency_hz: FloatArray) -> list[Source]:
    """Return what the kits say of their standards: their sources of error, and the misfits of their models.

    Of kits that have an ancestor in common it is not known how their errors go together. For any correlation the
    covariance of a sum of g errors is at most g times the sum of their covariances (from (1/g)·(Σx)² ≤ Σx²), so that
    each of them counts √g times.

    Raises
    ------
    RequestError
        A kit has more correlation lengths than this version.
    """
    designs = [one.design(frequency_hz) for one in references]
    sources: list[Source] = []
    for group in related(distinct([one.origin for one in references])):
        for origin in group:
            own = [k for k, one in enumerate(references) if one.origin.sha256 == origin.sha256]
            combined = [
                np.sqrt(len(group)) * sum(weight[:, k, None] * designs[k] for k in own) for weight in weights
            ]
            sources += _shares(origin, combined)
            sources += _misfits(origin, [references[k] for k in own], own, weights, frequency_hz, len(group))
    return sources


def _shares(origin: Origin, combined: Sequence[ComplexArray]) -> list[Source]:
    """Return each source of a kit as it acts on the standards through their combined derivatives."""
    sources: list[Source] = []
    for share in origin.kit.shares:
        if share.covariances.shape[0] > len(LENGTHS_PER_SPAN):
            raise RequestError(
                f"the kit '{origin.kit.name}' has {share.covariances.shape[0]} correlation lengths, and this version "
                f"{len(LENGTHS_PER_SPAN)}",
                "make the kit again with this version",
            )
        roots = [factor_of(covariance) for covariance in share.covariances]
        if any(root.any() for root in roots):
            # A kit with fewer lengths than others have keeps its last one: all places then have one of its own.
            places = range(len(LENGTHS_PER_SPAN) if len(roots) > 1 else 1)
            vectors = tuple(
                tuple(design @ roots[min(place, len(roots) - 1)] for design in combined) for place in places
            )
            name = f"reference kit ({_flat(origin.kit.name)}: {_flat(share.name)})"
            sources.append(SharedSource(name, vectors, share.freedom))
    return sources


def _flat(name: str) -> str:
    """Return a name without brackets: a reason names the kind before the first of them."""
    return name.replace(" (", ", ").replace("(", "").replace(")", "")


def _misfits(
    origin: Origin,
    own: Sequence[Reference],
    places: Sequence[int],
    weights: Weights,
    frequency_hz: FloatArray,
    related_kits: int,
) -> list[Source]:
    """Return the model error of each physical reference: a 95 % radius of a smooth function, common to all."""
    sources: list[Source] = []
    for name in dict.fromkeys(one.definition.name for one in own):
        same = [place for place, one in zip(places, own, strict=True) if one.definition.name == name]
        radius = misfit_at(origin.kit.definition(name), frequency_hz) * np.sqrt(related_kits) / CIRCULAR
        if radius.any():
            profiles = tuple(weight[:, same].sum(axis=1) * radius for weight in weights)
            sources.append(SmoothSource(f"reference misfit ({_flat(name)})", profiles, common=True))
    return sources


def reading_sources(
    known: Sequence[Observed], weights: Weights, scatter: Repeatability, reference_ohm: float
) -> list[Source]:
    """Return what the scatter of the references' own connections and their noise leave in the standards.

    Parameters
    ----------
    known : sequence of Observed
        The references.
    weights : sequence of complex arrays of shape (n, r)
    scatter : Repeatability
        Pooled over all standards; its leftovers are those of the references.
    reference_ohm : float

    Notes
    -----
    Noise of the references is white, and stronger where they lie near each other. The fit averages it over all
    readings, so it is small: it counts as white noise of the standard with the median of its variance over
    frequency, and that the same noise acts on all standards is left out.
    """
    share = 1.0 / np.sqrt([one.connections for one in known])
    each = np.stack([responses(one.gamma, one.frequency_hz, reference_ohm) for one in known], axis=1)
    sources: list[Source] = [
        SharedSource(
            f"reference connections ({part})",
            (tuple(weight * share * each[..., i] * scatter.sd[i] for weight in weights),),
            float(scatter.freedom[i]),
        )
        for i, part in enumerate(PARTS)
    ]
    contrasts = float(sum(one.connections - 1 for one in known))
    for k, (one, leftover) in enumerate(zip(known, scatter.leftover, strict=True)):
        if leftover.any():
            profiles = tuple(weight[:, k] * share[k] * leftover for weight in weights)
            name = f"reference connections (other scatter of {_flat(one.name)})"
            sources.append(SmoothSource(name, profiles, common=True, freedom=max(contrasts, 1.0)))
    white = [np.median((np.abs(weight) ** 2 * share**2).sum(axis=1)) for weight in weights]
    sources.append(WhiteSource("reference noise", tuple(float(scatter.noise**2 * own) for own in white)))
    return sources


def drift_sources(each: Sequence[ComplexArray]) -> list[Source]:
    """Return the drift between sets of reference readings, independent for each standard.

    Two sets: when between them a standard was read is not known, so its part of the half-difference is anything from
    −1 to 1 (a rectangular law: 1/√3). More sets: their sample covariance, with its degrees of freedom.

    Parameters
    ----------
    each : sequence of complex arrays of shape (sets, n)
        What each set makes of each standard.
    """
    sets = each[0].shape[0]
    if sets < 2:
        return []
    vectors = []
    for s, own in enumerate(each):
        off = own - own.mean(axis=0)
        columns = off[1:] / np.sqrt(3.0) if sets == 2 else off / np.sqrt(sets - 1.0)
        whole = np.zeros((own.shape[1], len(each) * columns.shape[0]), dtype=complex)
        whole[:, s * columns.shape[0] : (s + 1) * columns.shape[0]] = columns.T
        vectors.append(whole)
    return [SharedSource("drift (between sets)", (tuple(vectors),), np.inf if sets == 2 else sets - 1.0)]
