"""What physics demands of a device of which nothing is known: no gain, loss that rises steadily, a plain line."""

from itertools import product

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray, as_pairs
from stdfit.circuits.standard import PARAMETERS, reflection
from stdfit.fitting.observed import phase_slope
from stdfit.fitting.roles import ASSUMED
from stdfit.validity.device.check_value import Z0_PART

FULL = 0.9
"""A device reflects fully where |Γ| is above this at all but a few frequencies."""

FEW = 0.05
"""Part of the frequencies that may be below."""

ROUNDS = 15
"""Steps of the fit of a line; it settles in five."""

WEIGHINGS = 40
"""Times that a loss is weighed anew."""

STILL = 0.05
"""An electrical length, in rad, that is too small to divide by."""

HALVES = (1.0, 0.5, 0.25, 0.125, 0.0625)
"""Parts of a step that are tried until the fit gets better."""

LONGEST = 2.0
"""A step is no longer than so many standard uncertainties of the weak evidence, and an eighth of a turn at the top."""

INDEPENDENT = 4
"""Independent values that a smooth error has over a sweep."""

SMALLEST = 1e-6
"""A bound below this is taken for it, so that nothing is weighed without end."""

LOSS = "offset_loss_gohm_per_s"
LINES = {
    "open": ("offset_delay_ps", LOSS, "offset_z0_ohm", "c0", "c2"),
    "short": ("offset_delay_ps", LOSS, "offset_z0_ohm", "l0", "l2"),
}
"""What a plain line with a lossless end is described by; its end's C or L is even in frequency."""


def reflects_fully(gamma: ComplexArray) -> bool:
    """Tell whether a device reflects fully over the band."""
    return bool(np.quantile(np.abs(gamma), FEW) > FULL)


def steady_loss(frequency_hz: FloatArray, gamma: ComplexArray, bound: FloatArray) -> FloatArray:
    """Return |Γ| of the nearest full reflection whose loss rises with frequency as losses do.

    −ln |Γ| = p·√f·(1 + Im Γ/θ) + q·√f + r·f with p, q, r ≥ 0: conductors of a line of the electrical length θ = 4πfτ,
    which lose most where the current is largest; other conductors; dielectrics. Nearest is the one whose largest
    distance, in units of the bound, is smallest: least squares, weighted anew by what is left.

    Parameters
    ----------
    frequency_hz : array of shape (n,)
    gamma : complex array of shape (n,)
    bound : array of shape (n,)
        95 % bound on Γ.

    Notes
    -----
    The mean of the squared current on a line that ends in a short is (1 + sin θ/θ)/2, in an open (1 − sin θ/θ)/2; in
    both Im Γ is ± sin θ (derived). C. L. Lawson's algorithm, thesis, University of California, Los Angeles, 1961
    (from memory).
    """
    x = frequency_hz / frequency_hz[-1]
    columns = np.stack([np.sqrt(x) * (1.0 + _current(frequency_hz, gamma)), np.sqrt(x), x], axis=1)
    wanted = -np.log(np.maximum(np.abs(gamma), 1e-12))
    scale = 1.0 / np.maximum(bound, SMALLEST)
    share = np.full(x.size, 1.0 / x.size)
    best, smallest = np.zeros(3), np.inf
    for _ in range(WEIGHINGS):
        found = _not_negative(columns, wanted, scale * np.sqrt(share))
        left = np.abs(np.abs(gamma) - np.exp(-columns @ found)) * scale
        if left.max() < smallest:
            best, smallest = found, float(left.max())
        share = share * left
        total = float(share.sum())
        if total == 0.0:
            break
        share /= total
    return np.asarray(np.exp(-columns @ best))


def _current(frequency_hz: FloatArray, gamma: ComplexArray) -> FloatArray:
    """Return Im Γ/θ, from −1 to 1; at θ = 0 it is 1 for a short and −1 for an open."""
    theta = -phase_slope(frequency_hz, gamma) * frequency_hz
    short = np.abs(theta) < STILL
    return np.clip(np.where(short, -gamma.real, gamma.imag / np.where(short, 1.0, theta)), -1.0, 1.0)


