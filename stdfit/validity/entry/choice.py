"""The numbers to type for one standard: refitted to what is accepted, and rounded jointly."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import FloatArray, frozen_float
from stdfit.base.errors import RequestError
from stdfit.fitting.reduced import Target, cost_of, refit
from stdfit.validity.entry.error import largest_distance
from stdfit.validity.entry.rounding import jointly, plainly
from stdfit.validity.entry.terms import default_of
from stdfit.validity.entry.units import Typing
from stdfit.validity.kit import Definition, Kit, curve
from stdfit.validity.limit import Limit

FIT_POINTS = 129
"""Frequencies at which a reduced definition is fitted."""

WORTH = 0.03
"""Part of the bound that is worth another term, or a negative number, which some programs refuse."""

SMALLEST_BOUND = 1e-3
"""A bound counts as at least this part of the largest: a bound of zero would outweigh all else."""


@dataclass(frozen=True, slots=True, eq=False)
class Choice:
    """The numbers that were chosen for one standard.

    Attributes
    ----------
    definition : Definition
        The full one.
    typing : Typing
    places : tuple of int
        Places of the accepted parameters.
    numbers : array of shape (p,)
        What is typed; 0 at the other places.
    values : array of shape (p,)
        What that means in trade units, with what stands for the terms left out.
    range_hz : tuple of two floats
        Where the full definition was followed.
    extra, extra_hz : float
        Largest |Γ_typed − Γ_full| there, and where it is.
    notes : tuple of str
    """

    definition: Definition
    typing: Typing
    places: tuple[int, ...]
    numbers: FloatArray
    values: FloatArray
    range_hz: tuple[float, float]
    extra: float
    extra_hz: float
    notes: tuple[str, ...]

    def __post_init__(self) -> None:
        object.__setattr__(self, "numbers", frozen_float(self.numbers))
        object.__setattr__(self, "values", frozen_float(self.values))


def choose(
    kit: Kit,
    definition: Definition,
    limit: Limit,
    typing: Typing,
    places: tuple[int, ...],
    no_negative: bool = False,
) -> Choice:
    """Refit one standard to the accepted terms, and round the values jointly.

    The terms that the full definition uses make up for what is left out and for what rounding costs; others are typed
    only as far as they save more than `WORTH`.

    Raises
    ------
    RequestError
        No numbers can be found: the kit holds values beyond all sense.
    """
    try:
        choice = _chosen(kit, definition, limit, typing, places, no_negative)
    except np.linalg.LinAlgError:
        choice = None
    if choice is None or not np.isfinite(choice.extra):
        raise RequestError(
            f"no numbers can be found for '{definition.name}': its values are beyond all sense",
            "look at the kit file",
        )
    return choice


def _chosen(
    kit: Kit,
    definition: Definition,
    limit: Limit,
    typing: Typing,
    places: tuple[int, ...],
    no_negative: bool,
) -> Choice:
    """Refit and round."""
    range_hz, notes = _followed(definition, limit)
    default = np.array([default_of(one, kit.reference_ohm) for one in typing.parameters])
    base = default.copy()
    base[list(places)] = definition.values[list(places)]
    target = _target(kit, definition, range_hz, no_negative)
    orders = _orders(typing, base, default, places)
    richest = _refitted(target, typing, base, default, orders[-1], places)
    enough = _rms(target, richest.values) + WORTH
    best, harm = None, np.inf
    for order in orders:
        way = richest if order is orders[-1] else _refitted(target, typing, base, default, order, places)
        if way is not richest and _rms(target, way.values) > enough:
            continue
        numbers = _rounded(target, typing, way, places, range_hz)
        own = _rms(target, typing.meant(numbers, places, way.values))
        if best is None or own < harm - WORTH:
            best, harm = (way, numbers), own
        if harm <= enough:
            break
    way, numbers = best if best is not None else (richest, np.zeros(default.size))
    notes += [
        f"{typing.parameters[place].label} has no effect without a delay: it stays at "
        f"{'the reference impedance' if default[place] else '0'}"
        for place in way.dead
        if definition.values[place] != default[place] or typing.delay not in places
    ]
    values = typing.meant(numbers, places, way.values)
    extra, extra_hz = largest_distance(
        definition.kind, definition.values, values, *range_hz, kit.reference_ohm
    )
    return Choice(definition, typing, places, numbers, values, range_hz, extra, extra_hz, tuple(notes))


def _rms(target: Target, values: FloatArray) -> float:
    """Return the root mean square error in parts of the bound."""
    return float(np.sqrt(cost_of(target, values)))


def _followed(definition: Definition, limit: Limit) -> tuple[tuple[float, float], list[str]]:
    """Return where the definition is to be followed: up to its limit, or over the fit range where there is none."""
    if limit.limit_hz > definition.read_low_hz:
        return (definition.read_low_hz, limit.limit_hz), []
    note = "the full definition is not good at any frequency: what is typed follows it over the fit range"
    return (definition.fit_low_hz, definition.fit_top_hz), [note]


@dataclass(frozen=True, slots=True, eq=False)
class _Way:
    """A refit: which places may move, the values before rounding, and what is accepted without effect."""

    free: tuple[int, ...]
    values: FloatArray
    dead: tuple[int, ...]


def _orders(typing: Typing, base: FloatArray, default: FloatArray, places: Sequence[int]) -> list[list[int]]:
    """Return sets of accepted places that may move: those in use, then one more each, the line's loss and Z0 last."""
    used = [place for place in places if base[place] != default[place]]
    spare = sorted(set(places) - set(used), key=lambda place: (typing.is_line(place), place))
    return [sorted([*used, *spare[:count]]) for count in range(len(spare) + 1)]


