"""A day at the analyser: readings corrected with a kit, and what connections and noise of the day are worth."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.base.errors import PhysicsError
from stdfit.circuits.connectors import Family
from stdfit.circuits.error_box import corrected, solve_error_box
from stdfit.circuits.residual_map import device_weights
from stdfit.fitting.observed import Observed, noise_of, without_delay
from stdfit.uncertainty.budget import radius_of_planes
from stdfit.uncertainty.connections import (
    Repeatability,
    assumed_repeatability,
    pooled_repeatability,
    responses,
)
from stdfit.uncertainty.outlying import without_outlying
from stdfit.validity.device.bound import DeviceMap, device_bound


@dataclass(frozen=True, slots=True, eq=False)
class Stack:
    """The connections of one part, as they were read: `readings` has the shape (k, n)."""

    name: str
    kind: str
    readings: ComplexArray


@dataclass(frozen=True, slots=True, eq=False)
class Day:
    """Standards and devices of a day, in the plane of Γ.

    Attributes
    ----------
    errors : DeviceMap
        The kit's three standards at the frequencies of the readings.
    standards : tuple of Observed
        Three, in the order of the map; none where the analyser corrected with the kit itself.
    devices : tuple of Observed
    scatter : Repeatability
        Of the standards, then of the devices.
    left_out : tuple of (name, connection, distance)
        Connections that do not belong with the others, counted from 0.
    """

    errors: DeviceMap
    standards: tuple[Observed, ...]
    devices: tuple[Observed, ...]
    scatter: Repeatability
    left_out: tuple[tuple[str, int, float], ...]


def correct_day(
    errors: DeviceMap,
    standards: Sequence[Stack],
    devices: Sequence[Stack],
    reference_ohm: float,
    family: Family,
) -> Day:
    """Correct readings with a kit, and find out how well connections repeat.

    The three error terms are solved exactly, at each frequency, from the mean readings of the three standards. A
    connection far outside the scatter of all others is left out, as in a fit.

    Parameters
    ----------
    errors : DeviceMap
        n frequencies.
    standards : sequence of Stack
        Three in the order of the map, or none: then devices are taken as corrected already.
    devices : sequence of Stack
    reference_ohm : float
    family : Family
        Whose scatter is assumed where nothing was connected twice.

    Raises
    ------
    PhysicsError
        The readings of the standards cannot be solved, or give no finite Γ.
    """
    every = [*standards, *devices]
    observed = _observe(errors, standards, every)
    _, left_out = without_outlying(observed, reference_ohm, family.repeatability)
    if left_out:
        dropped = {s: [k for own, k, _ in left_out if own == s] for s, _, _ in left_out}
        every = [
            Stack(one.name, one.kind, np.delete(one.readings, dropped.get(s, []), axis=0))
            for s, one in enumerate(every)
        ]
        observed = _observe(errors, every[: len(standards)], every)
    if any(one.connections > 1 for one in observed):
        scatter = pooled_repeatability(observed, reference_ohm, family.repeatability)
    else:
        noise = float(np.median([noise_of(without_delay(one.frequency_hz, one.gamma)) for one in observed]))
        scatter = assumed_repeatability(observed, family.repeatability, noise)
    return Day(
        errors,
        tuple(observed[: len(standards)]),
        tuple(observed[len(standards) :]),
        scatter,
        tuple((every[s].name, k, distance) for s, k, distance in left_out),
    )


def _observe(errors: DeviceMap, standards: Sequence[Stack], every: Sequence[Stack]) -> list[Observed]:
    """Return all parts in the plane of Γ: means, and each connection's deviation."""
    grid = errors.frequency_hz
    if not standards:
        return [Observed.from_readings(one.name, one.kind, grid, one.readings) for one in every]
    means = np.stack([one.readings.mean(axis=0) for one in standards], axis=-1)
    try:
        box = solve_error_box(errors.standards, means)
        with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
            planes = [corrected(box, one.readings) for one in every]
    except np.linalg.LinAlgError:
        planes = []
    if not planes or not all(np.isfinite(one).all() for one in planes):
        names = ", ".join(one.name for one in standards)
        raise PhysicsError(
            f"the readings of {names} do not fix the analyser's error terms at some frequency",
            "check that three different standards were read, and which file belongs to which",
        )
    return [
        Observed.from_readings(one.name, one.kind, grid, plane)
        for one, plane in zip(every, planes, strict=True)
    ]


def device_uncertainty(day: Day, place: int, reference_ohm: float) -> FloatArray:
    """Return the 95 % bound on the corrected Γ of one device, shape (n,): the kit's part and the day's.

    U² = U_kit² + U_day². To first order the day's errors cᵢ of the standards and c of the device change Γ by
    c − Σᵢ wᵢ(Γ)·cᵢ, wᵢ the Lagrange polynomials through the standards.

    Parameters
    ----------
    day : Day
    place : int
        Which of the devices.
    reference_ohm : float
    """
    device = day.devices[place]
    kit = device_bound(day.errors, device.gamma[:, None])[:, 0]
    return np.asarray(np.hypot(kit, _day_radius(day, place, reference_ohm)))


def _day_radius(day: Day, place: int, reference_ohm: float) -> FloatArray:
    """Return the 95 % radius of connections and noise of the day."""
    device, errors, scatter = day.devices[place], day.errors, day.scatter
    weights = device_weights(errors.standards, device.gamma[:, None])[:, 0]
    # What the analyser corrected itself was calibrated with one connection of each, for all that is known.
    counts = [one.connections for one in day.standards] or [1, 1, 1]
    acts = [*(weights / np.sqrt(counts)).T, np.full(errors.frequency_hz.size, device.connections**-0.5)]
    gammas = [*errors.standards.T, device.gamma]
    own = scatter.leftover[len(day.standards) + place]
    usual = np.sqrt(np.mean([np.mean(one**2) for one in scatter.leftover]))
    leftovers = [*(scatter.leftover[:3] if day.standards else [np.full(own.size, usual)] * 3), own]
    each = [
        act[:, None] * responses(gamma, errors.frequency_hz, reference_ohm) * scatter.sd
        for act, gamma in zip(acts, gammas, strict=True)
    ]
    planes = [_planes([one[:, part] for one in each]) for part in range(scatter.sd.size)]
    sizes = np.abs(acts) ** 2
    planes += [
        _round((sizes * np.square(leftovers)).sum(axis=0)),
        _round(sizes.sum(axis=0) * scatter.noise**2),
    ]
    contrasts = sum(one.connections - 1.0 for one in (*day.standards, *day.devices))
    return radius_of_planes(planes, [*scatter.freedom.tolist(), max(contrasts, 1.0), np.inf])


def _planes(vectors: Sequence[ComplexArray]) -> FloatArray:
    """Return variances and covariance of real and imaginary part of independent numbers on lines, (1, n, 3)."""
    total = sum(np.stack([one.real**2, one.imag**2, one.real * one.imag], axis=-1) for one in vectors)
    return np.asarray(total)[None]


def _round(variance: FloatArray) -> FloatArray:
    """Return the same for a circular value with this variance per component."""
    return np.stack([variance, variance, np.zeros_like(variance)], axis=-1)[None]
