"""The linearised budget against refits of readings with drawn errors (a small Monte Carlo run, JCGM 101)."""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.fitting.solve import least_squares
from stdfit.uncertainty.smooth import bumps, correlation_lengths

DRAWS = 120
LENGTH = 2


@pytest.fixture(scope="module")
def refitted(bench):
    """Errors of the fitted quantities, shape (DRAWS, p), for readings with every source of the bench drawn."""
    rng = np.random.default_rng(101)
    frequency = bench.problem.observed[0].frequency_hz
    span = float(frequency[0]), float(frequency[-1])
    basis = bumps(frequency, *span, correlation_lengths(span[1] - span[0])[LENGTH])
    common, own, lumped, white = bench.sources

    def complex_normal(size):
        return rng.standard_normal(size) + 1j * rng.standard_normal(size)

    target, precision = bench.problem.evidence()
    told = [i for k, i in enumerate(bench.problem.fitted) if precision[k] > 0.0]
    errors = []
    for _ in range(DRAWS):
        shared = basis @ complex_normal(basis.shape[1])
        drawn = []
        for i, one in enumerate(bench.problem.observed):
            error = common.profiles[i] * shared + own.profiles[i] * (basis @ complex_normal(basis.shape[1]))
            error = error + lumped.vectors[i] * rng.standard_normal()
            error = error + np.sqrt(white.variances[i]) * complex_normal(frequency.size)
            gamma, _ = bench.problem.model(i, bench.problem.values)
            drawn.append(replace(one, gamma=gamma + error))
        problem = replace(bench.problem, observed=tuple(drawn))
        for i in told:
            quantity = problem.quantities[i]
            problem = problem.changed(i, value=quantity.value + quantity.evidence_u * rng.standard_normal())
        solution = least_squares(problem.residual, problem.jacobian, target)
        errors.append(solution.values - target)
    return np.array(errors)


def test_refits_scatter_on_gamma_as_the_budget_says(bench, refitted):
    """Mean square of δΓ over the draws, per standard, within 4 standard errors of what the shares give.

    The budget is linear, so that what is compared is Γ, which hardly bends, and not single coefficients.
    """
    _, shares = bench.shares()
    total = sum(share.covariances[LENGTH if share.covariances.shape[0] > 1 else 0, 0] for share in shares)
    values = bench.problem.expand(bench.scaled)
    for i in range(3):
        _, design = bench.problem.model(i, values)
        expected = np.einsum("np,pq,nq->n", design.conj(), total, design).real
        gamma, _ = bench.problem.model(i, values)
        power = []
        for error in refitted:
            moved, _ = bench.problem.model(i, bench.problem.expand(bench.scaled + error))
            power.append(np.mean(np.abs(moved - gamma) ** 2 / expected))
        assert np.mean(power) == pytest.approx(1.0, abs=4 * np.std(power) / np.sqrt(DRAWS) + 0.03)


def test_refits_are_not_biased(bench, refitted):
    """The mean of δΓ over the draws is zero within 4.5 standard errors of it at every frequency."""
    values = bench.problem.expand(bench.scaled)
    for i in range(3):
        _, design = bench.problem.model(i, values)
        for part in ((refitted @ design.T).real, (refitted @ design.T).imag):
            error = part.std(axis=0, ddof=1) / np.sqrt(DRAWS)
            assert (np.abs(part.mean(axis=0)) <= 4.5 * error + 1e-12).all()
