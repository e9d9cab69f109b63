"""Numbers with few digits, rounded jointly: each rounding lets the others follow."""

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt

from stdfit.base.arrays import FloatArray
from stdfit.fitting.reduced import PULL, Target, cost_of, misses
from stdfit.validity.entry.units import Typing, last_digit, nearest_number

KEPT = 24
"""Partial roundings that are carried on from one value to the next."""

NEXT, WIDEST = 2, 12
"""Roundings on either side of the nearest that are looked at: always, and where there are no branches yet."""

ROUNDS = 4
"""How often neighbours of the best are looked at."""


def plainly(typing: Typing, values: FloatArray, typed: Sequence[int]) -> FloatArray:
    """Return the numbers that come of rounding each value on its own, shape (p,); 0 for what is not typed.

    A loss in dB is rounded as it stands, and means another loss once delay and impedance are rounded.
    """
    numbers = np.zeros(values.size)
    for place in typed:
        numbers[place] = nearest_number(float(typing.typed(values, place)), typing.digits[place])
    return numbers


def jointly(
    target: Target, typing: Typing, values: FloatArray, typed: Sequence[int], free: Sequence[int]
) -> FloatArray:
    """Return sets of numbers to type that follow the target closely, best first, shape (m, p).

    One value after the other is rounded and held, and the others follow by linear least squares. The roundings
    next to the nearest are kept too, as long as they are among the best: a closest-point search in a lattice, cut
    to the `KEPT` best branches (C. P. Schnorr, M. Euchner, Math. Programming 66, 1994, 181–199; from memory). The
    last value to be rounded is the one with the finest digit, since nothing is left to make up for it. Then
    neighbours in one or two last digits are tried, without linearising.

    Parameters
    ----------
    target : Target
    typing : Typing
    values : array of shape (p,)
        Trade units, before rounding.
    typed : sequence of int
        Places that are typed; the others stay as they are.
    free : sequence of int
        Those of them that may move; the rest is rounded on its own.
    """
    start = values.copy()
    for place in typed:
        if place not in free:
            number = nearest_number(float(typing.typed(start, place)), typing.digits[place])
            start[place] = typing.value(number, start, place)
    found = [
        plainly(typing, branch, typed)
        for order in _orders(target, typing, start, list(free))
        for branch in _search(target, typing, start, order)
    ]
    found.append(plainly(typing, values, typed))
    numbers = np.unique(np.array(found), axis=0)
    for _ in range(ROUNDS):
        order = np.argsort(_cost(target, typing, values, typed, numbers), kind="stable")
        best = numbers[order[0]]
        numbers = np.unique(np.concatenate([numbers[order[:KEPT]], _neighbours(typing, best, free)]), axis=0)
        order = np.argsort(_cost(target, typing, values, typed, numbers), kind="stable")
        if (numbers[order[0]] == best).all():
            break
    return numbers[order[:KEPT]]


def _cost(
    target: Target, typing: Typing, values: FloatArray, typed: Sequence[int], numbers: FloatArray
) -> FloatArray:
    """Return what roundings are judged by: the mean square error, and the weak pull of the refit."""
    found = typing.meant(numbers, typed, values)
    way = PULL * (found - values) / target.sizes
    return np.where(_senseless(target, values, found), np.inf, cost_of(target, found) + (way**2).sum(axis=1))


def _senseless(target: Target, start: FloatArray, values: FloatArray) -> npt.NDArray[np.bool_]:
    """Return which values must not come of rounding: negative ones that are not allowed, or a wild impedance."""
    return np.asarray(target.wild(values) | ((target.negative(values) > 0.0) & (start >= 0.0)).any(axis=-1))


def _design(
    target: Target, start: FloatArray, values: FloatArray, free: list[int]
) -> tuple[FloatArray, FloatArray]:
    """Return residuals, shape (b, m), and derivatives by step of the free parameters, shape (b, m, k)."""
    residual, slope = misses(target, values)
    size = target.sizes[free]
    by_step = np.moveaxis(slope, 0, 1)[..., free] * size
    near = np.broadcast_to(PULL * np.eye(size.size), (values.shape[0], size.size, size.size))
    way = PULL * (values - start)[:, free] / size
    return np.concatenate([residual.T, way], axis=1), np.concatenate([by_step, near], axis=1)


