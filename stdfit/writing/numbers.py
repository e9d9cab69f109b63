"""Numbers as people read and type them."""

from collections.abc import Sequence

import numpy as np

from stdfit.circuits.standard import PARAMETERS, reflection
from stdfit.validity.kit import Definition, Fitted, Kit

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


def good_to(hertz: float) -> str:
    """Return a limit: a frequency, or "none" where it is good nowhere.

    Examples
    --------
    >>> good_to(2.13922e9), good_to(0.0)
    ('2.14 GHz', 'none')
    """
    return frequency(hertz) if hertz > 0.0 else "none"


def decimals(kit: Kit, definition: Definition) -> list[int]:
    """Return, for each parameter, the decimals that keep Γ within `ROUNDING` over the fit range.

    A parameter's own uncertainty alone is no guide: where two of them trade off, each is poorly known and yet their
    digits matter to the curve. But two digits of it are shown, so that no value is rounded to more than a tenth of
    what it is sure to.
    """
    grid = np.linspace(definition.fit_low_hz, definition.fit_top_hz, 33)
    _, jacobian = reflection(definition.kind, definition.values, grid, kit.reference_ohm)
    steepest = np.abs(jacobian).max(axis=0)
    with np.errstate(divide="ignore"):
        wanted = np.where(
            steepest > 0.0, np.ceil(np.log10(np.maximum(steepest, 1e-300) / ROUNDING / 2.0)), 0.0
        )
    halves = [half_width(one) for one in definition.parameters]
    return [
        int(np.clip(max(one, second_digit(half)), 0, 9)) for one, half in zip(wanted, halves, strict=True)
    ]


def half_width(one: Fitted) -> float:
    """Return the wider half of a parameter's 95 % interval; 0 for what is held or unused."""
    return max(one.high - one.value, one.value - one.low)


def second_digit(half: float) -> int:
    """Return the decimals that show the second digit of a half-width; 0 where there is none.

    Examples
    --------
    >>> second_digit(0.23), second_digit(4.1), second_digit(250.0)
    (2, 1, 0)
    """
    # 0.0996 is shown as 0.10: its second digit is that of the rounded value. From 10 on none is behind the point.
    return max(0, 1 - int(np.floor(np.log10(float(f"{half:.1e}"))))) if 0.0 < half < 10.0 else 0


def plus_minus(value: float, half: float, digits: int) -> str:
    """Return value ± half-width, the value with the given decimals at least.

    Both have the same decimals, unless the half-width would have more than three digits: then it has two.

    Examples
    --------
    >>> plus_minus(26.5241, 0.5042, 3), plus_minus(-0.3591, 4.123, 3)
    ('26.524 ± 0.504', '-0.359 ± 4.1')
    """
    return f"{rounded(value, digits)} ± {half_said(half, digits)}"


def half_said(half: float, digits: int) -> str:
    """Return a half-width beside a value with so many decimals."""
    whole = len(f"{half:.0f}") if half >= 1.0 else 0
    small = second_digit(half) - 1  # zeros behind the point
    told = digits + whole if whole else digits - small + 1
    return f"{half:.{digits}f}" if 0.0 < half < 99.5 and 2 <= told <= 3 else two_digits(half)


def two_digits(half: float) -> str:
    """Return a half-width with two digits, or whole where it is large."""
    return f"{half:.{second_digit(half)}f}" if 0.0 < half < 99.5 else f"{half:.0f}"


def rounded(value: float, digits: int) -> str:
    """Return a value with that many decimals, and no minus before a zero."""
    text = f"{value:.{digits}f}"
    return text.lstrip("-") if float(text) == 0.0 else text


def adding_up(values: Sequence[float], digits: int) -> list[str]:
    """Return values with that many decimals that add up to their rounded sum, each moved by the least that this takes.

    Examples
    --------
    >>> adding_up([0.333, 0.333, 0.334], 2)
    ['0.33', '0.33', '0.34']
    """
    scaled = np.asarray(values, dtype=float) * 10.0**digits
    if not np.isfinite(scaled).all():
        return [f"{value:.{digits}f}" for value in values]
    whole = np.floor(scaled)
    more = round(float(scaled.sum())) - int(whole.sum())
    whole[np.argsort(whole - scaled, kind="stable")[:more]] += 1.0
    return [f"{value / 10.0**digits:.{digits}f}" for value in whole]


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
