"""Connector repeatability: each connection adds a few random lumped parts at the connector's plane.

That two or three lumped parts which do not depend on frequency describe a connection well is the finding of
A. Lewandowski and D. Williams, 74th ARFTG Microwave Measurement Conference, 2009. Pooled over the standards
they can be known from few repeats.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TypeVar

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, as_pairs, frozen_float
from stdfit.fitting.observed import Observed, noise_of

Array = TypeVar("Array", FloatArray, ComplexArray)

PARTS = ("contact resistance", "plane shift", "contact reactance")
"""The lumped parts: series resistance in Ω, shift of the plane in ps, imbalance L/Z0 − C·Z0 in ps."""

ROUNDS = 60
"""Rounds of expectation and maximisation; a part that the readings see well settles in three."""

SHOWN = 0.3
"""Degrees of freedom below which the readings say nothing of a part."""

SMOOTHING = 40
"""The leftover scatter is averaged over 1/SMOOTHING of the sweep."""


def responses(gamma: ComplexArray, frequency_hz: FloatArray, reference_ohm: float) -> ComplexArray:
    """Return how a unit of each part changes a reflection Γ, shape (n, 3).

    A series impedance z = Z/Z0 changes Γ by z(1−Γ)²/2, a shunt admittance y = Y·Z0 by −y(1+Γ)²/2, a shift
    of the plane by t changes it by −2jωtΓ; the imbalance is x/2 in series and −x/2 in shunt.
    """
    omega = 2e-12 * np.pi * frequency_hz
    return np.stack(
        [
            (1.0 - gamma) ** 2 / (2.0 * reference_ohm),
            -2j * omega * gamma,
            0.25j * omega * ((1.0 - gamma) ** 2 + (1.0 + gamma) ** 2),
        ],
        axis=1,
    )


@dataclass(frozen=True, slots=True, eq=False)
class Repeatability:
    """How much connections scatter.

    Attributes
    ----------
    sd : array of shape (3,)
        Standard deviation of each of `PARTS` for one connection.
    freedom : array of shape (3,)
        Degrees of freedom of each.
    measured : bool
        False where no standard was connected twice and the values are a stated default.
    leftover : tuple of arrays of shape (n,)
        For each standard, the standard deviation per component of the smooth scatter of one connection
        that the parts do not explain.
    noise : float
        Standard deviation per component of the white noise of one reading.
    """

    sd: FloatArray
    freedom: FloatArray
    measured: bool
    leftover: tuple[FloatArray, ...]
    noise: float

    def __post_init__(self) -> None:
        object.__setattr__(self, "sd", frozen_float(self.sd))
        object.__setattr__(self, "freedom", frozen_float(self.freedom))


def assumed_repeatability(observed: Sequence[Observed], sd: Sequence[float], noise: float) -> Repeatability:
    """Return a stated default for readings of one connection each."""
    nothing = tuple(np.zeros(one.frequency_hz.size) for one in observed)
    return Repeatability(np.array(sd), np.full(len(PARTS), np.inf), False, nothing, noise)


def pooled_repeatability(
    observed: Sequence[Observed], reference_ohm: float, assumed_sd: Sequence[float]
) -> Repeatability:
    """Estimate the scatter of connections from all standards that were connected more than once.

    Parameters
    ----------
    observed : sequence of Observed
        At least one with two connections.
    reference_ohm : float
    assumed_sd : sequence of three floats
        Stated default of each part, for parts that no repeated standard shows.

    Notes
    -----
    The variances of the parts are found by expectation and maximisation (A. P. Dempster, N. M. Laird, D. B.
    Rubin, J. R. Statist. Soc. B 39, 1977, 1–38), with the readings' white noise known from fourth
    differences. A part has (k − 1) degrees of freedom from each standard, times the share of its variance
    that the readings of that standard determine.
    """
    repeated = [one for one in observed if one.connections > 1]
    noise = float(
        np.median(
            [
                noise_of(one.deviations) * np.sqrt(one.connections / (one.connections - 1.0))
                for one in repeated
            ]
        )
    )
    floor = max(noise, 1e-9) ** 2
    bases = [as_pairs(responses(one.gamma, one.frequency_hz, reference_ohm)) for one in repeated]
    products = [basis.T @ as_pairs(one.deviations.T) for basis, one in zip(bases, repeated, strict=True)]
    contrasts = np.array([one.connections - 1.0 for one in repeated])
    normals = np.array([basis.T @ basis for basis in bases]) / floor
    moments = np.array([product @ product.T for product in products]) / floor**2
    variance = np.array([1e-4, 1e-2, 1e-2])
    spread = np.zeros((len(repeated), len(PARTS)))
    for _ in range(ROUNDS):
        posterior = np.linalg.inv(normals + np.diag(1.0 / variance))
        spread = np.diagonal(posterior, axis1=1, axis2=2)
        seen = np.sum((posterior @ moments) * posterior, axis=-1)  # the diagonal of P·M·P
        variance = np.maximum((seen.sum(axis=0) + contrasts @ spread) / contrasts.sum(), 1e-16)
    told = np.clip(1.0 - spread / variance, 0.0, 1.0)
    freedom = contrasts @ told
    shown = freedom > SHOWN
    leftover = [_leftover(one, variance, floor, reference_ohm) for one in observed]
    powers = [
        float(np.mean(own**2)) for one, own in zip(observed, leftover, strict=True) if one.connections > 1
    ]
    usual = float(np.sqrt(np.mean(powers)))
    return Repeatability(
        sd=np.where(shown, np.sqrt(variance), np.asarray(assumed_sd)),
        freedom=np.where(shown, np.maximum(freedom, 1.0), np.inf),
        measured=True,
        leftover=tuple(
            own if one.connections > 1 else np.full(own.size, usual)
            for one, own in zip(observed, leftover, strict=True)
        ),
        noise=noise,
    )


def _leftover(one: Observed, variance: FloatArray, floor: float, reference_ohm: float) -> FloatArray:
    """Return the smooth scatter beyond the lumped parts and the noise, per component of one connection."""
    if one.connections < 2:
        return np.zeros(one.frequency_hz.size)
    basis = responses(one.gamma, one.frequency_hz, reference_ohm)
    pairs = as_pairs(basis)
    shares = np.linalg.solve(pairs.T @ pairs / floor + np.diag(1.0 / variance), pairs.T / floor)
    rest = one.deviations - (basis @ (shares @ as_pairs(one.deviations.T))).T
    power = 0.5 * np.sum(np.abs(rest) ** 2, axis=0) / (one.connections - 1.0)
    window = max(5, one.frequency_hz.size // SMOOTHING)
    excess = running_mean(power, window) - floor * (1.0 + 2.0 / np.sqrt(window * (one.connections - 1.0)))
    return np.asarray(np.sqrt(np.maximum(excess, 0.0)))


def running_mean(values: Array, window: int) -> Array:
    """Return the mean over a centred window along the last axis, shorter at the ends."""
    half = window // 2
    start = np.zeros((*values.shape[:-1], 1), dtype=values.dtype)
    sums = np.concatenate([start, np.cumsum(values, axis=-1)], axis=-1)
    place = np.arange(values.shape[-1])
    low, high = np.maximum(place - half, 0), np.minimum(place + half + 1, place.size)
    mean: Array = (sums[..., high] - sums[..., low]) / (high - low)
    return mean
