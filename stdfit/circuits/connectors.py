"""Connector families: their line, where the next mode ends their use, and how well a connection repeats.

Sources of the figures, as the table names them:

* *IEEE 287.1*: cut-offs and recommended tops of IEEE Std 287.1-2021, as tabulated in papers of DesignCon 2024
  (published). Bores are the names of the families; pins follow from 50 Ω in air, d = D·e^(−50/59.9585) (derived).
* *IEC 60457*, *IEC 61169*: the series of these standards, from memory.

Repeatability: common practice, no source, chosen on the high side for hand-tightened connectors.
"""

import re
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Family:
    """A connector family.

    Attributes
    ----------
    name : str
    top_hz : float
        Onset of the next coaxial mode, or the family's top where that is lower: no limit lies beyond it.
    repeatability : tuple of three floats
        Assumed standard deviation of one connection: contact resistance in Ω, plane shift in ps, reactance in ps.
    bore_m, pin_m : float or None
        Diameters of outer and inner conductor at the plane, for 50 Ω; None where no figure is at hand.
    permittivity : float
        Relative permittivity of what fills it.
    recommended_hz : float or None
        Top that the standard recommends.
    next_mode_hz : float or None
        Published onset of TE11, where there is a figure.
    source : str
        Where the figures come from.
    """

    name: str
    top_hz: float
    repeatability: tuple[float, float, float]
    bore_m: float | None = None
    pin_m: float | None = None
    permittivity: float = 1.0
    recommended_hz: float | None = None
    next_mode_hz: float | None = None
    source: str = ""


_IEEE = "IEEE 287.1"

FAMILIES = {
    "bnc": Family("BNC", 4e9, (0.05, 1.0, 0.5), recommended_hz=4e9, source="IEC 61169-8, from memory"),
    "tnc": Family("TNC", 11e9, (0.03, 0.4, 0.2), recommended_hz=11e9, source="IEC 61169-17, from memory"),
    "n": Family(
        "type N", 18e9, (0.02, 0.3, 0.15), 7.0e-3, 3.04e-3, 1.0, 18e9, None, "IEC 61169-16, from memory"
    ),
    "sma": Family(
        "SMA", 18e9, (0.02, 0.2, 0.1), 4.1e-3, 1.27e-3, 2.05, 18e9, None, "IEC 61169-15, from memory"
    ),
    "7": Family("7 mm", 18e9, (0.01, 0.1, 0.05), 7.0e-3, 3.04e-3, 1.0, 18e9, None, "IEC 60457, from memory"),
    "3.5": Family("3.5 mm", 38.8e9, (0.015, 0.12, 0.06), 3.5e-3, 1.520e-3, 1.0, 33e9, 38.8e9, _IEEE),
    "2.92": Family("2.92 mm", 46.5e9, (0.015, 0.12, 0.06), 2.92e-3, 1.268e-3, 1.0, 40e9, 46.5e9, _IEEE),
    "2.4": Family("2.4 mm", 56.5e9, (0.015, 0.1, 0.05), 2.4e-3, 1.042e-3, 1.0, 50e9, 56.5e9, _IEEE),
    "1.85": Family("1.85 mm", 73.3e9, (0.015, 0.1, 0.05), 1.85e-3, 0.8035e-3, 1.0, 65e9, 73.3e9, _IEEE),
    "1.0": Family("1.0 mm", 135.7e9, (0.02, 0.1, 0.05), 1.0e-3, 0.4343e-3, 1.0, 110e9, 135.7e9, _IEEE),
}
UNKNOWN = Family("", float("inf"), (0.03, 0.4, 0.2))
"""A family that the table does not hold: no ceiling, and repeatability on the high side."""


def family_of(connector: str) -> Family:
    """Return the family that a free text names, or `UNKNOWN`.

    Examples
    --------
    >>> family_of("SMA male").name, family_of("N 75").name, family_of("3.5 mm").top_hz, family_of("").name
    ('SMA', 'type N', 38800000000.0, '')
    """
    for word in re.findall(r"[a-z]+|\d+(?:\.\d+)?", connector.lower()):
        if word in FAMILIES:
            return FAMILIES[word]
    return UNKNOWN
