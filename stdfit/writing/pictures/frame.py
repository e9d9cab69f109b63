"""Panels: where they stand in a figure, their grid and scales, and the mark at the limit.

The grid and its numbers are drawn as a few lines and texts; the axes of the library have so
many parts that they took most of the time.
"""

from collections.abc import Sequence
from typing import Any

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.ticker import MaxNLocator

from stdfit.base.arrays import FloatArray
from stdfit.writing.numbers import frequency
from stdfit.writing.pictures.palette import PALETTE
from stdfit.writing.pictures.vector import FONT_SIZE, new_figure

WIDTH = 4.5
"""Inches: text stays legible where a picture is as wide as a phone."""

LEFT, BELOW, ABOVE = 0.56, 0.42, 0.40
"""Inches around a panel for numbers and words."""

SMALL = FONT_SIZE - 0.5
"""Points of numbers and labels."""

DASHED, DOTTED = (0, (4, 2)), (0, (1, 1.2))


def panels(heights: Sequence[float], *, right: float = 0.14) -> tuple[Figure, list[Axes]]:
    """Return a figure with panels below each other.

    Parameters
    ----------
    heights : sequence of float
        Of the panels, in inches.
    right : float
        Inches at the right of them.
    """
    total = sum(heights) + ABOVE * len(heights) + BELOW
    figure = new_figure(WIDTH, total)
    made = []
    top = total
    for height in heights:
        top -= ABOVE + height
        rectangle = (LEFT / WIDTH, top / total, (WIDTH - LEFT - right) / WIDTH, height / total)
        made.append(_bare(figure, rectangle))
    return figure, made


def square() -> tuple[Figure, Axes]:
    """Return a figure with one square panel."""
    figure = new_figure(WIDTH, WIDTH)
    return figure, _bare(figure, (0.0, 0.0, 1.0, 1.0))


def _bare(figure: Figure, rectangle: tuple[float, float, float, float]) -> Axes:
    figure.patch.set_visible(False)
    axes = figure.add_axes(rectangle)
    axes.set_axis_off()
    return axes


def unit_of(top_hz: float) -> tuple[float, str]:
    """Return the size and the name of the unit in which frequencies are told: MHz where all are below 1 GHz."""
    if top_hz >= 1e9:
        return 1e9, "GHz"
    return (1e6, "MHz") if top_hz >= 1e6 else (1e3, "kHz")


def frequency_axis(axes: Axes, frequency_hz: FloatArray) -> float:
    """Set the horizontal axis to a band, and return the size of its unit in Hz."""
    size, _ = unit_of(float(frequency_hz[-1]))
    low, top = float(frequency_hz[0]) / size, float(frequency_hz[-1]) / size
    axes.set_xlim(0.0 if low < 0.15 * top else low, top)
    return size


def ruled(
    axes: Axes,
    head: str,
    limits: tuple[float, float],
    top_hz: float | None,
    marks: Sequence[float] | None = None,
) -> list[Artist]:
    """Draw grid lines, numbers and words around a panel whose horizontal axis is set.

    Parameters
    ----------
    axes : Axes
    head : str
        What the vertical axis shows; it stands above its upper end, where it needs no turned letters.
    limits : (float, float)
        Ends of the vertical axis.
    top_hz : float or None
        Last frequency; None leaves out the numbers below, as between panels.
    marks : sequence of float, optional
        Values with a grid line; round ones by default.
    """
    axes.set_ylim(*limits)
    low, top = axes.get_xlim()
    width, height = size_of(axes)
    across = _round_values(low, top, max(2, int(width / 0.55)))
    up = (
        _round_values(*limits, max(2, int(height / 0.24)))
        if marks is None
        else np.asarray(marks, dtype=float)
    )
    floor, ceiling = limits
    artists: list[Artist] = [
        _grid(axes, [(x, x) for x in across], [(floor, ceiling)] * len(across)),
        _grid(axes, [(low, top)] * len(up), [(y, y) for y in up]),
        *axes.plot(
            *([low, low, top], [ceiling, floor, floor]), color=PALETTE["quiet"], linewidth=0.8, clip_on=False
        ),
    ]
    words: dict[str, Any] = {"color": PALETTE["ink"], "fontsize": SMALL}
    for y, told in zip(up, _told(up), strict=True):
        artists.append(
            _beside(axes, (low, y), told, (-3.0, 0.0), ("data", "data"), ha="right", va="center", **words)
        )
    if top_hz is not None:
        for x, told in zip(across, _told(across), strict=True):
            artists.append(
                _beside(axes, (x, floor), told, (0.0, -3.0), ("data", "data"), ha="center", va="top", **words)
            )
        artists.append(
            _beside(
                *(axes, (0.5, 0.0), f"frequency ({unit_of(top_hz)[1]})", (0.0, -14.0)),
                ("axes fraction", "axes fraction"),
                ha="center",
                va="top",
                color=PALETTE["ink"],
            )
        )
    artists.append(
        _beside(
            *(axes, (0.0, 1.0), head, (-LEFT * 72.0 + 3.0, 15.0), ("axes fraction", "axes fraction")),
            ha="left",
            va="bottom",
            color=PALETTE["ink"],
        )
    )
    return artists


