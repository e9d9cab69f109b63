"""Connector families: where the next mode ends their use, and how well a connection repeats.

Cut-offs and recommended tops of 3.5 mm and smaller: IEEE Std 287.1-2021, as tabulated in papers of DesignCon 2024.
Tops of 7 mm, SMA, type N, TNC and BNC: IEC 61169 series, from memory. Repeatability: common practice, no source,
chosen on the high side for hand-tightened connectors.
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
        Onset of the next coaxial mode, or the family's top where that is lower.
    repeatability : tuple of three floats
        Assumed standard deviation of one connection: contact resistance in Ω, plane shift in ps, reactance in ps.
    """

    name: str
    top_hz: float
    repeatability: tuple[float, float, float]


FAMILIES = {
    "bnc": Family("BNC", 4e9, (0.05, 1.0, 0.5)),
    "tnc": Family("TNC", 11e9, (0.03, 0.4, 0.2)),
    "n": Family("type N", 18e9, (0.02, 0.3, 0.15)),
    "sma": Family("SMA", 18e9, (0.02, 0.2, 0.1)),
    "7": Family("7 mm", 18e9, (0.01, 0.1, 0.05)),
    "3.5": Family("3.5 mm", 38.8e9, (0.015, 0.12, 0.06)),
    "2.92": Family("2.92 mm", 46.5e9, (0.015, 0.12, 0.06)),
    "2.4": Family("2.4 mm", 56.5e9, (0.015, 0.1, 0.05)),
    "1.85": Family("1.85 mm", 73.3e9, (0.015, 0.1, 0.05)),
    "1.0": Family("1.0 mm", 135.7e9, (0.02, 0.1, 0.05)),
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
