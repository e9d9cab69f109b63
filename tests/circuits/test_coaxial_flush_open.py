"""A flush open: the upper bound above it, what it radiates, symmetries, and what its uncertainty is worth."""

from itertools import pairwise

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.special import j1

from stdfit.base.errors import RequestError
from stdfit.circuits.coaxial.aperture import aperture_of, edge_exponent
from stdfit.circuits.coaxial.flush_open import (
    finite_flange_share,
    flush_open,
    tem_bound_f,
)
from stdfit.circuits.coaxial.half_space import couple, half_space
from stdfit.circuits.coaxial.sides import VACUUM_F_PER_M

INNER, OUTER = 1.27e-3, 4.1e-3
SWEEP = np.linspace(0.0, 10e9, 6)


@pytest.mark.parametrize("ratio", [1.2, 2.3023, 4.0, 10.0])
def test_it_lies_below_the_bound_of_a_tem_field(ratio):
    bound = tem_bound_f(OUTER / ratio, OUTER, 1.0)
    for er in (1.0, 2.07, 9.8):
        found = flush_open(OUTER / ratio, OUTER, np.zeros(1), er=er, er_outside=1.0).capacitance_f[0]
        assert 0.8 * bound < found < bound
    # A filling of the line so dense that it forces its own field on the opening reaches the bound.
    dense = flush_open(OUTER / ratio, OUTER, np.zeros(1), er=1e5, er_outside=1.0).capacitance_f[0]
    assert dense == pytest.approx(bound, rel=1e-3, abs=0)
    assert dense < bound * (1 + 1e-5)


def test_radiation_rises_as_the_fourth_power():
    low = np.array([0.0, 10e6, 20e6, 200e6])
    g = flush_open(INNER, OUTER, low).conductance_s
    assert g[0] == 0.0
    assert g[2] / g[1] == pytest.approx(16.0, rel=1e-5, abs=0)
    assert g[3] / g[1] == pytest.approx(20.0**4, rel=1e-3, abs=0)


def test_radiation_of_a_tem_field():
    """G = (π/3)·k⁴·[(b² − a²)/(2 ln b/a)]²/η, a ring of magnetic current seen from afar (derived).

    A dense filling forces its TEM field on the opening; without, the pin's edge draws the field inwards and G is less.
    """
    a, b, f = INNER / 2, OUTER / 2, 100e6
    k = 2 * np.pi * f / 299792458.0
    known = np.pi / 3 * k**4 * ((b**2 - a**2) / (2 * np.log(b / a))) ** 2 / 376.730313
    dense, air = (
        flush_open(INNER, OUTER, np.array([f]), er=er, er_outside=1.0).conductance_s[0] for er in (1e5, 1.0)
    )
    assert dense == pytest.approx(known, rel=1e-3, abs=0)
    assert 0.7 * known < air < 0.9 * known


def test_even_in_frequency_and_scales_with_size():
    here, back = flush_open(INNER, OUTER, SWEEP), flush_open(INNER, OUTER, -SWEEP)
    assert np.array_equal(here.capacitance_f, back.capacitance_f)
    assert np.array_equal(here.conductance_s, back.conductance_s)
    assert np.all(np.diff(here.capacitance_f) > 0.0)
    assert np.all(here.conductance_s >= 0.0)
    small = flush_open(INNER / 3, OUTER / 3, 3 * SWEEP)
    assert small.capacitance_f * 3 == pytest.approx(here.capacitance_f, rel=1e-10, abs=0)
    assert small.conductance_s == pytest.approx(here.conductance_s, rel=1e-10, abs=0)


def test_one_medium_everywhere_multiplies_and_slows():
    still, filled = (flush_open(INNER, OUTER, SWEEP / er**0.5, er=er, er_outside=er) for er in (1.0, 4.0))
    assert filled.capacitance_f == pytest.approx(4 * still.capacitance_f, rel=1e-10, abs=0)
    assert filled.conductance_s == pytest.approx(2 * still.conductance_s, rel=1e-10, abs=0)


