"""The ends of an open, a short and a load: values, derivatives, limits."""

import numpy as np
import pytest

from stdfit.circuits.load import load
from stdfit.circuits.open_end import open_end
from stdfit.circuits.short_end import short_end

FREQUENCY = np.concatenate([[0.0], np.linspace(20e6, 9e9, 40)])
OMEGA = 2 * np.pi * FREQUENCY
CAPACITANCE = np.array([48e-15, 0.6e-24, -0.2e-33, 0.04e-42])
INDUCTANCE = np.array([6e-12, -0.2e-21, 0.05e-30, -0.01e-39])
LOAD = (51.3, 80e-12, 20e-15)


def test_open_is_its_admittance():
    gamma, _ = open_end(FREQUENCY, CAPACITANCE, 50.0)
    total = np.polynomial.polynomial.polyval(FREQUENCY, CAPACITANCE)
    np.testing.assert_allclose((1 - gamma) / (1 + gamma) / 50.0, 1j * OMEGA * total, rtol=0, atol=1e-16)


def test_short_is_its_impedance():
    gamma, _ = short_end(FREQUENCY, INDUCTANCE, 50.0)
    total = np.polynomial.polynomial.polyval(FREQUENCY, INDUCTANCE)
    np.testing.assert_allclose(50.0 * (1 + gamma) / (1 - gamma), 1j * OMEGA * total, rtol=0, atol=1e-13)


def test_load_is_its_impedance():
    gamma, _ = load(FREQUENCY, *LOAD, 50.0)
    admittance = 1 / (LOAD[0] + 1j * OMEGA * LOAD[1]) + 1j * OMEGA * LOAD[2]
    np.testing.assert_allclose(50.0 * (1 + gamma) / (1 - gamma), 1 / admittance, rtol=1e-13)


@pytest.mark.parametrize(("end", "values"), [(open_end, CAPACITANCE), (short_end, INDUCTANCE)])
@pytest.mark.parametrize("order", range(4))
def test_derivatives_by_coefficients(contour_derivative, end, values, order):
    def at(value):
        changed = values.astype(complex)
        changed[order] = value
        return end(FREQUENCY, changed, 50.0)[0]

    expected = contour_derivative(at, values[order], np.abs(values[order]))
    found = end(FREQUENCY, values, 50.0)[1][:, order]
    np.testing.assert_allclose(found, expected, rtol=1e-9, atol=1e-12 * np.abs(expected).max())


@pytest.mark.parametrize("part", range(3))
def test_derivatives_of_the_load(contour_derivative, part):
    def at(value):
        return load(FREQUENCY, *LOAD[:part], value, *LOAD[part + 1 :], 50.0)[0]

    expected = contour_derivative(at, LOAD[part], 0.3 * LOAD[part])
    found = load(FREQUENCY, *LOAD, 50.0)[1][:, part]
    np.testing.assert_allclose(found, expected, rtol=1e-9, atol=1e-12 * np.abs(expected).max())


def test_values_and_derivatives_at_zero_frequency():
    opened, by_c = open_end(np.zeros(1), CAPACITANCE, 50.0)
    shorted, by_l = short_end(np.zeros(1), INDUCTANCE, 50.0)
    loaded, by_part = load(np.zeros(1), *LOAD, 50.0)
    assert opened[0] == 1.0
    assert shorted[0] == -1.0
    assert loaded[0] == pytest.approx((LOAD[0] - 50) / (LOAD[0] + 50), abs=1e-16)
    assert not by_c.any()
    assert not by_l.any()
    assert by_part[0, 0] == pytest.approx(100.0 / (LOAD[0] + 50) ** 2)
    assert not by_part[0, 1:].any()


def test_a_reactance_reflects_everything():
    for gamma in (open_end(FREQUENCY, CAPACITANCE, 50.0)[0], short_end(FREQUENCY, INDUCTANCE, 50.0)[0]):
        np.testing.assert_allclose(np.abs(gamma), 1.0, rtol=0, atol=1e-14)


def test_the_phase_of_a_constant_reactance_falls_with_frequency():
    """R. M. Foster, "A reactance theorem", Bell Syst. Tech. J. 3, 1924, 259–267 (from memory)."""
    for end, first in ((open_end, CAPACITANCE[0]), (short_end, INDUCTANCE[0])):
        gamma, _ = end(FREQUENCY, np.array([first, 0.0, 0.0, 0.0]), 50.0)
        assert (np.diff(np.angle(gamma / gamma[0])) < 0.0).all()


def test_open_and_short_are_dual():
    """C behind Z0 and L = C·Z0² have reflections of opposite sign."""
    opened, _ = open_end(FREQUENCY, CAPACITANCE, 75.0)
    shorted, _ = short_end(FREQUENCY, CAPACITANCE * 75.0**2, 75.0)
    np.testing.assert_allclose(shorted, -opened, rtol=0, atol=1e-14)


def test_a_load_of_huge_capacitance_is_a_short_and_of_huge_inductance_an_open():
    high = np.array([5e9])
    assert load(high, 50.0, 0.0, 1e-3, 50.0)[0][0] == pytest.approx(-1.0, abs=1e-6)
    assert load(high, 50.0, 1.0, 0.0, 50.0)[0][0] == pytest.approx(1.0, abs=1e-6)
