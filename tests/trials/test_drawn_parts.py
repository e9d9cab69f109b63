"""Simulated parts made to a drawing: the truth keeps to the drawing, and not by the code that reads it."""

import ast
from pathlib import Path

import numpy as np
import pytest

import stdfit.trials.drawn_parts as made_here
from stdfit.trials.drawn_parts import OPEN_FF_PER_CM, OPEN_RATIOS, draw_drawn_bench, open_capacitance_ff
from stdfit.trials.drawn_study import drawn_trial

BENCHES = 6


@pytest.fixture(scope="module")
def trials():
    return [drawn_trial(1, number) for number in range(BENCHES)]


@pytest.mark.parametrize(("ratio", "per_cm"), list(zip(OPEN_RATIOS, OPEN_FF_PER_CM, strict=True)))
def test_the_published_capacitances_are_met(ratio, per_cm):
    """36.242 fF/cm: P. I. Somlo, Proc. IREE Australia 28(1), 1967, 7–9, times 1.000635 for air; the others derived."""
    assert open_capacitance_ff(7.0 / ratio, 7.0) == pytest.approx(per_cm * 0.7 * np.pi * 1.000635, rel=1e-9)


def test_the_truth_of_an_open_does_not_come_from_the_fields_that_drawings_use():
    names = {
        node.module
        for node in ast.walk(ast.parse(Path(made_here.__file__).read_text(encoding="utf-8")))
        if isinstance(node, ast.ImportFrom)
    }
    assert not [name for name in names if "coaxial" in name or "validity" in name]


def test_true_parts_lie_within_their_tolerances():
    for number in range(20):
        made = draw_drawn_bench(np.random.default_rng(number))
        for part in made.drawing.parts:
            length = part.sections[0].length_m
            true_mm = made.delays_ps[part.name] * 0.299792458 / np.sqrt(1.000635)
            # u = t/√3
            assert abs(true_mm - 1e3 * length.value) <= 1e3 * np.sqrt(3.0) * length.u + 1e-9


def test_a_mistake_makes_the_open_longer():
    right, wrong = (draw_drawn_bench(np.random.default_rng(1), longer_mm=mm) for mm in (0.0, 0.5))
    assert wrong.delays_ps["open"] - right.delays_ps["open"] == pytest.approx(1.668, abs=2e-3)
    assert wrong.text == right.text
    assert wrong.delays_ps["short"] == right.delays_ps["short"]


def test_drawings_make_c0_at_least_five_times_surer(trials):
    assert all(one.u_c0_alone > 5.0 * one.u_c0 for one in trials)


def test_intervals_hold_the_truth(trials):
    """24 intervals of 95 %: were they independent, 19 or fewer would hold in 0.6 % of the cases (binomial)."""
    inside = [held for one in trials for held in one.inside.values()]
    assert len(inside) == 4 * BENCHES
    assert sum(inside) >= 20


def test_bounds_cover_the_truth(trials):
    """As for the other families: 0.95 − 3·0.10/√6."""
    assert np.mean([one.inside for trial in trials for one in trial.scores]) >= 0.95 - 0.3 / np.sqrt(BENCHES)
