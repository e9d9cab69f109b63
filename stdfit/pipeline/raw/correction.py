"""Raw readings of a bench, corrected with its references."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.circuits.error_box import corrected
from stdfit.circuits.reference_map import reference_weights
from stdfit.data.bench import Bench
from stdfit.fitting.observed import Observed
from stdfit.fitting.unknown_box import fitted_box
from stdfit.pipeline.raw.references import Reference, sets_of, stacked

SUREST = 1e-4
"""No reference counts as known better than this: its connections alone scatter more (common practice, no source)."""

CONNECTED = 5e-3
"""About how far off one connection of a reference can be (common practice, no source)."""

Readings = Mapping[str, ComplexArray]
"""Raw readings of each standard by name, shape (k, n): one row for each connection."""


@dataclass(frozen=True, slots=True, eq=False)
class SolvedSet:
    """The error terms at the time of one set of references.

    Attributes
    ----------
    name : str
    places : tuple of int
        Which of the bench's references these are.
    known : complex array of shape (n, r)
        Their defined reflections.
    bound : array of shape (n, r)
        Their bounds, which weigh them.
    shown : complex array of shape (n, r)
        Their mean readings, corrected with the error terms: with three references the same as `known`.
    box : complex array of shape (n, 3)
    """

    name: str
    places: tuple[int, ...]
    known: ComplexArray
    bound: FloatArray
    shown: ComplexArray
    box: ComplexArray

    def weights(self, gamma: ComplexArray) -> ComplexArray:
        """Return how much of each reference's error readings of Γ show, shape (n, k, r) for Γ of shape (n, k)."""
        return reference_weights(self.known, self.bound, gamma)


def solve_sets(
    references: Sequence[Reference], frequency_hz: FloatArray, raw: Readings
) -> tuple[SolvedSet, ...]:
    """Solve the error terms of each set from the mean readings of its references."""
    solved = []
    for name, places in sets_of(references).items():
        own = [references[place] for place in places]
        known, bound = stacked(own, frequency_hz)
        bound = np.maximum(bound, SUREST)
        read = np.stack([raw[one.entry.name].mean(axis=0) for one in own], axis=1)
        box = fitted_box(known, read, bound**-2.0)
        solved.append(SolvedSet(name, tuple(places), known, bound, corrected(box[:, None], read), box))
    return tuple(solved)


def observe(
    bench: Bench,
    references: Sequence[Reference],
    solved: Sequence[SolvedSet],
    frequency_hz: FloatArray,
    raw: Readings,
) -> tuple[list[Observed], list[Observed]]:
    """Correct every connection: references with the error terms of their own set, others with the mean over the sets.

    Returns
    -------
    references, others : lists of Observed
    """
    box_of = {place: one.box for one in solved for place in one.places}
    known = [
        Observed.from_readings(
            one.entry.name, one.entry.kind, frequency_hz, corrected(box_of[place], raw[one.entry.name])
        )
        for place, one in enumerate(references)
    ]
    others = [
        Observed.from_readings(
            entry.name,
            entry.kind,
            frequency_hz,
            np.mean([corrected(one.box, raw[entry.name]) for one in solved], axis=0),
        )
        for entry in bench.standards
        if entry.from_kit is None
    ]
    return known, others


def unsureness(others: Sequence[Observed], solved: Sequence[SolvedSet]) -> FloatArray:
    """Return about how far the references may put a corrected reading off, the worst standard's, shape (n,).

    √Σ|wᵢ|²·boundᵢ²: large where references are hardly known, and where two of them reflect nearly the same.
    """
    gamma = np.stack([one.gamma for one in others], axis=1)
    worst = np.zeros(gamma.shape[0])
    with np.errstate(all="ignore"):
        for one in solved:
            size = np.abs(one.weights(gamma)) * np.maximum(one.bound, CONNECTED)[:, None]
            worst = np.maximum(worst, np.sqrt((size**2).sum(axis=-1)).max(axis=-1))
    return np.where(np.isfinite(worst), worst, np.inf)


def by_set(
    others: Sequence[Observed], solved: Sequence[SolvedSet], raw: Readings
) -> tuple[ComplexArray, ...]:
    """Return what each set makes of the mean reading of each other standard, shape (sets, n) for each of them."""
    return tuple(
        np.stack([corrected(one.box, raw[other.name]).mean(axis=0) for one in solved]) for other in others
    )
