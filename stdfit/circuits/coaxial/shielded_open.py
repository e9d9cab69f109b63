"""A shielded open: the centre conductor ends flat, the outer one goes on as a pipe below its cut-off."""

from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import FloatArray, frozen_float
from stdfit.base.errors import RequestError
from stdfit.circuits.coaxial.aperture import Aperture, edge_exponent
from stdfit.circuits.coaxial.sides import AIR_ER, line_side, pipe_side
from stdfit.circuits.coaxial.variation import DEGREE, WAVES, Answering, shunt_of_opening

__all__ = ["AIR_ER", "OpenEnd", "shielded_open"]

_NEAREST_WALL = 0.05
_WIDEST = 1e100


@dataclass(frozen=True, slots=True, eq=False)
class OpenEnd:
    """The capacitance of an open end at the plane of its pin's face.

    Attributes
    ----------
    capacitance_f : array of shape (n,)
        C(f) in F.
    u_numeric_f : array of shape (n,)
        Standard uncertainty of the number alone, in F; dimensions are taken as exact.
    modes : int
        Waves that were summed, of line and pipe together.
    """

    capacitance_f: FloatArray
    u_numeric_f: FloatArray
    modes: int

    def __post_init__(self) -> None:
        object.__setattr__(self, "capacitance_f", frozen_float(self.capacitance_f))
        object.__setattr__(self, "u_numeric_f", frozen_float(self.u_numeric_f))


def shielded_open(
    inner_m: float,
    outer_m: float,
    frequency_hz: FloatArray,
    *,
    er: float = 1.0,
    er_beyond: float | None = None,
    wall_m: float | None = None,
    waves: int = WAVES,
    degree: int = DEGREE,
) -> OpenEnd:
    """Return the capacitance of a shielded open over frequency.

    Parameters
    ----------
    inner_m, outer_m : float
        Diameters of the centre conductor and of the outer one in m.
    frequency_hz : array of shape (n,)
        Frequency in Hz; 0 gives the static value.
    er : float
        Relative permittivity of the line's filling; `AIR_ER` for air.
    er_beyond : float, optional
        That of the pipe beyond the pin; the line's own where it is not given.
    wall_m : float, optional
        Distance of a metal wall that closes the pipe, from the pin's face, in m.
    waves, degree : int
        How fine the field is resolved.

    Returns
    -------
    OpenEnd

    Raises
    ------
    RequestError
        If dimensions are no line, or a wave of full symmetry is not below its cut-off.

    Notes
    -----
    The plane is the face of the pin. A pin that ends before the plane of the connector, or stands out of it, is the
    same end at another plane: a shift by its recess s is a delay of −s·√εr/c. The reference value is 36.242 fF per cm
    of outer circumference at 50 Ω in vacuum (P. I. Somlo, Proc. IREE Australia 28, 1967, 7–9).

    Examples
    --------
    >>> import numpy as np
    >>> end = shielded_open(3.04e-3, 7.0e-3, np.array([0.0, 10e9]))
    >>> [round(float(c) * 1e15, 1) for c in end.capacitance_f]
    [79.7, 83.3]
    """
    beyond = er if er_beyond is None else er_beyond
    check_line(inner_m, outer_m, er, beyond)
    a, b = 0.5 * inner_m, 0.5 * outer_m
    # The waves that are summed as a tail must not reach the wall.
    if wall_m is not None and not (np.isfinite(wall_m) and wall_m >= _NEAREST_WALL * (b - a)):
        raise RequestError(
            f"a closing wall {wall_m * 1e3:g} mm from the pin is not possible here",
            f"give {_NEAREST_WALL * (b - a) * 1e3:.3g} mm or more: nearer, pin and wall are a plate capacitor",
        )

    def sides(aperture: Aperture, cut: float) -> list[Answering]:
        return [line_side(aperture, a, b, er, cut), pipe_side(aperture, b, beyond, cut, wall_m)]

    shunt = shunt_of_opening(
        a, b, (edge_exponent(er, beyond), None), sides, frequency_hz, waves=waves, degree=degree
    )
    return OpenEnd(shunt.capacitance_f.real, shunt.u_numeric_f, shunt.modes)


def check_line(inner_m: float, outer_m: float, *permittivities: float) -> None:
    """Raise a RequestError if diameters and permittivities are not those of a coaxial line."""
    if not (np.isfinite(outer_m) and 0.0 < inner_m < outer_m < _WIDEST * inner_m):
        raise RequestError(
            f"an inner conductor of {inner_m * 1e3:g} mm in an outer one of {outer_m * 1e3:g} mm is no line",
            "give an inner diameter above 0 and below the outer one, both in m",
        )
    for value in permittivities:
        if not (np.isfinite(value) and value >= 1.0):
            raise RequestError(
                f"{value:g} is no relative permittivity", "give 1 for vacuum, more for anything else"
            )
