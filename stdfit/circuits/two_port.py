"""A reciprocal two-port between the analyser and a standard: what is seen through it, and what its errors do.

Port 1 faces the analyser. S-parameters are kept as (S11, S21, S22) along the last axis; S12 = S21.
"""

from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.circuits.line import LOSS_FREQUENCY_HZ


def box_of(s: ComplexArray) -> ComplexArray:
    """Return the error terms of `error_box` that a two-port stands for.

    Γin = S11 + S21²·Γ/(1 − S22·Γ) = (a + b·Γ)/(1 − c·Γ) with a = S11, b = S21² − S11·S22, c = S22.

    Parameters
    ----------
    s : complex array of shape (..., 3)
        S11, S21, S22.

    Returns
    -------
    complex array of shape (..., 3)
    """
    s11, s21, s22 = s[..., 0], s[..., 1], s[..., 2]
    return np.stack([s11, s21**2 - s11 * s22, s22], axis=-1)


def product_of(box: ComplexArray) -> ComplexArray:
    """Return S21² = b + a·c of error terms of shape (..., 3): the sign of S21 is not in them."""
    return np.asarray(box[..., 1] + box[..., 0] * box[..., 2])


def terms_by_s(s: ComplexArray) -> ComplexArray:
    """Return how errors of the S-parameters act on a standard that is seen through the two-port.

    With P = S21² the standard is shown wrong by δΓ = δ0 + δ1·Γ + δ2·Γ², where δ0 = −dS11/P,
    δ1 = −(2·S21·dS21 − 2·S22·dS11)/P and δ2 = −(P·dS22 − 2·S22·S21·dS21 + S22²·dS11)/P: the derivatives of Γin, divided
    by dΓin/dΓ = P/(1 − S22·Γ)².

    Parameters
    ----------
    s : complex array of shape (..., 3)

    Returns
    -------
    complex array of shape (..., 3, 3)
        By term, then by S-parameter.
    """
    _, s21, s22 = s[..., 0], s[..., 1], s[..., 2]
    product = s21**2
    matrix = np.zeros((*s.shape, 3), dtype=complex)
    matrix[..., 0, 0] = -1.0 / product
    matrix[..., 1, 0] = 2.0 * s22 / product
    matrix[..., 1, 1] = -2.0 / s21
    matrix[..., 2, 0] = -(s22**2) / product
    matrix[..., 2, 1] = 2.0 * s22 / s21
    matrix[..., 2, 2] = -1.0
    return matrix


def s_by_terms(s: ComplexArray) -> ComplexArray:
    """Return the inverse of `terms_by_s`: which errors of the S-parameters the three terms come from.

    dS11 = −P·δ0, dS21 = −S21·(δ1/2 + S22·δ0), dS22 = −(δ2 + S22·δ1 + S22²·δ0).

    Parameters
    ----------
    s : complex array of shape (..., 3)

    Returns
    -------
    complex array of shape (..., 3, 3)
        By S-parameter, then by term.
    """
    _, s21, s22 = s[..., 0], s[..., 1], s[..., 2]
    matrix = np.zeros((*s.shape, 3), dtype=complex)
    matrix[..., 0, 0] = -(s21**2)
    matrix[..., 1, 0] = -s21 * s22
    matrix[..., 1, 1] = -0.5 * s21
    matrix[..., 2, 0] = -(s22**2)
    matrix[..., 2, 1] = -s22
    matrix[..., 2, 2] = -1.0
    return matrix


def terms_by_reading(box: ComplexArray, quadratic: ComplexArray) -> ComplexArray:
    """Return what errors of readings at port 1 put on a standard behind a two-port.

    A reading that is wrong by α0 + α1·m + α2·m² shows the standard wrong by that, times dΓ/dm = (1 − c·Γ)²/P; with
    m = (a + b·Γ)/(1 − c·Γ) this is again a quadratic: δ0 = (α0 + α1·a + α2·a²)/P,
    δ1 = (−2c·α0 + (b − a·c)·α1 + 2ab·α2)/P and δ2 = (c²·α0 − bc·α1 + b²·α2)/P (derived).

    Parameters
    ----------
    box : complex array of shape (..., 3)
        a, b, c of the two-port.
    quadratic : complex array of shape (..., 3)
        α0, α1, α2.

    Returns
    -------
    complex array of shape (..., 3)
    """
    a, b, c = box[..., 0], box[..., 1], box[..., 2]
    first, second, third = quadratic[..., 0], quadratic[..., 1], quadratic[..., 2]
    terms = np.stack(
        [
            first + a * second + a**2 * third,
            -2.0 * c * first + (b - a * c) * second + 2.0 * a * b * third,
            c**2 * first - b * c * second + b**2 * third,
        ],
        axis=-1,
    )
    return np.asarray(terms / product_of(box)[..., None])


