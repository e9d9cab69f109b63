"""A definition with fewer terms, refitted so that its reflection stays close to that of the full one."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from stdfit.base.arrays import ComplexArray, FloatArray, as_pairs, frozen_complex, frozen_float
from stdfit.circuits.standard import PARAMETERS, reflection
from stdfit.fitting.roles import UNIT_SIZE, size_at
from stdfit.fitting.solve import OVERFLOW, least_squares

PULL = 0.01 / 30.0
"""A change of a parameter by its size, 1 ps or 1 fF and so on, weighs as much as this part of a bound."""

LINE_SIZE = {"offset_loss_gohm_per_s": 0.1, "offset_z0_ohm": 0.1}
"""Sizes of what must not be carried off: a line of 5 Ω or of 600 GΩ/s can stand for many things, on paper."""

FURTHEST = 10.0
"""A line impedance is looked for within this factor of the reference impedance and of the full definition's."""

TRIED = 2
"""Starting points, the best of many, from which the search is carried through."""

DAMPING = (1e-1, 1e-2, 1e-3, 1e-4, 1e-4, 1e-4)
"""Damping of the few steps that show how good a starting point is."""


@dataclass(frozen=True, slots=True, eq=False)
class Target:
    """What a reduced definition must follow.

    Attributes
    ----------
    kind : str
    full : array of shape (p,)
        Values of the full definition in trade units.
    frequency_hz, bound : arrays of shape (n,)
        Where it must follow, and the bound of the full definition there, above 0.
    reference_ohm : float
    gamma : complex array of shape (n,)
        Γ of the full definition.
    no_negative : bool
        No parameter may be negative, as some programs ask; a loss never may.
    """

    kind: str
    full: FloatArray
    frequency_hz: FloatArray
    bound: FloatArray
    reference_ohm: float
    gamma: ComplexArray
    no_negative: bool = False

    def __post_init__(self) -> None:
        for name in ("full", "frequency_hz", "bound"):
            object.__setattr__(self, name, frozen_float(getattr(self, name)))
        object.__setattr__(self, "gamma", frozen_complex(self.gamma))

    @property
    def sizes(self) -> FloatArray:
        """A sensible change of each parameter in trade units, shape (p,)."""
        top = float(self.frequency_hz[-1])
        own = UNIT_SIZE | LINE_SIZE
        return np.array([size_at(one, top) * own.get(one.name, 1.0) for one in PARAMETERS[self.kind]])

    def wild(self, values: FloatArray) -> npt.NDArray[np.bool_]:
        """Return which definitions of shape (..., p) have a line impedance that nobody means."""
        own, at = float(self.full[self.place("offset_z0_ohm")]), values[..., self.place("offset_z0_ohm")]
        meant = (self.reference_ohm, own)
        low, high = min(*(one / FURTHEST for one in meant), own * FURTHEST), max(meant) * FURTHEST
        return np.asarray(~((at >= low) & (at <= high)))

    def negative(self, values: FloatArray) -> FloatArray:
        """Return how far below 0 parameters are that must not be, in sizes, shape (..., p)."""
        below = np.maximum(-values, 0.0) / self.sizes
        if self.no_negative:
            return np.asarray(below)
        return np.where(np.arange(below.shape[-1]) == self.place("offset_loss_gohm_per_s"), below, 0.0)

    def place(self, name: str) -> int:
        """Return the place of a parameter."""
        return [one.name for one in PARAMETERS[self.kind]].index(name)


