"""A function that keeps what it gave last.

A solver asks for the residuals of a point and then, mostly, for the derivatives there; a model gives both at once.
"""

from collections.abc import Callable
from typing import Generic, TypeVar

import numpy as np

from stdfit.base.arrays import FloatArray

Found = TypeVar("Found")


class Latest(Generic[Found]):
    """A function of an array, computed anew only where the array is another one than last time.

    Parameters
    ----------
    function : callable
        Takes an array of shape (p,).
    """

    def __init__(self, function: Callable[[FloatArray], Found]) -> None:
        self._function = function
        self._last: tuple[FloatArray, Found] | None = None

    def __call__(self, values: FloatArray) -> Found:
        """Return the function at these values."""
        if self._last is None or not np.array_equal(values, self._last[0]):
            self._last = (values.copy(), self._function(values))
        return self._last[1]
