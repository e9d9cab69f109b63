"""Error terms eliminated: exact where the definitions are, and what is left of errors is what the projector says.

Five invented parts behind an invented analyser without correction; the truth lies inside the model family.
"""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.circuits.error_box import corrected, seen_raw, solve_error_box
from stdfit.circuits.standard import reflection
from stdfit.fitting.observed import Observed
from stdfit.fitting.roles import Wish, build_problem
from stdfit.fitting.unknown_box import RawProblem, apart, box_directions, coupled, fitted_box

F = np.linspace(50e6, 6e9, 61)
PARTS = {
    "short": ("short", [0.0, 1.5, 50.2, 0.4, 0.0, 0.0, 0.0]),
    "open": ("open", [5.0, 1.4, 49.7, 38.0, 0.0, 120.0, 0.0]),
    "load": ("load", [5.0, 0.0, 50.3, 50.2, 20.0, 0.0]),
    "offset short 1": ("short", [33.3, 1.6, 50.1, 0.2, 0.0, 0.0, 0.0]),
    "offset short 2": ("short", [66.7, 1.5, 49.8, 0.0, 0.0, 0.0, 0.0]),
}
SHAPES = {"short": "constant+Z0", "open": "even+Z0", "load": "R+L+delay+Z0"}
GIVEN = {
    "short": {"offset_delay_ps": (0.0, 0.02)},
    "load": {"resistance_ohm": (50.2, 0.02)},
    "offset short 1": {"offset_delay_ps": (33.3, 0.1)},
    "offset short 2": {"offset_delay_ps": (66.7, 0.1)},
}
GAMMA = np.stack([reflection(kind, values, F, 50.0)[0] for kind, values in PARTS.values()], axis=1)
BOX = np.stack(
    [
        0.05 * np.exp(-4j * np.pi * F * 0.4e-9 + 0.3j),
        0.9 * np.exp(-4j * np.pi * F * 0.7e-9),
        0.1 * np.exp(-4j * np.pi * F * 0.25e-9 - 1j),
    ],
    axis=-1,
)
RAW = seen_raw(BOX[:, None], GAMMA)


@pytest.fixture
def weights():
    return 10.0 ** np.random.default_rng(1).uniform(2.0, 6.0, GAMMA.shape)


@pytest.fixture
def problem():
    """The five parts; evidence lies where their truth is, so that nothing pulls at it."""
    observed = [
        Observed(name, kind, F, GAMMA[:, k], np.zeros((1, F.size)))
        for k, (name, (kind, _)) in enumerate(PARTS.items())
    ]
    whole = build_problem(
        observed,
        [Wish(GIVEN.get(name, {})) for name in PARTS],
        [SHAPES[kind] for kind, _ in PARTS.values()],
        [np.full(F.size, 1e6) for _ in PARTS],
        {"open.offset_delay_ps": 0.0},
        50.0,
    )
    for i, quantity in enumerate(whole.quantities):
        _, values = PARTS[quantity.standard]
        place = [q.parameter.name for q in whole.quantities if q.standard == quantity.standard]
        whole = whole.changed(i, value=values[place.index(quantity.parameter.name)])
    return RawProblem(whole, RAW)


def truth(problem):
    return problem.problem.values[problem.problem.fitted] / problem.problem.scales


@pytest.mark.parametrize("three", [(0, 1, 2), (2, 3, 4), (1, 2, 4)])
def test_three_exact_standards_give_the_exact_solution(three, weights):
    """The shorts alone come close to each other; where they do, only accuracy is lost."""
    gamma, raw = GAMMA[:, three], RAW[:, three]
    np.testing.assert_allclose(
        fitted_box(gamma, raw, weights[:, three]), solve_error_box(gamma, raw), rtol=0, atol=1e-10
    )


def test_five_exact_standards_give_the_true_box_whatever_their_weights(weights):
    found = fitted_box(GAMMA, RAW, weights)
    np.testing.assert_allclose(found, BOX, rtol=0, atol=1e-10)
    np.testing.assert_allclose(corrected(found[:, None], RAW), GAMMA, rtol=0, atol=1e-10)


