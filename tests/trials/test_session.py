"""Connections, drift, glitches and noise have the size that is asked for."""

import numpy as np
import pytest

from stdfit.trials import Scenario, StatedDecibels, draw_bench
from stdfit.trials.scenario import KINDS
from stdfit.trials.session import Connections, connect, draw_connections, draw_drift

SWEEP = np.linspace(10e6, 6e9, 301)
QUIET = {"scatter_ps": 0.0, "scatter_ohm": 0.0, "scatter_ff": 0.0, "noise": 0.0, "trace_noise": 0.0}


def scenario(**fixed):
    return Scenario(**{"frequency_hz": SWEEP, "residual": StatedDecibels.perfect(), **QUIET, **fixed})


def test_readings_without_any_error_are_the_truth():
    bench = draw_bench(scenario(connections=3), np.random.default_rng(41))
    for name in KINDS:
        assert bench.readings[name].shape == (3, SWEEP.size)
        np.testing.assert_allclose(bench.readings[name], np.tile(bench.truth[name], (3, 1)), atol=1e-14)
        np.testing.assert_allclose(bench.truth_at(name, SWEEP), bench.truth[name], atol=0)


def test_noise_is_white_and_grows_with_reflection():
    bench = draw_bench(scenario(noise=1e-3, trace_noise=2e-3, connections=40), np.random.default_rng(42))
    for name, expected in {"open": np.hypot(1e-3, 2e-3), "load": 1e-3}.items():
        off = bench.readings[name] - bench.truth[name]
        assert off.real.std() == pytest.approx(expected, rel=0.02)
        assert off.imag.std() == pytest.approx(expected, rel=0.02)
        assert abs(np.mean(off[:, 1:] * off[:, :-1].conj())) < 0.05 * expected**2


def test_series_resistance_is_seen_at_the_short_and_not_at_the_open():
    parts = Connections(np.zeros(1), np.array([0.1]), np.zeros(1))
    ones = np.ones(SWEEP.size, complex)
    assert np.allclose(connect(ones, SWEEP, parts, 50.0), 1)
    # Short with 0.1 Ω: Γ = (0.1 − 50)/(0.1 + 50).
    np.testing.assert_allclose(connect(-ones, SWEEP, parts, 50.0)[0], -49.9 / 50.1)
    # Matched load with 0.1 Ω: −60.0 dB (derived).
    shown = 20 * np.log10(np.abs(connect(0 * ones, SWEEP, parts, 50.0)[0]))
    np.testing.assert_allclose(shown, -60.0, atol=0.02)


def test_plane_shift_and_shunt_capacitance_turn_the_open():
    ones = np.ones(SWEEP.size, complex)
    delay = connect(ones, SWEEP, Connections(np.array([1e-12]), np.zeros(1), np.zeros(1)), 50.0)[0]
    farads = connect(ones, SWEEP, Connections(np.zeros(1), np.zeros(1), np.array([20e-15])), 50.0)[0]
    # 1 ps and 20 fF are both 0.720 degrees at 1 GHz (derived).
    np.testing.assert_allclose(-np.angle(delay, deg=True), 0.72 * SWEEP / 1e9, rtol=1e-9)
    np.testing.assert_allclose(-np.angle(farads, deg=True), 0.72 * SWEEP / 1e9, rtol=1e-3)


def test_scatter_of_connections_has_the_stated_size():
    rng = np.random.default_rng(43)
    loose = scenario(connections=4000, scatter_ps=0.15, scatter_ohm=0.015, scatter_ff=0.9)
    drawn = draw_connections(loose, "open", rng)
    assert drawn.shift_s.std() == pytest.approx(0.15e-12, rel=0.05)
    assert drawn.series_ohm.std() == pytest.approx(0.015, rel=0.05)
    assert drawn.shunt_f.std() == pytest.approx(0.9e-15, rel=0.05)
    assert drawn.bad is None


def test_one_bad_connection_of_the_named_standard():
    rng = np.random.default_rng(44)
    loose = scenario(connections=5, scatter_ps=0.1, scatter_ohm=0.01, bad_connection="short")
    for _ in range(50):
        assert draw_connections(loose, "open", rng).bad is None
        drawn = draw_connections(loose, "short", rng)
        assert 0.3e-12 <= abs(drawn.shift_s[drawn.bad]) <= 1e-12
        assert 0.03 <= drawn.series_ohm[drawn.bad] <= 0.1


@pytest.mark.parametrize("order", ["blocks", "rounds"])
def test_drift_walks_to_the_stated_phase(order):
    rng = np.random.default_rng(45)
    walking = scenario(connections=4, drift_deg=0.5, reading_order=order)
    walks = [draw_drift(walking, rng) for _ in range(2000)]
    last = np.array([np.angle(walk["load"][-1, -1], deg=True) for walk in walks])
    first = np.array([np.angle(walk["open"][0, -1], deg=True) for walk in walks])
    assert last.std() == pytest.approx(0.5, rel=0.06)
    assert first.std() == pytest.approx(0.5 / np.sqrt(12), rel=0.06)
    middle = np.array([np.angle(walk["short"][0, -1], deg=True) for walk in walks])
    assert middle.std() == pytest.approx(0.5 * np.sqrt((5 if order == "blocks" else 2) / 12), rel=0.06)


def test_drift_is_in_proportion_to_frequency():
    walk = draw_drift(scenario(drift_deg=1.0), np.random.default_rng(46))["short"][2]
    np.testing.assert_allclose(np.log(walk), np.log(walk[-1]) * SWEEP / SWEEP[-1], atol=1e-15)


def test_glitches_are_single_points_at_common_frequencies():
    bench = draw_bench(scenario(connections=8, glitches=4), np.random.default_rng(47))
    seen = set()
    for name in KINDS:
        off = np.abs(bench.readings[name] - bench.truth[name])
        hit = off > 1e-9
        assert np.all(off[hit] >= 0.0099)
        assert np.all(off[hit] <= 0.101)
        seen |= set(np.flatnonzero(hit.any(axis=0)).tolist())
        assert 0.4 < hit.sum() / (8 * 4) < 0.95
    assert seen == set(bench.drawn.band_edges)
    assert len(seen) == 4
