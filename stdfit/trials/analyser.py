"""An analyser whose own correction is imperfect: what is left of directivity, tracking and source match."""

from dataclasses import dataclass
from typing import Literal

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_float

Correlation = Literal["any", "long", "short"]
ResidualKind = Literal["any", "gaussian", "ripple"]

# 95 % radius of a circular complex normal value with standard deviation 1 per component.
RADIUS_95 = float(np.sqrt(-2 * np.log(0.05)))
LENGTHS = {"any": (1 / 30, 3.0), "long": (1.0, 3.0), "short": (1 / 30, 1 / 8)}  # in spans


@dataclass(frozen=True, slots=True, eq=False)
class StatedDecibels:
    """95 % bounds of the analyser's residual errors, as stated to the user.

    Attributes
    ----------
    frequency_hz : array of shape (m,)
        Rising, in hertz.
    directivity_db, source_match_db : array of shape (m,)
        Bound on |δD|, |δM| as −20 log10 of it.
    reflection_tracking_db : array of shape (m,)
        Bound on |1 + δT| as 20 log10 of it.
    """

    frequency_hz: FloatArray
    directivity_db: FloatArray
    source_match_db: FloatArray
    reflection_tracking_db: FloatArray

    def __post_init__(self) -> None:
        for key in ("frequency_hz", "directivity_db", "source_match_db", "reflection_tracking_db"):
            object.__setattr__(self, key, frozen_float(getattr(self, key)))

    @classmethod
    def perfect(cls) -> "StatedDecibels":
        """A correction without any error worth the name: 400 dB."""
        return cls(frozen_float([1e9]), frozen_float([400]), frozen_float([400]), frozen_float([0.0]))

    def bounds(self, frequency_hz: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Return the linear 95 % bounds on |δD|, |δT|, |δM|; decibels are interpolated, held at both ends."""
        d, t, m = (
            np.interp(frequency_hz, self.frequency_hz, table)
            for table in (self.directivity_db, self.reflection_tracking_db, self.source_match_db)
        )
        return 10 ** (-d / 20), 10 ** (t / 20) - 1, 10 ** (-m / 20)


@dataclass(frozen=True, slots=True, eq=False)
class Residuals:
    """Residual errors of one session, the same for all its readings.

    Attributes
    ----------
    directivity, tracking, source_match : complex array of shape (n,)
        δD, δT, δM.
    kinds : tuple of str
        How each was built.
    """

    directivity: ComplexArray
    tracking: ComplexArray
    source_match: ComplexArray
    kinds: tuple[str, str, str]


def gaussian_process(frequency_hz: FloatArray, length_hz: float, rng: np.random.Generator) -> ComplexArray:
    """Draw a smooth circular complex normal function, standard deviation 1 per component at every frequency.

    White noise on knots, smoothed with a kernel and divided by the kernel's own norm at each frequency. The
    kernel is exp(−x²), whose covariance is exp(−x²/2), or the rougher (1 + 2|x|) exp(−2|x|), x in lengths.

    Parameters
    ----------
    frequency_hz : array of shape (n,)
        In hertz.
    length_hz : float
        Correlation length.
    rng : numpy Generator
        Source of all chance.

    Returns
    -------
    complex array of shape (n,)
    """
    spacing, margin = length_hz / 3, 3.5 * length_hz
    start, stop = frequency_hz[0] - margin, frequency_hz[-1] + margin
    knots = np.arange(start + rng.uniform(-spacing, 0), stop + spacing, spacing)
    x = np.abs(frequency_hz[:, None] - knots) / length_hz
    kernel = np.exp(-(x**2)) if rng.random() < 0.5 else (1 + 2 * x) * np.exp(-2 * x)
    kernel /= np.sqrt(np.sum(kernel**2, axis=1, keepdims=True))
    white = rng.standard_normal((knots.size, 2)) @ np.array([1.0, 1j])
    process: ComplexArray = kernel @ white
    return process


def ripple(frequency_hz: FloatArray, length_hz: float, rng: np.random.Generator) -> ComplexArray:
    """Draw a sum of two to six reflections c e^{−jωτ}, standard deviation 1 per component over all draws.

    The delays are |N(0, 1)|/(2π·length), positive, so the correlation turns as it falls; its real part is
    exp(−x²/2), x in lengths. The c are circular with random magnitude, so the sum has the same 95 % radius at
    every frequency, but in one session it is a few beating waves.

    Parameters
    ----------
    frequency_hz : array of shape (n,)
        In hertz.
    length_hz : float
        Correlation length.
    rng : numpy Generator
        Source of all chance.

    Returns
    -------
    complex array of shape (n,)
    """
    count = int(rng.integers(2, 7))
    delay_s = np.abs(rng.standard_normal(count)) / (2 * np.pi * length_hz)
    weight = np.sqrt(rng.dirichlet(np.ones(count)))
    size = weight * (rng.standard_normal((count, 2)) @ np.array([1.0, 1j]))
    waves: ComplexArray = np.exp(-2j * np.pi * np.outer(frequency_hz, delay_s)) @ size
    return waves


def draw_residuals(
    stated: StatedDecibels,
    frequency_hz: FloatArray,
    rng: np.random.Generator,
    *,
    kind: ResidualKind = "any",
    correlation: Correlation = "any",
    scale: float = 1.0,
) -> Residuals:
    """Draw δD, δT, δM, each below its stated bound with probability 0.95 at every frequency.

    Parameters
    ----------
    stated : StatedDecibels
        The bounds.
    frequency_hz : array of shape (n,)
        In hertz.
    rng : numpy Generator
        Source of all chance.
    kind : "any", "gaussian" or "ripple"
        How they are built; "any" throws a coin for each.
    correlation : "any", "long" or "short"
        Range of the correlation length, drawn for each on a log scale.
    scale : float
        True size against the stated one.

    Returns
    -------
    Residuals
    """
    span = float(frequency_hz[-1] - frequency_hz[0])
    low, high = LENGTHS[correlation]
    drawn, kinds = [], []
    for bound in stated.bounds(frequency_hz):
        this = ("gaussian" if rng.random() < 0.5 else "ripple") if kind == "any" else kind
        length_hz = span * float(np.exp(rng.uniform(np.log(low), np.log(high))))
        build = gaussian_process if this == "gaussian" else ripple
        drawn.append(scale * bound / RADIUS_95 * build(frequency_hz, length_hz, rng))
        kinds.append(this)
    return Residuals(drawn[0], drawn[1], drawn[2], (kinds[0], kinds[1], kinds[2]))


def imperfect_correction(gamma: ComplexArray, residuals: Residuals) -> ComplexArray:
    """Return Γm = δD + (1 + δT) Γ / (1 − δM Γ): what an imperfectly corrected analyser shows.

    Source: the three-term model of a reflectometer, EURAMET cg-12 v3.0, 2018 (from memory).
    """
    shown = (1 + residuals.tracking) * gamma / (1 - residuals.source_match * gamma)
    return residuals.directivity + shown
