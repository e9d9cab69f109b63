"""The readings that a kit has kept, beside its model."""

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_complex, frozen_float
from stdfit.uncertainty.connections import responses
from stdfit.uncertainty.region import radius_95
from stdfit.validity.kit import Definition, Kit, model
from stdfit.validity.session import MeanReading, Session

OFTEN, CLEARLY = 0.1, 1.3
"""A connection is told that lies by this factor above what is expected at more than this part of the frequencies."""


@dataclass(frozen=True, slots=True, eq=False)
class Connections:
    """The connections of one standard, one by one.

    Attributes
    ----------
    frequency_hz : array of shape (k,)
    deviations : complex array of shape (c, k)
        Each connection minus the mean.
    expected : array of shape (k,)
        95 % radius of the deviation of one of them, from the scatter of all standards of the bench.
    """

    frequency_hz: FloatArray
    deviations: ComplexArray
    expected: FloatArray

    def __post_init__(self) -> None:
        object.__setattr__(self, "frequency_hz", frozen_float(self.frequency_hz))
        object.__setattr__(self, "deviations", frozen_complex(self.deviations))
        object.__setattr__(self, "expected", frozen_float(self.expected))

    def farthest(self) -> tuple[int, float, float]:
        """Return which connection lies farthest from the mean, counted from 1, how far, and where in Hz."""
        away = np.abs(self.deviations)
        k, i = np.unravel_index(int(np.argmax(away)), away.shape)
        return int(k) + 1, float(away[k, i]), float(self.frequency_hz[i])

    def above(self) -> tuple[int, float, float] | None:
        """Return the connection that lies most above what is expected, counted from 1, and between which Hz.

        None where none is clearly above it at more than a tenth of the frequencies: one of twenty may be above by
        chance, and only one of a hundred by 1.3 times.
        """
        higher = np.abs(self.deviations) > CLEARLY * self.expected
        often = higher.mean(axis=1)
        k = int(np.argmax(often))
        if often[k] <= OFTEN:
            return None
        places = np.flatnonzero(higher[k])
        return k + 1, float(self.frequency_hz[places[0]]), float(self.frequency_hz[places[-1]])


@dataclass(frozen=True, slots=True, eq=False)
class KeptReadings:
    """The mean reading of one standard.

    Attributes
    ----------
    frequency_hz : array of shape (m,)
    gamma, residual : complex arrays of shape (m,)
        The mean reading, and what is left of it without the model.
    connections : Connections or None
        None where there was one, or where they were not kept.
    """

    frequency_hz: FloatArray
    gamma: ComplexArray
    residual: ComplexArray
    connections: Connections | None

    def __post_init__(self) -> None:
        object.__setattr__(self, "frequency_hz", frozen_float(self.frequency_hz))
        object.__setattr__(self, "gamma", frozen_complex(self.gamma))
        object.__setattr__(self, "residual", frozen_complex(self.residual))


def kept_readings(kit: Kit, definition: Definition) -> KeptReadings | None:
    """Return the kept readings of a standard within the band that its definition names; None where there are none.

    Parameters
    ----------
    kit : Kit
    definition : Definition

    Raises
    ------
    RequestError
        The definition gives no finite reflection at one of the readings.
    """
    kept = None if kit.session is None else kit.session.mean_of(definition.name)
    if kept is None or kit.session is None:
        return None
    inside = _within(definition, kept.frequency_hz)
    if inside.size == 0:
        return None
    frequency_hz, gamma = kept.frequency_hz[inside], kept.gamma[inside]
    fitted, _ = model(kit, definition, frequency_hz)
    return KeptReadings(
        frequency_hz,
        gamma,
        gamma - fitted,
        _connections(kit, kit.session, definition, kept),
    )


def _connections(kit: Kit, session: Session, definition: Definition, kept: MeanReading) -> Connections | None:
    if kept.connection_hz is None or kept.deviations is None or kept.connections < 2:
        return None
    inside = _within(definition, kept.connection_hz)
    if inside.size == 0:
        return None
    frequency_hz = kept.connection_hz[inside]
    gamma, _ = model(kit, definition, frequency_hz)
    return Connections(
        frequency_hz, kept.deviations[:, inside], _expected(kit, session, kept, gamma, frequency_hz)
    )


def _within(definition: Definition, frequency_hz: FloatArray) -> npt.NDArray[np.intp]:
    """Return the places of the frequencies that lie within the band of the readings."""
    low, top = definition.read_low_hz, definition.read_top_hz
    return np.flatnonzero((frequency_hz >= low) & (frequency_hz <= top))


def _expected(
    kit: Kit, session: Session, kept: MeanReading, gamma: ComplexArray, frequency_hz: FloatArray
) -> FloatArray:
    """Return the 95 % radius of one connection's deviation from the mean of c: √(1 − 1/c) times its own scatter.

    Lumped parts and noise; scatter beyond the parts is kept only together with other errors of the session.
    """
    each = responses(gamma, frequency_hz, kit.reference_ohm) * session.scatter_sd
    white = kept.noise_sd**2 * kept.connections
    covariance = np.stack(
        [
            (each.real**2).sum(axis=1) + white,
            (each.imag**2).sum(axis=1) + white,
            (each.real * each.imag).sum(axis=1),
        ],
        axis=-1,
    )
    return np.asarray(np.sqrt(1.0 - 1.0 / kept.connections) * radius_95(covariance))
