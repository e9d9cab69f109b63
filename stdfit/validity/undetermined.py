"""What a set of standards read through unknown error terms cannot determine, in words."""

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.fitting.problem import Quantity
from stdfit.fitting.unknown_box import RawProblem, apart, coupled
from stdfit.validity.choose import INDEPENDENT_PIECES

READING_SIZE = 1e-3
"""Size of errors of the readings for which the question is asked; smooth ones, with few independent values."""

UNFIXED_PLANE_PS = 0.5
"""Standard uncertainty from which a common shift of the plane is said to be open."""

UNFIXED_SCALE = 0.003
"""Standard uncertainty from which a common scale of impedance is said to be open, as part of the impedance."""

UNREACHED = 1e-12
"""Smallest eigenvalue, against the largest, of directions in which quantities are told at all."""

COINCIDE = 0.1
"""How well standards must be told from each other, against +1, −1 and 0, else the error terms are open."""

SCALED_UP = ("offset_z0_ohm", "resistance_ohm", "inductance_ph", "offset_loss_gohm_per_s")
"""Parameters in proportion to an impedance, besides those of a short; those of an open are in inverse proportion."""


def undetermined(raw: RawProblem, scaled: FloatArray) -> tuple[str, ...]:
    """Return a sentence for each combination that readings and given values leave open.

    From the rank of N = Σ Re(Jᴴ·W·B·J) + P, P the precision of what is given; assumed evidence does not count. A
    change d of some quantities, whatever the others do, is known to 1/√(dᵀ·(N₁₁ − N₁₂·N₂₂⁻¹·N₂₁)·d).

    Parameters
    ----------
    raw : RawProblem
    scaled : array of shape (p,)
        The quantities at which the question is asked.
    """
    problem = raw.problem
    gamma, design = raw.model(scaled)
    inside = raw.weights.sum(axis=1) > 0.0
    gamma, design = gamma[inside], design[inside]
    weights = np.full(gamma.shape, INDEPENDENT_PIECES / gamma.shape[0] / READING_SIZE**2)
    _, weight = coupled(gamma, weights)
    normal = np.einsum("nsp,nst,ntq->pq", design.conj(), weight, design).real
    quantities = [problem.quantities[i] for i in problem.fitted]
    normal = normal + np.diag([_precision(one) for one in quantities])
    values = problem.expand(scaled)[problem.fitted]

    said = []
    held = {(one.standard, one.parameter.name) for one in problem.quantities if one.role == "held"}
    shift = _shift(quantities)
    if shift.any() and not any(name == "offset_delay_ps" for _, name in held):
        u = _uncertainty(normal, shift)
        if u > UNFIXED_PLANE_PS:
            said.append(
                f"a common shift of the plane is fixed to ± {u:.2g} ps only (one standard deviation), by the lengths "
                "that are given: measure one of them better"
            )
    scale = _scale(quantities, values)
    if scale.any() and not any(name in ("offset_z0_ohm", "resistance_ohm") for _, name in held):
        u = _uncertainty(normal, scale)
        if u > UNFIXED_SCALE:
            said.append(
                "a common scale of all impedances is not told by the readings: it rests on the assumed impedance of "
                "the lines. Give the DC resistance of the load"
            )
    return (*said, *_coinciding(raw, gamma, inside))


def _precision(quantity: Quantity) -> float:
    """Return the precision of a given value; that of an assumed one does not count."""
    if quantity.role != "given" or quantity.evidence_u is None:
        return 0.0
    return (quantity.scale / quantity.evidence_u) ** 2


def _uncertainty(normal: FloatArray, direction: FloatArray) -> float:
    """Return the standard uncertainty of a change of some quantities, while the others follow as they like."""
    moved = direction != 0.0
    here, others = normal[moved][:, moved], normal[~moved][:, ~moved]
    between = normal[moved][:, ~moved]
    left = here - between @ np.linalg.pinv(others, rcond=UNREACHED, hermitian=True) @ between.T
    information = float(direction[moved] @ left @ direction[moved])
    return 1.0 / np.sqrt(information) if information > 0.0 else np.inf


def _shift(quantities: Sequence[Quantity]) -> FloatArray:
    """Return a common shift of the plane by 1 ps, in scaled quantities."""
    return np.array(
        [1.0 / one.scale if one.parameter.name == "offset_delay_ps" else 0.0 for one in quantities]
    )


def _scale(quantities: Sequence[Quantity], values: FloatArray) -> FloatArray:
    """Return a common relative change of all impedances by one, in scaled quantities."""
    change = []
    for one, value in zip(quantities, values, strict=True):
        name = one.parameter.name
        up = name in SCALED_UP or name.startswith("l")
        down = name.startswith("c")
        change.append((value if up else -value if down else 0.0) / one.scale)
    return np.array(change)


def _band(low_hz: float, high_hz: float) -> str:
    """Return a band in words, or one frequency where it is no wider."""
    low, high = f"{low_hz / 1e9:.3g}", f"{high_hz / 1e9:.3g}"
    return f"{low} GHz" if low == high else f"{low} … {high} GHz"


def _coinciding(raw: RawProblem, gamma: ComplexArray, inside: npt.NDArray[np.bool_]) -> list[str]:
    """Name the bands in which too few standards differ from each other."""
    poor = apart(gamma) < COINCIDE
    if not poor.any():
        return []
    f = raw.problem.observed[0].frequency_hz[inside]
    edges = np.flatnonzero(np.diff(np.concatenate([[0], poor.astype(int), [0]])))
    bands = ", ".join(_band(float(f[start]), float(f[stop - 1])) for start, stop in edges.reshape(-1, 2)[:4])
    return [
        f"standards coincide on the Smith chart at {bands}: there the readings say nothing of the definitions. Add a "
        "standard of another length"
    ]
