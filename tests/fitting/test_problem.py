"""The joint problem: residuals, their derivatives, shared quantities, evidence."""

import numpy as np
import pytest

from stdfit.circuits.standard import PARAMETERS, reflection
from stdfit.fitting.observed import Observed
from stdfit.fitting.problem import Problem, Quantity

FREQUENCY = np.linspace(10e6, 6e9, 31)


def joint_problem():
    """An open and a short behind one line, evidence on two quantities, gaps in the readings of the short."""
    open_values = [20.0, 1.2, 50.0, 45.0, 0.0, -40.0, 0.0]
    short_values = [20.0, 1.2, 50.0, 4.0, 0.0, 0.0, 0.0]
    told = {"offset_delay_ps": ("given", 0.5), "offset_loss_gohm_per_s": ("assumed", 3.0)}
    quantities = []
    for parameter, value in zip(PARAMETERS["open"], open_values, strict=True):
        role, u = told.get(parameter.name, ("free" if parameter.name in ("c0", "c2") else "held", None))
        scale = 0.7 if parameter.name == "c2" else 2.0
        quantities.append(Quantity("open", parameter, role, value, u, scale))
    for parameter, value in zip(PARAMETERS["short"][3:], short_values[3:], strict=True):
        quantities.append(Quantity("short", parameter, "free" if parameter.name == "l0" else "unused", value))
    observed = tuple(
        Observed(kind, kind, FREQUENCY, reflection(kind, values, FREQUENCY, 50.0)[0], np.zeros((1, 31)))
        for kind, values in (("open", open_values), ("short", short_values))
    )
    weights = (np.full(31, 1e6), np.where(np.arange(31) % 3 == 0, 0.0, 4e6))
    return Problem(
        observed, tuple(quantities), ((0, 1, 2, 3, 4, 5, 6), (0, 1, 2, 7, 8, 9, 10)), weights, 50.0
    )


@pytest.fixture
def problem():
    return joint_problem()


@pytest.fixture
def elsewhere(problem):
    return problem.evidence()[0] * 1.1 + 0.3


def test_residual_has_readings_with_weight_and_evidence(problem, elsewhere):
    assert problem.residual(elsewhere).size == 2 * 31 + 2 * 20 + 2


def test_residual_is_zero_at_the_truth_with_its_evidence(problem):
    start, _ = problem.evidence()
    np.testing.assert_allclose(problem.residual(start), 0.0, atol=1e-9)


def test_jacobian_is_the_derivative_of_the_residual(problem, elsewhere):
    """Differences extrapolated once: L. F. Richardson, Phil. Trans. A 210, 1911, 307–357 (from memory)."""
    found = problem.jacobian(elsewhere)
    for k in range(elsewhere.size):
        unit = np.eye(elsewhere.size)[k]

        def central(step, unit=unit):
            return (problem.residual(elsewhere + step * unit) - problem.residual(elsewhere - step * unit)) / (
                2 * step
            )

        expected = (4 * central(0.005) - central(0.01)) / 3
        np.testing.assert_allclose(found[:, k], expected, rtol=0, atol=1e-7 * np.abs(expected).max())


def test_readings_without_weight_do_not_count(problem, elsewhere):
    spoilt = problem.observed[1].gamma.copy()
    spoilt[::3] = 77.0
    other = Problem(
        (problem.observed[0], Observed("short", "short", FREQUENCY, spoilt, np.zeros((1, 31)))),
        problem.quantities,
        problem.columns,
        problem.weights,
        50.0,
    )
    np.testing.assert_array_equal(other.residual(elsewhere), problem.residual(elsewhere))


def test_a_shared_line_acts_on_both_standards(problem):
    values = problem.values
    names = [problem.names()[i] for i in problem.fitted]
    for index in (0, 1):
        _, design = problem.model(index, values)
        assert np.abs(design[:, names.index("open.offset_delay_ps")]).max() > 0.0
    assert not problem.model(0, values)[1][:, names.index("short.l0")].any()
    assert not problem.model(1, values)[1][:, names.index("open.c0")].any()


def test_derivatives_are_per_scaled_quantity(problem):
    _, by_own = reflection("open", problem.values[:7], FREQUENCY, 50.0)
    _, design = problem.model(0, problem.values)
    place = [problem.names()[i] for i in problem.fitted].index("open.c2")
    np.testing.assert_allclose(design[:, place], 0.7 * by_own[:, 5], rtol=1e-14)


def test_one_quantity_twice_in_a_standard_adds_up():
    """Columns may name a quantity more than once; then the derivatives add."""
    base = joint_problem()
    same = Problem(base.observed[:1], base.quantities, ((0, 1, 2, 3, 4, 3, 6),), base.weights[:1], 50.0)
    _, by_own = reflection("open", base.values[[0, 1, 2, 3, 4, 3, 6]], FREQUENCY, 50.0)
    _, design = same.model(0, base.values)
    place = same.fitted.index(3)
    np.testing.assert_allclose(design[:, place], 2.0 * (by_own[:, 3] + by_own[:, 5]), rtol=1e-14)


def test_evidence_is_scaled(problem):
    target, precision = problem.evidence()
    names = [problem.names()[i] for i in problem.fitted]
    delay = names.index("open.offset_delay_ps")
    assert target[delay] == pytest.approx(20.0 / 2.0)
    assert precision[delay] == pytest.approx((2.0 / 0.5) ** 2)
    assert precision[names.index("open.c0")] == 0.0


def test_evidence_pulls_by_its_own_uncertainty(problem):
    start, _ = problem.evidence()
    delay = [problem.names()[i] for i in problem.fitted].index("open.offset_delay_ps")
    moved = start.copy()
    moved[delay] += 1.0 / 2.0  # 1 ps in the scale of 2 ps: two standard uncertainties of 0.5 ps
    assert problem.residual(moved)[-2] == pytest.approx(2.0)


def test_expand_is_the_inverse_of_scaling(problem):
    start, _ = problem.evidence()
    np.testing.assert_allclose(problem.expand(start), problem.values)
    np.testing.assert_allclose(problem.expand(start + 1.0)[problem.fitted], (start + 1.0) * problem.scales)


def test_held_and_unused_quantities_do_not_move(problem, elsewhere):
    still = [i for i in range(len(problem.quantities)) if i not in problem.fitted]
    np.testing.assert_array_equal(problem.expand(elsewhere)[still], problem.values[still])
    assert {problem.quantities[i].role for i in still} == {"held", "unused"}


def test_a_changed_copy_leaves_the_original(problem):
    place = problem.names().index("open.c0")
    other = problem.changed(place, role="held", value=33.0)
    assert other.quantities[place].value == 33.0
    assert problem.quantities[place].value == 45.0
    assert len(other.fitted) == len(problem.fitted) - 1