@dataclass(frozen=True, slots=True, eq=False)
class LineTwoPort:
    """S-parameters of a length of line, and their derivatives.

    Attributes
    ----------
    s : complex array of shape (n, 3)
    by_delay, by_loss, by_z0 : complex arrays of shape (n, 3)
        Derivatives by the delay in s, the loss in Ω/s and the lossless impedance in Ω.
    """

    s: ComplexArray
    by_delay: ComplexArray
    by_loss: ComplexArray
    by_z0: ComplexArray


def line_two_port(
    frequency_hz: FloatArray, *, delay_s: float, loss_ohm_per_s: float, z0_ohm: float, reference_ohm: float
) -> LineTwoPort:
    """Return the two-port of a length of line whose impedance may differ from the reference.

    With ρ = (Zc − Zr)/(Zc + Zr) and t = e^{−γl}: S11 = S22 = ρ·(1 − t²)/(1 − ρ²t²), S21 = t·(1 − ρ²)/(1 − ρ²t²);
    γl and Zc as for the offset line of a standard.

    Parameters
    ----------
    frequency_hz : array of shape (n,)
        Above 0, in Hz.
    delay_s : float
        One-way delay in s.
    loss_ohm_per_s : float
        Offset loss at 1 GHz in Ω/s, skin effect only.
    z0_ohm : float
        Impedance without loss, in Ω.
    reference_ohm : float
        Reference impedance of the S-parameters, in Ω.

    Notes
    -----
    Two mismatched ends with their echoes summed up (derived); the line as in `line.see_through_line`, after
    H. A. Wheeler, Proc. IRE 30, 1942, 412–424.

    Examples
    --------
    >>> import numpy as np
    >>> line = line_two_port(np.array([1e9]), delay_s=1e-12, loss_ohm_per_s=0.0, z0_ohm=50.0, reference_ohm=50.0)
    >>> round(float(-np.degrees(np.angle(line.s[0, 1]))), 3), abs(line.s[0, 0])
    (0.36, 0.0)
    """
    omega = 2.0 * np.pi * frequency_hz
    root = np.sqrt(frequency_hz / LOSS_FREQUENCY_HZ)
    skin = (1 + 1j) * root / (2.0 * z0_ohm)
    zc_by_loss = (1 - 1j) * root / (2.0 * omega)
    zc = z0_ohm + zc_by_loss * loss_ohm_per_s
    step = (zc - reference_ohm) / (zc + reference_ohm)
    once = np.exp(-(1j * omega * delay_s + skin * loss_ohm_per_s * delay_s))
    echo = 1.0 - step**2 * once**2
    s11 = step * (1.0 - once**2) / echo
    s21 = once * (1.0 - step**2) / echo

    # By γl and by ρ, then the chain rule.
    by_length = np.stack(
        [2.0 * step * once**2 * (1.0 - step**2) / echo**2, -s21 * (1.0 + step**2 * once**2) / echo], axis=-1
    )
    by_step = np.stack(
        [
            (1.0 - once**2) * (1.0 + step**2 * once**2) / echo**2,
            -2.0 * step * once * (1.0 - once**2) / echo**2,
        ],
        axis=-1,
    )
    by_zc = by_step * (2.0 * reference_ohm / (zc + reference_ohm) ** 2)[:, None]

    def both(by: ComplexArray) -> ComplexArray:
        return by[:, [0, 1, 0]]

    length_by_z0 = -skin * loss_ohm_per_s * delay_s / z0_ohm
    return LineTwoPort(
        s=np.stack([s11, s21, s11], axis=-1),
        by_delay=both(by_length * (1j * omega + skin * loss_ohm_per_s)[:, None]),
        by_loss=both(by_length * (skin * delay_s)[:, None] + by_zc * zc_by_loss[:, None]),
        by_z0=both(by_length * length_by_z0[:, None] + by_zc),
    )


def loss_of_decibels(loss_db: float, delay_s: float, z0_ohm: float) -> float:
    """Return the offset loss in Ω/s of a line that takes so many dB one way at 1 GHz: r = 2·Z0·αl/τ.

    Parameters
    ----------
    loss_db : float
    delay_s : float
        Above 0.
    z0_ohm : float
    """
    return float(2.0 * z0_ohm * loss_db * np.log(10.0) / 20.0 / delay_s)
