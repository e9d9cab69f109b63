"""Arrays that nobody can change behind another's back."""

from typing import Any

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]
ComplexArray = npt.NDArray[np.complex128]


def frozen_float(values: Any) -> FloatArray:
    """Return a read-only copy of `values` as float64."""
    array = np.array(values, dtype=np.float64)
    array.flags.writeable = False
    return array


def frozen_complex(values: Any) -> ComplexArray:
    """Return a read-only copy of `values` as complex128."""
    array = np.array(values, dtype=np.complex128)
    array.flags.writeable = False
    return array


def as_pairs(values: ComplexArray) -> FloatArray:
    """Return complex values of shape (n, ...) as real ones of shape (2n, ...): all real parts, then all imaginary."""
    return np.concatenate([values.real, values.imag], axis=0)
