"""What is left of the readings without the model, and single connections without their mean."""

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes

from stdfit.validity.evidence.kept import Connections, KeptReadings
from stdfit.validity.evidence.standard import StandardEvidence
from stdfit.writing.pictures.frame import DASHED, DOTTED, dots, frequency_axis, mark_limit, ruled
from stdfit.writing.pictures.labels import at_the_end
from stdfit.writing.pictures.palette import LINES, MISFIT_COLOUR, PALETTE

ROOM = 1.6
"""The axis ends at this multiple of the largest misfit and residual within the range that is used."""

NAMED = 6
"""Connections that have a line of their own look; of more, the one that lies farthest has."""

MOST_POINTS = 120
"""Readings that are drawn: more of them touch each other."""


def draw_residuals(
    axes: Axes, one: StandardEvidence, readings: KeptReadings
) -> tuple[list[Artist], list[str]]:
    """Draw real and imaginary part of reading minus model, the misfit and the whole bound; return the key too."""
    size = frequency_axis(axes, one.frequency_hz)
    step = max(1, -(-readings.frequency_hz.size // MOST_POINTS))
    x, at = one.frequency_hz / size, readings.frequency_hz[::step] / size
    left, end = readings.residual[::step], shown_to(one, readings)
    ruled(axes, "reading − model", (-end, end), float(one.frequency_hz[-1]))
    wide = [("bound", one.bound, "rest", 0.5), ("misfit", one.misfit, MISFIT_COLOUR, 0.3)]
    wide = [each for each in wide if each[1].any()]
    areas: list[Artist] = [
        axes.fill_between(*(x, -half, half), facecolor=PALETTE[colour], alpha=strength, linewidth=0.0)
        for _, half, colour, strength in wide
    ]
    points: list[Artist] = [
        dots(axes, at, left.real, "series-1"),
        dots(axes, at, left.imag, "series-3", flat=True),
    ]
    handles = [*points, *reversed(areas)]
    labels = ["real part", "imaginary part", *(name for name, *_ in reversed(wide))]
    if one.fit_top_hz < 0.999 * float(one.frequency_hz[-1]):
        handles.append(axes.axvline(one.fit_top_hz / size, color=PALETTE["quiet"], linewidth=0.9))
        labels.append("end of the fit")
    mark_limit(axes, one.limit_hz, size)
    return handles, labels


def shown_to(one: StandardEvidence, readings: KeptReadings) -> float:
    """Return where the axis of residuals ends."""
    used_hz = max(one.limit_hz, one.fit_top_hz)
    left = np.maximum(np.abs(readings.residual.real), np.abs(readings.residual.imag))
    most = [float(left[readings.frequency_hz <= used_hz].max(initial=0.0))]
    most.append(float(one.misfit[one.frequency_hz <= used_hz].max(initial=0.0)))
    return max(ROOM * max(most), 1e-5)


def draw_connections(axes: Axes, one: StandardEvidence, connections: Connections) -> list[Artist]:
    """Draw how far each connection lies from their mean, one line for each, named at its end."""
    size = frequency_axis(axes, one.frequency_hz)
    at, away = connections.frequency_hz / size, np.abs(connections.deviations)
    top = 1.08 * max(float(away.max()), float(connections.expected.max()), 1e-6)
    ruled(axes, "|connection − mean|", (0.0, top), float(one.frequency_hz[-1]))
    few, most = away.shape[0] <= NAMED, connections.farthest()[0] - 1
    artists: list[Artist] = []
    ends, labels, colours = [], [], []
    for k, row in enumerate(away):
        named = few or k == most
        colour = LINES[k % len(LINES)] if few else "series-2" if named else "rest"
        artists += axes.plot(
            *(at, row),
            color=PALETTE[colour],
            linestyle=DASHED if few and k >= len(LINES) else "solid",
            linewidth=1.2 if named else 0.7,
            zorder=2.5 if named else 2.0,
        )
        if named:
            ends.append(float(row[-1]))
            labels.append(str(k + 1))
            colours.append(colour)
    artists += axes.plot(at, connections.expected, color=PALETTE["quiet"], linewidth=1.1, linestyle=DOTTED)
    ends.append(float(connections.expected[-1]))
    return [
        *artists,
        *at_the_end(axes, [end / top for end in ends], [*labels, "expected"], [*colours, "quiet"]),
    ]