def test_the_box_is_the_best_in_the_plane_of_the_reflections(weights):
    """No small change of the terms lowers the sum of squares |Γ − (m − a)/(b + c·m)|² by more than second order."""
    rng = np.random.default_rng(2)
    raw = RAW + 1e-4 * (rng.standard_normal(RAW.shape) + 1j * rng.standard_normal(RAW.shape))

    def cost(box):
        return (weights * np.abs(corrected(box[:, None], raw) - GAMMA) ** 2).sum()

    box = fitted_box(GAMMA, raw, weights)
    best = cost(box)
    changes = rng.standard_normal((100, *box.shape, 2)) @ [1.0, 1j]
    assert min(cost(box + 3e-6 * change) for change in changes) >= (1.0 - 1e-6) * best
    # One pass in the plane of the readings alone is clearly further off.
    rows = np.stack([np.ones_like(raw), GAMMA, GAMMA * raw], axis=-1) * np.sqrt(weights)[..., None]
    first = (np.linalg.pinv(rows) @ (raw * np.sqrt(weights))[..., None])[..., 0]
    assert cost(first) > (1.0 + 1e-4) * best


def test_the_residual_is_zero_at_the_truth_and_evidence_comes_last(problem):
    residual = problem.residual(truth(problem))
    told = np.count_nonzero(problem.problem.evidence()[1])
    assert residual.size == 2 * F.size * len(PARTS) + told
    assert np.abs(residual).max() < 1e-7
    moved = truth(problem) + np.eye(truth(problem).size)[0]
    place = np.count_nonzero(problem.problem.evidence()[1][:1])
    assert np.count_nonzero(np.abs(problem.residual(moved)[-told:]) > 1e-12) == place


@pytest.mark.parametrize("inside", [F.size, 40])
def test_derivatives_against_finite_differences(problem, inside):
    """Exact where nothing is left; what is left out grows with the residual (L. Kaufman 1975)."""
    kept = np.arange(F.size) < inside
    whole = replace(problem.problem, weights=tuple(np.where(kept, 1e6, 0.0) for _ in PARTS))
    problem = RawProblem(whole, RAW)
    at = truth(problem)
    design = problem.jacobian(at)
    assert design.shape == (problem.residual(at).size, at.size)
    for k in range(at.size):
        step = 1e-4 * np.eye(at.size)[k]
        slope = (problem.residual(at + step) - problem.residual(at - step)) / 2e-4
        assert np.abs(design[:, k] - slope).max() < 1e-4 * max(np.abs(design[:, k]).max(), 1.0)


def test_a_small_residual_spoils_the_derivatives_only_a_little(problem):
    noise = 1e-3 * np.random.default_rng(3).standard_normal((2, *RAW.shape))
    noisy = RawProblem(problem.problem, RAW + noise[0] + 1j * noise[1])
    at = truth(problem)
    design = noisy.jacobian(at)
    for k in range(at.size):
        step = 1e-3 * np.eye(at.size)[k]
        slope = (noisy.residual(at + step) - noisy.residual(at - step)) / 2e-3
        assert np.linalg.norm(design[:, k] - slope) < 0.02 * np.linalg.norm(design[:, k])


def test_readings_beyond_the_fit_range_do_not_count(problem):
    kept = np.arange(F.size) < 40
    whole = replace(problem.problem, weights=tuple(np.where(kept, 1e6, 0.0) for _ in PARTS))
    spoiled = RAW.copy()
    spoiled[40:] += 0.1
    at = truth(problem) + 0.3
    np.testing.assert_array_equal(
        RawProblem(whole, RAW).residual(at), RawProblem(whole, spoiled).residual(at)
    )
    assert (RawProblem(whole, RAW).everywhere == 1e6).all()


