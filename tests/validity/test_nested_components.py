"""Components of variance from nested readings."""

import numpy as np
import pytest

from stdfit.trials.repeats import draw_values, study_values
from stdfit.validity.change.nested import GAIN, Components, Design, components

# Wing lengths of mosquitoes, 3 cages × 4 females × 2 measurements (R. R. Sokal, F. J. Rohlf, Biometry, two-level
# nested analysis of variance with equal sample sizes; data and mean squares from memory, which agree with each other).
WINGS = [
    *(58.5, 59.5, 77.8, 80.9, 84.0, 83.6, 70.1, 68.3),
    *(69.8, 69.8, 56.0, 54.5, 50.7, 49.3, 63.8, 65.8),
    *(56.6, 57.5, 77.8, 79.2, 69.9, 69.2, 62.1, 64.5),
]
MEAN_SQUARES = (332.8379, 191.1864, 1.3017)
UNEVEN = [[2, 1, 3], [1, 2], [1, 1, 1, 1], [2, 2, 2], [3, 1]]


def test_published_example():
    found = components(Design.of([[2] * 4] * 3), np.array(WINGS))
    a, b, e = MEAN_SQUARES
    assert found.sd**2 == pytest.approx([(a - b) / 8.0, (b - e) / 2.0, e], rel=1e-4)
    assert found.freedoms.tolist() == [2.0, 9.0, 12.0]


def test_interval_of_the_lowest_level_is_that_of_chi_square():
    """χ² of 12 degrees of freedom: 4.404 and 23.337 at 2.5 and 97.5 % (from memory)."""
    found = components(Design.of([[2] * 4] * 3), np.array(WINGS))
    exact = np.sqrt(12.0 * MEAN_SQUARES[2] / np.array([23.337, 4.404]))
    assert [found.low[2], found.high[2]] == pytest.approx(exact, rel=1e-3)


@pytest.mark.parametrize("counts", [[[2] * 4] * 5, UNEVEN, [[5, 1], [1] * 6, [2, 1, 3]]])
def test_estimates_are_right_on_average(counts):
    """Squares of the estimates, negative ones not cut off by a large truth: within 4 standard errors of 500 draws."""
    design, truth = Design.of(counts), np.array([6.0, 2.0, 0.5])
    squares = np.array(
        [components(design, draw_values(design, truth, np.random.default_rng(k))).sd ** 2 for k in range(500)]
    )
    error = squares.std(axis=0) / np.sqrt(500)
    # Where calibrations hardly differ the estimate is cut off at zero, which moves its mean up by a little.
    assert (np.abs(squares.mean(axis=0) - truth**2) <= 4.0 * error + [0.5, 0.0, 0.0]).all()


@pytest.mark.parametrize("counts, circular", [([[2] * 4] * 5, False), (UNEVEN, False), (UNEVEN, True)])
def test_intervals_hold_the_truth(counts, circular):
    """1000 designs: one standard deviation of the rate is 0.7 %, and 93 … 99 % is asked for."""
    rates = study_values(counts, (1.0, 1.0, 0.2), 1000, 3, circular=circular)
    assert all(0.93 <= rate <= 0.99 for rate in rates)


def test_half_the_intervals_would_not_do():
    """The check can fail: intervals whose ends lie half as far off in the logarithm hold clearly less."""
    design, held = Design.of([[2] * 4] * 5), []
    for k in range(200):
        found = components(design, draw_values(design, (1.0, 1.0, 0.2), np.random.default_rng(k)))
        low, high = np.sqrt(found.low[1:] * found.sd[1:]), np.sqrt(found.high[1:] * found.sd[1:])
        held.append((low <= [1.0, 0.2]) & (high >= [1.0, 0.2]))
    assert np.mean(held) < 0.85


def test_what_the_design_does_not_tell_is_not_told():
    one = components(Design.of([[2, 2, 2]]), np.arange(6.0))
    assert np.isnan(one.sd).tolist() == [True, False, False]
    single = components(Design.of([[1, 1, 1], [1, 1, 1]]), np.arange(6.0))
    assert np.isnan(single.sd).tolist() == [False, False, True]
    touched = components(Design.of([[3], [3]]), np.arange(6.0))
    assert np.isnan(touched.sd).tolist() == [False, True, False]


def test_complex_errors_on_a_line_count_once_and_circular_ones_twice():
    design = Design.of([[2] * 40])
    rng = np.random.default_rng(4)
    line = components(design, rng.standard_normal(80) * (0.6 + 0.8j))
    circle = components(design, rng.standard_normal((2, 80)).T @ [1.0, 1j])
    assert line.freedoms[2] == pytest.approx(40.0)
    assert 70.0 < circle.freedoms[2] <= 80.0


def test_identical_readings_scatter_by_nothing():
    found = components(Design.of([[2, 2], [2, 2]]), np.full(8, 1.0 + 2.0j))
    assert found.sd.tolist() == [0.0, 0.0, 0.0]
    assert found.worth == (1, 1, 1)


def made(a, b, e, repeats=1.0):
    return Components(np.array([a, b, e]), np.zeros(3), np.zeros(3), np.ones(3), (1, 1, 1), repeats)


def test_uncertainty_of_a_mean():
    assert made(3.0, 4.0, 0.0).of_mean(1) == pytest.approx(5.0)
    assert made(0.0, 0.0, 6.0, repeats=4.0).of_mean(9) == pytest.approx(1.0)


def test_one_connection_does_not_say_what_a_mean_of_connections_is_worth():
    """What scatters from connection to connection stands in no level of five repeats of one connection."""
    alone = components(Design.of([[5]]), np.arange(5.0))
    assert np.isnan([alone.of_mean(n) for n in (1, 5)]).all()
    # One connection in each calibration: it stays in the level above, and so in the mean.
    above = components(Design.of([[3], [3]]), np.arange(6.0))
    assert np.isfinite(above.of_mean(1))
    assert np.isfinite(components(Design.of([[1, 1, 1]]), np.arange(3.0)).of_mean(1))


@pytest.mark.parametrize("above, single", [(0.0, 1.0), (0.5, 1.0), (1.0, 1.0), (0.1, 1.0), (1.0, 0.0)])
def test_worth_making_is_where_one_more_brings_less(above, single):
    """The closed form against a search; without a floor averaging alone gives 5: √(5/6) = 0.913, √(4/5) = 0.894."""
    from stdfit.validity.change.nested import _worth

    (found,) = _worth(np.array([[above**2], [single**2], [0.0]]), 1.0)

    def u(n):
        return made(above, single, 0.0).of_mean(n)

    wanted = next(n for n in range(1, 100) if 1.0 - u(n + 1) / u(n) < GAIN)
    assert found == wanted
    if above == 0.0:
        assert found == 5
