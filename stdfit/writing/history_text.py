"""A history of kits in words, columns and plain data."""

import math
from typing import Any

from stdfit.validity.change.history import Course, History
from stdfit.validity.change.time_left import TimeLeft
from stdfit.validity.change.trend import DRIFT, EITHER, SAME, STEP, TOO_FEW, Interval
from stdfit.writing.aligned import aligned
from stdfit.writing.numbers import finite, frequency

COLUMNS = (
    *("standard", "quantity", "unit", "file", "measured", "matings", "per", "x"),
    *("value", "low_95", "high_95", "own_u95"),
)

SCATTERS = 0.01
"""Chance below which a scatter is said to be more than the kits' errors explain."""

FEW = 3
"""Values that always may lie close together."""

TOLD_LEFT_OUT = 8
"""Files left out that are told one by one."""


def history_text(found: History) -> str:
    """Return what has become of each value, the verdict last."""
    newest = found.kits[-1].kit
    first, last = found.courses[0].points[0].day, found.courses[0].points[-1].day
    lines = [f"{newest.name}: {len(found.kits)} kits, {first} to {last}"]
    for course in found.courses:
        lines += ["", f"{course.standard}: {course.label} [{course.unit}]", *_table(course)]
        lines += [f"  {line}" for line in course_lines(course)]
    notes = [*found.notes, *_left_out(found)]
    if notes:
        lines += ["", "Notes", *(f"  {note}" for note in notes)]
    return "\n".join([*lines, "", history_verdict(found)]) + "\n"


def history_verdict(found: History) -> str:
    """Return the answer in one line."""
    if all(course.trend.verdict == TOO_FEW for course in found.courses):
        return "too few kits to tell a step from a drift, or a change from none: four or more are needed"
    changed = [course for course in found.courses if course.trend.verdict not in (SAME, TOO_FEW)]
    if not changed:
        return "nothing changed by more than the errors that the kits do not share"
    return "; ".join(
        f"{one.standard}: {one.label}: {_said(one, one.trend.verdict)}{_shortest(one)}" for one in changed
    )


def course_lines(course: Course) -> list[str]:
    """Return what one course says: drift, verdict, scatter, time left."""
    trend, unit, per = course.trend, course.unit, course.per
    line = f"straight line: {_interval(trend.slope, f'{unit} a {per}')}"
    lines = [] if trend.verdict in (DRIFT, EITHER) else [line]
    if trend.verdict == TOO_FEW:
        lines.append("too few kits to tell a step from a drift, or a change from none")
    elif trend.verdict == SAME:
        lines.append(f"no change: as much would come by chance in {_percent(trend.chance)} of histories")
    else:
        lines.append(_said(course, trend.verdict))
    if trend.scatter < SCATTERS:
        lines.append("the values scatter about it by more than the errors of the kits explain")
    elif trend.scatter > 1.0 - SCATTERS and len(course.points) > FEW:
        lines.append("the values scatter by less than errors of the kits' own would: part of these is common")
    if course.left is not None:
        lines.append(left_words(course.left, per))
    return lines


def left_words(left: TimeLeft, per: str) -> str:
    """Say how long a definition serves at the drift of the straight line."""
    where = f"within {left.within:g} up to {frequency(left.to_hz)}"
    if left.high == 0.0:
        return f"{where}: not even now, used up at {frequency(left.at_hz)}"
    if math.isinf(left.high):
        return f"{where} for at least {_count(left.low)} {per}s more (95 %); it may be for ever"
    ends = f"{_count(left.low)} … {_count(left.high)}"
    return f"{where} at this drift for another {_count(left.value)} {per}s (95 %: {ends})"


def history_data(found: History) -> dict[str, Any]:
    """Return what `history_text` says, as data; what is infinite or not there is null."""
    return {
        "within": found.within,
        "kits": [
            {"file": one.file, "name": one.kit.name, "measured": one.kit.measured, "created": one.kit.created}
            for one in found.kits
        ],
        "left_out": [{"file": file, "why": why} for file, why in found.left_out],
        "courses": [_course_data(course) for course in found.courses],
        "level_of_each": found.alarm,
        "notes": list(found.notes),
        "verdict": history_verdict(found),
    }


