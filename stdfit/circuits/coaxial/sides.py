"""What each side of an opening answers to the field in it: waves of a line or of a pipe, below their cut-off."""

from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt
from scipy.special import j0, j1, y0, y1

from stdfit.base.arrays import FloatArray
from stdfit.base.errors import RequestError
from stdfit.circuits.coaxial.aperture import Aperture
from stdfit.circuits.coaxial.modes import SPEED_M_PER_S, line_tm_roots, pipe_tm_roots

VACUUM_F_PER_M = 8.8541878188e-12
"""Permittivity of vacuum ε0, CODATA 2022."""

AIR_ER = 1.000635
"""Relative permittivity of air of usual pressure and moisture (as used by P. I. Somlo 1967; published, second-hand)."""

_MOST_WAVES = 40_000


@dataclass(frozen=True, slots=True, eq=False)
class Side:
    """Waves with a radial electric and no azimuthal field on one side of an opening, TEM left out.

    C_kl(ω) = 2πε Σ_m X_mk·X_ml·coth(γ_m·L)/(N_m·γ_m),  γ_m² = κ_m² − εr(ω/c)²

    Attributes
    ----------
    kappa : array of shape (m,)
        Wave numbers across κ in 1/m.
    per : array of shape (m,)
        2πε/N of each wave, N = ∫h²·r dr, in F/m³.
    coupling : array of shape (m, k)
        X = ∫E_k·h_m·r dr.
    er : float
        Relative permittivity εr.
    wall_m : float or None
        Distance L of a metal wall; None where the side goes on without end.
    narrow : pair of bool
        Whether the side's own wall ends at the inner, and at the outer edge of the opening.
    cut : float
        Half-way from the last wave to the first that is left out, in 1/m.
    """

    kappa: FloatArray
    per: FloatArray
    coupling: FloatArray
    er: float
    wall_m: float | None
    narrow: tuple[bool, bool]
    cut: float

    @property
    def lowest_cutoff(self) -> float:
        """The wave number ω/c from which the first wave spreads, in 1/m."""
        return float(self.kappa[0] / np.sqrt(self.er))

    @property
    def waves(self) -> int:
        """How many waves are summed."""
        return self.kappa.size

    def up_to(self, cut: float) -> "Side":
        """Return the side with only the waves below a wave number, but one at least."""
        count = max(1, int(np.searchsorted(self.kappa, cut)))
        if count == self.kappa.size:
            return self
        return replace(
            self,
            kappa=self.kappa[:count],
            per=self.per[:count],
            coupling=self.coupling[:count],
            cut=float(0.5 * (self.kappa[count - 1] + self.kappa[count])),
        )

    def answer(self, wave_number: FloatArray) -> FloatArray:
        """Return coth(γL)/γ of each wave at wave numbers ω/c of shape (n,), shape (n, m)."""
        gamma = np.sqrt(self.kappa**2 - self.er * wave_number[:, None] ** 2)
        if self.wall_m is None:
            return 1.0 / gamma
        return 1.0 / (gamma * np.tanh(gamma * self.wall_m))

    def static(self, aperture: Aperture) -> FloatArray:
        """Return C_kl at ω = 0 without a wall, with what all the waves above the cut add; shape (k, k)."""
        inside = (self.coupling.T * (self.per / self.kappa)) @ self.coupling
        return inside + 2.0 * np.pi * self.er * VACUUM_F_PER_M * aperture.tail(self.cut, self.narrow)

    def beyond_static(
        self, wave_number: FloatArray, used: npt.NDArray[np.int64], basis: FloatArray
    ) -> FloatArray:
        """Return C_kl(ω) − C_kl(0) in another basis, shape (n, k, k).

        Parameters
        ----------
        wave_number : array of shape (n,)
            ω/c in 1/m.
        used : array of int
            Which fields the basis is made of.
        basis : array of shape (k', k)
        """
        turned = self.coupling[:, used] @ basis
        weight = self.per * (self.answer(wave_number) - 1.0 / self.kappa)
        return np.asarray(np.einsum("nm,mk,ml->nkl", weight, turned, turned, optimize=True))


