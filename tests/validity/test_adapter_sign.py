"""The sign of S21 from its square: right where it can be told, and told where it cannot. All lines are invented."""

import numpy as np
import pytest

from stdfit.base.errors import FitError
from stdfit.circuits.two_port import line_two_port
from stdfit.data.bench_records import Given
from stdfit.validity.adapter_sign import signed_root

NOTHING = 1e-4
"""Bound on the phase of readings that are nearly perfect, in rad."""


def s21_of(f, delay_ps, z0=51.0):
    return line_two_port(f, delay_s=1e-12 * delay_ps, loss_ohm_per_s=2e9, z0_ohm=z0, reference_ohm=50.0).s[
        :, 1
    ]


def root(f, true, estimate=None, bound=NOTHING):
    return signed_root(true**2, f, np.full(f.size, bound), estimate, "barrel")


@pytest.mark.parametrize("low_hz", [10e6, 1e9])
@pytest.mark.parametrize("estimate", [None, Given(1.0, 0.03), Given(1.0, 0.1)])
@pytest.mark.parametrize("delay_ps", [20.0, 95.0, 300.0, 430.0])
def test_the_sign_is_right_where_it_is_told(low_hz, estimate, delay_ps):
    """At 1 GHz 300 ps turn S21 by −108° and 430 ps by −155°: there the principal root has the other sign."""
    f = np.linspace(low_hz, 6e9, 201)
    true = s21_of(f, delay_ps)
    # The estimate is off by one of its standard uncertainties, to either side.
    for side in (-1.0, 1.0) if estimate else (0.0,):
        told = None if estimate is None else Given(delay_ps * (1 + side * estimate.u), delay_ps * estimate.u)
        np.testing.assert_allclose(root(f, true, told), true, atol=1e-12)


def test_an_estimate_tells_it_where_the_readings_do_not():
    """A phase that may be off by 0.02 rad over 10 to 10.2 GHz is off by a hundred times as much when continued to 0."""
    f = np.linspace(10e9, 10.2e9, 51)
    true = s21_of(f, 95.0)
    with pytest.raises(FitError, match=r"the sign of S21 of 'barrel' cannot be told.*\ngive delay_ps"):
        root(f, true, bound=0.02)
    np.testing.assert_allclose(root(f, true, Given(95.5, 0.5), bound=0.02), true, atol=1e-12)


def test_an_estimate_that_is_too_uncertain_is_told():
    f = np.linspace(10e9, 10.2e9, 51)
    with pytest.raises(FitError, match=r"cannot be told: where its phase ends.*\n.*smaller u"):
        root(f, s21_of(f, 95.0), Given(95.0, 10.0), bound=0.02)


def test_steps_that_are_too_wide_are_told():
    """1.6 ns turn S21² by 0.8 of a turn between readings 250 MHz apart: it looks like 0.2 the other way round."""
    f = np.arange(0.25e9, 6e9, 0.25e9)
    true = s21_of(f, 1600.0)
    with pytest.raises(FitError, match="turns too fast from reading to reading"):
        root(f, true)
    np.testing.assert_allclose(root(f, true, Given(1610.0, 10.0)), true, atol=1e-12)
    with pytest.raises(FitError, match="too many turns for readings 250 MHz apart"):
        root(f, true, Given(1600.0, 300.0))


def test_an_estimate_that_contradicts_the_readings_is_told():
    """At 1 GHz 95 ps and 595 ps are half a turn apart: each evidence is firm, and they differ in the sign."""
    f = np.linspace(1e9, 6e9, 201)
    with pytest.raises(
        FitError, match=r"the slope of its phase means about 95\.\d ps\nmend the estimate of 595 ps"
    ):
        root(f, s21_of(f, 95.0, 50.0), Given(595.0, 3.0))