def _orders(target: Target, typing: Typing, values: FloatArray, free: list[int]) -> list[list[int]]:
    """Return orders in which to round: by what the others cannot make up for, and by the harm of one digit."""
    if not free:
        return [[]]
    digit = np.array([_digit(typing, values, place) for place in free])
    _, slope = _design(target, values, values[None], free)
    harm = slope[0] * (digit / target.sizes[free])
    # From the end: what is rounded last has the least harm that none of the later ones can undo.
    rest, backwards, left = harm.copy(), [], list(range(len(free)))
    while left:
        able = [k for k in left if not _waits(typing, free[k], [free[j] for j in left])] or left
        least = min(able, key=lambda k: float(np.linalg.norm(rest[:, k])))
        backwards.append(free[least])
        left.remove(least)
        axis = rest[:, least] / max(float(np.linalg.norm(rest[:, least])), 1e-300)
        rest = rest - np.outer(axis, axis @ rest)
    size = np.linalg.norm(harm, axis=0)
    falling = [free[k] for k in np.argsort(-size, kind="stable")]
    tied = [place for place in falling if typing.units[place].tied]
    orders = [backwards[::-1], [place for place in falling if place not in tied] + tied]
    return orders if orders[0] != orders[1] else orders[:1]


def _waits(typing: Typing, place: int, left: list[int]) -> bool:
    """Return whether a place must be rounded before another: delay and impedance before a loss in dB."""
    name = typing.parameters[place].name
    return name in ("offset_delay_ps", "offset_z0_ohm") and any(typing.units[one].tied for one in left)


def _digit(typing: Typing, values: FloatArray, place: int) -> float:
    """Return what one more in the last digit changes, in trade units."""
    number = float(typing.typed(values, place))
    step = last_digit(number, typing.digits[place])
    return abs(float(typing.value(number + step, values, place) - typing.value(number, values, place)))


def _search(target: Target, typing: Typing, start: FloatArray, order: list[int]) -> FloatArray:
    """Return values whose `order` is rounded one by one, the best branches only, shape (b, p)."""
    branches = start[None].copy()
    for stage, place in enumerate(order):
        rest = order[stage + 1 :]
        free = [*rest, place]
        size = target.sizes[free]
        residual, slope = _design(target, start, branches, free)
        q, r = np.linalg.qr(slope)
        sought = -np.einsum("bmk,bm->bk", q, residual)
        left_over = (residual**2).sum(axis=1) - (sought**2).sum(axis=1)
        own = np.where(r[:, -1, -1] == 0.0, 1.0, r[:, -1, -1])
        aimed = branches[:, place] + size[-1] * sought[:, -1] / own
        reach = max(NEXT, WIDEST // len(branches))
        made, costs = [], []
        for b, branch in enumerate(branches):
            for value in _roundings(typing, branch, place, float(aimed[b]), reach):
                step = (value - branch[place]) / size[-1]
                moved = branch.copy()
                moved[place] = value
                if rest:
                    follow = np.linalg.solve(r[b, :-1, :-1], sought[b, :-1] - r[b, :-1, -1] * step)
                    moved[rest] += follow * size[:-1]
                made.append(moved)
                costs.append(left_over[b] + (r[b, -1, -1] * step - sought[b, -1]) ** 2)
        stacked = np.array(made)
        order_of = np.argsort(np.where(_senseless(target, start, stacked), np.inf, costs), kind="stable")
        branches = stacked[order_of[:KEPT]]
    return branches


def _roundings(typing: Typing, branch: FloatArray, place: int, aimed: float, reach: int) -> list[float]:
    """Return the trade values of the number nearest to the aim and of its neighbours, nearest first."""
    moved = branch.copy()
    moved[place] = aimed
    digits = typing.digits[place]
    number = nearest_number(float(typing.typed(moved, place)), digits)
    step = last_digit(number, digits)
    numbers = {nearest_number(number + k * step, digits) for k in range(-reach, reach + 1)}
    return [float(typing.value(one, branch, place)) for one in sorted(numbers, key=lambda n: abs(n - number))]


def _neighbours(typing: Typing, numbers: FloatArray, free: Sequence[int]) -> FloatArray:
    """Return the sets of numbers that differ by one in one or two last digits, shape (m, p)."""
    steps = {place: last_digit(float(numbers[place]), typing.digits[place]) for place in free}
    made = []
    for i, one in enumerate(free):
        for other in free[i:]:
            for sign in (-1.0, 1.0):
                for other_sign in (-1.0, 1.0):
                    moved = numbers.copy()
                    moved[one] += sign * steps[one]
                    if other != one:
                        moved[other] += other_sign * steps[other]
                    for place in (one, other):
                        moved[place] = nearest_number(float(moved[place]), typing.digits[place])
                    made.append(moved)
    return np.array(made).reshape(-1, numbers.size)
