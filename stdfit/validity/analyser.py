"""What a kit was told of the analyser that read it: what its own correction left, stated or assumed."""

from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import FloatArray, frozen_float
from stdfit.data.bench_records import StatedResidual

STATED, ASSUMED = "stated", "assumed"

LARGEST_DB = 200.0
"""No residual is further down, and none of reflection tracking as large."""


@dataclass(frozen=True, slots=True, eq=False)
class Analyser:
    """Residuals of the analyser's own correction, 95 % bounds.

    Attributes
    ----------
    residuals : str
        "stated" in the bench file, or "assumed" where nothing or only the draft's values stood there.
    frequency_hz : array of shape (n,)
    directivity_db, source_match_db, reflection_tracking_db : arrays of shape (n,)
        −20·lg|δ| of the first two, 20·lg(1 + |δ|) of the last.
    """

    residuals: str
    frequency_hz: FloatArray
    directivity_db: FloatArray
    source_match_db: FloatArray
    reflection_tracking_db: FloatArray

    def __post_init__(self) -> None:
        for name in NUMBERS:
            object.__setattr__(self, name, frozen_float(getattr(self, name)))


NUMBERS = ("frequency_hz", "directivity_db", "source_match_db", "reflection_tracking_db")


def analyser_of(residual: StatedResidual, *, assumed: bool) -> Analyser:
    """Return residuals in decibels, as they are stated.

    Parameters
    ----------
    residual : StatedResidual
    assumed : bool
        Whether nobody stated them.
    """

    def decibels(size: FloatArray) -> FloatArray:
        return np.minimum(np.round(-20.0 * np.log10(np.maximum(size, 1e-300)), 9), LARGEST_DB)

    return Analyser(
        ASSUMED if assumed else STATED,
        residual.frequency_hz,
        decibels(residual.directivity),
        decibels(residual.source_match),
        np.round(20.0 * np.log10(1.0 + residual.reflection_tracking), 9),
    )


def same_residuals(one: StatedResidual, other: StatedResidual) -> bool:
    """Tell whether two tables of residuals say the same."""
    return all(
        np.shape(a) == np.shape(b) and np.allclose(a, b, rtol=1e-6)
        for a, b in (
            (one.frequency_hz, other.frequency_hz),
            (one.directivity, other.directivity),
            (one.source_match, other.source_match),
            (one.reflection_tracking, other.reflection_tracking),
        )
    )
