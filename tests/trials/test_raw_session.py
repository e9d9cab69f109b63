"""Simulated raw sessions: what is drawn, and a short version of the study of bounds carried from kit to kit."""

import numpy as np
import pytest

from stdfit.circuits.error_box import corrected, solve_error_box
from stdfit.trials.families import draw_plain
from stdfit.trials.parts import reflection
from stdfit.trials.raw_session import KIT_PATH, draw_raw_session
from stdfit.trials.study import AGAINST_A_KIT, family_names, trial

BENCHES = 4
SPREAD = 0.10
"""Standard deviation of a bench's coverage, as in the study of corrected readings."""


@pytest.fixture(scope="module")
def session():
    rng = np.random.default_rng([12, 0])
    scenario = draw_plain(rng, points=101, connections=2, noise=1e-12, trace_noise=1e-12, scatter_ps=0.0,
                          scatter_ohm=0.0, scatter_ff=0.0)  # fmt: skip
    return draw_raw_session(scenario, rng)


def test_a_session_is_a_bench_of_two_sets_and_new_standards(session):
    entries = session.bench.standards
    assert [entry.from_kit for entry in entries] == [KIT_PATH] * 6 + [None] * 3
    assert [entry.reading_set for entry in entries] == ["before"] * 3 + ["after"] * 3 + [None] * 3
    assert session.bench.state == "raw"
    assert {len(session.sweeps[entry.name]) for entry in entries} == {2}


def test_raw_readings_are_far_from_the_truth_and_three_terms_bring_them_back(session):
    """Without noise, connections and drift the true standards of the kit correct the others exactly."""
    f, truth = session.simulated.frequency_hz, session.simulated.truth
    before = [entry for entry in session.bench.standards if entry.reading_set == "before"]
    read = np.stack([session.sweeps[entry.name][0].gamma for entry in before], axis=-1)
    after = np.stack(
        [session.sweeps[entry.name.replace("before", "after")][0].gamma for entry in before], axis=-1
    )
    np.testing.assert_allclose(read, after, rtol=0, atol=1e-10)
    raw = {name: session.sweeps[name][0].gamma for name in truth}
    assert all(np.abs(raw[name] - truth[name]).max() > 0.05 for name in truth)
    known = np.stack([reflection(session.true_references[entry.kind], f) for entry in before], axis=-1)
    inside = np.linalg.svd(known[..., None] ** np.arange(3), compute_uv=False)[..., -1] > 0.05
    box = solve_error_box(known[inside], read[inside])
    for name in truth:
        np.testing.assert_allclose(corrected(box, raw[name][inside]), truth[name][inside], rtol=0, atol=1e-9)


def test_the_families_have_names_that_the_command_knows():
    assert set(AGAINST_A_KIT) <= set(family_names())


@pytest.mark.parametrize("family", AGAINST_A_KIT)
def test_bounds_from_a_kit_cover_the_truth(family):
    """0.95 − 3·0.10/√4 = 0.80 over four benches: a bound without its reference's uncertainty falls far below."""
    found = [trial(family, 5, number, 0.02) for number in range(BENCHES)]
    assert all(one is not None for one in found)
    inside = [np.mean([score.inside for score in one.scores]) for one in found]
    assert np.mean(inside) >= 0.95 - 3.0 * SPREAD / np.sqrt(BENCHES)
    assert np.mean([one.devices for one in found]) >= 0.95 - 3.0 * SPREAD / np.sqrt(BENCHES)
    assert sum(all(score.limit_true for score in one.scores) for one in found) >= BENCHES - 1
    limits = [np.mean([score.limit for score in one.scores]) for one in found]
    assert np.mean(limits) > 0.2
