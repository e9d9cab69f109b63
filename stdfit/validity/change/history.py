"""Kits of the same standards over time: which values drift, which stepped, and how long the definitions last."""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date

import numpy as np

from stdfit.base.errors import RequestError
from stdfit.data.words import quoted
from stdfit.uncertainty.region import student
from stdfit.validity.change.history_kits import MONTH, Dated, as_day, comparable, day_of
from stdfit.validity.change.history_lines import Line, acts, lines_of
from stdfit.validity.change.time_left import TimeLeft, time_left
from stdfit.validity.change.trend import ALARM, STEP, Trend, own_uncertainty, trend
from stdfit.validity.kit import Kit

NAMES_TOLD = 3
"""Different names of kits that are told one by one."""


@dataclass(frozen=True, slots=True)
class Point:
    """A value of one kit.

    Attributes
    ----------
    file : str
    day : date or None
    matings : int or None
    x : float
        Months since the first kit, or matings.
    value, low, high : float
        With its 95 % interval.
    own_u95 : float
        95 % uncertainty without what all kits share.
    """

    file: str
    day: date | None
    matings: int | None
    x: float
    value: float
    low: float
    high: float
    own_u95: float


@dataclass(frozen=True, slots=True, eq=False)
class Course:
    """One quantity of one standard over time.

    Attributes
    ----------
    standard, label, unit : str
    per : str
        `MONTH` or `MATING`.
    points : tuple of Point
    trend : Trend
    left : TimeLeft or None
        None where there is no drift to count on, or the definition does not serve from the start.
    common : tuple of str
        Sources of error that all kits share, and that were taken out.
    """

    standard: str
    label: str
    unit: str
    per: str
    points: tuple[Point, ...]
    trend: Trend
    left: TimeLeft | None
    common: tuple[str, ...]


@dataclass(frozen=True, slots=True, eq=False)
class History:
    """What the kits of a folder say together.

    Attributes
    ----------
    kits : tuple of Dated
        Those that went in, oldest first.
    left_out : tuple of (file, why)
    courses : tuple of Course
    within : float
    alarm : float
        Chance of a false alarm of each course.
    notes : tuple of str
    """

    kits: tuple[Dated, ...]
    left_out: tuple[tuple[str, str], ...]
    courses: tuple[Course, ...]
    within: float
    alarm: float
    notes: tuple[str, ...]


def history(
    found: Sequence[Dated],
    *,
    within: float | None = None,
    to_hz: float | None = None,
    same_calibration: bool = False,
    left_out: Sequence[tuple[str, str]] = (),
) -> History:
    """Return what has become of the standards of the newest kit.

    Parameters
    ----------
    found : sequence of Dated
        In any order.
    within : float, optional
        Tolerance on |error of Γ|; the newest kit's where it is not given.
    to_hz : float, optional
        Up to which frequency the definitions have to serve.
    same_calibration : bool
        All readings were corrected by one calibration of the analyser.
    left_out : sequence of (file, why)
        What was left out before.

    Raises
    ------
    RequestError
        Fewer than two kits that can be set side by side.
    """
    kits, put_aside = comparable(found)
    aside = [*left_out, *put_aside]
    if len(kits) < 2:
        why = "".join(f"; {file}: {reason}" for file, reason in aside[:3])
        raise RequestError(
            f"fewer than two kits of the same standards{why}",
            "name a folder with kit files of one set, fitted from readings of different days",
        )
    _check_calibrations(kits, same_calibration)
    newest = kits[-1].kit
    tolerance = newest.within if within is None else within
    gathered = [
        line for definition in newest.definitions for line in lines_of(kits, definition, same_calibration)
    ]
    if not gathered:
        raise RequestError(
            "no value of any standard can be followed through these kits",
            "take kits of the same standards, read on different days or after different numbers of matings",
        )
    # All courses together raise a false alarm with the chance ALARM (Z. Šidák, 1967), whatever they have in common.
    alarm = 1.0 - (1.0 - ALARM) ** (1.0 / len(gathered))
    courses = tuple(_course(line, newest, alarm, tolerance, to_hz) for line in gathered)
    return History(
        *(tuple(kits), tuple(aside), courses, tolerance, alarm),
        (*other_names(kits), *_never_served(courses, tolerance), *_notes(kits, courses, same_calibration)),
    )


