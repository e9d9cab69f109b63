"""From impedance and admittance to reflection, for one and two ports."""

import numpy as np

from stdfit.base.arrays import ComplexArray


def gamma_from_impedance(z: ComplexArray) -> ComplexArray:
    """Return the reflection of port 1 of a circuit with normalised impedances.

    One port: Γ = (z − 1)/(z + 1).
    Two ports: S11 = [(z11 − 1)(z22 + 1) − z12 z21] / [(z11 + 1)(z22 + 1) − z12 z21], port 2 in its reference.

    Parameters
    ----------
    z : complex array of shape (n, 1, 1) or (n, 2, 2)
        Impedance matrix, divided by √(R_i R_j).

    Returns
    -------
    complex array of shape (n,)
        Not finite where the reflection is not defined.

    Notes
    -----
    S = (z − 1)(z + 1)⁻¹ with real references; e.g. D. A. Frickey, IEEE Trans. MTT 42(2), 1994, 205–211
    (from memory; checked against a library in the tests).
    """
    return _first_reflection(z, sign=1.0)


def gamma_from_admittance(y: ComplexArray) -> ComplexArray:
    """Return the reflection of port 1 of a circuit with normalised admittances.

    One port: Γ = (1 − y)/(1 + y).
    Two ports: S11 = [(1 − y11)(1 + y22) + y12 y21] / [(1 + y11)(1 + y22) − y12 y21].

    Parameters
    ----------
    y : complex array of shape (n, 1, 1) or (n, 2, 2)
        Admittance matrix, multiplied by √(R_i R_j).
    """
    return _first_reflection(y, sign=-1.0)


def _first_reflection(x: ComplexArray, sign: float) -> ComplexArray:
    """Both formulas above: they differ in sign only, because z and y are dual."""
    with np.errstate(all="ignore"):
        if x.shape[1] == 1:
            gamma = (x[:, 0, 0] - 1) / (x[:, 0, 0] + 1)
        else:
            cross = x[:, 0, 1] * x[:, 1, 0]
            top = (x[:, 0, 0] - 1) * (x[:, 1, 1] + 1) - cross
            gamma = top / ((x[:, 0, 0] + 1) * (x[:, 1, 1] + 1) - cross)
        result: ComplexArray = sign * gamma
    return result
