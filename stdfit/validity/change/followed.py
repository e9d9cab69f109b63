"""What of a standard can be followed over years: values that the readings determine well, source by source."""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_float
from stdfit.circuits.standard import PARAMETERS, reflection
from stdfit.circuits.units import said_unit
from stdfit.uncertainty.budget import radius
from stdfit.validity.kit import Definition, Fitted, Kit, model

GRID_POINTS = 33
"""Frequencies at which a parameter's own effect is compared with the radius of all sources."""


@dataclass(frozen=True, slots=True, eq=False)
class Followed:
    """A well determined value of one standard in one kit.

    Attributes
    ----------
    key : str
        The same for the same quantity in every kit: a parameter's name, or "whole" for what delay and C0, delay and L0,
        or L and C are together.
    label, unit : str
    value, low, high : float
        With its 95 % interval.
    sources : tuple of str
        Names of the sources of error, the last one "misfit".
    sizes : array of shape (s,)
        Standard uncertainty from each source.
    freedoms : array of shape (s,)
        Degrees of freedom of each.
    steers : tuple of (str, float)
        A parameter that stands for the quantity, and how much of it a unit of the quantity is.
    """

    key: str
    label: str
    unit: str
    value: float
    low: float
    high: float
    sources: tuple[str, ...]
    sizes: FloatArray
    freedoms: FloatArray
    steers: tuple[str, float]

    def __post_init__(self) -> None:
        object.__setattr__(self, "sizes", frozen_float(self.sizes))
        object.__setattr__(self, "freedoms", frozen_float(self.freedoms))


def followed(kit: Kit, definition: Definition) -> tuple[Followed, ...]:
    """Return what the readings of one standard determine well: its combination, and parameters that do not trade off.

    A parameter trades off with others where its uncertainty alone would move Γ by more than the 95 % radius of all
    sources together.
    """
    return (*_combination(kit, definition), *_parameters(kit, definition))


def effect(kit: Kit, definition: Definition, one: Followed, frequency_hz: FloatArray) -> ComplexArray:
    """Return how Γ changes by a unit of the quantity, shape (n,)."""
    _, by_parameter = reflection(definition.kind, definition.values, frequency_hz, kit.reference_ohm)
    name, amount = one.steers
    place = [known.name for known in PARAMETERS[definition.kind]].index(name)
    return np.asarray(amount * by_parameter[:, place])


def weights_of_whole(kind: str, values: FloatArray, reference_ohm: float) -> dict[str, float]:
    """Return how parameters, in trade units, add up to what the readings fix.

    Zr·(τ/Z0 + C0) in ps of an open, (τ·Z0 + L0)/Zr in ps of a short, L − C·Zr² in pH of a load; τ the delay, Z0 the
    impedance of the offset line, Zr the reference impedance. The weights are the derivatives by the parameters.
    """
    delay, z0, zr = float(values[0]), float(values[2]), reference_ohm
    if kind == "open":
        return {"offset_delay_ps": zr / z0, "c0": 1e-3 * zr, "offset_z0_ohm": -zr * delay / z0**2}
    if kind == "short":
        return {"offset_delay_ps": z0 / zr, "l0": 1.0 / zr, "offset_z0_ohm": delay / zr}
    return {"inductance_ph": 1.0, "capacitance_ff": -1e-3 * zr**2}


def _combination(kit: Kit, definition: Definition) -> Iterator[Followed]:
    """Yield the combination that the kit states, if it states one."""
    for stated in definition.combinations[:1]:
        weights = weights_of_whole(definition.kind, definition.values, kit.reference_ohm)
        direction = np.zeros(len(kit.order))
        for parameter in definition.parameters:
            if parameter.of in kit.order:
                direction[kit.order.index(parameter.of)] += weights.get(parameter.name, 0.0)
        first = next(iter(weights))
        interval = (stated.value, stated.low, stated.high)
        yield Followed(
            *("whole", stated.label, stated.unit, *interval),
            *_by_source(kit, direction, stated.u),
            steers=(first, 1.0 / weights[first]),
        )


def _parameters(kit: Kit, definition: Definition) -> Iterator[Followed]:
    """Yield the fitted parameters that do not trade off with others."""
    parts = {
        name
        for name in weights_of_whole(definition.kind, definition.values, kit.reference_ohm)
        if definition.combinations
    }
    grid = np.linspace(definition.fit_low_hz, definition.fit_top_hz, GRID_POINTS)
    _, design = model(kit, definition, grid)
    spread = radius(design, kit.shares)
    for known, parameter in zip(PARAMETERS[definition.kind], definition.parameters, strict=True):
        if parameter.role not in ("free", "given") or parameter.of not in kit.order or known.name in parts:
            continue
        direction = np.zeros(len(kit.order))
        direction[kit.order.index(parameter.of)] = 1.0
        sources = _by_source(kit, direction, parameter.u)
        alone = np.sqrt(np.sum(sources[1][:-1] ** 2))
        if not _trades_off(alone * np.abs(design @ direction), spread):
            interval = (parameter.value, parameter.low, parameter.high)
            yield Followed(
                *(parameter.name, _label(definition.kind, parameter), said_unit(parameter.unit), *interval),
                *sources,
                steers=(parameter.name, 1.0),
            )


def _trades_off(alone: FloatArray, spread: FloatArray) -> bool:
    """Return whether a parameter alone would move Γ by more than all sources do where it moves it most."""
    most = int(np.argmax(alone))
    return bool(alone[most] > spread[most])


def _label(kind: str, parameter: Fitted) -> str:
    return next(known.label for known in PARAMETERS[kind] if known.name == parameter.name)


def _by_source(
    kit: Kit, direction: FloatArray, stated_u: float
) -> tuple[tuple[str, ...], FloatArray, FloatArray]:
    """Return names, standard uncertainties and degrees of freedom, the misfit last: what is left of the stated u."""
    variances = [
        np.einsum("p,apq,q->a", direction, share.covariances, direction) for share in kit.shares
    ] or [np.zeros(1)]
    lengths = max(own.size for own in variances)
    stack = np.maximum([np.broadcast_to(own, lengths) for own in variances], 0.0)
    worst = stack[:, int(np.argmax(stack.sum(axis=0)))]
    misfit = max(stated_u**2 - float(worst.sum()), 0.0)
    return (
        (*(share.name for share in kit.shares), "misfit"),
        np.sqrt(np.append(worst[: len(kit.shares)], misfit)),
        np.array([*(share.freedom for share in kit.shares), np.inf]),
    )
