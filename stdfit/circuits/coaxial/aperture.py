"""The radial field in a ring-shaped opening, as functions that have the right singularity at metal edges."""

from dataclasses import dataclass

import numpy as np
from scipy.special import eval_jacobi, gamma, roots_jacobi

from stdfit.base.arrays import FloatArray


def edge_exponent(er_narrow: float, er_wide: float) -> float:
    """Return λ of a square metal edge: the potential grows as ρ^λ, the field as ρ^(λ−1).

    λ = (2/π)·atan √(1 + 2·ε_narrow/ε_wide)

    Parameters
    ----------
    er_narrow : float
        Permittivity in the quarter of space between the opening and the wall of the narrower side.
    er_wide : float
        Permittivity in the half of space on the wider side.

    Notes
    -----
    From ε_narrow·cot(λπ/2) + ε_wide·cot(λπ) = 0, the static field of a wedge (J. Meixner, IEEE Trans. AP 20, 1972,
    442–446; from memory). 2/3 with one medium. The next exponent is 2 − λ; all others differ from the two by
    whole numbers.
    """
    return float(2.0 / np.pi * np.arctan(np.sqrt(1.0 + 2.0 * er_narrow / er_wide)))


@dataclass(frozen=True, slots=True, eq=False)
class Aperture:
    """Basis of the radial field E(r) between two radii, r·E = ρ_i^p·ρ_o^q·P_k(x), and its moments.

    Two families: p = λ − 1 at each edge, and p = 1 − λ; 0 at an end that is no edge. P_k are orthonormal Jacobi
    polynomials; with both families polynomials follow the field to its edges at a rate beyond any power.

    Attributes
    ----------
    inner, outer : float
        Radii of the opening in m.
    exponents : pair of float or None
        λ at the inner and at the outer radius, None where the wall goes on straight.
    degree : int
        Polynomials in each family.
    nodes : tuple of two arrays of shape (q,)
        Radii in m at which integrals over a family are taken.
    weighted : tuple of two arrays of shape (q, degree)
        r·E times the weight of the node; sum over nodes times g(r) is ∫ E·g·r dr.
    """

    inner: float
    outer: float
    exponents: tuple[float | None, float | None]
    degree: int
    nodes: tuple[FloatArray, FloatArray]
    weighted: tuple[FloatArray, FloatArray]

    def voltage(self) -> FloatArray:
        """Return ∫E dr of each function, shape (2·degree,)."""
        return np.concatenate([w.T @ (1.0 / r) for r, w in zip(self.nodes, self.weighted, strict=True)])

    def edge_amplitudes(self) -> list[tuple[float, float, FloatArray, FloatArray]]:
        """Return for each edge its radius, λ, and the amplitudes of ρ^(λ−1) and of ρ^(1−λ) in r·E."""
        half = 0.5 * (self.outer - self.inner)
        found = []
        for end, (radius, exponent) in enumerate(zip((self.inner, self.outer), self.exponents, strict=True)):
            if exponent is None:
                continue
            families = []
            for family in range(2):
                own, other = self._powers(family)[end], self._powers(family)[1 - end]
                values = _polynomials(
                    np.array([-1.0 if end == 0 else 1.0]), self.degree, *self._powers(family)
                )[0]
                amplitude = np.zeros(2 * self.degree)
                amplitude[family * self.degree : (family + 1) * self.degree] = (
                    values * 2.0**other * half**-own
                )
                families.append(amplitude)
            found.append((radius, exponent, families[0], families[1]))
        return found

    def tail(self, cut: float, narrow: tuple[bool, bool]) -> FloatArray:
        """Return what waves above a wave number leave out of Σ X·Xᵀ/(N·κ), to the leading orders at the edges.

        Σ_edges (2/πr)·Σ_pq A_p·A_qᵀ·Γ(μp)Γ(μq)·c_pq·cut^−(μp+μq)/(μp+μq), μ = λ or 2 − λ

        Parameters
        ----------
        cut : float
            Wave number across in 1/m above which nothing is summed.
        narrow : pair of bool
            Whether the side's own wall ends at the edge (c = cos·cos of μπ/2), or the side is wider than the opening
            (c = cos(π(μp − μq)/2)/2, the mean over the phases of its waves).

        Returns
        -------
        array of shape (2·degree, 2·degree)
        """
        size = 2 * self.degree
        total = np.zeros((size, size))
        for (radius, exponent, *families), at_wall in zip(
            self.edge_amplitudes(), self._kept(narrow), strict=True
        ):
            powers = (exponent, 2.0 - exponent)
            for p, first in zip(powers, families, strict=True):
                for q, second in zip(powers, families, strict=True):
                    if at_wall:
                        phase = np.cos(0.5 * np.pi * p) * np.cos(0.5 * np.pi * q)
                    else:
                        phase = 0.5 * np.cos(0.5 * np.pi * (p - q))
                    size_of = 2.0 / (np.pi * radius) * gamma(p) * gamma(q) * phase * cut ** -(p + q) / (p + q)
                    total += size_of * np.outer(first, second)
        return total

    def _kept(self, flags: tuple[bool, bool]) -> list[bool]:
        return [flag for flag, exponent in zip(flags, self.exponents, strict=True) if exponent is not None]

    def _powers(self, family: int) -> tuple[float, float]:
        sign = 1.0 if family == 0 else -1.0
        inner, outer = (0.0 if e is None else sign * (e - 1.0) for e in self.exponents)
        return inner, outer


def aperture_of(
    inner: float, outer: float, exponents: tuple[float | None, float | None], degree: int, waves: int
) -> Aperture:
    """Return the basis with enough nodes to integrate it against as many half waves.

    Parameters
    ----------
    inner, outer : float
        Radii of the opening in m.
    exponents : pair of float or None
        λ of the edges, None where there is none.
    degree : int
        Polynomials in each family.
    waves : int
        Half waves across the opening of the finest wave.
    """
    half = 0.5 * (outer - inner)
    made = Aperture(inner, outer, exponents, degree, *_EMPTY)
    nodes, weighted = [], []
    for family in range(2):
        p, q = made._powers(family)
        # Gauss's rule is exact to degree 2n − 1, and n half waves need degree πn/2 and some more.
        x, weight = roots_jacobi(int(0.85 * waves) + 30 + degree, q, p)
        nodes.append(inner + half * (1.0 + x))
        weighted.append(half * weight[:, None] * _polynomials(x, degree, p, q))
    return Aperture(inner, outer, exponents, degree, (nodes[0], nodes[1]), (weighted[0], weighted[1]))


_EMPTY = ((np.empty(0), np.empty(0)), (np.empty((0, 0)), np.empty((0, 0))))


def _polynomials(x: FloatArray, degree: int, p: float, q: float) -> FloatArray:
    """Return P_0 … P_(degree−1), orthogonal with the weight (1+x)^p·(1−x)^q, shape (n, degree)."""
    return np.stack([eval_jacobi(k, q, p, x) * np.sqrt(2.0 * k + 1.0) for k in range(degree)], axis=-1)
