"""Simulated histories: kits of one set over time, with errors of their own and common ones, beside the truth."""

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from stdfit.base.arrays import FloatArray
from stdfit.circuits.standard import reflection
from stdfit.uncertainty.budget import Share
from stdfit.validity.change.followed import weights_of_whole
from stdfit.validity.change.history import Course, History, history
from stdfit.validity.change.history_kits import Dated
from stdfit.validity.kit import Definition, Kit, total_covariance

MATINGS = 20
"""Matings from one kit to the next."""

OWN = ("connections", "noise")
"""Kinds of sources that are drawn anew for each kit; the others once for all of them."""


@dataclass(frozen=True, slots=True)
class Change:
    """What becomes of one standard.

    Attributes
    ----------
    standard, parameter : str
    amount : float
        In the parameter's unit: from the first kit to the last for a drift, at once for a step.
    after : int or None
        Index of the last kit before a step; None for a drift.
    """

    standard: str
    parameter: str
    amount: float
    after: int | None = None

    def at(self, place: float, count: int) -> float:
        """Return by how much the parameter has changed at a kit; places beyond the last one continue a drift."""
        if self.after is None:
            return self.amount * place / (count - 1)
        return self.amount if place > self.after else 0.0


def draw_kits(template: Kit, count: int, change: Change | None, rng: np.random.Generator) -> list[Dated]:
    """Draw kits that are the template, a change, and errors from the template's own covariances.

    Where the size of a source was estimated from repeats, each kit states an estimate of its own: the true covariance
    times χ²/ν.

    Parameters
    ----------
    template : Kit
        Its values are the truth of the first kit.
    count : int
    change : Change or None
    rng : numpy Generator
    """
    lengths = max(share.covariances.shape[0] for share in template.shares)
    length = int(rng.integers(lengths))
    common = np.zeros(len(template.order))
    for share in template.shares:
        if not share.name.startswith(OWN):
            common += _draw(share, length, rng)
    kits = []
    for k in range(count):
        error, shares = common.copy(), []
        for share in template.shares:
            stated = share
            if share.name.startswith(OWN):
                error += _draw(share, length, rng)
                if np.isfinite(share.freedom):
                    scale = rng.chisquare(share.freedom) / share.freedom
                    stated = replace(share, covariances=share.covariances * scale)
            shares.append(stated)
        kit = replace(template, shares=tuple(shares), files=(), measured="")
        kit = replace(
            kit, definitions=tuple(_moved(kit, one, error, change, k, count) for one in kit.definitions)
        )
        kits.append(Dated(f"kit-{k + 1}.toml", str(k), kit))
    return kits


def true_error(dated: Sequence[Dated], template: Kit, change: Change, matings: float, to_hz: float) -> float:
    """Return the largest |Γ as typed from the newest kit − true Γ| of the changed standard, so many matings later."""
    typed = dated[-1].kit.definition(change.standard)
    true = template.definition(change.standard)
    grid = np.linspace(typed.read_low_hz, to_hz, 60)
    place = len(dated) - 1 + matings / MATINGS
    values = true.values + _change_of(true, change, change.at(place, len(dated)))
    was, _ = reflection(true.kind, values, grid, template.reference_ohm)
    says, _ = reflection(typed.kind, typed.values, grid, template.reference_ohm)
    return float(np.abs(says - was).max())