def test_thinned_readings_stand_for_those_left_out(problem):
    """Both ends are kept and count as three readings: of an error that grows as f, 2·3/61 = 10 % too much."""
    thin = problem.thinned(3)
    assert thin.raw.shape == (21, len(PARTS))
    np.testing.assert_array_equal(thin.raw, RAW[::3])
    np.testing.assert_array_equal(thin.weights, 3.0 * problem.weights[::3])
    at = truth(problem)
    at[0] += 0.5
    whole, part = (np.sum(one.residual(at) ** 2) for one in (problem, thin))
    assert part == pytest.approx(whole, rel=0.1)
    np.testing.assert_array_equal(problem.thinned(1).residual(at), problem.residual(at))


def test_what_error_terms_can_follow_is_gone_and_nothing_else(weights):
    """B·V = 0, B² = B, W·B Hermitian and not negative, of rank s − 3."""
    rest, weight = coupled(GAMMA, weights)
    scale = np.abs(rest).max()
    assert np.abs(rest @ box_directions(GAMMA)).max() < 1e-12 * scale
    np.testing.assert_allclose(rest @ rest, rest, rtol=0, atol=1e-9 * scale)
    np.testing.assert_allclose(weight, np.swapaxes(weight.conj(), 1, 2), rtol=1e-9, atol=1e-9 * weights.max())
    np.testing.assert_allclose(np.trace(rest, axis1=1, axis2=2), len(PARTS) - 3.0, atol=1e-8)
    assert np.linalg.eigvalsh(weight).min() > -1e-9 * weights.max()


def test_the_projector_is_the_published_formula(weights):
    rest, _ = coupled(GAMMA, weights)
    v = box_directions(GAMMA)
    acting = np.swapaxes(v.conj(), 1, 2) * weights[:, None, :]
    np.testing.assert_allclose(
        rest, np.eye(len(PARTS)) - v @ np.linalg.solve(acting @ v, acting), rtol=1e-6, atol=1e-6
    )


def test_small_errors_of_readings_are_left_as_the_projector_says():
    """Corrected with the terms that they themselves moved, errors δ leave B·δ, to first order."""
    rng = np.random.default_rng(4)
    weights = np.exp(rng.standard_normal(GAMMA.shape))
    error = rng.standard_normal((2, *GAMMA.shape))
    error = 1e-6 * (error[0] + 1j * error[1])
    raw = seen_raw(BOX[:, None], GAMMA + error)
    left = corrected(fitted_box(GAMMA, raw, weights)[:, None], raw) - GAMMA
    rest, _ = coupled(GAMMA, weights)
    np.testing.assert_allclose(left, (rest @ error[..., None])[..., 0], rtol=0, atol=1e-9)


@pytest.mark.parametrize("different", [1, 2])
def test_coinciding_standards_do_no_harm(different):
    """At some frequency offset shorts meet the flush one: what is left there is finite, and fits no worse."""
    gamma = np.resize([-1.0 + 0j, 0.02 + 0.01j][:different], 5)[None]
    raw = seen_raw(BOX[:1, None], gamma) + 1e-13 * np.random.default_rng(6).standard_normal(gamma.shape)
    weights = np.ones(gamma.shape)
    box = fitted_box(gamma, raw, weights)
    assert np.abs(box).max() < 10.0
    np.testing.assert_allclose(corrected(box[:, None], raw), gamma, rtol=0, atol=1e-8)
    rest, weight = coupled(gamma, weights)
    assert np.isfinite(rest).all()
    assert np.abs(rest @ box_directions(gamma)).max() < 1e-12
    assert np.abs(weight).max() <= 1.0 + 1e-9


def test_how_far_apart_standards_are():
    ideal = np.array([1.0, -1.0, 0.0])
    listed = np.array([ideal, [1.0, -1.0, -1.0], [-1.0, -1.0 + 1e-3, 0.0]], dtype=complex)
    found = apart(listed)
    assert found[0] == pytest.approx(1.0)
    assert found[1] == pytest.approx(0.0, abs=1e-12)
    assert 1e-5 < found[2] < 1e-2
