"""The demo's kind of bench, simulated with a number of seeds, and what its limits and its plan are."""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.pipeline import choose_all, kit_of, prepare, settle
from stdfit.pipeline.plan import plan
from stdfit.trials import demo_scenario, draw_bench
from stdfit.trials.score import bench_of

SEEDS = 6
"""The limit of a kit differs by a third of itself from one of these benches to the next: what a change does to it is
compared on the same six, whose parts and analyser's errors stay the same."""


def kit_from(prepared):
    return kit_of(prepared, settle(prepared, choose_all(prepared)), created="2000-01-01")


def simulate(seed, **fields):
    """Prepare the demo's kind of bench, with some fields of the scenario changed."""
    scenario = replace(demo_scenario(), **fields)
    return prepare(*bench_of(draw_bench(scenario, np.random.default_rng([66, seed]))))


@pytest.fixture(scope="session")
def fitted():
    """Return a function that makes a kit of what is prepared."""
    return kit_from


@pytest.fixture(scope="session")
def limit_of():
    """Return a function that gives the limit in Hz of what is prepared."""
    return lambda prepared: kit_from(prepared).limit.limit_hz


@pytest.fixture(scope="session")
def simulated():
    """Return a function (seed, fields of the scenario) that prepares a simulated bench."""
    return simulate


@pytest.fixture(scope="session")
def benches():
    return [simulate(seed) for seed in range(SEEDS)]


@pytest.fixture(scope="session")
def measured_hz(benches, limit_of):
    return np.array([limit_of(one) for one in benches])


@pytest.fixture(scope="session")
def first(benches):
    """The plan of one bench."""
    told = []
    found = plan(benches[0], lambda done, total: told.append((done, total)))
    assert told == [(k + 1, len(told)) for k in range(len(told))]
    return found