def _refitted(
    target: Target,
    typing: Typing,
    base: FloatArray,
    default: FloatArray,
    free: list[int],
    places: Sequence[int],
) -> _Way:
    """Refit with given places free; loss and Z0 of a line that has no length have no effect, and stay as they are."""
    dead: list[int] = []
    start = base.copy()
    if typing.delay not in free and base[typing.delay] == 0.0:
        dead = [place for place in places if typing.is_line(place)]
        free = [place for place in free if place not in dead]
        start[dead] = default[dead]
    return _Way(tuple(free), refit(target, free, start), tuple(dead))


def _target(kit: Kit, definition: Definition, range_hz: tuple[float, float], no_negative: bool) -> Target:
    grid = np.linspace(*range_hz, FIT_POINTS)
    gamma, bound = curve(kit, definition, grid)
    largest = float(bound.max())
    bound = np.maximum(bound, SMALLEST_BOUND * largest) if largest > 0.0 else np.ones(grid.size)
    return Target(definition.kind, definition.values, grid, bound, kit.reference_ohm, gamma, no_negative)


def _rounded(
    target: Target, typing: Typing, way: _Way, places: Sequence[int], range_hz: tuple[float, float]
) -> FloatArray:
    """Return jointly rounded numbers that are in no respect worse than each value rounded on its own.

    Among those that are about as good as the best, the ones with the fewest negative numbers are taken.
    """
    plain = plainly(typing, way.values, places)
    alone = _harm(target, typing.meant(plain, places, way.values), range_hz)
    found = jointly(target, typing, way.values, places, way.free)
    rms = np.sqrt(cost_of(target, typing.meant(found, places, way.values)))
    negative = np.where(rms <= rms[0] + WORTH, (found < 0.0).sum(axis=1), found.shape[1])
    for numbers in found[np.argsort(negative, kind="stable")]:
        harm = _harm(target, typing.meant(numbers, places, way.values), range_hz)
        if all(one <= other for one, other in zip(harm, alone, strict=True)):
            return np.asarray(numbers)
    return plain


def _harm(target: Target, values: FloatArray, range_hz: tuple[float, float]) -> tuple[float, float]:
    """Return the root mean square error in parts of the bound, and the largest error."""
    largest, _ = largest_distance(target.kind, target.full, values, *range_hz, target.reference_ohm)
    return _rms(target, values), largest
