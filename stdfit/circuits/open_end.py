"""The end of an open: a fringing capacitance that varies with frequency."""

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.circuits.powers import powers_of


def open_end(
    frequency_hz: FloatArray, capacitance: FloatArray, reference_ohm: float
) -> tuple[ComplexArray, ComplexArray]:
    """Return the reflection of Y = jω(C0 + C1·f + C2·f² + C3·f³) and its derivatives by the coefficients.

    Parameters
    ----------
    frequency_hz : array of shape (n,)
        Frequency in Hz.
    capacitance : array of shape (..., 4)
        C0 in F, C1 in F/Hz, C2 in F/Hz², C3 in F/Hz³.
    reference_ohm : float
        Reference impedance in Ω.

    Returns
    -------
    gamma : complex array of shape (..., n)
    by_coefficient : complex array of shape (..., n, 4)

    Examples
    --------
    >>> import numpy as np
    >>> gamma, _ = open_end(np.array([0.0]), np.array([50e-15, 0.0, 0.0, 0.0]), 50.0)
    >>> complex(gamma[0])
    (1+0j)
    """
    powers = powers_of(frequency_hz)
    susceptance = 2j * np.pi * frequency_hz
    y = susceptance * (capacitance @ powers.T) * reference_ohm
    gamma: ComplexArray = (1.0 - y) / (1.0 + y)
    by_y: ComplexArray = -2.0 * reference_ohm * susceptance / (1.0 + y) ** 2
    return gamma, np.asarray(by_y[..., None] * powers)
