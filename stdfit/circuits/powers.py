"""Powers of frequency, the terms of C(f) and L(f)."""

import numpy as np

from stdfit.base.arrays import FloatArray


def powers_of(frequency_hz: FloatArray) -> FloatArray:
    """Return 1, f, f² and f³, shape (n, 4).

    By products: a power function takes ten times as long.

    Examples
    --------
    >>> import numpy as np
    >>> powers_of(np.array([2.0])).tolist()
    [[1.0, 2.0, 4.0, 8.0]]
    """
    square = frequency_hz * frequency_hz
    return np.column_stack([np.ones(frequency_hz.size), frequency_hz, square, square * frequency_hz])
