"""Steps of the diameters of a coaxial line: limits, symmetry, and what the uncertainty is worth."""

import numpy as np
import pytest

from stdfit.base.errors import RequestError
from stdfit.circuits.coaxial.shielded_open import shielded_open
from stdfit.circuits.coaxial.sides import VACUUM_F_PER_M
from stdfit.circuits.coaxial.step import step_capacitance

STILL = np.zeros(1)


def test_no_step_is_nothing_also_where_a_bead_begins():
    end = step_capacitance(3e-3, 7e-3, 3e-3, 7e-3, np.linspace(0, 1e9, 3), er=1.0, er_beyond=2.0)
    assert np.array_equal(end.capacitance_f, np.zeros(3))
    assert np.array_equal(end.u_numeric_f, np.zeros(3))


@pytest.mark.parametrize("step", [1e-2, 1e-3])
def test_a_small_step_is_small(step):
    """Of the order of ε·(step)²·ln over the gap, times the circumference."""
    found = step_capacitance(3e-3, 7e-3, 3e-3 * (1 - step), 7e-3, STILL)
    scale = VACUUM_F_PER_M * np.pi * 3e-3 * (1.5e-3 * step / 2e-3) ** 2
    assert scale < found.capacitance_f[0] + found.u_numeric_f[0]
    assert found.capacitance_f[0] < 10 * scale


def test_a_vanishing_pin_leaves_a_shielded_open():
    """The line beyond is charged as 1/ln(b/a), and so is the difference."""
    known = shielded_open(3e-3, 7e-3, STILL).capacitance_f[0]
    thin = np.array([1e-20, 1e-40, 1e-80])
    found = [step_capacitance(3e-3, 7e-3, 3e-3 * x, 7e-3, STILL).capacitance_f[0] for x in thin]
    missing = (known - np.array(found)) * np.log(7e-3 / (3e-3 * thin))
    assert missing == pytest.approx(missing[-1], rel=0.05, abs=0)
    assert found[-1] == pytest.approx(known, rel=0.01, abs=0)


@pytest.mark.parametrize(
    "first, second",
    [((3e-3, 7e-3), (2e-3, 7e-3)), ((3e-3, 7e-3), (3e-3, 6e-3)), ((3e-3, 7e-3), (2e-3, 6e-3))],
)
def test_either_way_round(first, second):
    f = np.array([0.0, 10e9])
    there = step_capacitance(*first, *second, f, er=1.0, er_beyond=2.2)
    back = step_capacitance(*second, *first, f, er=2.2, er_beyond=1.0)
    assert there.capacitance_f == pytest.approx(back.capacitance_f, rel=1e-10, abs=0)
    assert there.capacitance_f[1] > there.capacitance_f[0] > 0.0


def test_two_steps_at_one_plane_are_less_than_the_two_apart():
    """The field of a pin and a bore that widen together is squeezed less than by either one."""
    inner = step_capacitance(3e-3, 6e-3, 2e-3, 6e-3, STILL).capacitance_f[0]
    outer = step_capacitance(3e-3, 6e-3, 3e-3, 7e-3, STILL).capacitance_f[0]
    both = step_capacitance(3e-3, 6e-3, 2e-3, 7e-3, STILL).capacitance_f[0]
    assert outer < both < inner + outer


@pytest.mark.parametrize("er", [(10.0, 1.0), (1.0, 10.0)])
@pytest.mark.parametrize("radii", [(1.5, 3.5, 1.5, 5.5), (1.5, 3.5, 1.0, 3.5)])
def test_with_the_power_of_its_edge_a_field_of_two_polynomials_will_do(radii, er):
    """With the fillings the wrong way round in the power, C would be 0.1 to 0.7 % off."""
    diameters = 2e-3 * np.array(radii)
    given = {"er": er[0], "er_beyond": er[1]}
    simple = step_capacitance(*diameters, STILL, degree=2, **given).capacitance_f[0]
    finer = step_capacitance(*diameters, STILL, waves=640, degree=7, **given).capacitance_f[0]
    assert simple == pytest.approx(finer, rel=3e-5, abs=0)


@pytest.mark.parametrize(
    "radii, er",
    [
        ((1.5, 3.5, 1.0, 3.5), (1, 1)),
        ((1.5, 3.5, 1.49, 3.5), (1, 1)),
        ((0.59, 3.5, 2.4, 3.5), (3.45, 2.14)),
        ((1.5, 3.5, 1.5, 5.5), (2.07, 1)),
        ((1.5, 3.5, 1.2, 3.0), (1, 4)),
        ((1.5, 3.5, 0.1, 8.0), (1, 1)),
    ],
)
def test_the_uncertainty_covers_a_far_finer_computation(radii, er):
    diameters = 2e-3 * np.array(radii)
    f = np.array([0.0, 3e9])
    usual = step_capacitance(*diameters, f, er=er[0], er_beyond=er[1])
    finer = step_capacitance(*diameters, f, er=er[0], er_beyond=er[1], waves=640, degree=7)
    assert np.all(np.abs(usual.capacitance_f - finer.capacitance_f) < usual.u_numeric_f)


def test_what_cannot_be_is_refused():
    with pytest.raises(RequestError, match="is no line"):
        step_capacitance(7e-3, 3e-3, 3e-3, 7e-3, STILL)
    with pytest.raises(RequestError, match="leave no opening"):
        step_capacitance(1e-3, 2e-3, 3e-3, 7e-3, STILL)
    with pytest.raises(RequestError, match="too narrow"):
        step_capacitance(1e-3, 1.000001e-3, 1e-3, 7e-3, STILL)
