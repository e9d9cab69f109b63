"""Nonlinear fits with certified results.

NIST/ITL StRD, Statistical Reference Datasets, nonlinear regression (published): data, both starting points,
certified values, their standard deviations and the residual standard deviations.
"""

from dataclasses import dataclass

import numpy as np
import pytest

from stdfit.fitting.solve import least_squares


def saturating(b, x):
    """y = b1·(1 − exp(−b2·x)) and its derivatives."""
    with np.errstate(over="ignore", invalid="ignore"):
        decay = np.exp(-b[1] * x)
        return b[0] * (1 - decay), np.stack([1 - decay, b[0] * x * decay], axis=1)


def rational(b, x):
    """y = b1·(x² + b2·x)/(x² + b3·x + b4) and its derivatives."""
    top, bottom = x**2 + b[1] * x, x**2 + b[2] * x + b[3]
    by = [top / bottom, b[0] * x / bottom, -b[0] * top * x / bottom**2, -b[0] * top / bottom**2]
    return b[0] * top / bottom, np.stack(by, axis=1)


@dataclass(frozen=True)
class Certified:
    """One data set and what is certified of it."""

    model: object
    x: list[float]
    y: list[float]
    starts: tuple[tuple[float, ...], tuple[float, ...]]
    values: list[float]
    deviations: list[float]
    residual_deviation: float


MISRA1A = Certified(
    saturating,
    [77.6, 114.9, 141.1, 190.8, 239.9, 289.0, 332.8, 378.4, 434.8, 477.3, 536.8, 593.1, 689.1, 760.0],
    [10.07, 14.73, 17.94, 23.93, 29.61, 35.18, 40.02, 44.82, 50.76, 55.05, 61.01, 66.40, 75.47, 81.78],
    ((500, 1e-4), (250, 5e-4)),
    [2.3894212918e02, 5.5015643181e-04],
    [2.7070075241e00, 7.2668688436e-06],
    1.0187876330e-01,
)
MGH09 = Certified(
    rational,
    [4.0, 2.0, 1.0, 0.5, 0.25, 0.167, 0.125, 0.1, 0.0833, 0.0714, 0.0625],
    [0.1957, 0.1947, 0.1735, 0.16, 0.0844, 0.0627, 0.0456, 0.0342, 0.0323, 0.0235, 0.0246],
    ((25, 39, 41.5, 39), (0.25, 0.39, 0.415, 0.39)),
    [1.9280693458e-01, 1.9128232873e-01, 1.2305650693e-01, 1.3606233068e-01],
    [1.1435312227e-02, 1.9633220911e-01, 8.0842031232e-02, 9.0025542308e-02],
    6.6279236551e-03,
)
BOXBOD = Certified(
    saturating,
    [1, 2, 3, 5, 7, 10],
    [109, 149, 149, 191, 213, 224],
    ((1, 1), (100, 0.75)),
    [2.1380940889e02, 5.4723748542e-01],
    [1.2354515176e01, 1.0455993237e-01],
    1.7088072423e01,
)
SETS = {"Misra1a": MISRA1A, "MGH09": MGH09, "BoxBOD": BOXBOD}


@pytest.mark.parametrize("start", [0, 1], ids=["far start", "near start"])
@pytest.mark.parametrize("name", SETS)
def test_certified_results(name, start):
    known = SETS[name]
    x, y = np.array(known.x, dtype=float), np.array(known.y, dtype=float)
    solution = least_squares(
        lambda b: known.model(b, x)[0] - y,
        lambda b: known.model(b, x)[1],
        np.array(known.starts[start], dtype=float),
    )
    assert solution.converged, solution.message
    np.testing.assert_allclose(solution.values, known.values, rtol=1e-6)
    np.testing.assert_allclose(solution.standard_deviations, known.deviations, rtol=1e-4)
    np.testing.assert_allclose(np.sqrt(solution.residual_variance), known.residual_deviation, rtol=1e-6)
