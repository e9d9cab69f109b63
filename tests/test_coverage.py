"""Do the bounds cover the truth, and are the limits true? Statistics over simulated benches, fixed seeds."""

import numpy as np
import pytest

from stdfit.trials import demo_scenario, devices, draw_bench
from stdfit.trials.score import score

BENCHES = 24
FIRST_SEED = 1000
LONG_RUN = 0.976
"""Mean part of the points inside, over 100 seeds × 3 standards of the same kind of bench."""

SPREAD = 0.05
"""Standard deviation of that part from bench to bench: neighbouring points of a curve fail together, so a bench
counts once and not as 180 points."""

DEVICES_LONG_RUN = 0.986
"""Mean part of devices inside their bound, over 60 benches; it spreads from bench to bench as the curves do."""


@pytest.fixture(scope="module")
def drawn():
    return [draw_bench(demo_scenario(), np.random.default_rng(FIRST_SEED + k)) for k in range(BENCHES)]


@pytest.fixture(scope="module")
def scored(drawn):
    """Kits and their scores."""
    return [score(bench) for bench in drawn]


@pytest.fixture(scope="module")
def scores(scored):
    return [scores for _, scores in scored]


def test_coverage(scores):
    """The mean of 24 benches has a standard deviation of SPREAD/√24 = 0.010; three of them are allowed below."""
    inside = np.array([[one.inside for one in bench] for bench in scores])
    assert inside.mean() >= LONG_RUN - 3.0 * SPREAD / np.sqrt(BENCHES)
    assert inside.mean(axis=1).std() <= 2.0 * SPREAD


def test_no_standard_is_covered_at_the_cost_of_another(scores):
    """One standard's part spreads about √3 times as much as the mean of three."""
    inside = np.array([[one.inside for one in bench] for bench in scores])
    assert (inside.mean(axis=0) >= 0.95 - 3.0 * np.sqrt(3.0) * SPREAD / np.sqrt(BENCHES)).all()


def test_bounds_are_not_bought_with_width(scores):
    """A 95 % radius of a circular error is 2.08 times its median, so a fair bound has a median error over bound of
    0.48, and one on a line 0.34. Sizes of analyser residuals are stated, not measured, and the worst correlation
    length is taken: half of the lower figure is still useful, less would be idle."""
    ratio = np.concatenate([one.error / one.bound for bench in scores for one in bench])
    assert 0.17 <= np.median(ratio) <= 0.48


def test_limits_are_true(scored, scores):
    """A limit is a bound at 95 % on a whole band; of 72 limits at least nine tenths must hold, and none is idle."""
    true = [one.limit_true for bench in scores for one in bench]
    assert len(true) == 3 * BENCHES
    assert np.mean(true) >= 0.9
    assert all(definition.limit.limit_hz > 0.0 for kit, _ in scored for definition in kit.definitions)


def devices_inside(scored, drawn):
    rng = np.random.default_rng(FIRST_SEED)
    return np.array(
        [devices.devices_inside(kit, bench, rng) for (kit, _), bench in zip(scored, drawn, strict=True)]
    )


def test_devices_keep_within_their_bound(scored, drawn):
    """Three standard deviations of the mean of 24 benches are allowed below, as for the curves."""
    inside = devices_inside(scored, drawn)
    assert inside.mean() >= DEVICES_LONG_RUN - 3.0 * SPREAD / np.sqrt(BENCHES)
    assert inside.std() <= 2.0 * SPREAD


def test_half_of_the_device_bound_would_not_do(scored, drawn, monkeypatch):
    """The bound is not bought with width: half of it holds clearly less than 95 %."""
    whole = devices.device_bound
    monkeypatch.setattr(devices, "device_bound", lambda *asked: 0.5 * whole(*asked))
    assert devices_inside(scored, drawn).mean() <= 0.95 - 3.0 * SPREAD / np.sqrt(BENCHES)