def line_side(
    aperture: Aperture, inner: float, outer: float, er: float, cut: float, wall_m: float | None = None
) -> Side:
    """Return the TM0n waves of a coaxial line, n ≥ 1, below a wave number across.

    h_n = J1(κr)·Y0(κa) − J0(κa)·Y1(κr),  N = [b²h²(b) − a²h²(a)]/2

    Parameters
    ----------
    aperture : Aperture
    inner, outer : float
        Radii a and b of the line in m.
    er : float
        Relative permittivity.
    cut : float
        Wave number in 1/m.
    wall_m : float, optional
        Distance of a metal wall in m.
    """
    count = wave_count(cut * (outer - inner) / np.pi)
    kappa, end = _kept(line_tm_roots(outer / inner, count) / inner, cut)
    j, y = j0(kappa * inner)[:, None], y0(kappa * inner)[:, None]
    # Of the order of one, also where the inner conductor is so thin that Y0 is large.
    size = np.hypot(j, y)
    j, y = j / size, y / size

    def wave(r: FloatArray) -> FloatArray:
        return np.asarray(j1(kappa[:, None] * r) * y - y1(kappa[:, None] * r) * j)

    ends = wave(np.array([inner, outer]))
    norm = 0.5 * (outer**2 * ends[:, 1] ** 2 - inner**2 * ends[:, 0] ** 2)
    coupling = np.concatenate(
        [wave(r) @ weighted for r, weighted in zip(aperture.nodes, aperture.weighted, strict=True)], axis=1
    )
    return Side(
        kappa,
        2.0 * np.pi * er * VACUUM_F_PER_M / norm,
        coupling,
        er,
        wall_m,
        (inner == aperture.inner, outer == aperture.outer),
        end,
    )


def pipe_side(aperture: Aperture, bore: float, er: float, cut: float, wall_m: float | None = None) -> Side:
    """Return the TM0m waves of an empty pipe below a wave number across.

    h_m = J1(κr),  N = b²·J1(κb)²/2

    Parameters
    ----------
    aperture : Aperture
    bore : float
        Radius b of the pipe in m.
    er : float
        Relative permittivity.
    cut : float
        Wave number in 1/m.
    wall_m : float, optional
        Distance of a metal wall in m.
    """
    kappa, end = _kept(pipe_tm_roots(wave_count(cut * bore / np.pi)) / bore, cut)
    norm = 0.5 * bore**2 * j1(kappa * bore) ** 2
    coupling = np.concatenate(
        [
            j1(kappa[:, None] * r) @ weighted
            for r, weighted in zip(aperture.nodes, aperture.weighted, strict=True)
        ],
        axis=1,
    )
    return Side(
        kappa,
        2.0 * np.pi * er * VACUUM_F_PER_M / norm,
        coupling,
        er,
        wall_m,
        (False, bore == aperture.outer),
        end,
    )


def wave_numbers(frequency_hz: FloatArray) -> FloatArray:
    """Return ω/c in 1/m, or raise a RequestError if a frequency is no number."""
    frequency = np.asarray(frequency_hz, dtype=np.float64)
    if not np.all(np.isfinite(frequency)):
        raise RequestError("a frequency is not a number", "give frequencies in Hz")
    return np.asarray(2.0 * np.pi * frequency / SPEED_M_PER_S)


def wave_count(half_waves: float) -> int:
    """Return how many waves to look for; more than memory and patience allow are refused."""
    if half_waves > _MOST_WAVES:
        raise RequestError(
            "the gap of the line is too narrow against its diameter, or against that of the other line",
            "look at the diameters: beside so narrow a gap an end or step is not computed",
        )
    return int(half_waves) + 3


def _kept(kappa: FloatArray, cut: float) -> tuple[FloatArray, float]:
    """Return the wave numbers below `cut`, but one at least, and the place half-way to the next."""
    count = max(1, int(np.searchsorted(kappa, cut)))
    return kappa[:count], float(0.5 * (kappa[count - 1] + kappa[count]))
