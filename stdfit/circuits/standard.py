"""The complete models of a standard: which parameters each kind has, and Γ with all its derivatives."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.circuits.line import see_through_line
from stdfit.circuits.load import load
from stdfit.circuits.open_end import open_end
from stdfit.circuits.short_end import short_end


@dataclass(frozen=True, slots=True)
class Parameter:
    """A parameter as people read and type it.

    Attributes
    ----------
    name : str
        Its key in bench and kit files.
    unit : str
        The trade's unit.
    si : float
        SI value of one unit.
    power : int
        The power of frequency that it multiplies.
    label : str
        Its name in a sentence.
    """

    name: str
    unit: str
    si: float
    power: int
    label: str


OFFSET = (
    Parameter("offset_delay_ps", "ps", 1e-12, 0, "offset delay"),
    Parameter("offset_loss_gohm_per_s", "GΩ/s", 1e9, 0, "offset loss"),
    Parameter("offset_z0_ohm", "Ω", 1.0, 0, "offset Z0"),
)
OPEN = (
    Parameter("c0", "1e-15 F", 1e-15, 0, "C0"),
    Parameter("c1", "1e-27 F/Hz", 1e-27, 1, "C1"),
    Parameter("c2", "1e-36 F/Hz²", 1e-36, 2, "C2"),
    Parameter("c3", "1e-45 F/Hz³", 1e-45, 3, "C3"),
)
SHORT = (
    Parameter("l0", "1e-12 H", 1e-12, 0, "L0"),
    Parameter("l1", "1e-24 H/Hz", 1e-24, 1, "L1"),
    Parameter("l2", "1e-33 H/Hz²", 1e-33, 2, "L2"),
    Parameter("l3", "1e-42 H/Hz³", 1e-42, 3, "L3"),
)
LOAD = (
    Parameter("resistance_ohm", "Ω", 1.0, 0, "resistance"),
    Parameter("inductance_ph", "pH", 1e-12, 0, "inductance"),
    Parameter("capacitance_ff", "fF", 1e-15, 0, "capacitance"),
)
PARAMETERS: dict[str, tuple[Parameter, ...]] = {
    "open": OFFSET + OPEN,
    "short": OFFSET + SHORT,
    "load": OFFSET + LOAD,
}
"""The parameters of each kind, in the order in which `reflection` takes them."""

_UNITS = {kind: np.array([one.si for one in parameters]) for kind, parameters in PARAMETERS.items()}

IDEAL: dict[str, complex] = {"open": 1.0, "short": -1.0, "load": 0.0}
"""Reflection of a standard of each kind that has no definition at all."""


def reflection(
    kind: str, values: Sequence[float] | FloatArray, frequency_hz: FloatArray, reference_ohm: float
) -> tuple[ComplexArray, ComplexArray]:
    """Return Γ of a standard and its derivatives by every parameter.

    Parameters
    ----------
    kind : {"open", "short", "load"}
        The kind of standard.
    values : array of shape (..., p)
        The parameters in the trade's units, in the order of ``PARAMETERS[kind]``; several sets at once are
        allowed.
    frequency_hz : array of shape (n,)
        Frequency in Hz.
    reference_ohm : float
        Reference impedance in Ω.

    Returns
    -------
    gamma : complex array of shape (..., n)
    jacobian : complex array of shape (..., n, p)
        dΓ by each parameter, per trade unit.
    """
    units = _UNITS[kind]
    si = np.asarray(values, dtype=float) * units
    if kind == "open":
        end, by_end = open_end(frequency_hz, si[..., 3:], reference_ohm)
    elif kind == "short":
        end, by_end = short_end(frequency_hz, si[..., 3:], reference_ohm)
    else:
        end, by_end = load(frequency_hz, si[..., 3:4], si[..., 4:5], si[..., 5:6], reference_ohm)
    seen = see_through_line(
        end,
        frequency_hz,
        delay_s=si[..., 0:1],
        loss_ohm_per_s=si[..., 1:2],
        z0_ohm=si[..., 2:3],
        reference_ohm=reference_ohm,
    )
    jacobian = np.empty((*seen.gamma.shape, units.size), dtype=complex)
    for place, by in enumerate((seen.by_delay, seen.by_loss, seen.by_z0)):
        np.multiply(by, units[place], out=jacobian[..., place])
    np.multiply(by_end, seen.by_termination[..., None], out=jacobian[..., 3:])
    jacobian[..., 3:] *= units[3:]
    return seen.gamma, jacobian
