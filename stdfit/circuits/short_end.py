"""The end of a short: a small inductance that varies with frequency."""

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.circuits.powers import powers_of


def short_end(
    frequency_hz: FloatArray, inductance: FloatArray, reference_ohm: float
) -> tuple[ComplexArray, ComplexArray]:
    """Return the reflection of Z = jω(L0 + L1·f + L2·f² + L3·f³) and its derivatives by the coefficients.

    Parameters
    ----------
    frequency_hz : array of shape (n,)
        Frequency in Hz.
    inductance : array of shape (..., 4)
        L0 in H, L1 in H/Hz, L2 in H/Hz², L3 in H/Hz³.
    reference_ohm : float
        Reference impedance in Ω.

    Returns
    -------
    gamma : complex array of shape (..., n)
    by_coefficient : complex array of shape (..., n, 4)

    Examples
    --------
    >>> import numpy as np
    >>> gamma, _ = short_end(np.array([0.0]), np.array([5e-12, 0.0, 0.0, 0.0]), 50.0)
    >>> complex(gamma[0])
    (-1+0j)
    """
    powers = powers_of(frequency_hz)
    reactance = 2j * np.pi * frequency_hz
    z = reactance * (inductance @ powers.T) / reference_ohm
    gamma: ComplexArray = (z - 1.0) / (z + 1.0)
    by_z: ComplexArray = 2.0 / reference_ohm * reactance / (z + 1.0) ** 2
    return gamma, np.asarray(by_z[..., None] * powers)
