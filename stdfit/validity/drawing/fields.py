"""The door to the fields of coaxial lines: diameters of drawings in, capacitances out, each computed once."""

from functools import lru_cache

import numpy as np

from stdfit.circuits.coaxial.flush_open import flush_open
from stdfit.circuits.coaxial.shielded_open import shielded_open
from stdfit.circuits.coaxial.step import step_capacitance

SEEN = 512
"""Results that are kept: a study, or a plan, asks for the same drawing many times."""

Frequencies = tuple[float, ...]
Farads = tuple[float, ...]


@lru_cache(maxsize=SEEN)
def shielded_capacitance(
    inner_m: float, outer_m: float, frequency_hz: Frequencies, er: float, beyond: float, wall_m: float | None
) -> tuple[Farads, Farads]:
    """Return C(f) of a shielded open and its numerical standard uncertainty, in F (`shielded_open`)."""
    found = shielded_open(inner_m, outer_m, np.array(frequency_hz), er=er, er_beyond=beyond, wall_m=wall_m)
    return tuple(found.capacitance_f.tolist()), tuple(found.u_numeric_f.tolist())


@lru_cache(maxsize=SEEN)
def flush_capacitance(
    inner_m: float, outer_m: float, frequency_hz: Frequencies, er: float
) -> tuple[Farads, Farads, Farads]:
    """Return C(f) of a flush open in F, its numerical standard uncertainty, and G(f) in S (`flush_open`)."""
    found = flush_open(inner_m, outer_m, np.array(frequency_hz), er=er)
    return (
        tuple(found.capacitance_f.tolist()),
        tuple(found.u_numeric.tolist()),
        tuple(found.conductance_s.tolist()),
    )


@lru_cache(maxsize=SEEN)
def static_step(
    before_m: tuple[float, float], after_m: tuple[float, float], er: float, er_beyond: float
) -> float:
    """Return the static capacitance in F where a line of some diameters goes on with others (`step_capacitance`)."""
    if before_m == after_m:
        return 0.0
    found = step_capacitance(*before_m, *after_m, np.zeros(1), er=er, er_beyond=er_beyond)
    return float(found.capacitance_f[0])
