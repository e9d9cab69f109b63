"""Three standards on a Smith chart (P. H. Smith, Electronics 12(1), 1939, 29–31)."""

from typing import Any

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.validity.evidence.whole import KitEvidence
from stdfit.writing.numbers import figure
from stdfit.writing.pictures.devices import labels_of
from stdfit.writing.pictures.frame import unit_of
from stdfit.writing.pictures.palette import LINES, PALETTE

CIRCLES = (0.2, 0.5, 1.0, 2.0, 5.0)
"""Normalised resistances and reactances whose circles are drawn."""

ARC = np.linspace(0.0, 1.0, 61)

STEPS = (1.0, 2.0, 2.5, 5.0)
"""Marked frequencies are multiples of one of these and a power of ten,"""

MARKS = 4
"""at most so many."""

MARKERS = ("o", "s", "^")

APART = 0.13
"""Frequencies are not written nearer to each other than this."""

NEAR = 0.15
"""A standard that stays within this distance of the centre is told as a whole, and not by frequencies."""

REACH = 1.17
"""The chart is drawn out to here, so that frequencies find room outside the rim."""


def draw_smith(axes: Axes, one: KitEvidence) -> tuple[list[Artist], list[str]]:
    """Draw the grid and Γ of the three standards, thick up to the limit and thin beyond; return the key too."""
    draw_grid(axes)
    size = unit_of(float(one.frequency_hz[-1]))[0]
    inside = one.frequency_hz <= one.limit_hz
    marked = marked_frequencies(one.frequency_hz)
    handles: list[Artist] = []
    written: list[complex] = []
    names = labels_of(one)
    inner = near_centre(one)
    for place_of, (gamma, colour, marker) in enumerate(zip(one.standards.T, LINES, MARKERS, strict=True)):
        look: dict[str, Any] = {"color": PALETTE[colour], "solid_capstyle": "round"}
        axes.plot(gamma.real, gamma.imag, linewidth=0.9, linestyle=(0, (1, 1.5)), **look)
        axes.plot(gamma.real[inside], gamma.imag[inside], linewidth=2.0, **look)
        at = np.interp(marked, one.frequency_hz, gamma.real) + 1j * np.interp(
            marked, one.frequency_hz, gamma.imag
        )
        (dots,) = axes.plot(
            *(at.real, at.imag),
            linestyle="solid",
            linewidth=0.0,
            marker=marker,
            markersize=4.5,
            color=PALETTE[colour],
            markeredgecolor=PALETTE["paper"],
            markeredgewidth=0.6,
            zorder=3,
        )
        handles.append(dots)
        away = inner[place_of]
        if away is not None:  # too close together for frequencies
            axes.text(
                *(0.0, -(away + 0.11), f"{names[place_of]}: within {figure(away)} of the centre"),
                color=PALETTE[colour],
                ha="center",
                va="center",
                zorder=3,
                bbox={"facecolor": PALETTE["paper"], "edgecolor": "none", "pad": 1.5},
            )
            continue
        for place, hertz in zip(at, marked, strict=True):
            beside = place / abs(place) * (abs(place) + 0.10) if abs(place) > 0.5 else place - 0.10j
            if all(abs(beside - other) > APART for other in written):
                written.append(beside)
                axes.text(
                    *(beside.real, beside.imag, f"{hertz / size:g}"),
                    color=PALETTE["quiet"],
                    fontsize="small",
                    ha="center",
                    va="center",
                )
    return handles, [*names]


def near_centre(one: KitEvidence) -> tuple[float | None, ...]:
    """Return how far each standard is from the centre at most; None where it leaves it."""
    away = np.abs(one.standards).max(axis=0)
    return tuple(float(each) if each < NEAR else None for each in away)


def draw_grid(axes: Axes) -> list[Artist]:
    """Draw the circles of constant resistance and the arcs of constant reactance within the unit circle."""
    axes.set_aspect("equal")
    axes.set_xlim(-REACH, REACH)
    axes.set_ylim(-REACH, REACH)
    faint: dict[str, Any] = {"color": PALETTE["grid"], "linewidth": 0.7, "zorder": 1.0}
    turn = np.exp(2j * np.pi * ARC)
    artists: list[Artist] = []
    for part in CIRCLES:
        circle = (part + turn) / (1.0 + part)
        artists += axes.plot(circle.real, circle.imag, **faint)
        for sign in (1.0, -1.0):
            arc = _reactance(sign * part)
            artists += axes.plot(arc.real, arc.imag, **faint)
    artists += axes.plot([-1.0, 1.0], [0.0, 0.0], **faint)
    artists += axes.plot(turn.real, turn.imag, color=PALETTE["quiet"], linewidth=0.9, zorder=1.5)
    return artists


def _reactance(x: float) -> ComplexArray:
    """Return Γ = (z − 1)/(z + 1) of z = r + jx for r from 0 to infinity: an arc that ends at 1."""
    r = np.tan(0.5 * np.pi * np.linspace(0.0, 0.999, ARC.size))
    z = r + 1j * x
    return np.append((z - 1.0) / (z + 1.0), 1.0)


def marked_frequencies(frequency_hz: FloatArray) -> FloatArray:
    """Return a few round frequencies of a band.

    Examples
    --------
    >>> (marked_frequencies(np.array([5e7, 6e9])) / 1e9).tolist()
    [2.0, 4.0, 6.0]
    """
    low, top = float(frequency_hz[0]), float(frequency_hz[-1])
    ten = 10.0 ** np.floor(np.log10(top / MARKS))
    for step in (*(one * ten for one in STEPS), 10.0 * ten):
        marks = step * np.arange(1, int(top / step * (1.0 + 1e-9)) + 1)
        marks = marks[marks >= low]
        if marks.size <= MARKS:
            return np.asarray(np.minimum(marks, top))
    return np.zeros(0)
