"""What is kept of the readings behind a kit, so that they can be compared with readings of another day.

A definition follows readings only as far as its order, its range and the evidence let it. To see whether a standard
has changed, the readings themselves are compared.
"""

from dataclasses import dataclass

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_complex, frozen_float


@dataclass(frozen=True, slots=True, eq=False)
class MeanReading:
    """The mean reading of one standard, and how large its errors are; arrays have the shape (m,) unless told.

    Attributes
    ----------
    standard : str
    connections : int
        That went into the mean.
    frequency_hz : array
        Rising.
    gamma : complex array
    calibration_sd : array
        Standard deviation per component of what the correction of the analyser leaves, or what the reference kits do.
    session_sd : array
        The same of smooth errors of the session alone: scatter beyond the lumped parts, reference connections, drift.
    noise_sd : float
        White noise of the mean, per component.
    connection_hz : array of shape (k,) or None
        Some of the frequencies; None where there was one connection, or where they were not kept.
    deviations : complex array of shape (c, k) or None
        Each connection minus the mean, there.
    """

    standard: str
    connections: int
    frequency_hz: FloatArray
    gamma: ComplexArray
    calibration_sd: FloatArray
    session_sd: FloatArray
    noise_sd: float
    connection_hz: FloatArray | None = None
    deviations: ComplexArray | None = None

    def __post_init__(self) -> None:
        object.__setattr__(self, "gamma", frozen_complex(self.gamma))
        if self.connection_hz is not None:
            object.__setattr__(self, "connection_hz", frozen_float(self.connection_hz))
        if self.deviations is not None:
            object.__setattr__(self, "deviations", frozen_complex(self.deviations))
        for name in ("frequency_hz", "calibration_sd", "session_sd"):
            object.__setattr__(self, name, frozen_float(getattr(self, name)))


@dataclass(frozen=True, slots=True, eq=False)
class Session:
    """The readings of one bench.

    Attributes
    ----------
    scatter_sd : array of shape (3,)
        Standard deviation of one connection: contact resistance in Ω, plane shift and contact reactance in ps.
    scatter_freedom : array of shape (3,)
        Degrees of freedom of each; infinite where it is assumed.
    session_freedom : float
        Degrees of freedom of the other errors of the session.
    means : tuple of MeanReading
    """

    scatter_sd: FloatArray
    scatter_freedom: FloatArray
    session_freedom: float
    means: tuple[MeanReading, ...]

    def __post_init__(self) -> None:
        for name in ("scatter_sd", "scatter_freedom"):
            object.__setattr__(self, name, frozen_float(getattr(self, name)))

    def mean_of(self, standard: str) -> MeanReading | None:
        """Return the mean reading of a standard, or None where there is none."""
        return next((one for one in self.means if one.standard == standard), None)
