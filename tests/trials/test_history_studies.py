"""Histories and repeats as they are simulated: what is put in comes out."""

import numpy as np
import pytest

from stdfit.trials.fitted_histories import draw_fitted_kits
from stdfit.trials.histories import Change, draw_kits, true_error
from stdfit.trials.history_study import repeats
from stdfit.validity.change.history import history


def test_kits_without_errors_of_their_own_would_be_the_truth(usual_kit):
    """Errors in common leave differences alone: the mean of many kits moves by the drift."""
    change = Change("open", "offset_delay_ps", 3.0)
    kits = draw_kits(usual_kit, 2, change, np.random.default_rng(1))
    values = [one.kit.definition("open").combinations[0].value for one in kits]
    assert values[1] - values[0] == pytest.approx(3.0, abs=0.5)


def test_true_error_grows_by_the_drift(usual_kit):
    change = Change("open", "offset_delay_ps", 3.0)
    kits = draw_kits(usual_kit, 2, change, np.random.default_rng(1))
    now, later = (true_error(kits, usual_kit, change, matings, 1e9) for matings in (0.0, 20.0))
    assert later - now == pytest.approx(4e-12 * np.pi * 1e9 * 3.0, rel=0.2)


def test_a_drift_through_whole_fits():
    """Readings of three sessions, 3 ps of drift against some hundredths from kit to kit."""
    kits = draw_fitted_kits(3, 3.0, np.random.default_rng(2), same_calibration=True)
    (course,) = [one for one in history(kits, same_calibration=True).courses if one.standard == "open"]
    assert course.trend.slope.low <= 3.0 / 40.0 <= course.trend.slope.high
    assert course.trend.slope.low > 0.0


def test_table_of_repeats():
    lines = list(repeats(5, 2))
    assert len(lines) == 2 + 8 + 6
    assert all(line.count("|") == 6 for line in lines)
