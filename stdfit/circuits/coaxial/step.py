"""A step of the inner or outer diameter of a coaxial line: a capacitance across the line at its plane."""

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.base.errors import RequestError
from stdfit.circuits.coaxial.aperture import Aperture, edge_exponent
from stdfit.circuits.coaxial.shielded_open import OpenEnd, check_line
from stdfit.circuits.coaxial.sides import line_side
from stdfit.circuits.coaxial.variation import DEGREE, WAVES, Answering, shunt_of_opening


def step_capacitance(
    inner_m: float,
    outer_m: float,
    inner_beyond_m: float,
    outer_beyond_m: float,
    frequency_hz: FloatArray,
    *,
    er: float = 1.0,
    er_beyond: float | None = None,
    waves: int = WAVES,
    degree: int = DEGREE,
) -> OpenEnd:
    """Return the capacitance across the line where a coaxial line goes on with other diameters.

    Parameters
    ----------
    inner_m, outer_m, inner_beyond_m, outer_beyond_m : float
        Diameters of the conductors on both sides of the plane in m; they may be given either way round.
    frequency_hz : array of shape (n,)
        Frequency in Hz; 0 gives the static value.
    er, er_beyond : float
        Relative permittivities on both sides; that beyond is the same where it is not given.
    waves, degree : int
        How fine the field is resolved.

    Returns
    -------
    OpenEnd
        0 where no diameter changes: the TEM wave of a coaxial line passes the face of a bead as it is.

    Raises
    ------
    RequestError
        If dimensions are no lines, the lines have no opening between them, or TM01 is not below cut-off.

    Notes
    -----
    At its plane a step is this capacitance and nothing else: both lines have the voltage of the opening, and the
    difference of their currents is the current into the waves that decay (J. R. Whinnery, H. W. Jamieson, Proc. IRE
    32, 1944, 98–114; from memory). A closed form for one medium and a single step: P. I. Somlo, IEEE Trans. MTT 15,
    1967, 48–53 (from memory).

    Examples
    --------
    >>> import numpy as np
    >>> step = step_capacitance(3.04e-3, 7e-3, 2.0e-3, 7e-3, np.array([0.0]))
    >>> round(float(step.capacitance_f[0]) * 1e15, 1)
    10.0
    """
    beyond = er if er_beyond is None else er_beyond
    check_line(inner_m, outer_m, er, beyond)
    check_line(inner_beyond_m, outer_beyond_m)
    if max(inner_m, inner_beyond_m) >= min(outer_m, outer_beyond_m):
        raise RequestError(
            "the inner conductor of one line is as wide as the outer of the other",
            "look at the diameters of both sections: they leave no opening",
        )
    if inner_m == inner_beyond_m and outer_m == outer_beyond_m:
        return OpenEnd(np.zeros(np.shape(frequency_hz)), np.zeros(np.shape(frequency_hz)), 0)
    radii = 0.5 * np.array([[inner_m, outer_m], [inner_beyond_m, outer_beyond_m]])
    permittivity = (er, beyond)
    inner, outer = float(radii[:, 0].max()), float(radii[:, 1].min())

    def exponent(end: int) -> float | None:
        if radii[0, end] == radii[1, end]:
            return None
        narrow = int(np.argmax(radii[:, 0])) if end == 0 else int(np.argmin(radii[:, 1]))
        return edge_exponent(permittivity[narrow], permittivity[1 - narrow])

    def sides(aperture: Aperture, cut: float) -> list[Answering]:
        return [
            line_side(aperture, float(a), float(b), e, cut)
            for (a, b), e in zip(radii, permittivity, strict=True)
        ]

    shunt = shunt_of_opening(
        inner, outer, (exponent(0), exponent(1)), sides, frequency_hz, waves=waves, degree=degree
    )
    return OpenEnd(shunt.capacitance_f.real, shunt.u_numeric_f, shunt.modes)
