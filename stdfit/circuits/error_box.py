"""Three-term correction of a one-port analyser: between reflections and raw readings."""

import numpy as np

from stdfit.base.arrays import ComplexArray


def solve_error_box(known: ComplexArray, read: ComplexArray) -> ComplexArray:
    """Return the error terms that turn known reflections into what was read.

    m = a + b·Γ + c·Γ·m; three standards give a, b and c exactly, more of them by least squares.

    Parameters
    ----------
    known, read : complex arrays of shape (..., s)
        Reflections Γ of s ≥ 3 standards, and the raw readings m of them.

    Returns
    -------
    complex array of shape (..., 3)
        a (directivity), b (reflection tracking − directivity × source match) and c (source match).

    Raises
    ------
    numpy.linalg.LinAlgError
        Two standards have the same reflection.

    Notes
    -----
    m = D + R·Γ/(1 − S·Γ) with a = D, b = R − D·S, c = S. D. Rytting, "An analysis of vector measurement accuracy
    enhancement techniques", 1980 (from memory).

    Examples
    --------
    >>> import numpy as np
    >>> known = np.array([1.0, -1.0, 0.0], dtype=complex)
    >>> solve_error_box(known, known).round(12).real.tolist()
    [0.0, 1.0, 0.0]
    """
    rows = np.stack([np.ones_like(read), known, known * read], axis=-1)
    if known.shape[-1] == 3:
        return np.asarray(np.linalg.solve(rows, read[..., None])[..., 0])
    return np.asarray((np.linalg.pinv(rows) @ read[..., None])[..., 0])


def corrected(box: ComplexArray, read: ComplexArray) -> ComplexArray:
    """Return the reflection behind raw readings: Γ = (m − a)/(b + c·m).

    Parameters
    ----------
    box : complex array of shape (..., 3)
    read : complex array of shape (...)
    """
    return np.asarray((read - box[..., 0]) / (box[..., 1] + box[..., 2] * read))


def seen_raw(box: ComplexArray, gamma: ComplexArray) -> ComplexArray:
    """Return the raw reading of a reflection: m = (a + b·Γ)/(1 − c·Γ).

    Parameters
    ----------
    box : complex array of shape (..., 3)
    gamma : complex array of shape (...)
    """
    return np.asarray((box[..., 0] + box[..., 1] * gamma) / (1.0 - box[..., 2] * gamma))
