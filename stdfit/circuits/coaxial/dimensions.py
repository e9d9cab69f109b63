"""What the dimensions of a coaxial line say of its impedance, delay and loss, and of a short that closes it."""

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.base.errors import RequestError
from stdfit.circuits.coaxial.modes import SPEED_M_PER_S
from stdfit.circuits.coaxial.shielded_open import check_line
from stdfit.circuits.coaxial.sides import VACUUM_F_PER_M

VACUUM_H_PER_M = 1.0 / (VACUUM_F_PER_M * SPEED_M_PER_S**2)
"""Permeability of vacuum μ0; the conductors are taken to have it too: nickel does not."""

VACUUM_OHM = VACUUM_H_PER_M * SPEED_M_PER_S
"""Impedance of free space, 376.730 Ω."""

_LOSS_HZ = 1e9


def line_impedance_ohm(inner_m: float, outer_m: float, er: float = 1.0) -> float:
    """Return the impedance of a lossless coaxial line.

    Z0 = (1/2π)·√(μ0/ε0)/√εr·ln(D/d), 59.9585 Ω·ln(D/d)/√εr

    Parameters
    ----------
    inner_m, outer_m : float
        Diameters d and D in m.
    er : float
        Relative permittivity εr.

    Notes
    -----
    The field inside the metal adds inductance. It is left out here, as the impedance of an offset line is that
    without loss; the loss brings it back.
    """
    check_line(inner_m, outer_m, er)
    return VACUUM_OHM / (2.0 * np.pi * float(np.sqrt(er))) * float(np.log(outer_m / inner_m))


def delay_s(length_m: float, er: float = 1.0) -> float:
    """Return the one-way delay l·√εr/c of a length of line.

    Parameters
    ----------
    length_m : float
        Length l in m; negative for a plane that lies in front.
    er : float
        Relative permittivity εr.

    Notes
    -----
    This is the offset delay of a definition: the field in the metal slows the wave a little more, by r·l√εr/c over
    2·Z0·ω times √(f/1 GHz), and that is part of the offset loss (the factor 1+j), not of the delay.
    """
    check_line(1.0, 2.0, er)
    return length_m * float(np.sqrt(er)) / SPEED_M_PER_S


def surface_resistance_ohm(
    frequency_hz: FloatArray | float, conductivity_s_per_m: float, roughness_m: float = 0.0
) -> FloatArray:
    """Return the surface resistance of a metal, smooth or rough.

    Rs = √(πfμ0/σ)·[1 + (2/π)·atan(1.4·(Δ/δ)²)]

    Parameters
    ----------
    frequency_hz : array or float
        Frequency f in Hz.
    conductivity_s_per_m : float
        Conductivity σ in S/m.
    roughness_m : float
        Root mean square Δ of the heights of the surface in m.

    Raises
    ------
    RequestError
        If conductivity or roughness is none.

    Notes
    -----
    The factor of roughness is E. Hammerstad's and Ø. Jensen's, IEEE MTT-S Symposium Digest, 1980, 407–409, on curves
    of S. P. Morgan, J. Appl. Phys. 20, 1949, 352–362 (from memory).
    """
    _check_conductivity(conductivity_s_per_m)
    if not (np.isfinite(roughness_m) and roughness_m >= 0.0):
        raise RequestError(f"a roughness of {roughness_m:g} m is not possible", "give 0 or more")
    square = np.pi * np.asarray(frequency_hz, dtype=np.float64) * VACUUM_H_PER_M
    # (Δ/δ)² = Δ²·πfμ0σ, which is 0 at f = 0 where δ has no end.
    factor = 1.0 + 2.0 / np.pi * np.arctan(1.4 * roughness_m**2 * square * conductivity_s_per_m)
    return np.asarray(np.sqrt(square / conductivity_s_per_m) * factor)


def offset_loss_ohm_per_s(
    inner_m: float,
    outer_m: float,
    conductivity_s_per_m: float,
    *,
    er: float = 1.0,
    conductivity_outer_s_per_m: float | None = None,
    roughness_m: float = 0.0,
) -> float:
    """Return the offset loss at 1 GHz of a coaxial line.

    r = (1/π)·(Rs/d + Rs'/D)·c/√εr

    Parameters
    ----------
    inner_m, outer_m : float
        Diameters d and D in m.
    conductivity_s_per_m : float
        Conductivity of the inner conductor, and of the outer one where that is not given, in S/m.
    er : float
        Relative permittivity.
    conductivity_outer_s_per_m : float, optional
        Conductivity of the outer conductor in S/m.
    roughness_m : float
        Root mean square roughness of both in m.

    Notes
    -----
    The resistance per metre is that of skins which are thin against the radii. A rough surface is taken at 1 GHz:
    its loss rises faster than √f above. Loss of the dielectric is not in it.
    """
    check_line(inner_m, outer_m, er)
    outer_conductivity = (
        conductivity_s_per_m if conductivity_outer_s_per_m is None else conductivity_outer_s_per_m
    )
    inside = float(surface_resistance_ohm(_LOSS_HZ, conductivity_s_per_m, roughness_m))
    outside = float(surface_resistance_ohm(_LOSS_HZ, outer_conductivity, roughness_m))
    return (inside / inner_m + outside / outer_m) / np.pi * SPEED_M_PER_S / float(np.sqrt(er))


def flat_short_ohm(
    inner_m: float,
    outer_m: float,
    frequency_hz: FloatArray,
    conductivity_s_per_m: float,
    roughness_m: float = 0.0,
) -> ComplexArray:
    """Return the impedance of a flat metal wall that closes a line.

    Z = (1 + j)·(Rs/2π)·ln(D/d)

    Parameters
    ----------
    inner_m, outer_m : float
        Diameters d and D in m.
    frequency_hz : array of shape (n,)
        Frequency in Hz.
    conductivity_s_per_m : float
        Conductivity of the wall in S/m.
    roughness_m : float
        Root mean square roughness of the wall in m.

    Notes
    -----
    The sum over rings of a sheet of resistance Rs; the wave stays TEM, so that it has no inductance besides. The
    inductance of the skin goes as 1/√f and is below 1 pH at 1 GHz.
    """
    check_line(inner_m, outer_m)
    sheet = surface_resistance_ohm(np.asarray(frequency_hz), conductivity_s_per_m, roughness_m)
    return np.asarray((1.0 + 1.0j) * sheet / (2.0 * np.pi) * float(np.log(outer_m / inner_m)))


def _check_conductivity(value: float) -> None:
    if not (np.isfinite(value) and value > 0.0):
        raise RequestError(f"a conductivity of {value:g} S/m is not possible", "copper has 5.8e7 S/m")
