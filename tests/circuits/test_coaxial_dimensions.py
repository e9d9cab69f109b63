"""Impedance, delay, loss and skin of a coaxial line from its dimensions."""

import numpy as np
import pytest
from scipy import constants

from stdfit.base.errors import RequestError
from stdfit.circuits.coaxial.dimensions import (
    VACUUM_H_PER_M,
    VACUUM_OHM,
    delay_s,
    flat_short_ohm,
    line_impedance_ohm,
    offset_loss_ohm_per_s,
    surface_resistance_ohm,
)
from stdfit.circuits.coaxial.sides import VACUUM_F_PER_M
from stdfit.circuits.line import see_through_line

COPPER = 5.8e7


def test_constants_against_the_library():
    """CODATA as shipped with scipy, whatever its year: the 2018 and 2022 values differ by 6e-11."""
    assert pytest.approx(constants.epsilon_0, rel=1e-9, abs=0) == VACUUM_F_PER_M
    assert pytest.approx(constants.mu_0, rel=1e-9, abs=0) == VACUUM_H_PER_M
    assert pytest.approx(376.730313, rel=1e-8, abs=0) == VACUUM_OHM


def test_impedance():
    """59.9585·ln(D/d)/√εr (published constant of the trade; exact value derived)."""
    assert line_impedance_ohm(1.0, np.e) == pytest.approx(59.9585, abs=1e-4)
    assert line_impedance_ohm(1.52e-3, 3.5e-3) == pytest.approx(50.0, abs=0.02)
    assert line_impedance_ohm(1.27e-3, 4.1e-3, 2.07) == pytest.approx(48.84, abs=0.01)


def test_delay():
    assert delay_s(0.299792458) == pytest.approx(1e-9, rel=1e-6, abs=0)
    assert delay_s(-1e-3, 4.0) == pytest.approx(-6.6713e-12, rel=1e-4, abs=0)


def test_skin_of_copper():
    """At 1 GHz 8.2502 mΩ (published value for 5.8e7 S/m)."""
    assert surface_resistance_ohm(1e9, COPPER) == pytest.approx(8.2502e-3, rel=1e-4, abs=0)
    assert surface_resistance_ohm(np.array([0.0, 4e9]), COPPER) == pytest.approx(
        [0.0, 2 * 8.2502e-3], rel=1e-4, abs=0
    )


@pytest.mark.parametrize("outer, inner, known", [(7.0e-3, 3.04e-3, 0.785e9), (3.5e-3, 1.52e-3, 1.569e9)])
def test_offset_loss_of_air_lines(outer, inner, known):
    """Metal of 1.3e7 S/m (derived)."""
    assert offset_loss_ohm_per_s(inner, outer, 1.3e7) == pytest.approx(known, rel=1e-3, abs=0)


def test_offset_loss_gives_the_attenuation_of_the_line():
    """α·l = R'·l/(2·Z0) with R' = (Rs/π)(1/d + 1/D); twice that is lost by an open at its end."""
    inner, outer, length, f = 3.04e-3, 7e-3, 0.1, 4e9
    z0 = line_impedance_ohm(inner, outer)
    loss = offset_loss_ohm_per_s(inner, outer, 1.3e7)
    seen = see_through_line(
        np.array([1.0 + 0j]),
        np.array([f]),
        delay_s=delay_s(length),
        loss_ohm_per_s=loss,
        z0_ohm=z0,
        reference_ohm=z0,
    )
    resistance = surface_resistance_ohm(f, 1.3e7) / np.pi * (1 / inner + 1 / outer)
    assert np.abs(seen.gamma[0]) == pytest.approx(np.exp(-resistance * length / z0), rel=1e-3, abs=0)


def test_loss_of_two_metals_and_of_a_filling():
    steel_pin = offset_loss_ohm_per_s(1e-3, 3e-3, 1e6, conductivity_outer_s_per_m=1e8)
    both = offset_loss_ohm_per_s(1e-3, 3e-3, 1e8)
    assert steel_pin / both == pytest.approx((10 * 3 + 1) / (3 + 1), rel=1e-6, abs=0)
    assert offset_loss_ohm_per_s(1e-3, 3e-3, 1e8, er=4.0) == pytest.approx(both / 2, rel=1e-6, abs=0)


def test_roughness():
    """1 + (2/π)·atan(1.4·(Δ/δ)²): 1 when smooth, 1.6051 at Δ = δ, 2 when rough (Hammerstad and Jensen, from memory).

    δ of copper at 1 GHz is 2.0898 µm (published value).
    """
    smooth, depth = surface_resistance_ohm(1e9, COPPER), 2.0898e-6
    assert surface_resistance_ohm(1e9, COPPER, depth) / smooth == pytest.approx(
        1 + 2 / np.pi * np.arctan(1.4), rel=1e-4, abs=0
    )
    assert surface_resistance_ohm(1e9, COPPER, 100 * depth) / smooth == pytest.approx(2.0, abs=1e-4)


def test_a_flat_short_has_below_a_picohenry_at_1_ghz():
    f = np.array([1e9, 4e9])
    z = flat_short_ohm(3.04e-3, 7e-3, f, 1.3e7)
    assert z.real == pytest.approx(z.imag, rel=1e-6, abs=0)
    assert z.real[0] == pytest.approx(17.427e-3 / (2 * np.pi) * np.log(7 / 3.04), rel=1e-3, abs=0)
    assert z.real[1] == pytest.approx(2 * z.real[0], rel=1e-6, abs=0)
    assert z.imag[0] / (2 * np.pi * f[0]) < 1e-12


@pytest.mark.parametrize("conductivity", [0.0, -1.0, float("nan"), float("inf")])
def test_what_conducts_nothing_is_refused(conductivity):
    with pytest.raises(RequestError, match="conductivity"):
        offset_loss_ohm_per_s(1e-3, 3e-3, conductivity)


def test_other_refusals():
    with pytest.raises(RequestError, match="roughness"):
        surface_resistance_ohm(1e9, COPPER, -1e-6)
    with pytest.raises(RequestError, match="is no line"):
        line_impedance_ohm(3e-3, 1e-3)
    with pytest.raises(RequestError, match="no relative permittivity"):
        delay_s(1.0, 0.9)
