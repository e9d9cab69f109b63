"""What errors of three or more references do to a reading that is corrected with them.

Error terms that are wrong move a corrected Γ by the quadratic q(Γ) = D + T·Γ + M·Γ². With errors ε of the references,
the error terms solved from them give the quadratic that follows ε: exactly for three, by weighted least squares for
more.
"""

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.circuits.residual_map import term_weights


def quadratic_terms(references: ComplexArray, bound: FloatArray) -> ComplexArray:
    """Return how much the error of each reference puts into each residual term.

    (D, T, M) = (Vᴴ·W·V)⁻¹·Vᴴ·W·ε with Vᵢ = (1, Γᵢ, Γᵢ²) and W = 1/bound²: the pseudoinverse of the weighted V.

    Parameters
    ----------
    references : complex array of shape (n, r)
        Reflections of r ≥ 3 references.
    bound : array of shape (n, r)
        How sure each is; only the ratios count, and with three references not even these.

    Returns
    -------
    complex array of shape (n, 3, r)
        By power of Γ, then by reference.

    Notes
    -----
    A. Björck, *Numerical Methods for Least Squares Problems*, 1996, sec. 1.2 (from memory). For three references these
    are the coefficients of the Lagrange polynomials, as `residual_map.term_weights` has them.
    """
    if references.shape[-1] == 3:
        return np.swapaxes(term_weights(references), -1, -2)
    powers = references[..., None] ** np.arange(3)
    return np.asarray(np.linalg.pinv(powers / bound[..., None]) / bound[..., None, :])


def reference_weights(references: ComplexArray, bound: FloatArray, gamma: ComplexArray) -> ComplexArray:
    """Return how much of the error of each reference corrected readings show.

    Parameters
    ----------
    references : complex array of shape (n, r)
    bound : array of shape (n, r)
    gamma : complex array of shape (n, k)
        Reflections of k standards at each frequency.

    Returns
    -------
    complex array of shape (n, k, r)

    Examples
    --------
    >>> import numpy as np
    >>> references = np.array([[1.0, -1.0, 0.0]], dtype=complex)
    >>> reference_weights(references, np.ones((1, 3)), references)[0].real.tolist()
    [[1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]]
    """
    return np.asarray((gamma[..., None] ** np.arange(3)) @ quadratic_terms(references, bound))
