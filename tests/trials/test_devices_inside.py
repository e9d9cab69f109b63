"""Devices that are corrected with a fitted kit: the part inside falls when kit or bound are wrong."""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.trials import demo_scenario, draw_bench
from stdfit.trials.devices import devices_inside
from stdfit.trials.score import score


@pytest.fixture(scope="module")
def drawn():
    bench = draw_bench(demo_scenario(), np.random.default_rng(1000))
    return score(bench)[0], bench


def inside(kit, bench):
    return devices_inside(kit, bench, np.random.default_rng(1))


def test_the_same_chance_gives_the_same_part(drawn):
    assert inside(*drawn) == inside(*drawn) > 0.8


def test_a_kit_without_uncertainty_covers_hardly_a_device(drawn):
    kit, bench = drawn
    bare = tuple(replace(one, misfit=np.zeros_like(one.misfit)) for one in kit.definitions)
    assert inside(replace(kit, definitions=bare, shares=()), bench) < 0.01


def test_a_load_that_is_wrong_is_seen(drawn):
    """2 Ω too much is 0.02 of directivity, twice the bound over most of the band."""
    kit, bench = drawn
    load = kit.definition("load")
    wrong = tuple(
        replace(one, value=one.value + 2.0) if one.name == "resistance_ohm" else one
        for one in load.parameters
    )
    definitions = tuple(
        replace(one, parameters=wrong) if one.name == "load" else one for one in kit.definitions
    )
    assert inside(replace(kit, definitions=definitions), bench) < 0.5 * inside(kit, bench)