@pytest.mark.parametrize("frequency_hz", [0.0, 3e9, 12e9])
def test_the_integral_over_waves_against_another_rule(frequency_hz):
    """∫ X²·κ dκ/√(κ² − k²) of one smooth field, by adaptive quadrature after taking away the root."""
    opening = aperture_of(INNER / 2, OUTER / 2, (None, None), 2, 200)
    cut = 60 * np.pi / (OUTER / 2)
    k = 2 * np.pi * frequency_hz / 299792458.0
    side = half_space(opening, 1.0, cut, k)
    used = np.arange(1)
    basis = np.ones((1, 1))
    got = side.static(opening)[0, 0] + side.beyond_static(np.array([k]), used, basis)[0, 0, 0]

    def squared(kappa):
        return couple(opening, np.array([kappa]))[0, 0] ** 2

    t = np.linspace(0.0, np.sqrt(side.cut**2 - k**2), 60)
    stored = sum(quad(lambda x: squared(np.hypot(x, k)), low, high)[0] for low, high in pairwise(t))
    sent = quad(lambda x: squared(k * np.sin(x)) * k * np.sin(x), 0, np.pi / 2)[0]
    known = 2 * np.pi * VACUUM_F_PER_M * (stored - 1j * sent)
    assert got == pytest.approx(known, rel=1e-6, abs=0)


def test_coupling_is_the_transform_of_the_field():
    """r·E = 1/√(b − a): X = ∫J1(κr) dr, by a plain rule."""
    opening = aperture_of(1.0, 2.0, (None, None), 1, 20)
    r = 1.0 + (np.arange(100000) + 0.5) / 100000
    assert couple(opening, np.array([5.0]))[0, 0] == pytest.approx(np.mean(j1(5.0 * r)), rel=1e-8, abs=0)


@pytest.mark.parametrize(
    "ratio, er, outside",
    [
        (1.2, 1.0, 1.0),
        (2.3023, 1.0, 1.000635),
        (2.93, 1.0, 1.0),
        (3.228, 2.07, 1.0),
        (10.0, 1.0, 1.0),
        (2.3, 1.0, 78.0),
    ],
)
def test_the_uncertainty_covers_a_far_finer_computation(ratio, er, outside):
    frequency = np.array([0.0, 1e9, 8e9])
    given = {"er": er, "er_outside": outside}
    usual = flush_open(OUTER / ratio, OUTER, frequency, **given)
    finer = flush_open(OUTER / ratio, OUTER, frequency, waves=320, degree=6, **given)
    assert np.all(np.abs(usual.capacitance_f - finer.capacitance_f) < usual.u_numeric)
    unequal = np.abs(usual.conductance_s - finer.conductance_s)
    assert np.all(unequal <= usual.u_numeric * 2 * np.pi * frequency)
    assert np.all(usual.u_numeric < 1e-4 * usual.capacitance_f)


def test_half_as_many_waves_end_where_a_panel_ends():
    opening = aperture_of(1e-3, 2e-3, (edge_exponent(1, 1),) * 2, 3, 40)
    side = half_space(opening, 1.0, 1e5, 0.0)
    less = side.up_to(5e4)
    assert less.kappa.size < side.kappa.size
    assert less.kappa[-1] < less.cut < side.kappa[less.kappa.size]
    all_of_it = side.static(opening)
    with_tail = np.abs(less.static(opening) - all_of_it).max()
    assert with_tail < 1e-3 * np.abs(all_of_it).max()
    cut_off = 2 * np.pi * VACUUM_F_PER_M * np.abs(opening.tail(less.cut, (False, False))).max()
    assert with_tail < 0.1 * cut_off


def test_a_flange_that_ends():
    shares = [finite_flange_share(INNER, OUTER, width * OUTER) for width in (1.01, 1.2, 2.0, 10.0)]
    assert shares[0] < 0.04
    assert shares == sorted(shares, reverse=True)
    assert shares[-1] < 1e-4
    with pytest.raises(RequestError, match=r"not wider than the line's 4\.1 mm"):
        finite_flange_share(INNER, OUTER, OUTER)


def test_what_cannot_be_is_refused():
    with pytest.raises(RequestError, match="is no line"):
        flush_open(OUTER, INNER, SWEEP)
    with pytest.raises(RequestError, match="no relative permittivity"):
        flush_open(INNER, OUTER, SWEEP, er_outside=0.0)
    with pytest.raises(RequestError, match="not a number"):
        flush_open(INNER, OUTER, np.array([np.inf]))
    with pytest.raises(RequestError, match="a wave spreads"):
        flush_open(INNER, OUTER, np.array([200e9]))
    with pytest.raises(RequestError, match="too narrow"):
        flush_open(OUTER * (1 - 1e-6), OUTER, SWEEP)