def mark_limit(axes: Axes, limit_hz: float, size: float, *, told: bool = True) -> list[Artist]:
    """Draw the limit as a dashed line, with its frequency above it; nothing where there is none inside the axes."""
    low, top = axes.get_xlim()
    place = limit_hz / size
    if not low < place <= top * (1.0 + 1e-9):
        return []
    artists: list[Artist] = [
        axes.axvline(place, color=PALETTE["ink"], linewidth=0.9, linestyle=DASHED, zorder=3, clip_on=False)
    ]
    if told:
        part = (place - low) / (top - low)
        artists.append(
            _beside(
                *(axes, (place, 1.0), f"limit {frequency(limit_hz)}", (0.0, 2.5), ("data", "axes fraction")),
                color=PALETTE["ink"],
                fontsize=SMALL,
                ha="left" if part < 0.15 else "right" if part > 0.85 else "center",
                va="bottom",
            )
        )
    return artists


def dots(axes: Axes, x: FloatArray, y: FloatArray, colour: str, *, flat: bool = False, **more: Any) -> Line2D:
    """Draw points as one path of very short strokes, round or flat; as single marks they take ten times the room."""
    half = (1.0 if flat else 0.025) / 72.0 / size_of(axes)[0] * float(np.ptp(axes.get_xlim()))
    gaps = np.full(x.size, np.nan)
    (line,) = axes.plot(
        np.stack([x - half, x + half, gaps], axis=1).ravel(),
        np.stack([y, y, gaps], axis=1).ravel(),
        color=PALETTE[colour],
        linewidth=1.0 if flat else 2.3,
        solid_capstyle="butt" if flat else "round",
        **more,
    )
    line.set_snap(False)  # where pixels are painted, strokes of no length would be lost
    line.get_path().should_simplify = False
    return line


def size_of(axes: Axes) -> tuple[float, float]:
    """Return width and height of a panel in inches."""
    box, figure = axes.get_position(), axes.get_figure(root=True)
    assert figure is not None  # every panel is made in one
    return float(box.width * figure.get_figwidth()), float(box.height * figure.get_figheight())


def _beside(
    axes: Axes,
    place: tuple[float, float],
    text: str,
    points: tuple[float, float],
    of: tuple[str, str],
    **more: Any,
) -> Artist:
    """Write a text some points away from a place."""
    return axes.annotate(
        text, place, xycoords=of, xytext=points, textcoords="offset points", annotation_clip=False, **more
    )


def _grid(axes: Axes, xs: Sequence[tuple[float, float]], ys: Sequence[tuple[float, float]]) -> Line2D:
    """Draw lines that are no parts of each other as one."""
    gap = (np.nan,)
    (line,) = axes.plot(
        [value for pair in xs for value in (*pair, *gap)],
        [value for pair in ys for value in (*pair, *gap)],
        color=PALETTE["grid"],
        linewidth=0.7,
        zorder=0.1,
        clip_on=False,
    )
    return line


def _round_values(low: float, top: float, count: int) -> FloatArray:
    """Return round values within a range, no more than about `count`."""
    values = np.asarray(MaxNLocator(nbins=count, steps=[1, 2, 2.5, 5, 10]).tick_values(low, top))
    slack = 1e-9 * (top - low)
    return values[(values >= low - slack) & (values <= top + slack)]


def _told(values: FloatArray) -> list[str]:
    """Return values as text, all with as many decimals as the last digit of their steps needs."""
    if values.size > 2 and not np.allclose(np.diff(values), values[1] - values[0]):
        return [f"{value:g}" for value in values]
    largest = float(np.abs(values).max(initial=0.0))
    digits = next(
        (d for d in range(7) if np.abs(np.round(values, d) - values).max(initial=0.0) < 1e-6 * largest), 6
    )
    return [f"{value + 0.0:.{digits}f}".replace("-", "−") for value in np.round(values, digits)]
