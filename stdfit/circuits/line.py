"""A termination seen through a length of lossy line, the "offset" of a calibration standard."""

from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray

LOSS_FREQUENCY_HZ = 1e9
"""The frequency at which the trade states an offset loss."""


@dataclass(frozen=True, slots=True, eq=False)
class SeenThroughLine:
    """Reflection at the near end of a line and its derivatives, each of shape (..., n).

    Attributes
    ----------
    gamma : complex array
        Reflection at the near end, with respect to the reference impedance.
    by_termination : complex array
        Derivative by the reflection of the termination (same reference impedance).
    by_delay, by_loss, by_z0 : complex array
        Derivatives by the delay in s, the loss in Ω/s and the lossless impedance in Ω.
    """

    gamma: ComplexArray
    by_termination: ComplexArray
    by_delay: ComplexArray
    by_loss: ComplexArray
    by_z0: ComplexArray


def see_through_line(
    termination: ComplexArray,
    frequency_hz: FloatArray,
    *,
    delay_s: FloatArray | float,
    loss_ohm_per_s: FloatArray | float,
    z0_ohm: FloatArray | float,
    reference_ohm: float,
) -> SeenThroughLine:
    """Return the reflection of a termination behind an offset line, with derivatives.

    γl = jωτ + (1+j)·(rτ/2Z0)·√(f/1 GHz),  Zc = Z0 + (1−j)·(r/2ω)·√(f/1 GHz)

    Parameters
    ----------
    termination : complex array of shape (..., n)
        Reflection of the termination with respect to `reference_ohm`.
    frequency_hz : array of shape (n,)
        Frequency f in Hz; at f = 0 the line has no effect.
    delay_s : float or array of shape (..., 1)
        One-way delay τ in s.
    loss_ohm_per_s : float or array of shape (..., 1)
        Offset loss r at 1 GHz in Ω/s, skin effect only.
    z0_ohm : float or array of shape (..., 1)
        Impedance Z0 that the line would have without loss, in Ω.
    reference_ohm : float
        Reference impedance of all reflections, in Ω.

    Notes
    -----
    The loss convention is the trade's usual one for calibration standards (common practice). The skin
    effect adds the same resistance as inductive reactance: H. A. Wheeler, "Formulas for the skin
    effect", Proc. IRE 30, 1942, 412–424.

    Examples
    --------
    >>> import numpy as np
    >>> seen = see_through_line(np.array([1.0 + 0j]), np.array([1e9]), delay_s=1e-12,
    ...                         loss_ohm_per_s=0.0, z0_ohm=50.0, reference_ohm=50.0)
    >>> round(float(-np.degrees(np.angle(seen.gamma[0]))), 3)
    0.72
    """
    omega = 2.0 * np.pi * frequency_hz
    root = np.sqrt(frequency_hz / LOSS_FREQUENCY_HZ)
    with np.errstate(divide="ignore", invalid="ignore"):
        by_loss_zc = (1 - 1j) * np.where(omega > 0.0, root / (2.0 * omega), 0.0)
    skin = (1 + 1j) * root / (2.0 * z0_ohm)
    line_length = 1j * omega * delay_s + skin * loss_ohm_per_s * delay_s
    zc = z0_ohm + by_loss_zc * loss_ohm_per_s

    # Divisions cost most: each of the three denominators is turned over once.
    over_sum = 1.0 / (zc + reference_ohm)
    step = (zc - reference_ohm) * over_sum
    by_zc_step = 2.0 * reference_ohm * over_sum * over_sum
    there_and_back = np.exp(-2.0 * line_length)

    over_far = 1.0 / (1.0 - termination * step)
    far = (termination - step) * over_far
    near = far * there_and_back
    over_near = 1.0 / (1.0 + near * step)
    gamma = (near + step) * over_near

    passed = 1.0 - step * step
    by_far_end = over_far * over_far
    by_near_end = over_near * over_near
    by_near = passed * by_near_end
    by_far = by_near * there_and_back
    by_step = (1.0 - near * near) * by_near_end + by_far * (termination * termination - 1.0) * by_far_end
    by_length = -2.0 * by_near * near
    by_zc = by_step * by_zc_step
    return SeenThroughLine(
        gamma=gamma,
        by_termination=by_far * passed * by_far_end,
        by_delay=by_length * (1j * omega + skin * loss_ohm_per_s),
        by_loss=by_length * skin * delay_s + by_zc * by_loss_zc,
        by_z0=by_length * (-skin * loss_ohm_per_s * delay_s / z0_ohm) + by_zc,
    )