def history_rows(found: History) -> list[list[Any]]:
    """Return the rows of `COLUMNS`."""
    return [
        [
            *(course.standard, course.label, course.unit, point.file, str(point.day)),
            *("" if point.matings is None else point.matings, course.per, point.x),
            *(point.value, point.low, point.high, point.own_u95),
        ]
        for course in found.courses
        for point in course.points
    ]


def _table(course: Course) -> list[str]:
    digits = _digits(max(min(point.own_u95 for point in course.points), 1e-12))
    counted = any(point.matings is not None for point in course.points)
    rows = [["measured", *(["matings"] if counted else []), "value", "own (95 %)", "kit"]]
    for point in course.points:
        matings = ["" if point.matings is None else str(point.matings)] if counted else []
        value = f"{point.value:.{digits}f} ± {0.5 * (point.high - point.low):.2g}"
        rows.append([str(point.day), *matings, value, f"± {point.own_u95:.2g}", point.file])
    return aligned(rows)


def _digits(size: float) -> int:
    """Return the decimals that show two digits of an uncertainty."""
    return int(min(max(1 - math.floor(math.log10(size)), 0), 9))


def _said(course: Course, verdict: str) -> str:
    """Say a change in words."""
    trend, points = course.trend, course.points
    step = ""
    if trend.step is not None and trend.after is not None:
        between = f"{points[trend.after].file} and {points[trend.after + 1].file}"
        step = f"a step of {_interval(trend.step, course.unit)} between {between}"
    if verdict == STEP:
        return step
    drift = f"a drift of {_interval(trend.slope, f'{course.unit} a {course.per}')}"
    return drift if verdict == DRIFT else f"{drift}, or {step}: not told apart"


def _shortest(course: Course) -> str:
    """Return how long it lasts, where it drifts."""
    if course.left is None or course.trend.verdict not in (DRIFT, EITHER):
        return ""
    left = course.left
    if left.high == 0.0:
        return f", {left.within:g} is used up"
    ends = (
        f"{_count(left.low)} or more"
        if math.isinf(left.high)
        else f"{_count(left.low)} … {_count(left.high)}"
    )
    return f", within {left.within:g} to {frequency(left.to_hz)} for another {ends} {course.per}s"


def _left_out(found: History) -> list[str]:
    told = [f"left out: {file}: {why}" for file, why in found.left_out[:TOLD_LEFT_OUT]]
    more = len(found.left_out) - TOLD_LEFT_OUT
    return [*told, *([f"left out: {more} more files"] if more > 0 else [])]


def _course_data(course: Course) -> dict[str, Any]:
    trend, left = course.trend, course.left
    return {
        "standard": course.standard,
        "quantity": course.label,
        "unit": course.unit,
        "per": course.per,
        "verdict": trend.verdict,
        "drift": _ends(trend.slope),
        "step": None
        if trend.step is None or trend.after is None
        else {
            **_ends(trend.step),
            "after": course.points[trend.after].file,
            "before": course.points[trend.after + 1].file,
        },
        "chance_without_change": trend.chance,
        "criterion_step_minus_drift": trend.preference,
        "chance_of_scatter": trend.scatter,
        "left": None
        if left is None
        else {
            "within": left.within,
            "to_hz": left.to_hz,
            "used_up_at_hz": left.at_hz,
            **{key: finite(getattr(left, key)) for key in ("value", "low", "high")},
        },
        "common": list(course.common),
        "points": [
            {
                "file": point.file,
                "measured": str(point.day),
                "matings": point.matings,
                "x": point.x,
                "value": point.value,
                "low_95": point.low,
                "high_95": point.high,
                "own_u95": point.own_u95,
            }
            for point in course.points
        ],
    }


def _ends(one: Interval) -> dict[str, float]:
    return {"value": one.value, "low_95": one.low, "high_95": one.high}


def _interval(one: Interval, unit: str) -> str:
    return f"{one.value:+.2g} {unit} ({one.low:+.2g} … {one.high:+.2g})"


def _percent(chance: float) -> str:
    return f"{100.0 * chance:.2g} %" if chance < 0.995 else "100 %"


def _count(value: float) -> str:
    return f"{value:.2g}" if value < 99.5 else f"{float(f'{value:.2g}'):.0f}" if value < 1e6 else "a million"
