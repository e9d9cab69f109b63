"""Wave numbers of coaxial lines and pipes against an independent search for roots, and their limits."""

import numpy as np
import pytest
from scipy.optimize import brentq
from scipy.special import jn_zeros, jnp_zeros, jv, jvp, yv, yvp

from stdfit.base.errors import RequestError
from stdfit.circuits.coaxial.modes import (
    PIPE_TE11,
    SPEED_M_PER_S,
    bracketed_roots,
    line_te11_hz,
    line_te11_root,
    line_tm_roots,
    pipe_te11_hz,
    pipe_tm_roots,
)

RATIOS = [1.01, 1.2, 2.0, 2.3023, 4.0, 10.0, 1000.0]


def found_by_scanning(function, count, step):
    """Return the first roots: change of sign on a fine grid, then Brent's method."""
    grid = np.arange(step / 7, 1e6 * step, step)
    found, start = [], 0
    while len(found) < count:
        part = grid[start : start + 2000]
        values = function(part)
        for place in np.flatnonzero(values[:-1] * values[1:] < 0.0):
            found.append(brentq(function, part[place], part[place + 1], xtol=1e-15, rtol=1e-14))
        start += 1999
    return np.array(found[:count])


@pytest.mark.parametrize("ratio", RATIOS)
def test_tm_roots_are_all_there_and_right(ratio):
    def cross(x):
        return jv(0, x) * yv(0, ratio * x) - jv(0, ratio * x) * yv(0, x)

    known = found_by_scanning(cross, 6, 0.05 * np.pi / (ratio - 1.0))
    assert line_tm_roots(ratio, 6) == pytest.approx(known, rel=1e-12, abs=0)


@pytest.mark.parametrize("ratio", RATIOS)
def test_te11_is_the_lowest_root_of_the_cross_product(ratio):
    def cross(x):
        return jvp(1, x) * yvp(1, ratio * x) - jvp(1, ratio * x) * yvp(1, x)

    known = found_by_scanning(cross, 1, 0.01 / ratio)[0]
    assert line_te11_root(ratio) == pytest.approx(known, rel=1e-11, abs=0)


def test_many_roots_of_a_pipe():
    assert pipe_tm_roots(200) == pytest.approx(jn_zeros(0, 200), rel=1e-13, abs=0)
    assert pipe_tm_roots(5) == pytest.approx(jn_zeros(0, 5), rel=1e-14, abs=0)


def test_a_thin_pin_leaves_the_modes_of_the_pipe():
    assert line_te11_root(1e6) * 1e6 == pytest.approx(PIPE_TE11, rel=1e-6, abs=0)
    assert line_tm_roots(1e60, 3) * 1e60 == pytest.approx(jn_zeros(0, 3), rel=0.02, abs=0)
    assert pytest.approx(jnp_zeros(1, 1)[0], rel=1e-14, abs=0) == PIPE_TE11


def test_a_narrow_gap_leaves_a_wave_around_the_mean_circumference():
    assert line_te11_root(1.001) * 2.001 / 2.0 == pytest.approx(1.0, rel=1e-6, abs=0)


def test_frequencies_follow_from_diameters_and_filling():
    assert pipe_te11_hz(7e-3) == pytest.approx(PIPE_TE11 * SPEED_M_PER_S / (np.pi * 7e-3), rel=1e-6, abs=0)
    assert line_te11_hz(3e-3, 7e-3, 4.0) == pytest.approx(line_te11_hz(3e-3, 7e-3) / 2.0, rel=1e-6, abs=0)


def test_the_mean_circumference_is_two_percent_low_at_50_ohm():
    """c/[π(a + b)], the usual estimate (common practice)."""
    inner, outer = 7e-3 / 2.3023, 7e-3
    estimate = SPEED_M_PER_S / (np.pi * 0.5 * (inner + outer))
    assert estimate / line_te11_hz(inner, outer) == pytest.approx(0.98, abs=0.002)


@pytest.mark.parametrize("ratio", [1.0, 0.5, float("nan"), float("inf")])
def test_what_is_no_line_is_refused(ratio):
    with pytest.raises(RequestError, match="smaller than the outer"):
        line_te11_root(ratio)
    with pytest.raises(RequestError, match="smaller than the outer"):
        line_tm_roots(ratio, 2)


def test_newtons_step_out_of_the_bracket_is_halved():
    """atan has Newton steps that run away from beyond 1.39."""

    def value_and_slope(x):
        return np.arctan(x - 0.3), 1.0 / (1.0 + (x - 0.3) ** 2)

    assert bracketed_roots(value_and_slope, np.array([-50.0]), np.array([9.0]))[0] == pytest.approx(
        0.3, rel=1e-6, abs=0
    )
