"""The sources of error of a bench, each as what it does to the readings."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.data.bench_records import StatedResidual
from stdfit.fitting.observed import Observed
from stdfit.uncertainty.connections import PARTS, Repeatability, responses
from stdfit.uncertainty.region import CIRCULAR

Part = slice | npt.NDArray[np.intp]
"""Which readings of a standard."""


@dataclass(frozen=True, slots=True, eq=False)
class SmoothSource:
    """A smooth random function of frequency times a known profile, of unknown correlation length.

    Attributes
    ----------
    name : str
    profiles : tuple of complex arrays of shape (n,)
        For each standard, standard deviation per component times the way it acts.
    common : bool
        True where the same function acts on all standards.
    freedom : float
    """

    name: str
    profiles: tuple[ComplexArray, ...]
    common: bool
    freedom: float = np.inf

    def taken(self, standards: Sequence[int], parts: Sequence[Part], steps: Sequence[int]) -> "SmoothSource":
        """Return the source as it acts on some readings of some standards."""
        return replace(
            self, profiles=tuple(self.profiles[s][part] for s, part in zip(standards, parts, strict=True))
        )

    def power(self, index: int) -> FloatArray:
        """Return the variance per component of one standard's mean reading, shape (n,)."""
        return np.asarray(np.abs(self.profiles[index]) ** 2)


@dataclass(frozen=True, slots=True, eq=False)
class LumpedSource:
    """A random number of unit variance for each standard, times a known function of frequency.

    Attributes
    ----------
    name : str
    vectors : tuple of complex arrays of shape (n,)
    freedom : float
    """

    name: str
    vectors: tuple[ComplexArray, ...]
    freedom: float

    def taken(self, standards: Sequence[int], parts: Sequence[Part], steps: Sequence[int]) -> "LumpedSource":
        """Return the source as it acts on some readings of some standards."""
        return replace(
            self, vectors=tuple(self.vectors[s][part] for s, part in zip(standards, parts, strict=True))
        )

    def power(self, index: int) -> FloatArray:
        """Return the mean variance per component of one standard's mean reading, shape (n,)."""
        return np.asarray(0.5 * np.abs(self.vectors[index]) ** 2)


@dataclass(frozen=True, slots=True, eq=False)
class SharedSource:
    """Random numbers of unit variance that act on all standards at once, each times a known function of frequency.

    Attributes
    ----------
    name : str
    vectors : tuple over lengths of tuple over standards of complex arrays of shape (n, q)
        One entry for each correlation length that is tried, or one for all of them.
    freedom : float
    """

    name: str
    vectors: tuple[tuple[ComplexArray, ...], ...]
    freedom: float = np.inf

    def taken(self, standards: Sequence[int], parts: Sequence[Part], steps: Sequence[int]) -> "SharedSource":
        """Return the source as it acts on some readings of some standards."""
        return replace(
            self,
            vectors=tuple(
                tuple(own[s][part] for s, part in zip(standards, parts, strict=True)) for own in self.vectors
            ),
        )

    def power(self, index: int) -> FloatArray:
        """Return the mean variance per component of one standard's mean reading, the largest length's, shape (n,)."""
        each = [0.5 * (np.abs(own[index]) ** 2).sum(axis=1) for own in self.vectors]
        return np.asarray(np.max(each, axis=0))

    def at_length(self, length: int) -> tuple[ComplexArray, ...]:
        """Return the vectors on each standard at one of the correlation lengths."""
        return self.vectors[min(length, len(self.vectors) - 1)]


@dataclass(frozen=True, slots=True, eq=False)
class WhiteSource:
    """Independent noise at each point; `variances` per component of the mean reading, one for each standard."""

    name: str
    variances: tuple[float, ...]
    freedom: float = np.inf

    def taken(self, standards: Sequence[int], parts: Sequence[Part], steps: Sequence[int]) -> "WhiteSource":
        """Return the source as it acts on readings that each stand for the mean of `steps` of them."""
        return replace(
            self, variances=tuple(self.variances[s] / step for s, step in zip(standards, steps, strict=True))
        )


Source = SmoothSource | LumpedSource | SharedSource | WhiteSource


def analyser_sources(observed: Sequence[Observed], residual: StatedResidual) -> list[Source]:
    """Return directivity, tracking and source match residuals, common to all standards.

    A stated bound is the 95 % radius of a circular complex value: 2.448 standard deviations per component. Between
    the stated frequencies it is interpolated in dB, beyond them held.
    """

    def between(logarithm: FloatArray) -> list[FloatArray]:
        return [np.interp(one.frequency_hz, residual.frequency_hz, logarithm) for one in observed]

    bounds = {
        "directivity": [np.exp(own) for own in between(np.log(residual.directivity))],
        # A tracking bound is stated as the dB of 1 + |δT|.
        "tracking": [np.expm1(own) for own in between(np.log1p(residual.reflection_tracking))],
        "source match": [np.exp(own) for own in between(np.log(residual.source_match))],
    }
    return [
        SmoothSource(
            f"analyser residuals ({name})",
            tuple(bound / CIRCULAR * one.gamma**power for one, bound in zip(observed, each, strict=True)),
            common=True,
        )
        for power, (name, each) in enumerate(bounds.items())
    ]


def connection_sources(
    observed: Sequence[Observed], scatter: Repeatability, reference_ohm: float
) -> list[Source]:
    """Return what the scatter of connections leaves in the means of the readings."""
    each = [
        responses(one.gamma, one.frequency_hz, reference_ohm) / np.sqrt(one.connections) for one in observed
    ]
    sources: list[Source] = [
        LumpedSource(
            f"connections ({part})",
            tuple(basis[:, i] * scatter.sd[i] for basis in each),
            float(scatter.freedom[i]),
        )
        for i, part in enumerate(PARTS)
    ]
    contrasts = float(sum(one.connections - 1 for one in observed))
    if any(leftover.any() for leftover in scatter.leftover):
        profiles = tuple(
            leftover / np.sqrt(one.connections) + 0j
            for leftover, one in zip(scatter.leftover, observed, strict=True)
        )
        sources.append(
            SmoothSource("connections (other scatter)", profiles, common=False, freedom=max(contrasts, 1.0))
        )
    sources.append(WhiteSource("noise", tuple(scatter.noise**2 / one.connections for one in observed)))
    return sources


def reading_variance(sources: Sequence[Source], index: int) -> tuple[FloatArray, FloatArray]:
    """Return the variance per component of one standard's mean reading, each of shape (n,): smooth, white."""
    smooth: FloatArray | float = 0.0
    white: FloatArray | float = 0.0
    for source in sources:
        if isinstance(source, WhiteSource):
            white = white + source.variances[index]
        else:
            smooth = smooth + source.power(index)
    return np.asarray(smooth, dtype=float), np.asarray(white, dtype=float)
