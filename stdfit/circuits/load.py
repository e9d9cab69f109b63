"""A load: a resistor with the inductance of its leads, shunted by the capacitance of its pads."""

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray


def load(
    frequency_hz: FloatArray,
    resistance_ohm: FloatArray | float,
    inductance_h: FloatArray | float,
    capacitance_f: FloatArray | float,
    reference_ohm: float,
) -> tuple[ComplexArray, ComplexArray]:
    """Return the reflection of (R + jωL) shunted by C, and its derivatives by R, L and C.

    Parameters
    ----------
    frequency_hz : array of shape (n,)
        Frequency in Hz.
    resistance_ohm, inductance_h, capacitance_f : float or arrays of shape (..., 1)
        R in Ω, L in H, C in F. To first order only L − C·Z0² shows.
    reference_ohm : float
        Reference impedance in Ω.

    Returns
    -------
    gamma : complex array of shape (..., n)
    by_part : complex array of shape (..., n, 3)

    Examples
    --------
    >>> import numpy as np
    >>> gamma, _ = load(np.array([1e9]), 50.1, 0.0, 0.0, 50.0)
    >>> round(float(20 * np.log10(abs(gamma[0]))), 1)
    -60.0
    """
    omega = 2.0 * np.pi * frequency_hz
    branch: ComplexArray = np.asarray(resistance_ohm + 1j * omega * inductance_h, dtype=complex)
    bridge = 1.0 + 1j * omega * capacitance_f * branch
    z = branch / bridge
    gamma: ComplexArray = np.asarray((z - reference_ohm) / (z + reference_ohm))
    by_z = 2.0 * reference_ohm / (z + reference_ohm) / (z + reference_ohm)
    by_branch = by_z / bridge**2
    by_capacitance = -by_z * z * 1j * omega * z
    return gamma, np.stack([by_branch, 1j * omega * by_branch, by_capacitance], axis=-1)