def _check_calibrations(kits: Sequence[Dated], same_calibration: bool) -> None:
    """Refuse the word that one calibration served all kits where the kits name several."""
    named = list(dict.fromkeys(one.kit.calibration for one in kits if one.kit.calibration))
    if same_calibration and len(named) > 1:
        raise RequestError(
            f"--same-calibration is given, and the kits name {len(named)} calibrations: '{named[0]}', '{named[1]}'",
            "leave the option out: kits of one calibration are known by its name",
        )


def _course(line: Line, newest: Kit, alarm: float, within: float, to_hz: float | None) -> Course:
    said = trend(line.series, alarm)
    own = own_uncertainty(line.series) * float(student(np.inf))
    points = tuple(
        Point(
            *(dated.file, day_of(dated.kit), definition.matings, float(x)),
            *(value.value, value.low, value.high, float(u95)),
        )
        for dated, definition, value, x, u95 in zip(
            line.kits, line.definitions, line.values, line.series.x, own, strict=True
        )
    )
    one = line.values[-1]
    left = None
    if said.verdict != STEP:
        left = time_left(newest, line.definition, one, said.slope, within, to_hz)
    return Course(line.definition.name, one.label, one.unit, line.per, points, said, left, line.common)


def other_names(kits: Sequence[Dated]) -> tuple[str, ...]:
    """Say that kits have different names, since a drift through kits of other standards means nothing."""
    names = list(dict.fromkeys(one.kit.name for one in kits))
    if len(names) == 1:
        return ()
    told = ", ".join(quoted(name) for name in names[:NAMES_TOLD])
    more = ", …" if len(names) > NAMES_TOLD else ""
    return (
        f"the kits have {len(names)} names: {told}{more}: a drift or step through kits of other standards means "
        "nothing; leave in the folder what is of one set",
    )


def _never_served(courses: Sequence[Course], within: float) -> tuple[str, ...]:
    """Say of which standards no time is told, since their bound is above the tolerance from the first reading on."""
    names = dict.fromkeys(one.standard for one in courses if one.left is None and one.trend.verdict != STEP)
    if not names:
        return ()
    return (
        f"{', '.join(names)}: not within {within:g} even now, from the first reading on: no time left is told",
    )


def _notes(kits: Sequence[Dated], courses: Sequence[Course], same_calibration: bool) -> tuple[str, ...]:
    """Say what was taken for common, what was not, and what would make the trends surer."""
    notes = []
    common = list(dict.fromkeys(_kind(name) for course in courses for name in course.common))
    if common:
        notes.append(f"the same in all kits, and so not in the uncertainty of a trend: {', '.join(common)}")
    residuals = any(
        share.name.startswith("analyser residuals") and share.covariances.any()
        for one in kits
        for share in one.kit.shares
    )
    if residuals and not same_calibration and not any(one.startswith("analyser residuals") for one in common):
        notes.append(
            "analyser residuals are counted as new with every kit; if one calibration of the analyser served all, "
            "--same-calibration makes the trends surer"
        )
    fitted = [one.file for one in kits if as_day(one.kit.measured) is None]
    if fitted:
        notes.append(
            f"placed by the day of the fit, since no day of measurement (kit.date) is named: {', '.join(fitted)}"
        )
    lengths = {(course.standard, course.label): len(course.points) for course in courses}
    notes += [
        f"{standard}, {label}: only in {count} of {len(kits)} kits"
        for (standard, label), count in lengths.items()
        if count < len(kits)
    ]
    held = [f"{one.standard}, {one.label}" for one in courses if "given values" in one.common]
    if held:
        notes.append(
            f"the same values are given in all kits, and a change may hide behind them: {', '.join(held)}"
        )
    for definition in kits[-1].kit.definitions:
        ways = {
            acts(own)
            for dated in kits
            for own in dated.kit.definitions
            if (own.name, own.kind) == (definition.name, definition.kind)
        }
        if len(ways) > 1:
            notes.append(
                f"{definition.name}: orders or fit ranges differ from kit to kit, and an error in common is taken out "
                "only among kits that are alike: fix the order with 'polynomial', the range with goal.highest_hz"
            )
    for course in courses:
        counted = [point.matings for point in course.points if point.matings is not None]
        if course.per == MONTH and len(counted) == len(course.points) and counted != sorted(counted):
            notes.append(f"{course.standard}: the counts of matings fall with time; dates are taken instead")
    return tuple(dict.fromkeys(notes))


def _kind(name: str) -> str:
    return name.partition(" (")[0]
