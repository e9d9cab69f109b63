"""Numbers as people read and type them."""

import numpy as np

from stdfit.circuits.standard import PARAMETERS, reflection
from stdfit.validity.kit import Definition, Kit

ROUNDING = 1e-4
"""Largest change of Γ that rounding one parameter may cause."""


def frequency(hertz: float) -> str:
    """Return a frequency with a fitting prefix and three or four digits.

    Examples
    --------
    >>> frequency(2.13922e9), frequency(2e8), frequency(0.0)
    ('2.14 GHz', '200 MHz', '0 Hz')
    """
    for unit, size in (("GHz", 1e9), ("MHz", 1e6), ("kHz", 1e3)):
        if hertz >= 0.9995 * size:
            return f"{hertz / size:.3g} {unit}" if hertz < 999.5 * size else f"{hertz / size:.0f} {unit}"
    return f"{hertz:.0f} Hz"


def decimals(kit: Kit, definition: Definition) -> list[int]:
    """Return, for each parameter, the decimals that keep Γ within `ROUNDING` over the fit range.

    A parameter's own uncertainty is no guide: where two of them trade off, each is poorly known and yet their
    digits matter to the curve.
    """
    grid = np.linspace(definition.fit_low_hz, definition.fit_top_hz, 33)
    _, jacobian = reflection(definition.kind, definition.values, grid, kit.reference_ohm)
    steepest = np.abs(jacobian).max(axis=0)
    with np.errstate(divide="ignore"):
        wanted = np.where(
            steepest > 0.0, np.ceil(np.log10(np.maximum(steepest, 1e-300) / ROUNDING / 2.0)), 0.0
        )
    return [int(np.clip(one, 0, 9)) for one in wanted]


def plus_minus(value: float, half: float, digits: int) -> str:
    """Return value ± half-width, the value with the given decimals, the half-width with two digits."""
    return (
        f"{rounded(value, digits)} ± {half:.2g}" if half < 99.5 else f"{rounded(value, digits)} ± {half:.0f}"
    )


def rounded(value: float, digits: int) -> str:
    """Return a value with that many decimals, and no minus before a zero."""
    text = f"{value:.{digits}f}"
    return text.lstrip("-") if float(text) == 0.0 else text


def label_of(kind: str, name: str) -> str:
    """Return the name of a parameter in a sentence."""
    return next(parameter.label for parameter in PARAMETERS[kind] if parameter.name == name)


def figure(value: float) -> str:
    """Return a size with two digits, and in words where it has no end.

    Examples
    --------
    >>> figure(0.01234), figure(123.4), figure(0.0), figure(float("inf"))
    ('0.012', '123', '0', 'without end')
    """
    if value <= 0.0:
        return "0"
    if not np.isfinite(value):
        return "without end"
    return f"{value:.2g}" if value < 99.5 else f"{value:.0f}"


def finite(value: float) -> float | None:
    """Return a number for JSON, which knows neither infinity nor NaN."""
    return value if np.isfinite(value) else None
