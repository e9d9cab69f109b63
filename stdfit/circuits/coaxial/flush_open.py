"""A flush open: a coaxial line ends in a wide flat flange, before open space."""

from typing import NamedTuple

import numpy as np
from scipy.special import ellipe

from stdfit.base.arrays import FloatArray, frozen_float
from stdfit.base.errors import RequestError
from stdfit.circuits.coaxial.aperture import Aperture, edge_exponent
from stdfit.circuits.coaxial.half_space import half_space
from stdfit.circuits.coaxial.shielded_open import check_line
from stdfit.circuits.coaxial.sides import AIR_ER, VACUUM_F_PER_M, line_side, wave_numbers
from stdfit.circuits.coaxial.variation import DEGREE, WAVES, Answering, shunt_of_opening

BARE_FACE_SHARE = 0.18
"""How much less than a flange without end the face of a connector may have: 30 fF against 25 fF for SMA (common
practice, no source)."""


class FlushOpen(NamedTuple):
    """What a flush open puts across the line at the plane of its flange.

    Attributes
    ----------
    capacitance_f, conductance_s : arrays of shape (n,)
        C(f) in F and G(f) in S: Y = G + jωC.
    u_numeric : array of shape (n,)
        Standard uncertainty of the number alone, of C and of G/ω, in F; dimensions are taken as exact.
    """

    capacitance_f: FloatArray
    conductance_s: FloatArray
    u_numeric: FloatArray


def flush_open(
    inner_m: float,
    outer_m: float,
    frequency_hz: FloatArray,
    *,
    er: float = 1.0,
    er_outside: float = AIR_ER,
    waves: int = WAVES,
    degree: int = DEGREE,
) -> FlushOpen:
    """Return capacitance and conductance of a flush open in a flange without end.

    Parameters
    ----------
    inner_m, outer_m : float
        Diameters of the centre conductor and of the outer one in m.
    frequency_hz : array of shape (n,)
        Frequency in Hz; 0 gives the static value.
    er : float
        Relative permittivity of the line's filling, which ends at the flange.
    er_outside : float
        That of the space before it.
    waves, degree : int
        How fine the field is resolved.

    Returns
    -------
    FlushOpen

    Raises
    ------
    RequestError
        If dimensions are no line, or its TM01 is not below cut-off.

    Notes
    -----
    Galerkin's method with the TM0n waves of the line and the spectrum of the half space. With one field alone, that of
    the TEM wave, it is the variational formula of N. Marcuvitz, Waveguide Handbook, 1951, section 4.16, whose static
    value `tem_bound_f` is an upper bound. G rises as f⁴ at low frequency. A flange that ends has less: see
    `finite_flange_share`.

    Examples
    --------
    >>> import numpy as np
    >>> end = flush_open(1.27e-3, 4.1e-3, np.array([0.0, 6e9]), er=2.07)
    >>> [round(float(c) * 1e15, 1) for c in end.capacitance_f]
    [30.2, 30.5]
    """
    check_line(inner_m, outer_m, er, er_outside)
    a, b = 0.5 * inner_m, 0.5 * outer_m
    highest = float(np.max(np.abs(wave_numbers(frequency_hz)), initial=0.0))

    def sides(aperture: Aperture, cut: float) -> list[Answering]:
        return [line_side(aperture, a, b, er, cut), half_space(aperture, er_outside, cut, highest)]

    exponent = edge_exponent(er, er_outside)
    shunt = shunt_of_opening(a, b, (exponent, exponent), sides, frequency_hz, waves=waves, degree=degree)
    omega = 2.0 * np.pi * np.asarray(frequency_hz)
    return FlushOpen(
        frozen_float(shunt.capacitance_f.real),
        frozen_float(0.0 - np.abs(omega) * shunt.capacitance_f.imag),
        frozen_float(shunt.u_numeric_f),
    )


def tem_bound_f(inner_m: float, outer_m: float, er_outside: float = AIR_ER) -> float:
    """Return the static capacitance for a field 1/r in the opening, an upper bound.

    C = 8·ε0·εr·(a + b)·[E(k) − 1]/ln²(b/a),  k = 2√(ab)/(a + b)

    Parameters
    ----------
    inner_m, outer_m : float
        Diameters 2a and 2b in m.
    er_outside : float
        Relative permittivity of the space before the flange.

    Notes
    -----
    N. Marcuvitz, Waveguide Handbook, 1951, section 4.16 (from memory).
    """
    a, b = 0.5 * inner_m, 0.5 * outer_m
    complete = float(ellipe(4.0 * a * b / (a + b) ** 2))
    return 8.0 * VACUUM_F_PER_M * er_outside * (a + b) * (complete - 1.0) / float(np.log(b / a)) ** 2


def finite_flange_share(inner_m: float, outer_m: float, flange_m: float) -> float:
    """Return a bound on the share by which a flange that ends lowers the static capacitance.

    share ≤ 0.065·(d/D)^(2/3)·(D/Df)³

    Parameters
    ----------
    inner_m, outer_m, flange_m : float
        Diameters d and D of the line and Df of the flange, the body behind it of the same diameter, in m.

    Raises
    ------
    RequestError
        If dimensions are no line, or the flange is not wider than the line.

    Notes
    -----
    Metal taken away lowers a capacitance to it, so that the error has one sign. The bound lies above values computed
    by finite differences for D/d from 1.3 to 10 and Df/D from 1.01 to 3; the power is that of the dipole that the
    opening is from afar (derived).
    """
    check_line(inner_m, outer_m)
    if not flange_m > outer_m:
        raise RequestError(
            f"a flange of {flange_m * 1e3:g} mm is not wider than the line's {outer_m * 1e3:g} mm",
            "give the diameter of the flat metal face",
        )
    return float(0.065 * (inner_m / outer_m) ** (2.0 / 3.0) * (outer_m / flange_m) ** 3)
