"""What is said of a Monte Carlo check: agreement, difference, magnitude near zero, draws left out."""

import numpy as np
import pytest

from stdfit.uncertainty.monte_carlo import Compared
from stdfit.validity.linear_check import CHANCE, SPREAD, check_lines


def hand_made(ratio, *, magnitude=1.0, magnitude_ratio=1.0, unsettled=0.0):
    """Figures of a standard at 1 … 5 GHz, linear radius 0.01."""
    linear = np.full(5, 0.01)
    return Compared(
        standard="open",
        frequency_hz=np.arange(1.0, 6.0) * 1e9,
        drawn=linear * ratio,
        linear=linear,
        drawn_magnitude_u=0.005 * np.ones(5) * magnitude_ratio,
        linear_magnitude_u=np.full(5, 0.005),
        magnitude=np.full(5, magnitude),
        unsettled=unsettled,
    )


def test_agreement_is_told_with_the_worst_difference():
    (line,) = check_lines([hand_made(np.array([1.0, 1.02, 0.96, 1.0, 1.0]))], 5000)
    assert line == "open: Monte Carlo (5000 draws) and linear bounds agree within 4 %"


def test_a_difference_is_told_with_band_and_size():
    (line,) = check_lines([hand_made(np.array([1.0, 1.3, 1.0, 1.16, 1.0]))], 5000)
    assert line == (
        "open: Monte Carlo (5000 draws) and linear bounds differ by more than 10 % at 2 … 4 GHz: "
        "there the bound should be 1.16 … 1.30 times as large"
    )


def test_a_difference_at_one_frequency_is_told_as_one():
    (line,) = check_lines([hand_made(np.array([1.0, 1.0, 0.8, 1.0, 1.0]))], 5000)
    assert "differ by more than 10 % at 3 GHz: there the bound should be 0.80 … 0.80 times" in line


def test_few_draws_must_differ_by_more_than_chance():
    """Of 100 draws a radius on a line has 9.5 %: three of those are allowed before anything is said."""
    assert CHANCE * SPREAD / np.sqrt(100.0) == pytest.approx(0.285)
    ratio = np.array([1.0, 1.2, 1.27, 0.8, 1.0])
    assert "agree within 27 %" in check_lines([hand_made(ratio)], 100)[0]
    assert "differ by more than 10 %" in check_lines([hand_made(ratio)], 10_000)[0]
    assert "differ by more than 28 %" in check_lines([hand_made(1.5 * np.ones(5))], 100)[0]


def test_a_magnitude_far_from_zero_is_of_no_concern():
    assert len(check_lines([hand_made(np.ones(5), magnitude=1.0, magnitude_ratio=0.6)], 5000)) == 1
    near = check_lines([hand_made(np.ones(5), magnitude=0.015, magnitude_ratio=0.6)], 5000)
    assert len(near) == 2
    assert "not linear at 1 … 5 GHz, where |Γ| is as small as its own uncertainty" in near[1]


def test_draws_that_did_not_settle_are_told():
    assert len(check_lines([hand_made(np.ones(5), unsettled=0.005)], 5000)) == 1
    lines = check_lines([hand_made(np.ones(5), unsettled=0.034)], 5000)
    assert lines[-1] == "open: 3 % of the draws did not settle and are left out"
