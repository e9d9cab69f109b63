"""An adapter that was determined: its S-parameters, and what their errors put on a standard behind it."""

from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_complex, frozen_float
from stdfit.base.errors import RequestError
from stdfit.circuits.two_port import s_by_terms
from stdfit.uncertainty.region import radius_95, student
from stdfit.validity.kit import Ancestor, SourceFile
from stdfit.validity.thru import LineTerm

S_NAMES = ("s11", "s21", "s22")
EXCEEDS = 0.05
"""Part of the frequencies at which |S| may lie above what a passive part has, by more than its 95 % bound."""


@dataclass(frozen=True, slots=True, eq=False)
class Adapter:
    """A reciprocal two-port, port 1 towards the analyser.

    Attributes
    ----------
    name : str
    reference_ohm : float
    created, version : str
        Date, and version of the program.
    frequency_hz : array of shape (n,)
    s : complex array of shape (n, 3)
        S11, S21, S22.
    known_hz : array of shape (m,)
        Where the covariance is kept: ends as `frequency_hz`.
    covariance : array of shape (m, 6, 6)
        Of the three terms δ0, δ1, δ2 of the error that the adapter puts on a standard behind it,
        δΓ = δ0 + δ1·Γ + δ2·Γ²: real and imaginary part of the first, of the second, of the third.
    freedom : float
        Degrees of freedom of the covariance, at the frequency at which they are fewest.
    line : tuple of three LineTerm
        The line that is most like it.
    files : tuple of SourceFile
    ancestors : tuple of Ancestor
        The kits that its uncertainty comes from.
    warnings : tuple of str
    """

    name: str
    reference_ohm: float
    created: str
    version: str
    frequency_hz: FloatArray
    s: ComplexArray
    known_hz: FloatArray
    covariance: FloatArray
    freedom: float
    line: tuple[LineTerm, LineTerm, LineTerm]
    files: tuple[SourceFile, ...] = ()
    ancestors: tuple[Ancestor, ...] = ()
    warnings: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        for field in ("frequency_hz", "known_hz", "covariance"):
            object.__setattr__(self, field, frozen_float(getattr(self, field)))
        object.__setattr__(self, "s", frozen_complex(self.s))

    @property
    def band(self) -> tuple[float, float]:
        """Lowest and highest frequency at which it is known, in Hz."""
        return float(self.frequency_hz[0]), float(self.frequency_hz[-1])

    @property
    def term_bounds(self) -> FloatArray:
        """95 % radii of the three terms at `known_hz`, shape (m, 3)."""
        return bounds_of(self.covariance, self.freedom)

    @property
    def s_bounds(self) -> FloatArray:
        """95 % radii of S11, S21, S22 at `known_hz`, shape (m, 3)."""
        return bounds_of(
            carried(self.covariance, s_by_terms(s_at(self, np.asarray(self.known_hz)))), self.freedom
        )


def s_at(adapter: Adapter, frequency_hz: FloatArray) -> ComplexArray:
    """Return S11, S21, S22 between the frequencies at which they are known, shape (n, 3).

    S21 in magnitude and phase; S11 and S22, small and looped around zero, in real and imaginary part. At the known
    frequencies these are the known values.

    Parameters
    ----------
    adapter : Adapter
    frequency_hz : array of shape (n,)

    Raises
    ------
    RequestError
        A frequency lies outside the band.
    """
    low, high = adapter.band
    outside = (frequency_hz < low) | (frequency_hz > high)
    if outside.any():
        raise RequestError(
            f"{float(frequency_hz[outside][0]):.10g} Hz lies outside the band of the adapter '{adapter.name}'",
            f"it is known from {low:.10g} to {high:.10g} Hz: determine it over a wider band, or end the band with "
            "goal.highest_hz",
        )
    grid, s = adapter.frequency_hz, adapter.s
    magnitude = np.interp(frequency_hz, grid, np.abs(s[:, 1]))
    phase = np.interp(frequency_hz, grid, np.unwrap(np.angle(s[:, 1])))
    found = np.stack([np.interp(frequency_hz, grid, s[:, k]) for k in range(3)], axis=-1)
    between = ~np.isin(frequency_hz, grid)
    found[between, 1] = (magnitude * np.exp(1j * phase))[between]
    return found


