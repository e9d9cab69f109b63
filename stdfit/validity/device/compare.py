"""Two kits side by side: where and by how much they differ, standard by standard and as kits."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.base.errors import RequestError
from stdfit.circuits.residual_map import device_weights, term_weights
from stdfit.validity.device.bound import (
    DeviceMap,
    all_phases,
    device_bound,
    device_map,
    residual_terms,
    three_of,
)
from stdfit.validity.device.difference import Difference, ratio_of
from stdfit.validity.device.ideal import largest_change
from stdfit.validity.device.pairing import Pair, Pairing, pair_up, shared
from stdfit.validity.kit import Definition, Kit, curve

POINTS = 401
"""Frequencies at which kits are compared, besides those of the misfits."""

KIT_POINTS = 201
"""Frequencies at which they are compared as kits."""

TERMS = ("directivity", "reflection tracking", "source match")
DEVICE = "device of |Γ| = 1"


@dataclass(frozen=True, slots=True, eq=False)
class Comparison:
    """Two kits side by side.

    Attributes
    ----------
    one, two : Kit
    pairing : Pairing
    standards : tuple of Difference
        In the order of ``pairing.pairs``.
    three : tuple of Pair
        With which a correction is made; empty where they cannot be compared as kits.
    as_kits : tuple of Difference
        Of `TERMS` and `DEVICE`, to first order; empty like `three`.
    exactly : float
        Largest difference of the device not to first order; NaN where it does not exist.
    notes : tuple of str
    """

    one: Kit
    two: Kit
    pairing: Pairing
    standards: tuple[Difference, ...]
    three: tuple[Pair, ...]
    as_kits: tuple[Difference, ...]
    exactly: float
    notes: tuple[str, ...]


def compare(one: Kit, two: Kit) -> Comparison:
    """Return where and by how much two kits differ.

    Raises
    ------
    RequestError
        They cannot be compared: see `pair_up`.
    """
    pairing = pair_up(one, two)
    standards = tuple(standard_difference(one, two, pair, _grid(pair)) for pair in pairing.pairs)
    three, why = _three(one, pairing.pairs)
    as_kits: tuple[Difference, ...] = ()
    exactly = float("nan")
    if three:
        low, top = max(pair.low_hz for pair in three), min(pair.top_hz for pair in three)
        grid = np.linspace(low, top, KIT_POINTS)
        as_kits = kit_differences(one, two, three, grid)
        exactly = _exactly(*_maps(one, two, three, grid))
    return Comparison(one, two, pairing, standards, three, as_kits, exactly, (*why, *shared(one, two)))


def differences_at(found: Comparison, frequency_hz: FloatArray) -> tuple[Difference, ...]:
    """Return all differences of a comparison at given frequencies: standards, then as kits.

    Raises
    ------
    RequestError
        A frequency lies outside the readings of a standard.
    """
    standards = [
        standard_difference(found.one, found.two, pair, frequency_hz) for pair in found.pairing.pairs
    ]
    if not found.three:
        return tuple(standards)
    return (*standards, *kit_differences(found.one, found.two, found.three, frequency_hz))


def standard_difference(one: Kit, two: Kit, pair: Pair, frequency_hz: FloatArray) -> Difference:
    """Return how far the reflections of two standards lie apart.

    Parameters
    ----------
    one, two : Kit
    pair : Pair
    frequency_hz : array of shape (n,)

    Raises
    ------
    RequestError
        A frequency lies outside the readings of one of them, or too close to zero.
    """
    (gamma_one, bound_one), (gamma_two, bound_two) = (
        curve(kit, own, frequency_hz) for kit, own in ((one, pair.one), (two, pair.two))
    )
    difference, bound = np.abs(gamma_one - gamma_two), np.hypot(bound_one, bound_two)
    return Difference(pair.label, frequency_hz, difference, bound, ratio_of(difference, bound))


def kit_differences(
    one: Kit, two: Kit, three: Sequence[Pair], frequency_hz: FloatArray
) -> tuple[Difference, ...]:
    """Return what it changes, to first order, to correct an analyser with one kit in place of the other.

    The differences ΔΓᵢ of three standards change a device Γ by Σᵢ ΔΓᵢ·Πⱼ≠ᵢ (Γ − Γⱼ)/(Γᵢ − Γⱼ) = D + T·Γ + M·Γ².

    Parameters
    ----------
    one, two : Kit
    three : sequence of three Pair
    frequency_hz : array of shape (n,)

    Returns
    -------
    tuple of Difference
        |D|, |T| and |M|, and a device of |Γ| = 1 at the worst phase.

    Raises
    ------
    RequestError
        A frequency lies outside the readings of one of them.
    """
    maps = _maps(one, two, three, frequency_hz)
    change = maps[0].standards - maps[1].standards
    terms = np.abs(_weighted(np.swapaxes(term_weights(maps[0].standards), 1, 2), change))
    left = [residual_terms(one_map) for one_map in maps]
    bounds = [
        np.hypot(first, second)
        for first, second in zip(
            *((own.directivity, own.reflection_tracking, own.source_match) for own in left), strict=True
        )
    ]
    device = np.abs(_weighted(device_weights(maps[0].standards, all_phases()), change))
    device_bounds = np.hypot(*(device_bound(one_map, all_phases()) for one_map in maps))
    return (
        *(
            Difference(what, frequency_hz, terms[:, k], bound, ratio_of(terms[:, k], bound))
            for k, (what, bound) in enumerate(zip(TERMS, bounds, strict=True))
        ),
        Difference(
            DEVICE,
            frequency_hz,
            device.max(axis=1),
            device_bounds.max(axis=1),
            ratio_of(device, device_bounds).max(axis=1),
        ),
    )


def _three(one: Kit, pairs: Sequence[Pair]) -> tuple[tuple[Pair, ...], tuple[str, ...]]:
    """Return the pairs that a correction is made with, or why there are none."""
    try:
        chosen = three_of(replace(one, definitions=tuple(pair.one for pair in pairs)))
    except RequestError:
        return (), ("not compared as kits: of open, short and load not all have counterparts",)
    three = tuple(next(pair for pair in pairs if pair.one is own) for own in chosen)
    if max(pair.low_hz for pair in three) >= min(pair.top_hz for pair in three):
        return (), ("not compared as kits: the bands of the standards do not overlap",)
    return three, ()


def _maps(one: Kit, two: Kit, three: Sequence[Pair], frequency_hz: FloatArray) -> tuple[DeviceMap, DeviceMap]:
    first: tuple[Definition, ...] = tuple(pair.one for pair in three)
    second: tuple[Definition, ...] = tuple(pair.two for pair in three)
    return (
        device_map(one, (first[0], first[1], first[2]), frequency_hz),
        device_map(two, (second[0], second[1], second[2]), frequency_hz),
    )


def _weighted(weights: ComplexArray, change: ComplexArray) -> ComplexArray:
    """Return weighted sums of the changes of three standards, shape (n, k); infinite where two are the same."""
    finite = np.asarray(np.isfinite(weights).all(axis=-1))
    sums = (np.where(finite[..., None], weights, 0.0) * change[:, None]).sum(axis=-1)
    return np.where(finite | ~np.asarray(change.any(axis=-1))[:, None], sums, np.inf)


def _exactly(one: DeviceMap, two: DeviceMap) -> float:
    """Return how far apart passive devices are shown at most: read as the one kit, corrected with the other."""
    return max(largest_change(*pair) for pair in zip(two.standards, one.standards, strict=True))


def _grid(pair: Pair) -> FloatArray:
    """Return where a pair is compared: evenly over its common band, and where a misfit bends."""
    points = np.concatenate(
        [np.linspace(pair.low_hz, pair.top_hz, POINTS), pair.one.misfit_hz, pair.two.misfit_hz]
    )
    return np.unique(points[(points >= pair.low_hz) & (points <= pair.top_hz)])
