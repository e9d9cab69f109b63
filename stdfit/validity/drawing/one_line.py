"""Several sections of line, with the fringing fields at their steps, as the one offset line of a definition."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.circuits.line import SeenThroughLine, see_through_line

POINTS = 40
"""Frequencies up to the top of the band at which the chain and the one line are compared."""

STEPS = 6
"""Steps of Gauss and Newton; the start is good to first order, and four already settle."""

TOLD = 0.005
"""Difference of Γ between chain and one line that is told."""

LARGEST_RATIO = 2.0
"""Ratio of impedances beyond which a chain is a filter and no offset line."""


@dataclass(frozen=True, slots=True)
class OneLine:
    """The line that stands for a chain.

    Attributes
    ----------
    delay_s, z0_ohm : float
        Of the line that comes nearest over the band.
    low_delay_s, low_z0_ohm : float
        Of the line that has the chain's capacitance and inductance in all, which is right at low frequency.
    apart : float
        Largest |ΔΓ| between the chain and the line over the band.
    holds_to_hz : float
        Up to where |ΔΓ| keeps within `TOLD`.
    """

    delay_s: float
    z0_ohm: float
    low_delay_s: float
    low_z0_ohm: float
    apart: float
    holds_to_hz: float


def one_line(
    delays_s: Sequence[float],
    z0s_ohm: Sequence[float],
    steps_f: Sequence[float],
    end: ComplexArray,
    frequency_hz: FloatArray,
    reference_ohm: float,
) -> OneLine:
    """Return the line whose reflection comes nearest to that of a chain of lossless sections.

    At low frequency a chain is its capacitance C = Σ τk/Zk + Σ Cstep and its inductance L = Σ τk·Zk, so that
    τ = √(L·C) and Z = √(L/C): delays add, and a step's capacitance acts as delay. From there τ and Z are moved until
    Σ |Γchain − Γline|² over the band is least.

    Parameters
    ----------
    delays_s, z0s_ohm : sequences of k floats
        Of each section, from the reference plane on.
    steps_f : sequence of k − 1 floats
        Capacitance of the step behind each section but the last.
    end : complex array of shape (n,)
        Reflection of what closes the chain, with respect to `reference_ohm`.
    frequency_hz : array of shape (n,)
        Rising.
    reference_ohm : float

    Notes
    -----
    Low-frequency equivalents of short lines: derived. Steps as capacitances: J. R. Whinnery, H. W. Jamieson,
    T. E. Robbins, "Coaxial-line discontinuities", Proc. IRE 32, 1944, 695–709 (from memory).
    """
    delays, z0s = np.asarray(delays_s, dtype=float), np.asarray(z0s_ohm, dtype=float)
    farad = float((delays / z0s).sum() + sum(steps_f))
    henry = float((delays * z0s).sum())
    if delays.size == 1:
        only = (float(delays[0]), float(z0s[0]))
        return OneLine(*only, *only, 0.0, float(frequency_hz[-1]))
    # A chain of no length at all, or of negative ones, has no impedance of its own.
    sound = farad > 0.0 and henry > 0.0
    low = (
        (float(np.sqrt(henry * farad)), float(np.sqrt(henry / farad)))
        if sound
        else (float(delays.sum()), float(z0s.mean()))
    )
    wanted = _chain(delays, z0s, steps_f, end, frequency_hz, reference_ohm)
    delay, z0 = low
    for _ in range(STEPS if sound else 0):
        seen = _line(end, frequency_hz, delay, z0, reference_ohm)
        design = np.stack([seen.by_delay * low[0], seen.by_z0 * low[1]], axis=1)
        off = wanted - seen.gamma
        step, *_ = np.linalg.lstsq(
            np.concatenate([design.real, design.imag]), np.concatenate([off.real, off.imag]), rcond=1e-6
        )
        delay, z0 = delay + float(step[0]) * low[0], z0 + float(step[1]) * low[1]
        if not (np.isfinite(delay) and 0.5 * low[1] < z0 < 2.0 * low[1]):
            delay, z0 = low
            break
    apart = np.abs(wanted - _line(end, frequency_hz, delay, z0, reference_ohm).gamma)
    beyond = np.flatnonzero(apart > TOLD)
    holds = float(frequency_hz[-1] if beyond.size == 0 else frequency_hz[max(int(beyond[0]) - 1, 0)])
    return OneLine(delay, z0, *low, float(apart.max()), holds)


def _line(
    end: ComplexArray, frequency_hz: FloatArray, delay_s: float, z0_ohm: float, reference_ohm: float
) -> SeenThroughLine:
    return see_through_line(
        end, frequency_hz, delay_s=delay_s, loss_ohm_per_s=0.0, z0_ohm=z0_ohm, reference_ohm=reference_ohm
    )


def _chain(
    delays: FloatArray,
    z0s: FloatArray,
    steps_f: Sequence[float],
    end: ComplexArray,
    frequency_hz: FloatArray,
    reference_ohm: float,
) -> ComplexArray:
    """Return the reflection of the whole chain."""
    gamma = end
    for place in range(delays.size - 1, -1, -1):
        if place < delays.size - 1:
            half = 1j * np.pi * frequency_hz * steps_f[place] * reference_ohm
            gamma = (gamma - half * (1.0 + gamma)) / (1.0 + half * (1.0 + gamma))
        gamma = _line(gamma, frequency_hz, float(delays[place]), float(z0s[place]), reference_ohm).gamma
    return gamma