def term_vectors(adapter: Adapter, frequency_hz: FloatArray) -> ComplexArray:
    """Return the three terms as six independent real random numbers of unit variance make them, shape (n, 3, 6).

    The symmetric square root of the covariance, which has no freedom of sign or order from one frequency to the next.
    Between the frequencies at which it is kept the covariance is interpolated, which leaves it a covariance.
    """
    covariance = np.stack(
        [
            np.interp(frequency_hz, adapter.known_hz, adapter.covariance[:, i, j])
            for i in range(6)
            for j in range(6)
        ],
        axis=-1,
    ).reshape(-1, 6, 6)
    root = symmetric_root(covariance)
    return np.asarray(root[:, 0::2] + 1j * root[:, 1::2])


def symmetric_root(covariance: FloatArray) -> FloatArray:
    """Return the symmetric R with R·R = C of a stack of covariances; what is negative by rounding counts as zero."""
    value, vector = np.linalg.eigh(covariance)
    return np.asarray((vector * np.sqrt(np.maximum(value, 0.0))[..., None, :]) @ np.swapaxes(vector, -1, -2))


def as_real(matrix: ComplexArray) -> FloatArray:
    """Return a complex linear map of shape (..., p, q) as it acts on real and imaginary parts, shape (..., 2p, 2q)."""
    whole = np.empty((*matrix.shape[:-2], 2 * matrix.shape[-2], 2 * matrix.shape[-1]))
    whole[..., 0::2, 0::2] = matrix.real
    whole[..., 0::2, 1::2] = -matrix.imag
    whole[..., 1::2, 0::2] = matrix.imag
    whole[..., 1::2, 1::2] = matrix.real
    return whole


def carried(covariance: FloatArray, matrix: ComplexArray) -> FloatArray:
    """Return the covariance of complex linear combinations: A·C·Aᵀ.

    Parameters
    ----------
    covariance : array of shape (m, 2q, 2q)
    matrix : complex array of shape (m, p, q)

    Returns
    -------
    array of shape (m, 2p, 2p)
    """
    real = as_real(matrix)
    return np.asarray(real @ covariance @ np.swapaxes(real, -1, -2))


def bounds_of(covariance: FloatArray, freedom: float) -> FloatArray:
    """Return the 95 % radius of each complex quantity of a joint covariance of shape (m, 2p, 2p): shape (m, p)."""
    variance = np.einsum("mii->mi", covariance)
    across = np.einsum("mii->mi", covariance[:, 0::2, 1::2])
    return radius_95(np.stack([variance[:, 0::2], variance[:, 1::2], across], axis=-1), freedom)


def too_active(adapter: Adapter) -> tuple[float, float] | None:
    """Return by how much the adapter gives more than it takes, and at which frequency in Hz; None where it is passive.

    The largest singular value of S may exceed 1 by the 95 % bound of its own error, Re(uᴴ·dS·v), at all but one in
    twenty frequencies.
    """
    s = s_at(adapter, np.asarray(adapter.known_hz))
    matrix = np.stack([s[:, [0, 1]], s[:, [1, 2]]], axis=1)
    left, size, right = np.linalg.svd(matrix)
    u, v = left[:, :, 0].conj(), right[:, 0].conj()
    along = np.stack([u[:, 0] * v[:, 0], u[:, 0] * v[:, 1] + u[:, 1] * v[:, 0], u[:, 1] * v[:, 1]], axis=-1)
    variance = carried(adapter.covariance, along[:, None] @ s_by_terms(s))[:, 0, 0]
    over = size[:, 0] - 1.0 - np.sqrt(variance) * float(student(adapter.freedom))
    # What rounding leaves of a lossless part is no gain.
    if np.count_nonzero(over > 1e-9) <= EXCEEDS * over.size:
        return None
    worst = int(np.argmax(over))
    return float(size[worst, 0] - 1.0), float(adapter.known_hz[worst])