def study(
    template: Kit, count: int, change: Change | None, histories: int, seed: int
) -> tuple[Counter[str], dict[str, float]]:
    """Return how often each verdict was given, and how often intervals held the truth.

    Where something changes, the course of the changed quantity counts; else every course, and "alarm" is the part of
    histories in which any is said to change.
    """
    verdicts: Counter[str] = Counter()
    held: dict[str, list[bool]] = {
        "slope": [],
        "step": [],
        "time left": [],
        "within tolerance at its low end": [],
    }
    alarms = []
    for k in range(histories):
        rng = np.random.default_rng([seed, k])
        dated = draw_kits(template, count, change, rng)
        found = history(dated, same_calibration=True)
        alarms.append(any(one.trend.verdict not in ("no change", "too few") for one in found.courses))
        for course in _asked(found, change):
            verdicts[course.trend.verdict] += 1
            if change is None:
                continue
            size = _of_whole(template, change)
            if change.after is not None:
                step = course.trend.step
                if course.trend.verdict == "step" and step is not None:
                    held["step"].append(step.low <= size <= step.high and course.trend.after == change.after)
                continue
            slope = size / ((count - 1) * MATINGS)
            held["slope"].append(course.trend.slope.low <= slope <= course.trend.slope.high)
            if course.left is not None and slope:
                true = course.left.value * abs(course.trend.slope.value / slope)
                held["time left"].append(course.left.low <= true <= course.left.high)
                worst = true_error(dated, template, change, course.left.low, course.left.to_hz)
                held["within tolerance at its low end"].append(worst <= course.left.within)
    rates = {name: float(np.mean(told)) for name, told in held.items() if told}
    return verdicts, {"alarm": float(np.mean(alarms)), **rates}


def own_sd(template: Kit, standard: str, parameter: str) -> float:
    """Return the standard deviation, from kit to kit, of what a parameter is part of."""
    definition = template.definition(standard)
    direction = _direction(template, definition)
    if parameter == "resistance_ohm":
        direction = np.array([float(name == f"{standard}.{parameter}") for name in template.order])
    own = [share for share in template.shares if share.name.startswith(OWN)]
    return float(np.sqrt(direction @ total_covariance(own) @ direction))


def _asked(found: History, change: Change | None) -> list[Course]:
    if change is None:
        return list(found.courses)
    labels = {"resistance_ohm": ("resistance",)}.get(change.parameter)
    return [
        one
        for one in found.courses
        if one.standard == change.standard and (one.label in labels if labels else one.label != "resistance")
    ]


def _of_whole(template: Kit, change: Change) -> float:
    """Return how much the quantity that is followed changes."""
    definition = template.definition(change.standard)
    weights = weights_of_whole(definition.kind, definition.values, template.reference_ohm)
    return change.amount * weights.get(change.parameter, 1.0)


def _draw(share: Share, length: int, rng: np.random.Generator) -> FloatArray:
    covariance = share.covariances[min(length, share.covariances.shape[0] - 1)]
    value, vector = np.linalg.eigh(covariance)
    return np.asarray(vector @ (np.sqrt(np.maximum(value, 0.0)) * rng.standard_normal(value.size)))


def _direction(kit: Kit, definition: Definition) -> FloatArray:
    weights = weights_of_whole(definition.kind, definition.values, kit.reference_ohm)
    direction = np.zeros(len(kit.order))
    for one in definition.parameters:
        if one.of in kit.order:
            direction[kit.order.index(one.of)] += weights.get(one.name, 0.0)
    return direction


def _change_of(definition: Definition, change: Change, amount: float) -> FloatArray:
    return np.array([amount * (one.name == change.parameter) for one in definition.parameters])


def _moved(
    kit: Kit, definition: Definition, error: FloatArray, change: Change | None, place: int, count: int
) -> Definition:
    """Return a standard as one kit sees it."""
    moved = definition.values.copy()
    if change is not None and change.standard == definition.name:
        moved += _change_of(definition, change, change.at(place, count))
    for k, one in enumerate(definition.parameters):
        if one.of in kit.order:
            moved[k] += error[kit.order.index(one.of)]
    by = moved - definition.values
    parameters = tuple(
        replace(one, value=one.value + off, low=one.low + off, high=one.high + off)
        for one, off in zip(definition.parameters, by.tolist(), strict=True)
    )
    weights = weights_of_whole(definition.kind, definition.values, kit.reference_ohm)
    off = float(sum(weights.get(one.name, 0.0) * own for one, own in zip(parameters, by, strict=True)))
    combinations = tuple(
        replace(one, value=one.value + off, low=one.low + off, high=one.high + off)
        for one in definition.combinations
    )
    return replace(
        definition, parameters=parameters, combinations=combinations, matings=MATINGS * (place + 1)
    )
