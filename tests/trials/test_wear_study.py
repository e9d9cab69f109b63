"""A short version of the study of wear: few pairs, with what so few can tell."""

import numpy as np
import pytest

from stdfit.trials.wear_pair import Worn, draw_pair
from stdfit.trials.wear_study import CHANGES, main, one_pair, wear_scenario
from stdfit.validity.change.wear import CHANGED

PAIRS = 8
FEW = 6


@pytest.mark.parametrize("same", [True, False])
def test_false_alarms(same):
    """At 5 % more than 3 of 8 pairs come about once in 2700 draws (binomial)."""
    found = [one_pair("demo", 5, number, same_calibration=same) for number in range(PAIRS)]
    assert sum(CHANGED in one.verdicts for one in found) <= 3


@pytest.mark.parametrize("worn", CHANGES, ids=lambda worn: f"{worn.standard} {worn.cause}")
def test_changes_are_found_and_named(worn):
    """At 95 % fewer than 4 of 6 are found once in 450 draws (binomial)."""
    found = [one_pair("demo", 6, number, same_calibration=True, worn=worn) for number in range(FEW)]
    hits = [one for one in found if one.verdicts == (CHANGED,)]
    assert len(hits) >= 4
    assert sum(one.among for one in hits) >= len(hits) - 2


def test_two_sessions_share_the_standards_and_only_if_asked_the_correction():
    for same in (True, False):
        first, second = draw_pair(wear_scenario(), np.random.default_rng(1), same_calibration=same)
        assert first.parts is second.parts
        assert all(np.array_equal(first.truth[name], second.truth[name]) for name in first.truth)
        shared = first.drawn.residuals.directivity is second.drawn.residuals.directivity
        assert shared == same
        assert not np.array_equal(first.readings["open"], second.readings["open"])


def test_what_has_worn_is_the_truth_of_the_second_session():
    """10 ps turns a full reflection by 7.2° at 1 GHz, and 1 Ω in series with 50 Ω is Γ = 0.0099 (derived)."""
    f = np.array([1e9])
    turned = Worn("open", "", shift_ps=10.0).on(np.array([1.0 + 0j]), f, 50.0)
    assert np.degrees(np.angle(turned[0])) == pytest.approx(-7.2)
    assert Worn("load", "", series_ohm=1.0).on(np.array([0j]), f, 50.0)[0] == pytest.approx(1.0 / 101.0)
    first, second = draw_pair(
        wear_scenario(), np.random.default_rng(1), same_calibration=True, worn=Worn("open", "", shift_ps=1.0)
    )
    assert not np.array_equal(first.truth["open"], second.truth["open"])
    assert np.array_equal(first.truth["load"], second.truth["load"])


def test_the_study_prints_two_tables(capsys):
    assert main(["--pairs", "1"]) == 0
    lines = capsys.readouterr().out.splitlines()
    assert sum(line.startswith("|---") for line in lines) == 2
    assert len(lines) == 5 + 2 + len(CHANGES)
