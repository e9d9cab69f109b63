"""Nested readings, calibration / connection / repeat: how much scatter comes from each, with 95 % intervals."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_float

LEVELS = ("calibration", "connection", "repeat")

DRAWS = 4000
SEED = 1
"""The same numbers are drawn every time, so that a study says the same twice."""

NODES = 129
"""Exact quantiles of χ² between which draws are interpolated."""

GAIN = 0.1
"""One more connection is worth making as long as it makes a mean surer by this part."""

MOST = 1000
"""Connections that nobody makes."""


@dataclass(frozen=True, slots=True, eq=False)
class Design:
    """Where each reading of one standard belongs.

    Attributes
    ----------
    calibration : int array of shape (n,)
        Which calibration, counted from 0.
    connection : int array of shape (n,)
        Which connection, counted from 0 over all calibrations.
    """

    calibration: npt.NDArray[np.int64]
    connection: npt.NDArray[np.int64]

    def __post_init__(self) -> None:
        for name in ("calibration", "connection"):
            values = np.array(getattr(self, name), dtype=np.int64)
            values.flags.writeable = False
            object.__setattr__(self, name, values)

    @classmethod
    def of(cls, counts: Sequence[Sequence[int]]) -> "Design":
        """Return the design with so many repeats of each connection of each calibration."""
        calibration = [i for i, own in enumerate(counts) for repeats in own for _ in range(repeats)]
        sizes = [repeats for own in counts for repeats in own]
        connection = [j for j, repeats in enumerate(sizes) for _ in range(repeats)]
        return cls(np.array(calibration), np.array(connection))


@dataclass(frozen=True, slots=True, eq=False)
class Components:
    """Standard deviations of each of `LEVELS`, and what a mean of n connections is worth.

    Attributes
    ----------
    sd : array of shape (3,)
        NaN where the design does not tell a level from the one above it, or not at all.
    low, high : arrays of shape (3,)
        Ends of the 95 % intervals; NaN as for `sd`.
    freedoms : array of shape (3,)
        Degrees of freedom of each level's sum of squares.
    worth : (int, int, int)
        Connections from which on one more brings less than `GAIN`; with its 95 % interval. Where calibrations are not
        told apart it is what pure averaging asks for.
    repeats : float
        Readings of each connection, on average (harmonic mean).
    """

    sd: FloatArray
    low: FloatArray
    high: FloatArray
    freedoms: FloatArray
    worth: tuple[int, int, int]
    repeats: float

    def __post_init__(self) -> None:
        for name in ("sd", "low", "high", "freedoms"):
            object.__setattr__(self, name, frozen_float(getattr(self, name)))

    def of_mean(self, connections: int) -> float:
        """Return the standard uncertainty of a mean of so many connections in one calibration.

        u² = σa² + (σb² + σe²/r)/n, for n connections of r readings each. NaN where neither σb nor the σa that would
        hold it is known: one connection does not say how connections scatter. Without σa the calibration's part is not
        in it.
        """
        if np.isnan(self.sd[:2]).all():
            return float("nan")
        a, b, e = np.nan_to_num(self.sd) ** 2
        return float(np.sqrt(a + (b + e / self.repeats) / connections))


def components(design: Design, values: FloatArray | ComplexArray) -> Components:
    """Return the components of variance of y_ijk = μ + a_i + b_ij + e_ijk by the analysis of unweighted means.

    With c_i connections in calibration i and r_ij readings of each,

    Se = ΣΣΣ (y_ijk − ȳ_ij)²,  Sb = ΣΣ (ȳ_ij − ȳ_i)²,  Sa = Σ (ȳ_i − ȳ)²,  ȳ_i = Σ_j ȳ_ij/c_i,  ȳ = Σ_i ȳ_i/a

    divided by their degrees of freedom νe, νb, νa estimate σe², σb² + h·σe² and σa² + k·σb² + m·σe², with
    h = Σ(1 − 1/c_i)/r_ij / νb, k the mean of 1/c_i, and m that of Σ_j 1/(r_ij·c_i²). For equal counts it is the usual
    nested analysis of variance, where the three are independent multiples of χ². With unequal counts that is a close
    approximation (J. D. Thomas, R. A. Hultquist, Ann. Statist. 6, 1978, 582–587; from memory). The intervals come from
    draws of S/χ²_ν in place of each mean square (generalised confidence intervals: S. Weerahandi, J. Amer. Statist.
    Assoc. 88, 1993, 899–905; from memory), negative differences counted as zero. The nested design calibration,
    disconnect, repeat is that of A. Koepke, J. Jargon, 90th ARFTG conference, 2017.

    Complex values have E|·|² as their variance, and ν·(tr V)²/tr V² degrees of freedom, V the 2×2 covariance of their
    real and imaginary parts (F. E. Satterthwaite, Biometrics Bulletin 2, 1946, 110–114): twice as many where errors
    are circular, as many where they lie on a line.

    Parameters
    ----------
    design : Design
    values : array of shape (n,)
    """
    pair = [values.real, values.imag] if np.iscomplexobj(values) else [values.real]
    parts: FloatArray = np.stack(pair, axis=1).astype(float)
    of_connection = _means(parts, design.connection)
    owner = design.calibration[np.unique(design.connection, return_index=True)[1]]
    of_calibration = _means(of_connection, owner)
    rests = (
        of_calibration - of_calibration.mean(axis=0),
        of_connection - of_calibration[owner],
        parts - of_connection[design.connection],
    )
    mix = _mixture(design, owner)
    free = np.array(
        [of_calibration.shape[0] - 1, owner.size - of_calibration.shape[0], parts.shape[0] - owner.size]
    )
    told = free > 0
    sums = np.array([float((rest**2).sum()) for rest in rests])
    effective = free * np.array([_circularity(rest) for rest in rests])
    rng = np.random.default_rng(SEED)
    # S/tr V is ν/ν_eff times χ² with ν_eff degrees of freedom: its mean is ν.
    shrunk = [
        nu_eff / nu / _chi_squares(nu_eff, rng) if nu else np.zeros(DRAWS)
        for nu, nu_eff in zip(free, effective, strict=True)
    ]
    estimate = _from_squares((sums / np.maximum(free, 1))[:, None], told, mix)
    drawn = _from_squares(sums[:, None] * np.array(shrunk), told, mix)
    low, high = np.quantile(drawn, [0.025, 0.975], axis=1)
    middle = int(_worth(estimate, mix.h)[0])
    ends = np.quantile(_worth(drawn, mix.h), [0.025, 0.975])
    unknown = np.where(told, 0.0, np.nan)
    return Components(
        sd=np.sqrt(estimate[:, 0]) + unknown,
        low=np.sqrt(low) + unknown,
        high=np.sqrt(high) + unknown,
        freedoms=effective,
        worth=(middle, min(middle, int(ends[0])), max(middle, int(ends[1]))),
        repeats=1.0 / mix.h,
    )


@dataclass(frozen=True, slots=True)
class _Mixture:
    """How much of the lower levels each mean square holds: h of σe² in Sb, k of σb² and m of σe² in Sa."""

    h: float
    k: float
    m: float


def _mixture(design: Design, owner: npt.NDArray[np.int64]) -> _Mixture:
    each = 1.0 / np.bincount(design.connection)
    inside = np.bincount(owner).astype(float)
    weight = 1.0 - 1.0 / inside[owner]
    h = float(weight @ each / weight.sum()) if weight.any() else float(each.mean())
    return _Mixture(h, float(np.mean(1.0 / inside)), float(np.sum(each / inside[owner] ** 2) / inside.size))


def _chi_squares(freedom: float, rng: np.random.Generator) -> FloatArray:
    """Return draws of χ², one from each of `DRAWS` equally likely parts, in random order: their quantiles are exact.

    The cube root of χ² is nearly a straight line of a normal variable (E. B. Wilson, M. M. Hilferty, Proc. Natl. Acad.
    Sci. 17, 1931, 684–688), so that few exact quantiles and straight lines between their roots do.
    """
    from scipy.special import chdtri, ndtr, ndtri

    z = ndtri((rng.permutation(DRAWS) + 0.5) / DRAWS)
    nodes = np.linspace(z.min(), z.max(), NODES)
    return np.asarray(np.interp(z, nodes, np.cbrt(chdtri(freedom, ndtr(-nodes)))) ** 3)


def _means(parts: FloatArray, group: npt.NDArray[np.int64]) -> FloatArray:
    """Return the mean of each group, shape (groups, ...)."""
    sums = np.zeros((int(group.max()) + 1, parts.shape[1]))
    np.add.at(sums, group, parts)
    return np.asarray(sums / np.bincount(group)[:, None])


def _circularity(rest: FloatArray) -> float:
    """Return (tr V)²/tr V² of the covariance of the parts: 1 for real values or errors on a line, up to 2."""
    covariance = rest.T @ rest
    squares = float((covariance**2).sum())
    return float(np.trace(covariance)) ** 2 / squares if squares > 0.0 else 1.0


def _from_squares(squares: FloatArray, told: npt.NDArray[np.bool_], mix: _Mixture) -> FloatArray:
    """Return σa², σb², σe² from mean squares of shape (3, d); what is not told apart stays in the level above."""
    a, b, e = squares * told[:, None]
    own_b = b - mix.h * e
    beside = mix.k * own_b + mix.m * e if told[1] else mix.m * e
    levels = np.stack([a - beside, own_b, e]) * told[:, None]
    return np.asarray(np.maximum(levels, 0.0))


def _worth(variances: FloatArray, h: float) -> npt.NDArray[np.int64]:
    """Return the smallest n with 1 − u(n+1)/u(n) < `GAIN`, for each column of variances.

    u²(n) = A + B/n falls by the part g from n to n + 1 where B/(n(n+1)) = (1 − (1 − g)²)·(A + B/n), a quadratic in n:
    with q = 1 − (1 − g)², A·q·n² + (A + B)·q·n + B·q − B = 0.
    """
    above, single = variances[0], variances[1] + h * variances[2]
    q = 1.0 - (1.0 - GAIN) ** 2
    square, linear, constant = above * q, (above + single) * q, single * (q - 1.0)
    with np.errstate(divide="ignore", invalid="ignore"):
        root = np.where(
            square > 1e-12 * linear,
            (-linear + np.sqrt(linear**2 - 4.0 * square * constant)) / (2.0 * square),
            -constant / linear,
        )
    return np.asarray(np.clip(np.ceil(np.nan_to_num(root, nan=1.0)), 1, MOST), dtype=np.int64)
