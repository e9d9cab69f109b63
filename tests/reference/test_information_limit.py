"""The information limit of an open: what noise alone leaves unknown.

50 fF, 201 points to 6 GHz, noise 0.001 per component: u(C0) = 13.9 fF with the delay free, 0.033 fF with it
fixed, u(τ + Z0·C0) = 0.0041 ps (derived from first principles: not a publication). The lowest frequency is
not stated with them; from 10 MHz they are 13.97 fF, 0.0325 fF and 0.00405 ps. That no unbiased estimate does
better is the Cramér–Rao bound: H. Cramér, Mathematical Methods of Statistics, 1946, sec. 32.3 (from memory).
"""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.circuits.standard import PARAMETERS
from stdfit.fitting.observed import Observed
from stdfit.fitting.problem import Problem, Quantity
from stdfit.fitting.solve import least_squares

FREQUENCY = np.linspace(10e6, 6e9, 201)
NOISE = 1e-3
C0_FF = 50.0
COMBINATION = np.array([1.0, 50.0 * 1e-3])  # τ in ps + Z0·C0, C0 in fF


def truth():
    y = 2j * np.pi * FREQUENCY * C0_FF * 1e-15 * 50.0
    return (1 - y) / (1 + y)


def problem_with(*free):
    values = {"offset_z0_ohm": 50.0, "c0": C0_FF}
    quantities = tuple(
        Quantity("open", one, "free" if one.name in free else "held", values.get(one.name, 0.0))
        for one in PARAMETERS["open"]
    )
    observed = Observed("open", "open", FREQUENCY, truth(), np.zeros((1, FREQUENCY.size)))
    weight = np.full(FREQUENCY.size, 1 / NOISE**2)
    return Problem((observed,), quantities, (tuple(range(len(quantities))),), (weight,), 50.0)


def limit_of(problem):
    solution = least_squares(problem.residual, problem.jacobian, problem.evidence()[0])
    return solution.unscaled_covariance


def simulated_errors(problem, seeds, rounds):
    """Return the errors of estimates from noisy readings, shape (seeds, p), by Gauss–Newton steps."""
    rng = np.random.default_rng(1967)
    start, _ = problem.evidence()
    errors = []
    for _ in range(seeds):
        noise = NOISE * (rng.standard_normal(FREQUENCY.size) + 1j * rng.standard_normal(FREQUENCY.size))
        noisy = replace(problem, observed=(replace(problem.observed[0], gamma=truth() + noise),))
        values = start
        for _ in range(rounds):
            design = noisy.jacobian(values)
            values = values - np.linalg.solve(design.T @ design, design.T @ noisy.residual(values))
        errors.append(values - start)
    return np.array(errors)


def test_with_the_delay_held():
    covariance = limit_of(problem_with("c0"))
    assert np.sqrt(covariance[0, 0]) == pytest.approx(0.033, abs=0.0005)


def test_with_the_delay_free():
    covariance = limit_of(problem_with("offset_delay_ps", "c0"))
    assert np.sqrt(covariance[1, 1]) == pytest.approx(13.9, abs=0.1)
    assert np.sqrt(COMBINATION @ covariance @ COMBINATION) == pytest.approx(0.0041, abs=0.00005)
    assert covariance[0, 1] / np.sqrt(covariance[0, 0] * covariance[1, 1]) < -0.9999


def test_estimates_reach_the_limit_with_the_delay_held():
    problem = problem_with("c0")
    errors = simulated_errors(problem, 2000, rounds=2)
    assert np.mean(errors[:, 0] ** 2) == pytest.approx(limit_of(problem)[0, 0], rel=0.1)


def test_estimates_reach_the_limit_with_the_delay_free():
    """One step from the truth: the limit is that of the linearised problem."""
    problem = problem_with("offset_delay_ps", "c0")
    limit = limit_of(problem)
    errors = simulated_errors(problem, 2000, rounds=1)
    assert np.mean(errors[:, 1] ** 2) == pytest.approx(limit[1, 1], rel=0.1)
    assert np.mean((errors @ COMBINATION) ** 2) == pytest.approx(COMBINATION @ limit @ COMBINATION, rel=0.1)
