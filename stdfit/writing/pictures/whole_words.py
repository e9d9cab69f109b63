"""Title, caption and alternative text of the pictures of a kit as a whole."""

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.validity.evidence.whole import KitEvidence
from stdfit.writing.numbers import figure, frequency
from stdfit.writing.pictures.frame import unit_of
from stdfit.writing.pictures.smith import near_centre

Words = tuple[str, str, str]
"""Title, caption, alternative text."""


def device_words(one: KitEvidence) -> Words:
    """Return the words of the bound on devices."""
    where = min(max(one.limit_hz, float(one.frequency_hz[0])), float(one.frequency_hz[-1]))
    after = int(np.searchsorted(one.frequency_hz, where))
    places = sorted({max(after - 1, 0), after})
    key = ", ".join(
        f"{figure(_between(where, one.frequency_hz[places], bounds[places]))} for |Γ| = {magnitude:g}"
        for magnitude, bounds in zip(one.magnitudes, one.bounds.T, strict=True)
    )
    at = frequency(where)
    caption = (
        f"How far a device's reflection can be off after a correction with {_three(one)}, at the worst phase: "
        f"{key} at {at}. Connections, drift and noise of the day come on top."
    )
    return (
        "What the kit leaves on devices",
        caption,
        f"Bound on devices over frequency, one line for each |Γ|: at {at} {key}.",
    )


def smith_words(one: KitEvidence) -> Words:
    """Return the words of the Smith chart."""
    where = "nowhere" if one.limit_hz <= 0.0 else f"up to {frequency(one.limit_hz)}"
    top = frequency(float(one.frequency_hz[-1]))
    turned = [
        f"{name} {np.ptp(np.degrees(np.unwrap(np.angle(gamma)))):.0f}°"
        for name, kind, gamma in zip(one.names, one.kinds, one.standards.T, strict=True)
        if kind != "load"
    ]
    centre = "".join(
        f" Near the centre: {name}, within {figure(away)} of it."
        for name, away in zip(one.names, near_centre(one), strict=True)
        if away is not None
    )
    caption = (
        f"Reflections of the three standards, thick as far as the kit is good within {one.within:g} ({where}), "
        f"dotted beyond. Numbers are frequencies in {unit_of(float(one.frequency_hz[-1]))[1]}.{centre}"
    )
    alt = f"Smith chart of {_three(one)} up to {top}, good {where}" + (
        f"; turns of the phase: {', '.join(turned)}." if turned else "."
    )
    return "The three standards", caption, alt


def separation_words(one: KitEvidence) -> Words:
    """Return the words of the distances between standards."""
    inside = one.frequency_hz <= max(one.limit_hz, one.frequency_hz[0])
    k, i = np.unravel_index(int(np.argmin(one.separation[inside].T)), one.separation[inside].T.shape)
    first, second = one.pair(int(k))
    key = f"{first} and {second} come nearest, {one.separation[i, k]:.2g} at {frequency(float(one.frequency_hz[i]))}"
    reach = "" if one.limit_hz <= 0.0 else " up to the limit"
    caption = (
        f"Distances of the three standards from each other:{reach} {key}. "
        "Where two come near each other, their errors are magnified in a correction."
    )
    return (
        "How far apart the standards are",
        caption,
        f"Distances between {_three(one)} over frequency:{reach} {key}.",
    )


def _between(where: float, frequency_hz: FloatArray, values: FloatArray) -> float:
    """Return a value between two points, without end where one of them has none."""
    return float(np.interp(where, frequency_hz, values)) if np.isfinite(values).all() else float("inf")


def _three(one: KitEvidence) -> str:
    return f"{one.names[0]}, {one.names[1]} and {one.names[2]}"
