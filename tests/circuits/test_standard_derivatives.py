"""The complete models: all derivatives per trade unit, order of parameters, limits."""

import numpy as np
import pytest

from stdfit.circuits.line import see_through_line
from stdfit.circuits.load import load
from stdfit.circuits.open_end import open_end
from stdfit.circuits.short_end import short_end
from stdfit.circuits.standard import PARAMETERS, reflection

FREQUENCY = np.concatenate([[0.0], np.linspace(20e6, 9e9, 40)])
VALUES = {
    "open": [23.0, 1.9, 50.6, 47.0, 300.0, -90.0, 12.0],
    "short": [23.0, 1.9, 49.2, 5.0, -150.0, 60.0, -8.0],
    "load": [4.0, 0.8, 50.3, 50.7, 60.0, 15.0],
}
STEPS = {
    "open": [5.0, 1.0, 5.0, 20.0, 1000.0, 300.0, 60.0],
    "short": [5.0, 1.0, 5.0, 20.0, 1000.0, 300.0, 60.0],
    "load": [2.0, 0.5, 5.0, 5.0, 40.0, 40.0],
}
EVERY = [(kind, place) for kind, values in VALUES.items() for place in range(len(values))]


@pytest.mark.parametrize(("kind", "place"), EVERY, ids=[f"{k}-{PARAMETERS[k][p].name}" for k, p in EVERY])
def test_derivatives_per_trade_unit(extrapolated_derivative, kind, place):
    def at(value):
        values = list(VALUES[kind])
        values[place] = value
        return reflection(kind, values, FREQUENCY, 50.0)[0]

    expected = extrapolated_derivative(at, VALUES[kind][place], STEPS[kind][place])
    found = reflection(kind, VALUES[kind], FREQUENCY, 50.0)[1][:, place]
    size = np.abs(expected).max()
    assert size > 0.0
    np.testing.assert_allclose(found, expected, rtol=0, atol=1e-9 * size)


@pytest.mark.parametrize("kind", VALUES)
def test_trade_units_are_the_si_model(kind):
    v = VALUES[kind]
    if kind == "open":
        end, _ = open_end(FREQUENCY, np.array([v[3] * 1e-15, v[4] * 1e-27, v[5] * 1e-36, v[6] * 1e-45]), 50.0)
    elif kind == "short":
        end, _ = short_end(
            FREQUENCY, np.array([v[3] * 1e-12, v[4] * 1e-24, v[5] * 1e-33, v[6] * 1e-42]), 50.0
        )
    else:
        end, _ = load(FREQUENCY, v[3], v[4] * 1e-12, v[5] * 1e-15, 50.0)
    expected = see_through_line(
        end, FREQUENCY, delay_s=v[0] * 1e-12, loss_ohm_per_s=v[1] * 1e9, z0_ohm=v[2], reference_ohm=50.0
    ).gamma
    np.testing.assert_allclose(reflection(kind, v, FREQUENCY, 50.0)[0], expected, rtol=0, atol=1e-14)


def test_parameter_names_are_those_of_the_bench_file():
    offset = ("offset_delay_ps", "offset_loss_gohm_per_s", "offset_z0_ohm")
    names = {kind: tuple(parameter.name for parameter in own) for kind, own in PARAMETERS.items()}
    assert names == {
        "open": (*offset, "c0", "c1", "c2", "c3"),
        "short": (*offset, "l0", "l1", "l2", "l3"),
        "load": (*offset, "resistance_ohm", "inductance_ph", "capacitance_ff"),
    }


@pytest.mark.parametrize("kind", ["open", "short"])
def test_without_loss_everything_is_reflected_even_with_negative_delay(kind):
    values = [-3.0, 0.0, 52.0, *VALUES[kind][3:]]
    gamma, _ = reflection(kind, values, FREQUENCY, 50.0)
    np.testing.assert_allclose(np.abs(gamma), 1.0, rtol=0, atol=1e-12)


@pytest.mark.parametrize("kind", VALUES)
def test_passive_values_reflect_no_more_than_they_get(kind):
    gamma, _ = reflection(kind, VALUES[kind], FREQUENCY, 50.0)
    assert np.abs(gamma).max() <= 1.0 + 1e-12


@pytest.mark.parametrize(("kind", "limit"), [("open", 1.0), ("short", -1.0), ("load", 0.7 / 100.7)])
def test_zero_frequency_is_the_ideal_end(kind, limit):
    gamma, jacobian = reflection(kind, VALUES[kind], np.array([0.0]), 50.0)
    assert gamma[0] == pytest.approx(limit, abs=1e-14)
    by_resistance = 1.0 if kind == "load" else 0.0
    assert np.count_nonzero(np.abs(jacobian[0]) > 1e-14) == by_resistance


@pytest.mark.parametrize(("kind", "limit"), [("open", 1.0), ("short", -1.0), ("load", 0.7 / 100.7)])
def test_low_frequencies_lead_to_zero_frequency(kind, limit):
    """What loss leaves of a jump, r²τ/(4π·10⁹·Z0) of resistance, is below 2 mΩ for these values."""
    gamma, _ = reflection(kind, VALUES[kind], np.array([1.0]), 50.0)
    assert abs(gamma[0] - limit) < 4e-5
