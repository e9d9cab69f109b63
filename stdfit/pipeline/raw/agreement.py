"""Do more than three references agree with each other? What is left after the error terms, against what is expected."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.circuits.reference_map import reference_weights
from stdfit.fitting.observed import Observed
from stdfit.pipeline.raw.correction import SolvedSet
from stdfit.pipeline.raw.references import FEWEST, Reference
from stdfit.uncertainty.budget import plane, radius_of_planes
from stdfit.uncertainty.connections import Repeatability, responses
from stdfit.validity.ancestry import distinct
from stdfit.validity.kit import misfit_at

AGREES = 1.25
"""Root mean square of deviation ÷ bound over the band beyond which references disagree: about 1 % of sound sets do."""


def disagreements(
    references: Sequence[Reference],
    known: Sequence[Observed],
    solved: Sequence[SolvedSet],
    scatter: Repeatability,
    reference_ohm: float,
) -> list[str]:
    """Return a warning for each set whose references contradict each other.

    Parameters
    ----------
    references, known : sequences
        The references, and their corrected readings.
    solved : sequence of SolvedSet
    scatter : Repeatability
    reference_ohm : float
    """
    told = []
    for one in solved:
        own = [references[place] for place in one.places]
        read = [known[place] for place in one.places]
        worst, size = _deviation(one, own, read, scatter, reference_ohm)
        if worst.size and worst.max() > AGREES:
            told.append(_line(one, own, read, scatter, reference_ohm, worst, size))
    return told


def _line(
    solved: SolvedSet,
    own: Sequence[Reference],
    read: Sequence[Observed],
    scatter: Repeatability,
    reference_ohm: float,
    worst: FloatArray,
    size: FloatArray,
) -> str:
    """Say which reference disagrees: the one without which the others agree best."""
    where = f" of the set '{solved.name}'" if solved.name else ""
    names = [one.entry.name for one in own]
    if len(own) == FEWEST + 1:
        # One deviation is all that is left, and an error of any of the four would give it.
        return (
            f"the known standards {', '.join(names)}{where} contradict each other, {worst.max():.2g} times more than "
            "their bounds allow; which of the four is wrong only a fifth would tell"
        )
    left = []
    for k in range(len(own)):
        rest = [place for place in range(len(own)) if place != k]
        deviation, _ = _deviation(
            _part(solved, rest),
            [own[place] for place in rest],
            [read[place] for place in rest],
            scatter,
            reference_ohm,
        )
        left.append(deviation.max())
    odd = int(np.argmin(left))
    others = "the others agree without it" if left[odd] <= AGREES else "without it the others still disagree"
    return (
        f"the known standard '{names[odd]}'{where} contradicts the others, by {size[odd]:.2g} and "
        f"{worst.max():.2g} times more than the bounds allow; {others}. Clean and read it again, or leave it out."
    )


def _part(solved: SolvedSet, places: Sequence[int]) -> SolvedSet:
    """Return a set with some of its references; the deviations are linear, so that the same error terms serve."""
    return replace(
        solved,
        places=tuple(solved.places[place] for place in places),
        known=solved.known[:, places],
        bound=solved.bound[:, places],
        shown=solved.shown[:, places],
    )


def _deviation(
    solved: SolvedSet,
    own: Sequence[Reference],
    read: Sequence[Observed],
    scatter: Repeatability,
    reference_ohm: float,
) -> tuple[FloatArray, FloatArray]:
    """Return for each reference the root mean square of deviation ÷ 95 % bound, and of the deviation.

    What is left after the error terms is −P·(ε − η) with P = 1 − V·V⁺: ε from the kits, η from connections and noise.
    Three references leave nothing.
    """
    count, f = len(own), read[0].frequency_hz
    if count <= FEWEST:
        return np.zeros(0), np.zeros(0)
    project = np.eye(count) - reference_weights(solved.known, solved.bound, solved.known)
    left = np.abs((project @ (solved.shown - solved.known)[..., None])[..., 0])
    bound = np.stack(
        [_bound(project[:, k], own, read, scatter, reference_ohm, f) for k in range(count)], axis=1
    )
    ratio = left / bound
    return np.sqrt(np.mean(ratio**2, axis=0)), np.sqrt(np.mean(left**2, axis=0))


def _bound(
    weight: ComplexArray,
    own: Sequence[Reference],
    read: Sequence[Observed],
    scatter: Repeatability,
    reference_ohm: float,
    frequency_hz: FloatArray,
) -> FloatArray:
    """Return the 95 % bound of a weighted sum of the references' errors, shape (n,)."""
    planes, freedoms = [], []
    for origin in distinct([one.origin for one in own]):
        design = sum(
            weight[:, k, None] * one.design(frequency_hz)
            for k, one in enumerate(own)
            if one.origin.sha256 == origin.sha256
        )
        for share in origin.kit.shares:
            planes.append(plane(np.asarray(design), share.covariances))
            freedoms.append(share.freedom)
    for part, sd in enumerate(scatter.sd):
        lumped = np.stack(
            [
                weight[:, k]
                * responses(one.gamma, frequency_hz, reference_ohm)[:, part]
                * sd
                / np.sqrt(one.connections)
                for k, one in enumerate(read)
            ],
            axis=1,
        )
        planes.append(plane(lumped, np.eye(len(own))[None]))
        freedoms.append(float(scatter.freedom[part]))
    noise = sum(
        np.abs(weight[:, k]) ** 2 * (scatter.leftover[k] ** 2 + scatter.noise**2) / one.connections
        for k, one in enumerate(read)
    )
    planes.append(np.stack([noise, noise, np.zeros_like(noise)], axis=-1)[None])
    freedoms.append(np.inf)
    misfit = np.sqrt(
        sum(
            (np.abs(weight[:, k]) * misfit_at(one.definition, frequency_hz)) ** 2 for k, one in enumerate(own)
        )
    )
    return np.asarray(radius_of_planes(planes, freedoms) + misfit)
