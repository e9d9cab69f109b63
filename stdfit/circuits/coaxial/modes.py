"""Waves that a coaxial line or an empty pipe can carry: their wave numbers across, and where the next one starts."""

from collections.abc import Callable

import numpy as np
import numpy.typing as npt
from scipy.special import j0, j1, jn_zeros, jvp, y0, y1, yvp

from stdfit.base.arrays import FloatArray
from stdfit.base.errors import RequestError

SPEED_M_PER_S = 299_792_458.0
"""Speed of light in vacuum; exact."""

PIPE_TE11 = 1.841183781340659
"""First zero of J1', from M. Abramowitz, I. A. Stegun, Handbook of Mathematical Functions, 1964, table 9.5."""


def line_tm_roots(ratio: float, count: int) -> FloatArray:
    """Return the wave numbers of TM01 … TM0n of a coaxial line, times the radius of its inner conductor.

    J0(x)·Y0(cx) − J0(cx)·Y0(x) = 0

    Parameters
    ----------
    ratio : float
        Outer by inner diameter, c > 1.
    count : int
        How many roots, the lowest first.

    Returns
    -------
    array of shape (count,)

    Raises
    ------
    RequestError
        If the ratio is not above 1.

    Notes
    -----
    Between (n − 1/2)π and nπ the function of (c − 1)x changes its sign once, for any c: its n-th zero lies between
    that of a narrow gap, nπ, and that of a pipe without a pin, the n-th zero of J0 (N. Marcuvitz, Waveguide
    Handbook, 1951, section 2.4; from memory).
    """
    _check_ratio(ratio)
    order = np.arange(1, count + 1)
    low, high = (order - 0.5) * np.pi / (ratio - 1.0), order * np.pi / (ratio - 1.0) * (1.0 + 1e-9)

    def value_and_slope(x: FloatArray) -> tuple[FloatArray, FloatArray]:
        value = j0(x) * y0(ratio * x) - j0(ratio * x) * y0(x)
        slope = -j1(x) * y0(ratio * x) - ratio * j0(x) * y1(ratio * x)
        slope += ratio * j1(ratio * x) * y0(x) + j0(ratio * x) * y1(x)
        return value, slope

    return bracketed_roots(value_and_slope, low, high)


def pipe_tm_roots(count: int) -> FloatArray:
    """Return the wave numbers of TM01 … TM0n of an empty pipe, times its radius: the zeros of J0.

    Parameters
    ----------
    count : int
        How many roots, the lowest first.

    Returns
    -------
    array of shape (count,)
    """
    if count <= 40:
        return np.asarray(jn_zeros(0, count), dtype=np.float64)
    order = np.arange(1, count + 1)

    def value_and_slope(x: FloatArray) -> tuple[FloatArray, FloatArray]:
        return j0(x), -j1(x)

    # The zeros lie a little above (n − 1/4)π.
    return bracketed_roots(value_and_slope, (order - 0.25) * np.pi, (order - 0.2) * np.pi)


def line_te11_root(ratio: float) -> float:
    """Return the wave number of TE11 of a coaxial line, times the radius of its inner conductor.

    J1'(x)·Y1'(cx) − J1'(cx)·Y1'(x) = 0, the smallest root

    Parameters
    ----------
    ratio : float
        Outer by inner diameter, c > 1.

    Raises
    ------
    RequestError
        If the ratio is not above 1.

    Notes
    -----
    The root lies between 1/c and √(2 ln c/(c² − 1)): the square of the wave number is the smallest mean of
    |∇ψ|²/ψ² (Rayleigh), which is nowhere below 1/b², and that is its value for ψ = cos φ.
    """
    _check_ratio(ratio)
    low = np.array([1.0 / ratio])
    high = np.array([np.sqrt(2.0 * np.log(ratio) / ((ratio - 1.0) * (ratio + 1.0)))]) * (1.0 + 1e-12)

    def value_and_slope(x: FloatArray) -> tuple[FloatArray, FloatArray]:
        near, far = (jvp(1, x), yvp(1, x)), (jvp(1, ratio * x), yvp(1, ratio * x))
        near_2, far_2 = (jvp(1, x, 2), yvp(1, x, 2)), (jvp(1, ratio * x, 2), yvp(1, ratio * x, 2))
        value = near[0] * far[1] - far[0] * near[1]
        slope = (
            near_2[0] * far[1] + ratio * near[0] * far_2[1] - ratio * far_2[0] * near[1] - far[0] * near_2[1]
        )
        return value, slope

    return float(bracketed_roots(value_and_slope, low, high)[0])


def bracketed_roots(
    value_and_slope: Callable[[FloatArray], tuple[FloatArray, FloatArray]],
    lowest: npt.ArrayLike,
    highest: npt.ArrayLike,
) -> FloatArray:
    """Return one root in each bracket, by Newton's steps and halving where a step would leave the bracket.

    Parameters
    ----------
    value_and_slope : function of an array of shape (n,)
        Returns the function and its derivative.
    lowest, highest : arrays of shape (n,)
        Between them the function changes its sign once.
    """
    low, high = np.array(lowest, dtype=np.float64), np.array(highest, dtype=np.float64)
    sign = np.sign(value_and_slope(low)[0])
    at = 0.5 * (low + high)
    for _ in range(60):
        value, slope = value_and_slope(at)
        left = np.sign(value) == sign
        low, high = np.where(left, at, low), np.where(left, high, at)
        with np.errstate(divide="ignore", invalid="ignore"):
            step = at - value / slope
        inside = (step > low) & (step < high)
        following = np.where(inside, step, 0.5 * (low + high))
        following = np.where(value == 0.0, at, following)
        if np.all(np.abs(following - at) <= 4e-16 * np.abs(at)):
            return following
        at = following
    return at


def line_te11_hz(inner_m: float, outer_m: float, er: float = 1.0) -> float:
    """Return the frequency from which a coaxial line carries TE11, its first higher mode.

    f = c·x/(2πa√εr)

    Parameters
    ----------
    inner_m, outer_m : float
        Diameters 2a and 2b of inner and outer conductor in m.
    er : float
        Relative permittivity εr of the filling.
    """
    return SPEED_M_PER_S * line_te11_root(outer_m / inner_m) / (np.pi * inner_m * float(np.sqrt(er)))


def pipe_te11_hz(bore_m: float, er: float = 1.0) -> float:
    """Return the frequency from which an empty pipe carries TE11, its first mode; bore (a diameter) in m."""
    return SPEED_M_PER_S * PIPE_TE11 / (np.pi * bore_m * float(np.sqrt(er)))


def _check_ratio(ratio: float) -> None:
    if not (np.isfinite(ratio) and ratio > 1.0):
        raise RequestError(
            f"the outer conductor is {ratio:g} times as wide as the inner",
            "the inner diameter must be smaller than the outer one",
        )