def _not_negative(columns: FloatArray, wanted: FloatArray, weight: FloatArray) -> FloatArray:
    """Return the coefficients of least squares that are not below zero: the best of all choices of columns."""
    count = columns.shape[1]
    best, lowest = np.zeros(count), float(((wanted * weight) ** 2).sum())
    for chosen in product((False, True), repeat=count):
        used, found = np.flatnonzero(chosen), np.zeros(count)
        if used.size:
            found[used] = np.linalg.lstsq(columns[:, used] * weight[:, None], wanted * weight, rcond=None)[0]
        cost = float((((wanted - columns @ found) * weight) ** 2).sum())
        if (found >= 0.0).all() and cost < lowest:
            best, lowest = found, cost
    return best


def plain_line(
    frequency_hz: FloatArray, gamma: ComplexArray, bound: FloatArray, reference_ohm: float
) -> ComplexArray:
    """Return Γ of the plain line with an open or shorted end that is nearest to a device.

    A line of constant impedance with skin loss, and an end whose C or L is even in frequency. What readings tell poorly
    is kept where physics is by the weak evidence that a fit assumes; a loss below zero is none.

    Parameters
    ----------
    frequency_hz : array of shape (n,)
    gamma : complex array of shape (n,)
    bound : array of shape (n,)
        95 % bound on Γ.
    reference_ohm : float

    Returns
    -------
    complex array of shape (n,)

    Notes
    -----
    C and L of a lossless end are even: R. M. Foster, Bell Syst. Tech. J. 3, 1924, 259–267 (from memory).
    """
    fits = [
        _nearest(kind, lossless, frequency_hz, gamma, bound, reference_ohm)
        for kind in LINES
        for lossless in (False, True)
    ]
    return min((one for one in fits if one is not None), key=lambda one: one[0])[1]


def _nearest(
    kind: str,
    lossless: bool,
    frequency_hz: FloatArray,
    gamma: ComplexArray,
    bound: FloatArray,
    reference_ohm: float,
) -> tuple[float, ComplexArray] | None:
    """Return cost and Γ of the nearest line with an end of that kind, by Gauss and Newton; None for a gain."""
    names = [one.name for one in PARAMETERS[kind]]
    used = [name for name in LINES[kind] if not (lossless and name == LOSS)]
    places = [names.index(name) for name in used]
    weak = {**ASSUMED, "offset_z0_ohm": (reference_ohm, Z0_PART * reference_ohm)}
    # The evidence on a coefficient of f² is the size of its term at the top, in fF or pH.
    weak[used[-1]] = (0.0, weak[used[-1]][1] * 1e21 / float(frequency_hz[-1]) ** 2)
    wanted, sizes = np.array([weak.get(name, (0.0, np.inf)) for name in used]).T
    values = np.zeros(len(names))
    values[places] = wanted
    values[names.index("offset_z0_ohm")] = reference_ohm
    values[0] = -1e12 * phase_slope(frequency_hz, gamma) / (4.0 * np.pi)
    weight = _weight(bound)
    longest = np.where(np.isfinite(sizes), LONGEST * sizes, 1e12 / (16.0 * float(frequency_hz[-1])))

    def seen(trial: FloatArray) -> tuple[float, ComplexArray, FloatArray, FloatArray]:
        """Return cost, Γ, what is left, and the derivatives."""
        model, slopes = reflection(kind, trial, frequency_hz, reference_ohm)
        left = np.concatenate([as_pairs((gamma - model) * weight), (wanted - trial[places]) / sizes])
        design = np.concatenate([as_pairs(slopes[:, places] * weight[:, None]), np.diag(1.0 / sizes)])
        return float(left @ left), model, left, design

    cost, model, left, design = seen(values)
    for _ in range(ROUNDS):
        size = np.linalg.norm(design, axis=0)
        step = np.clip(np.linalg.lstsq(design / size, left, rcond=None)[0] / size, -longest, longest)
        for part in HALVES:
            trial = values.copy()
            trial[places] += part * step
            found = seen(trial)
            if found[0] < cost:
                break
        else:
            break
        values, (cost, model, left, design) = trial, found
    if values[names.index(LOSS)] < 0.0:
        return None
    return cost, model


def _weight(bound: FloatArray) -> FloatArray:
    """Return 2/U, scaled so that a smooth error counts as four independent values over the sweep."""
    return np.asarray(np.sqrt(INDEPENDENT / bound.size) * 2.0 / np.maximum(bound, SMALLEST))
