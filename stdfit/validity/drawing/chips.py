"""Chip resistors as a load: what their package says of inductance and capacitance."""

from dataclasses import dataclass

from stdfit.data.drawing_materials import CHIP_SIZES

HENRY_PER_M = 0.4e-6
"""Inductance of a chip by its length, mounted close to metal (common practice, no source)."""

FARAD = 30e-15
"""Capacitance of one chip with its pads, end to end (common practice, no source)."""

UNSURE = 0.6
"""Relative standard uncertainty of both: pads, solder and the way to ground matter as much as the chip."""


@dataclass(frozen=True, slots=True)
class ChipParasitics:
    """Broad evidence on a load of chips in parallel.

    Attributes
    ----------
    inductance_h, inductance_u_h, capacitance_f, capacitance_u_f : float
        Value and standard uncertainty.
    """

    inductance_h: float
    inductance_u_h: float
    capacitance_f: float
    capacitance_u_f: float


def chip_parasitics(size: str, count: int) -> ChipParasitics:
    """Return inductance and capacitance of equal chips in parallel, very roughly.

    L = 0.4 nH/mm · length / n, C = 30 fF · n, each with a standard uncertainty of 60 %.

    Parameters
    ----------
    size : str
        Code of the package, a key of `CHIP_SIZES`.
    count : int
        How many in parallel.

    Notes
    -----
    Common practice, no source. It only keeps a fit where a load can be; readings from 1 GHz on know better.
    """
    length, _ = CHIP_SIZES[size]
    henry, farad = HENRY_PER_M * length / count, FARAD * count
    return ChipParasitics(henry, UNSURE * henry, farad, UNSURE * farad)
