"""Words at lines and below panels: names at the ends of lines, keys, and names that can be drawn."""

from collections.abc import Sequence
from functools import cache

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.collections import PolyCollection
from matplotlib.figure import Figure
from matplotlib.font_manager import findfont, get_font
from matplotlib.ft2font import FT2Font
from matplotlib.lines import Line2D
from matplotlib.patches import Rectangle

from stdfit.base.arrays import FloatArray
from stdfit.writing.pictures.frame import SMALL, WIDTH, size_of
from stdfit.writing.pictures.palette import PALETTE

LONGEST = 18
"""Characters of a name that are drawn."""

BESIDE, MOVED = 0.1, 0.35
"""Inches from the end of a line to its label; a label moved by more than this part of its height has a leader."""

ROW, SAMPLE, GAP = 13.0, 15.0, 11.0
"""Points: height of a row of a key, width of its samples, room between entries."""


def key_below(figure: Figure, handles: Sequence[Artist], labels: Sequence[str]) -> list[Artist]:
    """Write below the panels what lines, points and areas mean; the figure grows by the rows that this takes."""
    rows: list[list[tuple[Artist, str, float]]] = [[]]
    place = 0.0
    for handle, label in zip(handles, labels, strict=True):
        length = SAMPLE + 4.0 + width_of(label)
        if rows[-1] and place + length > 72.0 * WIDTH - 6.0:
            rows.append([])
            place = 0.0
        rows[-1].append((handle, label, place))
        place += length + GAP
    old = 72.0 * figure.get_figheight()
    more = ROW * len(rows) + 5.0
    _grow(figure, more)
    wide, high = 72.0 * WIDTH, old + more
    drawn: list[Artist] = []
    for k, row in enumerate(rows):
        middle = more - 5.0 - ROW * (k + 0.5)
        for handle, label, start in row:
            drawn += _sample(figure, handle, (start + 3.0, middle), (wide, high))
            drawn.append(
                figure.text(
                    *((start + SAMPLE + 7.0) / wide, middle / high, label),
                    fontsize=SMALL,
                    color=PALETTE["ink"],
                    va="center_baseline",
                )
            )
    return drawn


def _grow(figure: Figure, points: float) -> None:
    """Give a figure more room at its lower end; panels keep their sizes."""
    old = float(figure.get_figheight())
    new = old + points / 72.0
    boxes = [(axes, axes.get_position()) for axes in figure.axes]
    figure.set_size_inches(figure.get_figwidth(), new)
    for axes, box in boxes:
        axes.set_position((box.x0, (box.y0 * old + new - old) / new, box.width, box.height * old / new))


def _sample(
    figure: Figure, handle: Artist, at: tuple[float, float], size: tuple[float, float]
) -> list[Artist]:
    """Draw what a line, points or an area look like."""
    (x, y), (wide, high) = at, size
    if isinstance(handle, PolyCollection):
        area = Rectangle(
            *((x / wide, (y - 3.5) / high), SAMPLE / wide, 7.0 / high),
            facecolor=handle.get_facecolor()[0],
            edgecolor="none",
            transform=figure.transFigure,
        )
        return [figure.add_artist(area)]
    assert isinstance(handle, Line2D)  # nothing else is drawn
    if handle.get_marker() not in ("None", "", None):
        ends = [x + 0.5 * SAMPLE]
    elif np.isnan(np.asarray(handle.get_ydata(), dtype=float)).any():  # points, as short strokes
        reach = 0.03 if handle.get_solid_capstyle() == "round" else 1.0
        ends = [x + part * SAMPLE + shift for part in (0.15, 0.5, 0.85) for shift in (-reach, reach, np.nan)]
    else:
        ends = [x, x + SAMPLE]
    line = Line2D([one / wide for one in ends], [y / high] * len(ends), transform=figure.transFigure)
    line.update_from(handle)
    line.set_transform(figure.transFigure)
    line.set_clip_on(False)
    return [figure.add_artist(line)]


def at_the_end(
    axes: Axes, ends: Sequence[float], labels: Sequence[str], colours: Sequence[str]
) -> list[Artist]:
    """Write labels at the right of lines, at the heights where these end, pushed apart where they would touch.

    Parameters
    ----------
    axes : Axes
    ends : sequence of float
        Heights in parts of the panel.
    labels, colours : sequences of str
    """
    width, height = size_of(axes)
    rows = max(label.count("\n") + 1 for label in labels)
    shown = np.clip(ends, 0.0, 1.0)
    gap = (1.3 * rows + 0.15) * SMALL / 72.0 / height
    places = pushed_apart(shown, gap)
    right = 1.0 + BESIDE / width
    leaders: list[Artist] = []
    for end, place, colour in zip(shown, places, colours, strict=True):
        if abs(place - end) > MOVED * gap:  # a label that was pushed away is led back to its line
            leaders += axes.plot(
                *([1.0, 1.0 + 0.75 * BESIDE / width], [end, place]),
                transform=axes.transAxes,
                color=PALETTE[colour],
                linewidth=0.6,
                clip_on=False,
            )
    return [
        *leaders,
        *(
            axes.text(
                *(right, place, label),
                transform=axes.transAxes,
                color=PALETTE[colour],
                fontsize=SMALL,
                va="center",
                ha="left",
            )
            for place, label, colour in zip(places, labels, colours, strict=True)
        ),
    ]


def pushed_apart(wanted: FloatArray | Sequence[float], gap: float) -> FloatArray:
    """Return heights near the wanted ones, in their order and at least `gap` apart, within 0 … 1 where there is room.

    Examples
    --------
    >>> pushed_apart([0.5, 0.5, 0.0], 0.1).round(2).tolist()
    [0.45, 0.55, 0.0]
    """
    wanted = np.asarray(wanted, dtype=float)
    order = np.argsort(wanted, kind="stable")
    groups: list[tuple[float, int]] = []
    for value in wanted[order]:
        middle, count = float(value), 1
        while groups and middle - groups[-1][0] < 0.5 * gap * (count + groups[-1][1]) - 1e-12:
            other, more = groups.pop()
            middle, count = (other * more + middle * count) / (more + count), more + count
            half = 0.5 * gap * (count - 1)
            middle = float(np.clip(middle, half, max(half, 1.0 - half)))
        groups.append((middle, count))
    placed = [middle + gap * (k - 0.5 * (count - 1)) for middle, count in groups for k in range(count)]
    result = np.empty(wanted.size)
    result[order] = placed
    return result


def drawable(name: str, instead: str) -> str:
    """Return a name as it can be drawn: cut where it is long, replaced where letters of it would be boxes."""
    known = _letters()
    if not name.strip() or any(ord(letter) not in known for letter in name):
        return instead
    return name if len(name) <= LONGEST else f"{name[: LONGEST - 1]}…"


def width_of(text: str) -> float:
    """Return the width of a label in points."""
    return float(sum(_advance(letter) for letter in text)) * SMALL


@cache
def _font() -> FT2Font:
    return get_font(findfont("DejaVu Sans"))


@cache
def _letters() -> frozenset[int]:
    return frozenset(_font().get_charmap())


@cache
def _advance(letter: str) -> float:
    """Return the width of a letter in parts of the font's size."""
    font = _font()
    font.set_size(72.0, 72.0)
    return float(font.load_char(ord(letter)).linearHoriAdvance) / 65536.0 / 72.0
