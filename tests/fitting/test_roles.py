"""Which parameter may move, and where it starts."""

import numpy as np
import pytest

from stdfit.circuits.standard import PARAMETERS, reflection
from stdfit.fitting.observed import Observed
from stdfit.fitting.roles import (
    ASSUMED,
    SHAPES,
    Wish,
    build_problem,
    equivalent_delay,
    places_of,
    size_at,
    starting_values,
)
from stdfit.fitting.solve import least_squares

FREQUENCY = np.linspace(10e6, 6e9, 121)
TRUTH = {
    "open": [30.0, 1.0, 50.0, 48.0, 0.0, -30.0, 0.0],
    "short": [30.0, 1.0, 50.0, 3.0, 0.0, 0.0, 0.0],
    "load": [0.0, 0.0, 50.0, 50.4, 30.0, 0.0],
}
NOTHING = Wish({})


def readings_of(kind, values=None, frequency=FREQUENCY):
    gamma, _ = reflection(kind, values or TRUTH[kind], frequency, 50.0)
    return Observed.from_readings(kind, kind, frequency, [gamma])


def built(kinds, wishes, shapes, noise=1e-3):
    observed = [readings_of(kind) for kind in kinds]
    weights = [np.full(FREQUENCY.size, 1 / noise**2)] * len(kinds)
    return build_problem(observed, wishes, shapes, weights, starting_values(observed, 50.0), 50.0)


def role_of(problem, name):
    return problem.quantities[problem.names().index(name)].role


def test_every_shape_uses_parameters_of_its_kind():
    for kind, shapes in SHAPES.items():
        own = {parameter.name for parameter in PARAMETERS[kind]}
        assert all(set(used) <= own for used in shapes.values())


@pytest.mark.parametrize(("kind", "shape"), [(kind, shape) for kind, own in SHAPES.items() for shape in own])
def test_roles_of_every_shape(kind, shape):
    problem = built([kind], [NOTHING], [shape])
    for quantity in problem.quantities:
        name = quantity.parameter.name
        if name not in SHAPES[kind][shape]:
            assert quantity.role == ("held" if name == "offset_z0_ohm" else "unused")
            assert quantity.value == (50.0 if name == "offset_z0_ohm" else 0.0)
        elif name in ASSUMED:
            assert quantity.role == "assumed"
            assert quantity.value == ASSUMED[name][0]
            assert quantity.evidence_u == pytest.approx(ASSUMED[name][1] * size_at(quantity.parameter, 6e9))
        else:
            assert quantity.role in ("free", "assumed")
            assert (quantity.evidence_u is None) == (quantity.role == "free")


def test_given_with_uncertainty_is_evidence_and_without_is_held():
    wish = Wish({"offset_delay_ps": (29.0, 0.4), "c0": (47.0, None)})
    problem = built(["open"], [wish], ["even"])
    assert role_of(problem, "open.offset_delay_ps") == "given"
    assert role_of(problem, "open.c0") == "held"
    assert problem.values[problem.names().index("open.c0")] == 47.0
    names = [problem.names()[i] for i in problem.fitted]
    _, precision = problem.evidence()
    assert np.sqrt(precision[names.index("open.offset_delay_ps")]) / problem.scales[0] == pytest.approx(
        1 / 0.4
    )


def test_given_holds_for_what_the_shape_does_not_use():
    problem = built(["open"], [Wish({"c1": (12.0, None)})], ["constant"])
    assert problem.values[problem.names().index("open.c1")] == 12.0


def test_a_shared_line_is_one_set_of_quantities():
    problem = built(["open", "short"], [Wish({}, "short"), NOTHING], ["constant", "constant"])
    assert [name for name in problem.names() if "offset" in name] == [
        f"short.{parameter.name}" for parameter in PARAMETERS["short"][:3]
    ]
    assert problem.columns[0][:3] == problem.columns[1][:3]


def test_a_chain_of_sharing_leads_to_the_owner():
    problem = built(
        ["open", "short", "load"],
        [Wish({}, "short"), NOTHING, Wish({}, "open")],
        ["constant", "constant", "R"],
    )
    assert problem.columns[0][:3] == problem.columns[1][:3] == problem.columns[2][:3]


@pytest.mark.parametrize(
    ("kind", "place", "unit"),
    [("open", 4, 1e-15), ("open", 5, 1e-15), ("short", 4, 1e-12), ("short", 6, 1e-12)],
)
def test_size_of_a_coefficient_is_one_unit_at_the_top(kind, place, unit):
    parameter = PARAMETERS[kind][place]
    assert size_at(parameter, 6e9) * parameter.si * 6e9**parameter.power == pytest.approx(unit)


def test_size_of_what_does_not_vary_with_frequency_is_one():
    assert size_at(PARAMETERS["open"][0], 6e9) == 1.0
    assert size_at(PARAMETERS["load"][3], 6e9) == 1.0


@pytest.mark.parametrize("delay_s", [-3e-12, 0.0, 25e-12, 400e-12])
@pytest.mark.parametrize("end", [1.0, -1.0])
def test_equivalent_delay_of_a_plain_line(delay_s, end):
    gamma = end * np.exp(-4j * np.pi * FREQUENCY * delay_s)
    assert equivalent_delay(FREQUENCY, gamma) == pytest.approx(delay_s, abs=1e-16)


def test_starting_values_lie_near_the_truth():
    starts = starting_values([readings_of(kind) for kind in TRUTH], 50.0)
    assert starts["open.offset_delay_ps"] == pytest.approx(30.0, abs=2.0)
    assert starts["short.offset_delay_ps"] == pytest.approx(30.0, abs=2.0)
    assert starts["load.resistance_ohm"] == pytest.approx(50.4, abs=0.05)


@pytest.mark.parametrize("delay_ps", [-3.0, 5.0, 60.0, 250.0])
@pytest.mark.parametrize("kind", ["open", "short"])
def test_the_curve_is_found_from_the_starting_values(kind, delay_ps):
    """From readings without noise the curve comes back, however the parts are split."""
    values = [delay_ps, 1.0, 50.0, *TRUTH[kind][3:]]
    one = readings_of(kind, values)
    weight = np.full(FREQUENCY.size, 1e8)
    starts = starting_values([one], 50.0)
    problem = build_problem([one], [NOTHING], ["even"], [weight], starts, 50.0)
    solution = least_squares(problem.residual, problem.jacobian, problem.evidence()[0])
    gamma, _ = problem.model(0, problem.expand(solution.values))
    assert solution.converged
    assert np.abs(gamma - one.gamma).max() < 2e-4


def test_a_load_is_found_from_its_starting_values():
    problem = built(["load"], [NOTHING], ["R+L"], noise=1e-4)
    solution = least_squares(problem.residual, problem.jacobian, problem.evidence()[0])
    values = dict(zip(problem.names(), problem.expand(solution.values), strict=True))
    assert values["load.resistance_ohm"] == pytest.approx(50.4, abs=1e-3)
    assert values["load.inductance_ph"] == pytest.approx(30.0, abs=0.1)


def test_places_of_evidence():
    problem = built(["open"], [Wish({"offset_delay_ps": (29.0, 0.4)})], ["constant"])
    places = dict(places_of(problem))
    names = [problem.names()[i] for i in problem.fitted]
    assert [names[k] for k in places["given values"]] == ["open.offset_delay_ps"]
    assert [names[k] for k in places["assumed values"]] == ["open.offset_loss_gohm_per_s", "open.c0"]
