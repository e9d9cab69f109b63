"""What a kit does to a device: residual terms of an analyser that is corrected with it, and the bound on any device."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_complex, frozen_float
from stdfit.base.errors import RequestError
from stdfit.circuits.residual_map import device_weights, term_weights
from stdfit.uncertainty.budget import radius_of_planes
from stdfit.validity.kit import Definition, Kit, misfit_at, model

PHASES = 48
"""Phases at which the worst one is looked for; the bound varies with four times the phase at most."""

BLOCK = 256
"""Frequencies that are worked on at once, so that a long list of them needs no long arrays."""


@dataclass(frozen=True, slots=True, eq=False)
class DeviceMap:
    """Three standards of a kit at a set of frequencies, and how their errors go together.

    Attributes
    ----------
    definitions : tuple of three Definition
    frequency_hz : array of shape (n,)
    standards : complex array of shape (n, 3)
        Γ of each.
    designs : complex array of shape (n, 3, p)
        Their derivatives by the quantities of the joint covariance.
    misfits : array of shape (n, 3)
    covariances : tuple of arrays of shape (a, n, 6, 6)
        For each source the joint covariance of real and imaginary parts, for each correlation length.
    freedoms : tuple of float
    """

    definitions: tuple[Definition, Definition, Definition]
    frequency_hz: FloatArray
    standards: ComplexArray
    designs: ComplexArray
    misfits: FloatArray
    covariances: tuple[FloatArray, ...]
    freedoms: tuple[float, ...]

    def __post_init__(self) -> None:
        for name, frozen in (
            ("frequency_hz", frozen_float),
            ("standards", frozen_complex),
            ("designs", frozen_complex),
            ("misfits", frozen_float),
        ):
            object.__setattr__(self, name, frozen(getattr(self, name)))
        object.__setattr__(self, "covariances", tuple(frozen_float(one) for one in self.covariances))


def three_of(kit: Kit, names: Sequence[str] = ()) -> tuple[Definition, Definition, Definition]:
    """Return the three standards that a one-port correction is made with: the named ones, or one of each kind.

    Raises
    ------
    RequestError
        Three different names are not there, or the kit lacks a kind and no names are given.
    """
    if names:
        found = [kit.definition(name) for name in dict.fromkeys(names)]
        if len(found) != 3:
            raise RequestError(
                f"{len(found)} different standards are named", "name three: a correction takes three"
            )
    else:
        of_kind = {one.kind: one for one in reversed(kit.definitions)}
        found = [of_kind[kind] for kind in ("open", "short", "load") if kind in of_kind]
        if len(found) < 3 and len(kit.definitions) == 3:
            found = list(kit.definitions)
        if len(found) < 3:
            held = ", ".join(one.name for one in kit.definitions)
            raise RequestError(
                f"a device is corrected with three standards, and the kit has no open, short and load: {held}",
                "a kit with three standards, or three of more named, can be used as a whole",
            )
    return (found[0], found[1], found[2])


def device_map(
    kit: Kit, three: tuple[Definition, Definition, Definition], frequency_hz: FloatArray
) -> DeviceMap:
    """Return how the errors of three standards go together at given frequencies.

    Parameters
    ----------
    kit : Kit
    three : tuple of three Definition
    frequency_hz : array of shape (n,)

    Raises
    ------
    RequestError
        A frequency lies outside the readings of one of the three.
    """
    frequency_hz = np.asarray(frequency_hz, dtype=float)
    top = common_top(three)
    outside = ~((frequency_hz > 0.0) & (frequency_hz <= top))
    if outside.any():
        raise RequestError(
            f"{float(frequency_hz[outside][0]):.10g} Hz lies outside the readings of the three standards",
            f"ask for frequencies above 0 and up to {top:.10g} Hz: beyond them there is no bound",
        )
    gammas, designs = zip(*(model(kit, one, frequency_hz) for one in three), strict=True)
    design = np.stack(designs, axis=1)
    pairs = np.stack([design.real, design.imag], axis=2).reshape(frequency_hz.size, 6, -1)
    across = np.swapaxes(pairs, 1, 2)
    return DeviceMap(
        three,
        frequency_hz,
        np.stack(gammas, axis=1),
        design,
        np.stack([misfit_at(one, frequency_hz) for one in three], axis=1),
        tuple(pairs @ share.covariances[:, None] @ across for share in kit.shares),
        tuple(share.freedom for share in kit.shares),
    )


def common_top(three: Sequence[Definition]) -> float:
    """Return up to where there are readings of all."""
    return min(one.read_top_hz for one in three)


def weighted_bound(errors: DeviceMap, weights: ComplexArray) -> FloatArray:
    """Return the 95 % bound of weighted sums of the three errors: the radius of all sources, plus misfits.

    Each standard leaves its model in a way of its own, so that the three misfits add as root sum of squares;
    together they are added to the radius, as for one standard. Where a kit states bounds and no sources, as a
    sheet that was read back does, its bounds may share their causes and are added linearly.

    Parameters
    ----------
    errors : DeviceMap
    weights : complex array of shape (n, k, 3)

    Returns
    -------
    array of shape (n, k)
        Infinite where two standards are the same.
    """
    count = errors.frequency_hz.size
    if count > BLOCK:
        blocks = [slice(start, start + BLOCK) for start in range(0, count, BLOCK)]
        return np.concatenate([weighted_bound(part_of(errors, one), weights[one]) for one in blocks])
    finite = np.asarray(np.isfinite(weights).all(axis=-1))
    weights = np.where(finite[..., None], weights, 0.0)
    real = np.stack([weights.real, -weights.imag], axis=-1).reshape(*weights.shape[:2], 6)
    imag = np.stack([weights.imag, weights.real], axis=-1).reshape(*weights.shape[:2], 6)
    planes = []
    for covariance in errors.covariances:
        by_real, by_imag = real @ covariance, imag @ covariance
        planes.append(
            np.stack([(by_real * real).sum(-1), (by_imag * imag).sum(-1), (by_real * imag).sum(-1)], axis=-1)
        )
    stated = np.abs(weights * errors.misfits[:, None])
    if not planes:
        return np.where(finite, stated.sum(axis=-1), np.inf)
    spread = radius_of_planes(planes, errors.freedoms)
    return np.where(finite, spread + np.sqrt((stated**2).sum(axis=-1)), np.inf)


def part_of(errors: DeviceMap, places: slice) -> DeviceMap:
    """Return the map at some of its frequencies."""
    return replace(
        errors,
        frequency_hz=errors.frequency_hz[places],
        standards=errors.standards[places],
        designs=errors.designs[places],
        misfits=errors.misfits[places],
        covariances=tuple(covariance[:, places] for covariance in errors.covariances),
    )


def device_bound(errors: DeviceMap, device: ComplexArray) -> FloatArray:
    """Return the 95 % bound on the reflection of devices that are measured with the kit.

    Parameters
    ----------
    errors : DeviceMap
    device : complex array of shape (n, k) or (k,)

    Returns
    -------
    array of shape (n, k)
        The part of the kit alone; the day's connections, drift and noise come on top.
    """
    return weighted_bound(errors, device_weights(errors.standards, device))


def by_magnitude(errors: DeviceMap, magnitudes: Sequence[float]) -> tuple[FloatArray, FloatArray]:
    """Return the bound at the worst phase, and at half of the phases, of devices of given |Γ|.

    Parameters
    ----------
    errors : DeviceMap
    magnitudes : sequence of k floats

    Returns
    -------
    worst, typical : arrays of shape (n, k)
    """
    worst = np.empty((errors.frequency_hz.size, len(magnitudes)))
    typical = np.empty_like(worst)
    for k, magnitude in enumerate(magnitudes):
        found = device_bound(errors, magnitude * all_phases())
        worst[:, k], typical[:, k] = found.max(axis=1), np.median(found, axis=1)
    return worst, typical


def all_phases() -> ComplexArray:
    """Return e^{jφ} around the circle."""
    return np.asarray(np.exp(2j * np.pi * np.arange(PHASES) / PHASES))


@dataclass(frozen=True, slots=True, eq=False)
class ResidualTerms:
    """95 % bounds on what is left in an analyser that is corrected with a kit, as magnitudes, each of shape (n,).

    Attributes
    ----------
    directivity, reflection_tracking, source_match : arrays
        Bounds on |D|, |T| and |M| of "shown = Γ + D + T·Γ + M·Γ²".
    """

    directivity: FloatArray
    reflection_tracking: FloatArray
    source_match: FloatArray

    def __post_init__(self) -> None:
        for name in ("directivity", "reflection_tracking", "source_match"):
            object.__setattr__(self, name, frozen_float(getattr(self, name)))


def residual_terms(errors: DeviceMap) -> ResidualTerms:
    """Return the effective directivity, reflection tracking and source match."""
    weights = np.swapaxes(term_weights(errors.standards), 1, 2)
    bound = weighted_bound(errors, weights)
    return ResidualTerms(bound[:, 0], bound[:, 1], bound[:, 2])
