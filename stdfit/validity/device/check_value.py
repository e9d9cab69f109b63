"""What a device should be: a value from given parameters, from another kit, or from a file, with its bound."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_complex, frozen_float
from stdfit.base.records import Sweep
from stdfit.circuits.standard import PARAMETERS, Parameter, reflection
from stdfit.circuits.units import said_unit
from stdfit.data.bench_records import Given, StatedBound
from stdfit.fitting.observed import phase_slope
from stdfit.fitting.roles import ASSUMED
from stdfit.uncertainty.budget import radius_of_planes
from stdfit.validity.kit import Definition, Kit, curve

Z0_PART = 0.02
"""Standard uncertainty of a line's impedance that is not given, as a part of the reference (common practice)."""

LARGEST = 2.0
"""No two passive devices lie further apart."""


@dataclass(frozen=True, slots=True, eq=False)
class Value:
    """What a device should be.

    Attributes
    ----------
    label : str
        Where it comes from.
    gamma : complex array of shape (n,)
    bound : array of shape (n,)
        95 % bound; NaN where nothing is known.
    assumed : tuple of str
        What had to be assumed, in words.
    """

    label: str
    gamma: ComplexArray
    bound: FloatArray
    assumed: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        object.__setattr__(self, "gamma", frozen_complex(self.gamma))
        object.__setattr__(self, "bound", frozen_float(self.bound))


def given_value(
    kind: str, given: Mapping[str, Given], frequency_hz: FloatArray, reference_ohm: float
) -> Value:
    """Return the value of a device that is described as an open, short or load.

    What is not given is taken for usual, with the weak evidence that a fit assumes: it widens the bound. Orders of C(f)
    and L(f) above the first are taken as zero.

    Parameters
    ----------
    kind : {"open", "short", "load"}
    given : mapping of str to Given
        In trade units; without an uncertainty a parameter is taken as exact.
    frequency_hz : array of shape (n,)
    reference_ohm : float

    Notes
    -----
    A bound is no more than `LARGEST`. Figures that give no reflection at all tell nothing: the bound is NaN there.
    """
    values, sizes, assumed = [], [], []
    for parameter in PARAMETERS[kind]:
        if parameter.name in given:
            stated = given[parameter.name]
            value, u = stated.value, stated.u or 0.0
        else:
            value, u = _usual(kind, parameter, reference_ohm)
            if u > 0.0:
                assumed.append(f"{parameter.label} {value:g} ± {u:g} {said_unit(parameter.unit)}")
        values.append(value)
        sizes.append(u)
    with np.errstate(all="ignore"):  # a bench may hold any figures
        gamma, slopes = reflection(kind, values, frequency_hz, reference_ohm)
        steps = np.where(np.array(sizes) > 0.0, slopes * np.array(sizes), 0.0)
    # A step this long makes the bound the largest anyway.
    steps = _clipped(steps.real) + 1j * _clipped(steps.imag)
    plane = np.stack(
        [(steps.real**2).sum(-1), (steps.imag**2).sum(-1), (steps.real * steps.imag).sum(-1)], axis=-1
    )
    bound = np.minimum(radius_of_planes([plane[None]], [np.inf]), LARGEST)
    known = np.isfinite(gamma)
    return Value(
        "its given values", np.where(known, gamma, 0.0), np.where(known, bound, np.nan), tuple(assumed)
    )


def _clipped(steps: FloatArray) -> FloatArray:
    longest = 100.0 * LARGEST
    return np.clip(np.nan_to_num(steps, nan=longest), -longest, longest)


def _usual(kind: str, parameter: Parameter, reference_ohm: float) -> tuple[float, float]:
    """Return value and standard uncertainty of a parameter of which nothing is said."""
    if parameter.name == "offset_z0_ohm":
        return reference_ohm, Z0_PART * reference_ohm
    if parameter.power > 0:
        return 0.0, 0.0
    key = "load delay" if (kind, parameter.name) == ("load", "offset_delay_ps") else parameter.name
    return ASSUMED[key]


def value_from_kit(kit: Kit, definition: Definition, frequency_hz: FloatArray) -> Value:
    """Return the value that another kit gives; nothing is known outside its readings."""
    known = (frequency_hz >= definition.read_low_hz) & (frequency_hz <= definition.read_top_hz)
    gamma, bound = np.zeros(frequency_hz.size, dtype=complex), np.full(frequency_hz.size, np.nan)
    if known.any():
        gamma[known], bound[known] = curve(kit, definition, frequency_hz[known])
    return Value(f"'{definition.name}' of {kit.name}", gamma, bound)


def value_from_file(sweep: Sweep, stated: StatedBound, frequency_hz: FloatArray) -> Value:
    """Return a value that was read elsewhere; nothing is known outside its frequencies, nor outside a table of bounds.

    Between its points it is a straight line, after the phase that grows with frequency is turned back. That is wrong by
    at most h²/8·|Γ″|, which is added to the bound: 4t(1 − t)·|Δ²Γ|/8 at the part t of a step.

    Parameters
    ----------
    sweep : Sweep
        m points.
    stated : StatedBound
        One element holds for all frequencies.
    frequency_hz : array of shape (n,)
    """
    own = sweep.frequency_hz
    slope = phase_slope(own, sweep.gamma)
    straight = sweep.gamma * np.exp(-1j * slope * own)
    known = (frequency_hz >= own[0]) & (frequency_hz <= own[-1])
    if stated.frequency_hz.size > 1:
        known &= (frequency_hz >= stated.frequency_hz[0]) & (frequency_hz <= stated.frequency_hz[-1])
    gamma = np.interp(frequency_hz, own, straight.real) + 1j * np.interp(frequency_hz, own, straight.imag)
    gamma = gamma * np.exp(1j * slope * frequency_hz)
    left = np.clip(np.searchsorted(own, frequency_hz, side="right") - 1, 0, own.size - 2)
    part = np.clip((frequency_hz - own[left]) / (own[left + 1] - own[left]), 0.0, 1.0)
    bend = np.zeros(own.size)
    bend[1:-1] = np.abs(straight[2:] - 2.0 * straight[1:-1] + straight[:-2])
    between = 0.5 * part * (1.0 - part) * np.maximum(bend[left], bend[left + 1])
    bound = np.interp(frequency_hz, stated.frequency_hz, stated.bound) + between
    return Value("its stated values", gamma, np.where(known, bound, np.nan))
