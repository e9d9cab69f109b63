"""Drawn standards: passive, of believable size, with a resonance where it is asked for."""

import numpy as np
import pytest

from stdfit.base.errors import RequestError
from stdfit.trials import Scenario, StatedDecibels, draw_bench, draw_part, families, reflection
from stdfit.trials.parts import with_resonance
from stdfit.trials.scenario import KINDS

SWEEP = np.linspace(10e6, 6e9, 401)


def plain(**fixed):
    return Scenario(frequency_hz=SWEEP, residual=StatedDecibels.perfect(), **fixed)


@pytest.mark.parametrize("family", families())
def test_truths_are_passive(family):
    rng = np.random.default_rng(20)
    for _ in range(10):
        scenario = families()[family](rng)
        bench = draw_bench(scenario, rng)
        wide = np.linspace(0, 1.2 * scenario.frequency_hz[-1], 2001)
        for name in KINDS:
            assert np.max(np.abs(bench.truth_at(name, wide))) <= 1 + 1e-12


@pytest.mark.parametrize("family", families())
def test_low_frequency_tells_what_a_part_is(family):
    rng = np.random.default_rng(21)
    for _ in range(10):
        bench = draw_bench(families()[family](rng), rng)
        gamma = {name: bench.truth_at(name, [1e3])[0] for name in KINDS}
        assert abs(gamma["open"] - 1) < 1e-3
        assert abs(gamma["short"] + 1) < 1e-3
        assert abs(gamma["load"]) < 0.0105


def test_load_is_as_good_as_asked():
    rng = np.random.default_rng(22)
    bare = [abs(reflection(draw_part(plain(), "load", rng, body=()), [6e9])[0]) for _ in range(200)]
    assert min(bare) >= 0.02
    assert max(bare) <= 0.06
    assert np.ptp(bare) > 0.03


def test_load_resistance_is_within_one_and_two_per_cent():
    rng = np.random.default_rng(23)
    ohm = [draw_part(plain(), "load", rng).end.dc_resistance_ohm for _ in range(300)]
    assert 49.5 <= min(ohm) < 49.7
    assert 50.8 < max(ohm) <= 51.0


def test_radiating_open_loses_and_shielded_does_not():
    rng = np.random.default_rng(24)
    for _ in range(50):
        radiating = draw_part(plain(open_kind="radiating", radiation_drop=(0.01, 0.02)), "open", rng, body=())
        shielded = draw_part(plain(open_kind="shielded"), "open", rng, body=())
        assert 0.98 <= abs(reflection(radiating, [6e9])[0]) <= 0.992
        assert abs(reflection(shielded, [6e9])[0]) == pytest.approx(1, abs=1e-12)


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("frequency_hz", [3.1e9, 4.5e9, 5.9e9])
def test_resonance_has_the_peak_asked_for(kind, frequency_hz):
    rng = np.random.default_rng(25)
    for _ in range(20):
        part = draw_part(plain(), kind, rng)
        quality, peak = rng.uniform(20, 80), rng.uniform(0.05, 0.3)
        ringing = with_resonance(part, frequency_hz, quality, peak)
        near = frequency_hz * np.linspace(0.8, 1.2, 2001)
        move = np.abs(reflection(ringing, near) - reflection(part, near))
        assert move[1000] == pytest.approx(peak, rel=1e-3)
        assert move.max() < 1.1 * peak
        # The half-height width of a resonance of quality Q is √3 f0/Q; the line's load only widens it.
        width = np.ptp(near[move > move.max() / 2]) / frequency_hz
        assert np.sqrt(3) / quality * 0.9 < width < np.sqrt(3) / quality * 1.9


def test_resonance_is_on_the_asked_standard_and_visible_there_only():
    scenario = plain(resonance_hz=4.2e9, resonance_standard="short", resonance_quality=50, resonance_peak=0.2)
    bench = draw_bench(scenario, np.random.default_rng(26))
    without = draw_bench(plain(), np.random.default_rng(26))
    move = {name: np.abs(bench.truth[name] - without.truth[name]) for name in KINDS}
    assert SWEEP[np.argmax(move["short"])] == pytest.approx(4.2e9, rel=0.01)
    assert move["short"].max() == pytest.approx(0.2, rel=0.05)
    assert move["open"].max() == move["load"].max() == 0


def test_impossible_peak_is_refused():
    part = draw_part(plain(), "open", np.random.default_rng(27))
    with pytest.raises(RequestError, match=r"peak of 1\.5"):
        with_resonance(part, 4e9, 50, 1.5)


def test_shared_body_is_the_same_line():
    bench = draw_bench(plain(body="shared"), np.random.default_rng(28))
    assert bench.parts["open"].elements == bench.parts["short"].elements == bench.parts["load"].elements
    assert bench.same_offset_as == {"open": "short", "load": "short"}
