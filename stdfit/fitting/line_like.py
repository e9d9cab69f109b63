"""The line that is most like a two-port: delay, loss and impedance by least squares."""

from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, frozen_complex, frozen_float
from stdfit.circuits.two_port import LineTwoPort, line_two_port
from stdfit.fitting.solve import least_squares

UNITS = np.array([1e-12, 1e9, 1.0])
"""Of delay in ps, loss in GΩ/s and impedance in Ω."""


@dataclass(frozen=True, slots=True, eq=False)
class LineLike:
    """A line fitted to S-parameters.

    Attributes
    ----------
    values : array of shape (3,)
        Delay in ps, loss in GΩ/s, impedance in Ω.
    left : complex array of shape (n, 3)
        S minus the line's.
    follow : array of shape (3, n, 6)
        How a change of the real and imaginary parts of S moves the values.
    """

    values: FloatArray
    left: ComplexArray
    follow: FloatArray

    def __post_init__(self) -> None:
        object.__setattr__(self, "values", frozen_float(self.values))
        object.__setattr__(self, "left", frozen_complex(self.left))
        object.__setattr__(self, "follow", frozen_float(self.follow))


def most_like_line(
    s: ComplexArray, frequency_hz: FloatArray, u: FloatArray, reference_ohm: float
) -> LineLike:
    """Return the line whose S-parameters come nearest.

    Parameters
    ----------
    s : complex array of shape (n, 3)
        S11, S21, S22.
    frequency_hz : array of shape (n,)
        Above 0.
    u : array of shape (n, 3)
        How sure each is; only the ratios count.
    reference_ohm : float

    Notes
    -----
    The start is the slope of the phase of S21, its magnitude, and the reference impedance.
    """
    root = 1.0 / np.maximum(u, 1e-3 * u.max() if u.any() else 1.0)

    def line(values: FloatArray) -> LineTwoPort:
        delay, loss, z0 = values * UNITS
        return line_two_port(
            frequency_hz,
            delay_s=float(delay),
            loss_ohm_per_s=float(loss),
            z0_ohm=float(z0),
            reference_ohm=reference_ohm,
        )

    def residual(values: FloatArray) -> FloatArray:
        return _pairs((line(values).s - s) * root).ravel()

    def jacobian(values: FloatArray) -> FloatArray:
        found = line(values)
        each = [found.by_delay, found.by_loss, found.by_z0]
        return np.stack(
            [_pairs(own * unit * root).ravel() for own, unit in zip(each, UNITS, strict=True)],
            axis=-1,
        )

    values = least_squares(residual, jacobian, _start(s, frequency_hz, reference_ohm)).values
    design = jacobian(values)
    follow = (np.linalg.pinv(design) * np.repeat(root, 2, axis=1).ravel()).reshape(3, frequency_hz.size, 6)
    return LineLike(values, s - line(values).s, follow)


def _start(s: ComplexArray, frequency_hz: FloatArray, reference_ohm: float) -> FloatArray:
    """Return a delay in ps, a loss in GΩ/s and an impedance in Ω to start from."""
    phase = np.unwrap(np.angle(s[:, 1]))
    delay = max(-float(np.sum(phase * frequency_hz) / np.sum(frequency_hz**2)) / 2e-12 / np.pi, 1.0)
    root = np.sqrt(frequency_hz / 1e9)
    nepers = -float(np.sum(np.log(np.abs(s[:, 1])) * root) / np.sum(root**2))
    return np.array([delay, 2e3 * reference_ohm * nepers / delay, reference_ohm])


def _pairs(values: ComplexArray) -> FloatArray:
    """Return complex values of shape (n, q) as real ones of shape (n, 2q): real and imaginary part side by side."""
    return np.stack([values.real, values.imag], axis=-1).reshape(values.shape[0], -1)
