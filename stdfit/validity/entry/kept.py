"""Definitions as they are typed: exact values."""

from stdfit.base.arrays import FloatArray
from stdfit.circuits.standard import PARAMETERS
from stdfit.validity.kit import Fitted

ORDER = "as typed"
"""The order of a definition that was typed."""


def held(kind: str, values: FloatArray) -> tuple[Fitted, ...]:
    """Return parameters with values in trade units that are exact: what is typed is known."""
    return tuple(
        Fitted(one.name, one.unit, float(value), 0.0, float(value), float(value), "held", "")
        for one, value in zip(PARAMETERS[kind], values, strict=True)
    )
