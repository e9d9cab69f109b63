"""The models once more, in their bare formulas and without derivatives: what one would hand to a general solver."""

from collections.abc import Callable

import numpy as np

from stdfit.fitting.problem import Problem


def gamma_of(kind: str, values: np.ndarray, f: np.ndarray, ohm: float) -> np.ndarray:
    """Return Γ of a standard, shape (n,), from its parameters in trade units."""
    jw = 2j * np.pi * f
    delay, loss, z0 = values[0] * 1e-12, values[1] * 1e9, values[2]
    if kind == "load":
        z = values[3] + jw * values[4] * 1e-12
        z = z / (1 + jw * values[5] * 1e-15 * z)
        end = (z - ohm) / (z + ohm)
    else:
        units = (1e-15, 1e-27, 1e-36, 1e-45) if kind == "open" else (1e-12, 1e-24, 1e-33, 1e-42)
        reactive = jw * np.polyval((values[3:] * units)[::-1], f)
        end = (
            (1 - reactive * ohm) / (1 + reactive * ohm)
            if kind == "open"
            else (reactive - ohm) / (reactive + ohm)
        )
    root = np.sqrt(f / 1e9)
    zc = z0 + (1 - 1j) * loss * root / (4 * np.pi * f)
    step = (zc - ohm) / (zc + ohm)
    near = (
        (end - step)
        / (1 - end * step)
        * np.exp(-2 * (jw * delay + (1 + 1j) * loss * delay * root / (2 * z0)))
    )
    return (near + step) / (1 + near * step)


def residual_function(problem: Problem) -> Callable[[np.ndarray], np.ndarray]:
    """Return the weighted residuals of a problem as a function of its scaled fitted quantities."""
    parts = []
    for observed, columns, weight in zip(problem.observed, problem.columns, problem.weights, strict=True):
        inside = weight > 0
        parts.append(
            (
                observed.kind,
                list(columns),
                observed.frequency_hz[inside],
                observed.gamma[inside],
                np.sqrt(weight[inside]),
            )
        )
    target, precision = problem.evidence()
    root = np.sqrt(precision)
    places, scales, held = problem.fitted, problem.scales, problem.values

    def residual(scaled: np.ndarray) -> np.ndarray:
        values = held.copy()
        values[places] = scaled * scales
        found = [
            ((gamma_of(kind, values[columns], f, problem.reference_ohm) - gamma) * weight).view(float)
            for kind, columns, f, gamma, weight in parts
        ]
        return np.concatenate([*found, (scaled - target) * root])

    return residual
