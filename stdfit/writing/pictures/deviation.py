"""A standard beside the ideal one: readings as points, the model as a line, its bound as a band."""

from collections.abc import Sequence
from typing import Any

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes

from stdfit.base.arrays import FloatArray
from stdfit.validity.evidence.standard import StandardEvidence
from stdfit.writing.pictures.frame import DASHED, dots, frequency_axis, mark_limit, ruled
from stdfit.writing.pictures.palette import PALETTE

SMALLEST = 1e-6
"""Of |Γ| in dB: a passive standard shows no less."""

MOST_POINTS = 120
"""Readings that are drawn: more of them touch each other."""


def draw_reflecting(magnitude: Axes, phase: Axes, one: StandardEvidence) -> tuple[list[Artist], list[str]]:
    """Draw |Γ| in dB and the phase against the ideal open or short in degrees; return the key too."""
    top_hz = float(one.frequency_hz[-1])
    for axes in (magnitude, phase):
        size = frequency_axis(axes, one.frequency_hz)
    x, length = one.frequency_hz / size, np.abs(one.gamma)
    loss = decibels(length)
    band = (
        decibels(np.maximum(length - one.bound, SMALLEST * length)),
        decibels(length + one.bound),
    )
    turned = np.degrees(np.unwrap(np.angle(one.gamma / one.ideal)))
    half = np.degrees(np.arcsin(np.clip(one.bound / np.maximum(length, SMALLEST), 0.0, 1.0)))
    arc = (turned - half, turned + half)
    at, losses, turns = _nothing(), _nothing(), _nothing()
    if one.readings is not None:
        at, losses = one.readings.frequency_hz / size, decibels(np.abs(one.readings.gamma))
        near = np.interp(one.readings.frequency_hz, one.frequency_hz, turned)
        rest = np.degrees(np.angle(one.readings.gamma / one.ideal)) - near
        turns = near + (rest + 180.0) % 360.0 - 180.0
    ruled(magnitude, "|Γ| (dB)", _seen([loss, losses], [band], one), None)
    ruled(phase, f"phase against the ideal {one.kind} (°)", _seen([turned, turns], [arc], one), top_hz)
    handles = [_points(magnitude, at, losses), *_draw(magnitude, x, loss, band, "series-1")]
    _points(phase, at, turns)
    _draw(phase, x, turned, arc, "series-1")
    mark_limit(magnitude, one.limit_hz, size)
    mark_limit(phase, one.limit_hz, size, told=False)
    return _with_key(one, handles, ["mean reading", "model", "95 % bound"])


def draw_absorbing(magnitude: Axes, plane: Axes, one: StandardEvidence) -> tuple[list[Artist], list[str]]:
    """Draw |Γ|, and its real and imaginary part, of a load; return the key too."""
    top_hz = float(one.frequency_hz[-1])
    for axes in (magnitude, plane):
        size = frequency_axis(axes, one.frequency_hz)
    x, length = one.frequency_hz / size, np.abs(one.gamma)
    real, imag = one.gamma.real, one.gamma.imag
    read = np.zeros(0, dtype=complex) if one.readings is None else one.readings.gamma
    at = _nothing() if one.readings is None else one.readings.frequency_hz / size
    ends = (np.maximum(length - one.bound, 0.0), length + one.bound)
    bands = [(part - one.bound, part + one.bound) for part in (real, imag)]
    _, high = _seen([length, np.abs(read)], [ends], one)
    ruled(magnitude, "|Γ|", (0.0, high), None)
    ruled(
        plane, "real and imaginary part of Γ", _seen([real, imag, read.real, read.imag], bands, one), top_hz
    )
    points = _points(magnitude, at, np.abs(read))
    line, band = _draw(magnitude, x, length, ends, "series-1")
    _points(plane, at, read.real)
    _draw(plane, x, real, bands[0], "series-1")
    other = _draw(plane, x, imag, bands[1], "series-3", linestyle=DASHED)
    mark_limit(magnitude, one.limit_hz, size)
    second = _points(plane, at, read.imag, "series-5")
    mark_limit(plane, one.limit_hz, size, told=False)
    return _with_key(
        one,
        [points, second, line, other[0], band],
        ["reading", "reading, imaginary part", "model", "model, imaginary part", "95 % bound"],
    )


def decibels(length: FloatArray) -> FloatArray:
    """Return 20·lg of a magnitude."""
    return np.asarray(20.0 * np.log10(np.maximum(length, SMALLEST)))


def _nothing() -> FloatArray:
    return np.zeros(0)


def _with_key(
    one: StandardEvidence, handles: list[Artist], labels: list[str]
) -> tuple[list[Artist], list[str]]:
    """Return the key, without the readings where there are none."""
    kept = [k for k, label in enumerate(labels) if one.readings is not None or "reading" not in label]
    return [handles[k] for k in kept], [labels[k] for k in kept]


def _draw(
    axes: Axes, x: FloatArray, value: FloatArray, ends: Sequence[FloatArray], colour: str, **more: Any
) -> list[Artist]:
    band = axes.fill_between(x, ends[0], ends[1], facecolor=PALETTE[colour], alpha=0.22, linewidth=0.0)
    (line,) = axes.plot(x, value, color=PALETTE[colour], linewidth=1.2, zorder=2.5, **more)
    return [line, band]


def _points(axes: Axes, x: FloatArray, value: FloatArray, colour: str = "series-2") -> Artist:
    step = max(1, -(-x.size // MOST_POINTS))
    return dots(axes, x[::step], value[::step], colour, zorder=2.2)


def _seen(
    values: Sequence[FloatArray], bands: Sequence[Sequence[FloatArray]], one: StandardEvidence
) -> tuple[float, float]:
    """Return the ends of an axis: all values, and the bands up to the limit, or all of them where there is none."""
    useful = one.frequency_hz <= (one.limit_hz if one.limit_hz > one.frequency_hz[0] else np.inf)
    shown = np.concatenate([*values, *(end[useful] for ends in bands for end in ends)])
    low, high = float(shown.min()), float(shown.max())
    room = 0.05 * (high - low) + 1e-9
    return low - room, high + room
