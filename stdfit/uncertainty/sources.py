"""The sources of error of a bench, each as what it does to the readings."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.data.bench_records import StatedResidual
from stdfit.fitting.observed import Observed
from stdfit.uncertainty.connections import PARTS, Repeatability, responses
from stdfit.uncertainty.region import CIRCULAR


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


@dataclass(frozen=True, slots=True, eq=False)
class WhiteSource:
    """Independent noise at each point; `variances` per component of the mean reading, one for each standard."""

    name: str
    variances: tuple[float, ...]
    freedom: float = np.inf


Source = SmoothSource | LumpedSource | WhiteSource


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
        if isinstance(source, SmoothSource):
            smooth = smooth + np.abs(source.profiles[index]) ** 2
        elif isinstance(source, LumpedSource):
            smooth = smooth + 0.5 * np.abs(source.vectors[index]) ** 2
        else:
            white = white + source.variances[index]
    return np.asarray(smooth, dtype=float), np.asarray(white, dtype=float)
