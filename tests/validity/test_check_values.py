"""What devices should be, against figures worked by hand."""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.base.records import Sweep
from stdfit.circuits.standard import reflection
from stdfit.data.bench_records import Given, StatedBound
from stdfit.validity.device.check_value import given_value, value_from_file, value_from_kit
from stdfit.validity.kit import curve

LINE = 1.959963984540054  # 95 % of a normal value on a line
HERTZ = np.array([1e9, 3e9])
EXACT = {"offset_loss_gohm_per_s": Given(0.0), "offset_z0_ohm": Given(50.0), "l0": Given(0.0)}


def test_a_length_that_is_uncertain():
    """dΓ/dτ = −2jωΓ: 0.1 ps at 1 GHz is 2π·1e9·2·1e-13 = 1.2566e-3 (derived)."""
    found = given_value("short", {"offset_delay_ps": Given(33.3, 0.1), **EXACT}, HERTZ, 50.0)
    np.testing.assert_allclose(found.gamma, -np.exp(-4j * np.pi * HERTZ * 33.3e-12), rtol=1e-12)
    np.testing.assert_allclose(found.bound, LINE * 1.2566371e-3 * np.array([1.0, 3.0]), rtol=1e-6)
    assert found.assumed == ()


def test_a_resistance_that_is_uncertain():
    """Γ = −1/3 at 25 of 50 Ω; dΓ/dR = 2·Z/(R + Z)² = 100/75² (derived)."""
    rest = {"offset_delay_ps": Given(0.0), "inductance_ph": Given(0.0), "capacitance_ff": Given(0.0)}
    line = {"offset_loss_gohm_per_s": Given(0.0), "offset_z0_ohm": Given(50.0)}
    found = given_value("load", {"resistance_ohm": Given(25.0, 0.02), **rest, **line}, HERTZ, 50.0)
    np.testing.assert_allclose(found.gamma, -1.0 / 3.0, rtol=1e-12)
    np.testing.assert_allclose(found.bound, LINE * 0.02 * 100.0 / 75.0**2, rtol=1e-9)


def test_what_is_not_given_widens_the_bound_and_is_told():
    found = given_value("open", {"offset_delay_ps": Given(30.0)}, HERTZ, 50.0)
    assert found.assumed == (
        "offset loss 1 ± 3 GΩ/s",
        "offset Z0 50 ± 1 Ω",
        "C0 40 ± 40 fF",
    )
    # 40 fF are 2 ps of delay at 50 Ω: at 1 GHz about 0.025, and the other two come on top.
    assert 0.7 * LINE * 0.0251 < found.bound[0] < 1.3 * LINE * 0.0251
    vague = given_value("load", {"resistance_ohm": Given(5.0)}, np.array([80e9]), 50.0)
    assert vague.bound[0] == 2.0


def test_another_kit_tells_nothing_outside_its_readings(by_hand):
    kit = by_hand({"load": {"load.resistance_ohm": 0.1}})
    grid = np.array([10e6, 1e9, 7e9])
    found = value_from_kit(kit, kit.definition("load"), grid)
    gamma, bound = curve(kit, kit.definition("load"), grid[1:2])
    assert (found.gamma[1], found.bound[1]) == (gamma[0], bound[0])
    assert np.isnan(found.bound[[0, 2]]).all()
    assert found.label == "'load' of Kit made by hand"


def test_a_file_between_its_points():
    """The bound covers what the straight line is wrong by, and is the stated one on the points themselves."""
    own = np.linspace(0.5e9, 6e9, 45)
    values = [55.0, 1.5, 50.0, 3.0, 0.0, 0.0, 0.0]
    sweep = Sweep(own, reflection("short", values, own, 50.0)[0])
    stated = StatedBound(np.array([0.8e9, 1e9, 5e9, 6e9]), np.array([1e-9, 1e-9, 3e-9, 3e-9]))
    on = value_from_file(sweep, stated, own[3:6])
    np.testing.assert_allclose(on.gamma, sweep.gamma[3:6], rtol=1e-12)
    np.testing.assert_allclose(on.bound, np.interp(own[3:6], [1e9, 5e9], [1e-9, 3e-9]), rtol=1e-9)
    fine = np.linspace(0.9e9, 5.9e9, 977)
    between = value_from_file(sweep, stated, fine)
    error = np.abs(between.gamma - reflection("short", values, fine, 50.0)[0])
    assert error.max() > 1e-7
    # The second difference is that of the points: it changes a little within a step.
    assert (error <= 1.2 * between.bound).all()
    assert between.bound.max() < 3.0 * error.max()
    outside = value_from_file(sweep, stated, np.array([0.4e9, 6.1e9]))
    assert np.isnan(outside.bound).all()
    # A table of bounds ends at its ends; a single bound holds everywhere.
    beyond = value_from_file(sweep, stated, np.array([0.7e9, 0.8e9, 6e9]))
    assert np.isnan(beyond.bound).tolist() == [True, False, False]
    single = value_from_file(sweep, StatedBound(np.array([1.0]), np.array([1e-3])), np.array([0.7e9, 6e9]))
    assert np.isfinite(single.bound).all()


@pytest.mark.parametrize("value, u", [(50.0, 1e200), (1e300, 0.1), (1e300, 1e300)])
def test_any_figures_give_a_value_without_a_warning(value, u):
    """Warnings are errors here."""
    found = given_value("load", {"resistance_ohm": Given(value, u)}, HERTZ, 50.0)
    assert np.isfinite(found.gamma).all()
    assert (found.bound <= 2.0).all()
    if value == 50.0:
        assert found.bound.tolist() == [2.0, 2.0]


def test_figures_that_give_no_reflection_tell_nothing():
    given = {"offset_delay_ps": Given(30.0), "offset_loss_gohm_per_s": Given(1e300)}
    assert np.isnan(given_value("open", given, HERTZ, 50.0).bound).all()


def test_nothing_can_be_changed_afterwards():
    found = given_value("short", {"offset_delay_ps": Given(33.3, 0.1)}, HERTZ, 50.0)
    assert not found.gamma.flags.writeable
    assert not found.bound.flags.writeable
    with pytest.raises(AttributeError):
        found.label = "x"
    assert replace(found, label="x").label == "x"
