"""A history as a picture: one panel for each value, the same bytes every time."""

from pathlib import Path

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes

from stdfit.base.arrays import FloatArray
from stdfit.data.ordinary import beginning
from stdfit.validity.change.history import Course, History
from stdfit.validity.change.history_kits import MATING
from stdfit.validity.change.trend import SAME, STEP
from stdfit.writing.pictures.vector import drawing_rules, new_figure, svg_file

TITLE = "stdfit history"
"""Stands in the file, so that only such files are overwritten."""

PANEL_INCHES = (7.0, 2.6)


def history_svg(found: History) -> str:
    """Return the picture of a history as SVG text."""
    count = len(found.courses)
    with drawing_rules(TITLE):
        figure = new_figure(PANEL_INCHES[0], PANEL_INCHES[1] * count, layout="constrained")
        for axes, course in zip(np.ravel(figure.subplots(count, 1)), found.courses, strict=True):
            draw_course(axes, course)
        return svg_file(figure, {"Title": TITLE})


def draw_course(axes: Axes, course: Course) -> list[Artist]:
    """Draw values with their bounds, thick bars for what is each kit's own, and what was made of them."""
    x = np.array([point.x for point in course.points])
    value = np.array([point.value for point in course.points])
    ends = np.array([[point.value - point.low, point.high - point.value] for point in course.points]).T
    own = np.array([point.own_u95 for point in course.points])
    artists: list[Artist] = [
        *axes.errorbar(
            x, value, yerr=ends, fmt="none", ecolor="0.75", capsize=2.0, label="95 %"
        ).get_children(),
        *axes.errorbar(
            x,
            value,
            yerr=own,
            fmt="o",
            color="C0",
            elinewidth=2.5,
            markersize=4.0,
            label="of it each kit's own",
        ).get_children(),
        *axes.plot(*_described(course, x, value), color="C1", linewidth=1.2, label=course.trend.verdict),
    ]
    axes.set_title(
        f"{course.standard}: {course.label} ({course.trend.verdict})", loc="left", parse_math=False
    )
    axes.set_xlabel("matings" if course.per == MATING else "months since the first kit")
    axes.set_ylabel(course.unit, parse_math=False)
    axes.grid(visible=True, color="0.92")
    axes.legend(fontsize="small", frameon=False, ncols=3, loc="upper center")
    axes.margins(y=0.25)
    return artists


def is_history_svg(path: Path) -> bool:
    """Return whether a file says of itself that it is a picture of a history."""
    return f"<dc:title>{TITLE}</dc:title>".encode() in beginning(path, 8192)


def _described(course: Course, x: FloatArray, value: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return the line or the step that is drawn: through the middle of the values."""
    trend, middle = course.trend, float(value.mean())
    if trend.verdict == STEP and trend.after is not None and trend.step is not None:
        cut = trend.after + 1
        edge = 0.5 * (x[cut - 1] + x[cut])
        before = middle - trend.step.value * (x.size - cut) / x.size
        behind = before + trend.step.value
        return np.array([x[0], edge, edge, x[-1]]), np.array([before, before, behind, behind])
    slope = 0.0 if trend.verdict == SAME else trend.slope.value
    return x, np.asarray(middle + slope * (x - x.mean()))