def misses(target: Target, values: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return how far definitions miss the target, in parts of the bound, and the derivatives.

    (Γ − Γ_full)/(bound·√n): the sum of squares is the mean square over the frequencies.

    Parameters
    ----------
    target : Target
    values : array of shape (..., p)
        Trade units.

    Returns
    -------
    residual : array of shape (2n, ...), then by parameter : array of shape (2n, ..., p)
        Real parts first. `OVERFLOW` stands for what is not finite or has no sense.
    """
    with np.errstate(all="ignore"):
        gamma, jacobian = reflection(target.kind, values, target.frequency_hz, target.reference_ohm)
        weight = 1.0 / (target.bound * np.sqrt(target.frequency_hz.size))
        residual = as_pairs(np.moveaxis((gamma - target.gamma) * weight, -1, 0))
        slope = as_pairs(np.moveaxis(jacobian * weight[:, None], -2, 0))
    wild = target.wild(values) | ~np.isfinite(residual).all(axis=0) | ~np.isfinite(slope).all(axis=(0, -1))
    return np.where(wild, OVERFLOW, residual), np.where(wild[..., None], 0.0, slope)


def cost_of(target: Target, values: FloatArray) -> FloatArray:
    """Return the mean square of (Γ − Γ_full)/bound of definitions of shape (..., p)."""
    residual, _ = misses(target, values)
    with np.errstate(over="ignore"):
        return np.asarray((residual**2).sum(axis=0))


def refit(target: Target, free: Sequence[int], base: FloatArray) -> FloatArray:
    """Return the values that follow the target best when only some may move.

    Minimises Σ|Γ − Γ_full|²/bound²/n + Σ(PULL·δ/size)². The second sum, δ being the way from `base`, keeps single
    values where they are when the curve hardly feels them. What must not be negative is held at 0.

    Parameters
    ----------
    target : Target
    free : sequence of int
        Places of the parameters that may move.
    base : array of shape (p,)
        The full values, and what stands for the terms that are left out.

    Returns
    -------
    array of shape (p,)
    """
    if cost_of(target, base) == 0.0 and not target.negative(base).any():
        return base
    found = np.array(
        [_search(target, list(free), start, base) for start in _starts(target, list(free), base)]
    )
    way = PULL * (found - base) / target.sizes
    best: FloatArray = found[int(np.argmin(cost_of(target, found) + (way**2).sum(axis=1)))]
    below = target.negative(best)
    worst = int(np.argmax(below))
    if below[worst] > 0.0 and worst in free:
        held = base.copy()
        held[worst] = 0.0
        return refit(target, [place for place in free if place != worst], held)
    return best


def _search(target: Target, free: list[int], start: FloatArray, base: FloatArray) -> FloatArray:
    """Return where a search from one start ends."""
    size = target.sizes[free]
    away = (start - base)[free] / size

    last: list[tuple[FloatArray, FloatArray, FloatArray]] = []

    def at(steps: FloatArray) -> FloatArray:
        values = start.copy()
        values[free] += steps * size
        return values

    def both(steps: FloatArray) -> tuple[FloatArray, FloatArray]:
        # The solver asks for the derivatives where it has just asked for the residuals.
        if not last or (last[0][0] != steps).any():
            last[:] = [(steps.copy(), *misses(target, at(steps)))]
        return last[0][1:]

    def residual(steps: FloatArray) -> FloatArray:
        return np.concatenate([both(steps)[0], PULL * (away + steps)])

    def jacobian(steps: FloatArray) -> FloatArray:
        return np.concatenate([both(steps)[1][:, free] * size, PULL * np.eye(size.size)])

    return at(least_squares(residual, jacobian, np.zeros(size.size)).values)


def _starts(target: Target, free: list[int], base: FloatArray) -> FloatArray:
    """Return the best of many starting points, best first, shape (m, p).

    What is left out is handed on by one linear step; besides, C0 is worth a delay of Zr·C0 and L0 one of L0/Zr.
    Delays a part of a turn away are tried, also made up for by C0 or L0, and C0 or L0 of other sizes, since the
    phase of a long line has many poor minima. A few steps downhill show which of them lead furthest.
    """
    size = target.sizes[free]
    _, slope = misses(target, target.full)
    design = np.vstack([slope[:, free] * size, PULL * np.eye(size.size)])
    handed = np.concatenate([slope @ (target.full - base), np.zeros(size.size)])
    linear = base.copy()
    linear[free] += size * np.linalg.lstsq(design, handed, rcond=None)[0]
    made = [base, linear]
    delay, first = target.place("offset_delay_ps"), target.place("offset_loss_gohm_per_s") + 2
    # 1 fF is 0.001·Zr ps, 1 pH is 1/Zr ps.
    worth = {"open": 1e-3 * target.reference_ohm, "short": 1.0 / target.reference_ohm}.get(target.kind)
    whole = target.full[delay] + (worth or 0.0) * target.full[first]
    if worth is not None and delay in free:
        made.append(_with(base, {delay: whole} | ({first: 0.0} if first in free else {})))
    elif worth is not None and first in free:
        made += [_with(base, {first: part * whole / worth}) for part in (0.25, 0.5, 1.0, 2.0, 4.0)]
    if delay in free:
        for part in (-1 / 4, -1 / 8, -1 / 16, 1 / 16, 1 / 8, 1 / 4):
            shift = part * 1e12 / float(target.frequency_hz[-1])
            for known in (base, linear):
                made.append(_with(known, {delay: known[delay] + shift}))
                if worth is not None and first in free:
                    made.append(_with(made[-1], {first: known[first] - shift / worth}))
    starts = np.array(made)
    for damping in DAMPING:
        moved = starts.copy()
        moved[:, free] += _step(target, free, base, starts, damping)
        better = _judged(target, base, moved) < _judged(target, base, starts)
        starts = np.where(better[:, None], moved, starts)
    return starts[np.argsort(_judged(target, base, starts), kind="stable")[:TRIED]]


def _with(values: FloatArray, changed: Mapping[int, float]) -> FloatArray:
    """Return a copy of values with some of them changed."""
    result = values.copy()
    result[list(changed)] = list(changed.values())
    return result


def _step(
    target: Target, free: list[int], base: FloatArray, values: FloatArray, damping: float
) -> FloatArray:
    """Return damped Gauss–Newton steps of what is free, shape (b, k), for values of shape (b, p)."""
    size = target.sizes[free]
    residual, slope = misses(target, values)
    own = np.moveaxis(slope, 0, 1)[..., free] * size
    normal = np.swapaxes(own, -1, -2) @ own + PULL**2 * np.eye(size.size)
    normal *= 1.0 + damping * np.eye(size.size)
    downhill = np.einsum("bmk,mb->bk", own, residual) + PULL**2 * (values - base)[:, free] / size
    return np.asarray(-np.linalg.solve(normal, downhill[..., None])[..., 0] * size)


def _judged(target: Target, base: FloatArray, values: FloatArray) -> FloatArray:
    """Return what is minimised, of values of shape (b, p)."""
    way = PULL * (values - base) / target.sizes
    return np.asarray(cost_of(target, values) + (way**2).sum(axis=1))
