"""The capacitance across an opening, stationary with respect to the field in it, and how sure its number is."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Protocol

import numpy as np
import numpy.typing as npt

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.base.errors import RequestError
from stdfit.circuits.coaxial.aperture import Aperture, aperture_of
from stdfit.circuits.coaxial.modes import SPEED_M_PER_S
from stdfit.circuits.coaxial.sides import wave_numbers

IntArray = npt.NDArray[np.int64]

WAVES = 160
"""Half waves across the opening of the finest wave that is summed."""

DEGREE = 4
"""Polynomials in each of the two families of the field."""

_LEAST_SHARE = 1e-6
"""Share of the value below which no uncertainty is told: two differences may be small by accident."""


class Answering(Protocol):
    """A side of the opening."""

    @property
    def lowest_cutoff(self) -> float:
        """The wave number ω/c from which a wave spreads that is taken to decay, in 1/m."""

    @property
    def waves(self) -> int:
        """How many waves are summed."""

    def up_to(self, cut: float) -> "Answering":
        """Return the side with only the waves below a wave number across."""

    def static(self, aperture: Aperture) -> FloatArray:
        """Return C_kl at ω = 0, shape (k, k)."""

    def beyond_static(
        self, wave_number: FloatArray, used: IntArray, basis: FloatArray
    ) -> FloatArray | ComplexArray:
        """Return C_kl(ω) − C_kl(0) in another basis, shape (n, k, k)."""


@dataclass(frozen=True, slots=True, eq=False)
class Shunt:
    """What an opening puts across the line, with the uncertainty of the number.

    Attributes
    ----------
    capacitance_f : complex array of shape (n,)
        C + G/jω in F.
    u_numeric_f : array of shape (n,)
        Standard uncertainty, from the differences to half and a quarter of the waves and to a field of one degree
        less.
    modes : int
        Waves summed on both sides.
    """

    capacitance_f: ComplexArray
    u_numeric_f: FloatArray
    modes: int


def shunt_of_opening(
    inner: float,
    outer: float,
    exponents: tuple[float | None, float | None],
    sides_of: Callable[[Aperture, float], list[Answering]],
    frequency_hz: FloatArray,
    *,
    waves: int = WAVES,
    degree: int = DEGREE,
) -> Shunt:
    """Return the capacitance that an opening between two sides puts across the line.

    C + G/jω = 1/(vᵀ·[C_left + C_right]⁻¹·v), v_k = ∫E_k dr

    Parameters
    ----------
    inner, outer : float
        Radii of the opening in m.
    exponents : pair of float or None
        λ of its edges.
    sides_of : function of an aperture and a wave number
        Returns the sides with all their waves below it.
    frequency_hz : array of shape (n,)
        Frequency in Hz; only its square counts.
    waves, degree : int
        How fine: half waves across the opening, polynomials in each family.

    Raises
    ------
    RequestError
        If a wave of a side is not below its cut-off at one of the frequencies.

    Notes
    -----
    Galerkin's method for the field in the opening (R. F. Harrington, Time-Harmonic Electromagnetic Fields, 1961,
    chapter 7; from memory): stationary, and from above for a given sum of waves that all decay.
    """
    wave_number = wave_numbers(frequency_hz)
    aperture = aperture_of(inner, outer, exponents, degree, waves)
    cut = (waves + 0.5) * np.pi / (outer - inner)
    sides = sides_of(aperture, cut)
    _check_below_cutoff(sides, wave_number)
    every = np.arange(2 * degree)
    fewer = every[every % degree < degree - 1]

    fine = _stationary(aperture, sides, wave_number, every)
    halved, quartered = (
        _stationary(aperture, [side.up_to(cut * part) for side in sides], wave_number, every)
        for part in (0.5, 0.25)
    )
    lower = _stationary(aperture, sides, wave_number, fewer)
    # What is left falls at least with the square of the waves; the second difference counts where the first
    # happens to be zero.
    u = (
        np.abs(halved - fine)
        + 0.25 * np.abs(quartered - halved)
        + np.abs(lower - fine)
        + _LEAST_SHARE * np.abs(fine)
    )
    return Shunt(fine, u, sum(side.waves for side in sides))


def _stationary(
    aperture: Aperture, sides: Sequence[Answering], wave_number: FloatArray, used: IntArray
) -> ComplexArray:
    static = sum((side.static(aperture) for side in sides), np.zeros(1))[np.ix_(used, used)]
    basis = independent_basis(static)
    voltage = (aperture.voltage()[used] @ basis).astype(np.complex128)
    changed = np.eye(basis.shape[1]) + sum(side.beyond_static(wave_number, used, basis) for side in sides)
    return np.asarray(1.0 / (np.linalg.solve(changed, voltage[:, None])[..., 0] @ voltage))


def independent_basis(matrix: FloatArray) -> FloatArray:
    """Return columns V with Vᵀ·matrix·V = 1, without what the numbers no longer tell apart.

    Parameters
    ----------
    matrix : array of shape (k, k)
        Symmetric, positive.
    """
    size = np.sqrt(np.diag(matrix))
    values, vectors = np.linalg.eigh(matrix / np.outer(size, size))
    kept = values > 1e-12 * values[-1]
    return np.asarray((vectors[:, kept] / np.sqrt(values[kept])) / size[:, None])


def _check_below_cutoff(sides: Sequence[Answering], wave_number: FloatArray) -> None:
    lowest = min(side.lowest_cutoff for side in sides)
    if np.max(np.abs(wave_number), initial=0.0) >= lowest:
        top = lowest * SPEED_M_PER_S / (2.0 * np.pi)
        raise RequestError(
            f"from {top / 1e9:.4g} GHz on a wave spreads beyond the end of the line",
            "ask for lower frequencies: there the end is no longer a capacitance",
        )
