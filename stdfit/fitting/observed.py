"""Several connections of one standard, reduced to what a fit needs."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_complex, frozen_float

MEDIAN_OF_EXPONENTIAL = float(np.log(2.0))
FOURTH_DIFFERENCE = np.array([1.0, -4.0, 6.0, -4.0, 1.0])


@dataclass(frozen=True, slots=True, eq=False)
class Observed:
    """The readings of one standard.

    Attributes
    ----------
    name : str
    kind : {"open", "short", "load"}
    frequency_hz : array of shape (n,)
    gamma : complex array of shape (n,)
        Mean over the connections.
    deviations : complex array of shape (k, n)
        Each connection minus the mean.
    """

    name: str
    kind: str
    frequency_hz: FloatArray
    gamma: ComplexArray
    deviations: ComplexArray

    def __post_init__(self) -> None:
        object.__setattr__(self, "frequency_hz", frozen_float(self.frequency_hz))
        object.__setattr__(self, "gamma", frozen_complex(self.gamma))
        object.__setattr__(self, "deviations", frozen_complex(self.deviations))

    @property
    def connections(self) -> int:
        """Number of connections."""
        return int(self.deviations.shape[0])

    @classmethod
    def from_readings(
        cls, name: str, kind: str, frequency_hz: FloatArray, readings: Sequence[ComplexArray] | ComplexArray
    ) -> "Observed":
        """Reduce readings of shape (k, n) to their mean and deviations."""
        stack = np.asarray(readings, dtype=complex)
        mean = stack.mean(axis=0)
        return cls(name, kind, frequency_hz, mean, stack - mean)

    def without(self, connection: int) -> "Observed":
        """Return the same standard with one connection left out."""
        rest = np.delete(self.deviations, connection, axis=0) + self.gamma
        return Observed.from_readings(self.name, self.kind, self.frequency_hz, rest)


def without_delay(frequency_hz: FloatArray, gamma: ComplexArray) -> ComplexArray:
    """Turn back the phase that grows with frequency, so that what is left is smooth from point to point."""
    return np.asarray(gamma * np.exp(-1j * phase_slope(frequency_hz, gamma) * frequency_hz))


def phase_slope(frequency_hz: FloatArray, gamma: ComplexArray) -> float:
    """Return the slope of the phase in rad/Hz, a straight line through it weighted by |Γ|.

    The phase is unwrapped step by step, so that it must turn by less than half a turn between points.
    """
    phase = np.unwrap(np.angle(gamma))
    weight = np.abs(gamma)
    if not weight.any():
        return 0.0
    offset = frequency_hz - np.average(frequency_hz, weights=weight)
    return float(np.sum(weight * offset * phase) / np.sum(weight * offset**2))


def noise_of(values: ComplexArray) -> float:
    """Return the standard deviation per component of white noise on smooth complex readings.

    Fourth differences remove what is smooth; the median of their squares is not moved by single outlying
    points: median |Δ⁴|² = 2·70·σ²·ln 2, since |Δ⁴|² is exponentially distributed with mean 2·70·σ².

    Parameters
    ----------
    values : complex array of shape (n,) or (k, n)
        At least five points along the last axis.
    """
    difference = sum(
        weight * values[..., i : values.shape[-1] - 4 + i] for i, weight in enumerate(FOURTH_DIFFERENCE)
    )
    total = 2.0 * float(FOURTH_DIFFERENCE @ FOURTH_DIFFERENCE) * MEDIAN_OF_EXPONENTIAL
    return float(np.sqrt(np.median(np.abs(difference) ** 2) / total))
