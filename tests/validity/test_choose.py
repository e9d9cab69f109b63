"""Range and order are chosen by the limit that they give."""

import numpy as np
import pytest

from stdfit.trials import Scenario, StatedDecibels, draw_bench
from stdfit.trials.families import sweep
from stdfit.trials.score import score

GOOD_DB = 50.0


def limits_of_the_open(seed, resonance_hz):
    """Characterise a bench within 0.03 with an analyser that is not the limit."""
    good = np.array([GOOD_DB])
    scenario = Scenario(
        frequency_hz=sweep(50e6, 6e9, 239),
        residual=StatedDecibels(np.array([1e9]), good, good, 20 * np.log10(1 + 10 ** (-good / 20))),
        connections=4,
        offset_delay_ps=(12.0, 30.0),
        resonance_hz=resonance_hz,
        resonance_standard="open",
    )
    kit, scores = score(draw_bench(scenario, np.random.default_rng(seed)), 0.03)
    return kit.definition("open"), scores[0]


@pytest.mark.parametrize("seed", [0, 3, 6])
def test_a_resonance_costs_the_band_above_it_and_not_the_band_below(seed):
    """Method, section 5: with the range as part of the choice the limit comes near the resonance."""
    with_it, scored = limits_of_the_open(seed, 4.5e9)
    assert 3.5e9 < with_it.limit.limit_hz < 4.4e9
    assert with_it.limit.reason.startswith("the readings leave the model ")
    assert scored.limit_true


def test_the_same_bench_without_the_resonance_goes_further():
    assert limits_of_the_open(0, None)[0].limit.limit_hz > 5.5e9


def test_a_simple_part_gets_a_simple_order(usual_kit):
    """The short is a constant inductance: no higher order may be taken for it."""
    assert usual_kit.definition("short").shape == "constant"
    assert usual_kit.definition("short").fit_top_hz == 6e9


def test_the_order_that_the_user_asks_for_is_taken(workshop):
    kit = workshop(polynomial="full").kit()
    for name in ("open", "short"):
        assert kit.definition(name).shape.split("+")[0] == "full"
        assert all(order.split("+")[0] == "full" for order, _ in kit.definition(name).tried)


def test_the_orders_that_were_tried_are_told(usual_kit):
    for definition in usual_kit.definitions:
        tried = dict(definition.tried)
        assert definition.shape in tried
        assert len(tried) > 1
        assert all(0.0 <= limit_hz <= 6e9 for limit_hz in tried.values())
