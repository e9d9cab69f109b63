"""What the open space before a wide metal flange answers to the field in an opening: it stores, and it radiates."""

from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt
from scipy.special import j1

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.circuits.coaxial.aperture import Aperture, aperture_of
from stdfit.circuits.coaxial.sides import VACUUM_F_PER_M, wave_count

_PER_PANEL = 10
_OVERLAP = 4.0


@dataclass(frozen=True, slots=True, eq=False)
class HalfSpace:
    """Cylindrical waves J1(κr) of all wave numbers across, before a flange without end.

    C_kl + G_kl/jω = 2πε ∫ X_k(κ)·X_l(κ)·κ dκ/√(κ² − εr(ω/c)²),  X_k = ∫E_k·J1(κr)·r dr

    Attributes
    ----------
    kappa : array of shape (m,)
        Wave numbers above `low` at which the integral is taken, whole panels of ten, in 1/m.
    per : array of shape (m,)
        2πε·κ·Δκ, in F/m³.
    coupling : array of shape (m, k)
        X at these wave numbers.
    er : float
        Relative permittivity εr.
    low : float
        Wave number in 1/m up to which the integral is taken for each frequency by itself.
    cut : float
        End of the last panel in 1/m.
    ends : array
        Ends of the panels in 1/m.
    coarse : Aperture
        The same fields with as many nodes as waves below `low` need.
    """

    kappa: FloatArray
    per: FloatArray
    coupling: FloatArray
    er: float
    low: float
    cut: float
    ends: FloatArray
    coarse: Aperture

    @property
    def lowest_cutoff(self) -> float:
        """No wave is cut off: every frequency will do."""
        return np.inf

    @property
    def waves(self) -> int:
        """How many waves are summed."""
        return self.kappa.size

    def up_to(self, cut: float) -> "HalfSpace":
        """Return the side with only the panels below a wave number."""
        panels = max(1, int(np.searchsorted(self.ends, cut)))
        count = panels * _PER_PANEL
        return replace(
            self,
            kappa=self.kappa[:count],
            per=self.per[:count],
            coupling=self.coupling[:count],
            cut=float(self.ends[panels - 1]),
            ends=self.ends[:panels],
        )

    def static(self, aperture: Aperture) -> FloatArray:
        """Return C_kl at ω = 0 with what all the waves above the cut add, shape (k, k)."""
        x, weight = _rule(self._low_nodes(), 0.0, self.low)
        below = self._couple(x)
        inside = (below.T * (weight * 2.0 * np.pi * self.er * VACUUM_F_PER_M)) @ below
        inside += (self.coupling.T * (self.per / self.kappa)) @ self.coupling
        return inside + 2.0 * np.pi * self.er * VACUUM_F_PER_M * aperture.tail(self.cut, (False, False))

    def beyond_static(
        self, wave_number: FloatArray, used: npt.NDArray[np.int64], basis: FloatArray
    ) -> ComplexArray:
        """Return C_kl(ω) + G_kl/jω − C_kl(0) in another basis, shape (n, k, k).

        Below `low` t = √(κ² − εr(ω/c)²) takes the place of κ where the waves decay, and κ = √εr·(ω/c)·sin θ where they
        radiate; both integrands are smooth, since X_k·X_l is a function of κ² without any singularity.

        Parameters
        ----------
        wave_number : array of shape (n,)
            ω/c in 1/m.
        used : array of int
            Which fields the basis is made of.
        basis : array of shape (k', k)
        """
        unit = 2.0 * np.pi * self.er * VACUUM_F_PER_M
        outside = np.sqrt(self.er) * np.abs(wave_number)
        turned = self.coupling[:, used] @ basis
        gamma = np.sqrt(self.kappa**2 - outside[:, None] ** 2)
        total = np.einsum(
            "nm,mk,ml->nkl", self.per * (1.0 / gamma - 1.0 / self.kappa), turned, turned, optimize=True
        ).astype(np.complex128)

        nodes = self._low_nodes()
        unit_x, unit_w = _rule(nodes, 0.0, 1.0)
        still = self._couple(unit_x * self.low)[:, used] @ basis
        total -= unit * self.low * ((still.T * unit_w) @ still)
        for row, k in enumerate(outside):
            reach = np.sqrt(self.low**2 - k**2)
            stored = self._couple(np.hypot(unit_x * reach, k))[:, used] @ basis
            total[row] += unit * reach * ((stored.T * unit_w) @ stored)
            across = k * np.sin(0.5 * np.pi * unit_x)
            sent = self._couple(across)[:, used] @ basis
            total[row] -= 1j * unit * 0.5 * np.pi * ((sent.T * (unit_w * across)) @ sent)
        return np.asarray(total)

    def _low_nodes(self) -> int:
        return 20 + int(2.0 * self.low * self.coarse.outer)

    def _couple(self, kappa: FloatArray) -> FloatArray:
        return couple(self.coarse, kappa)


def couple(aperture: Aperture, kappa: FloatArray) -> FloatArray:
    """Return ∫E_k·J1(κr)·r dr of each field, shape (m, k)."""
    return np.concatenate(
        [j1(kappa[:, None] * r) @ w for r, w in zip(aperture.nodes, aperture.weighted, strict=True)], axis=1
    )


def half_space(aperture: Aperture, er: float, cut: float, highest_wave_number: float) -> HalfSpace:
    """Return the half space before a flange.

    Parameters
    ----------
    aperture : Aperture
    er : float
        Relative permittivity.
    cut : float
        Wave number across in 1/m up to which waves are summed.
    highest_wave_number : float
        ω/c in 1/m of the highest frequency.
    """
    low = max(2.0 * np.sqrt(er) * highest_wave_number, _OVERLAP / aperture.outer)
    cut = max(cut, 2.0 * low)
    panels = wave_count((cut - low) * aperture.outer / np.pi)
    ends = np.linspace(low, cut, panels + 1)
    x, weight = _rule(_PER_PANEL, 0.0, 1.0)
    width = (cut - low) / panels
    kappa = (ends[:-1, None] + width * x).ravel()
    steps = np.tile(width * weight, panels)
    gap = aperture.outer - aperture.inner
    small = aperture_of(
        aperture.inner, aperture.outer, aperture.exponents, aperture.degree, int(low * gap / np.pi) + 4
    )
    return HalfSpace(
        kappa,
        2.0 * np.pi * er * VACUUM_F_PER_M * kappa * steps,
        couple(aperture, kappa),
        er,
        low,
        float(ends[-1]),
        ends[1:],
        small,
    )


def _rule(count: int, start: float, end: float) -> tuple[FloatArray, FloatArray]:
    """Return nodes and weights of Gauss and Legendre's rule on an interval."""
    x, weight = np.polynomial.legendre.leggauss(count)
    return start + 0.5 * (end - start) * (1.0 + x), 0.5 * (end - start) * weight
