"""What holds a kit back and what would move it: the predictions come true when the change is made."""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.pipeline import prepare
from stdfit.pipeline.plan import (
    BETTER_DB,
    plan,
    ranked,
    with_better_reference,
    with_connections,
    with_given,
    with_longer_sweep,
    with_model_for,
)
from stdfit.pipeline.plan_text import plan_text
from stdfit.trials import demo_scenario
from stdfit.uncertainty.sources import LumpedSource


def better_by(told, decibels):
    """Return a statement of residuals that are all smaller by so many decibels."""
    factor = 10.0 ** (-decibels / 20.0)
    tracking = factor * (10.0 ** (told.reflection_tracking_db / 20.0) - 1.0)
    return replace(
        told,
        directivity_db=told.directivity_db + decibels,
        source_match_db=told.source_match_db + decibels,
        reflection_tracking_db=20.0 * np.log10(1.0 + tracking),
    )


def test_contributions_make_up_the_bound(first):
    """The bound at the limit is the tolerance, its parts and the misfit add to one, and they are ranked."""
    parts = [one.part for one in first.contributions]
    assert sum(parts) + first.misfit / first.bound == pytest.approx(1.0, abs=1e-9)
    assert parts == sorted(parts, reverse=True)
    assert all(0.0 <= one.alone <= first.bound for one in first.contributions)
    assert first.bound == pytest.approx(first.kit.within, rel=1e-3)
    assert 0.0 <= first.misfit < first.bound
    assert first.kit.definition(first.standard).limit.limit_hz == first.kit.limit.limit_hz == first.at_hz


def test_remedies_are_ranked_by_gain(first):
    gains = [one.gain_hz for one in first.remedies]
    assert gains == sorted(gains, reverse=True)
    for one in first.remedies:
        assert one.gain_hz == one.limit_hz - first.kit.limit.limit_hz
    helping, useless = ranked(first.remedies)
    assert [*helping, *useless] == list(first.remedies)
    assert all(one.gain_hz > 1e6 for one in helping)


def test_every_kind_of_remedy_is_thought_of(first, benches, limit_of):
    words = " / ".join(one.what for one in first.remedies)
    assert "make 10 connections of each standard" in words
    assert "make 5 connections" not in words  # the load has five already
    assert f"residuals are {BETTER_DB:.0f} dB smaller" in words
    assert "measure the offset length of 'open' and 'short'" in words
    assert "DC resistance" not in words  # it is given
    assert "read on up to" not in words  # the limit lies far below the last reading
    at = next(one for one in first.remedies if "10 connections" in one.what)
    assert at.limit_hz == limit_of(with_connections(benches[0], 10))


def test_ten_connections_give_what_was_predicted(benches, measured_hz, limit_of, simulated):
    predicted = np.mean([limit_of(with_connections(one, 10)) for one in benches])
    true = np.mean([limit_of(simulated(seed, connections=10)) for seed in range(len(benches))])
    assert predicted == pytest.approx(true, rel=0.15)
    assert predicted >= 0.98 * measured_hz.mean()


def test_many_connections_where_connections_are_the_trouble(limit_of, simulated):
    """Scatter five times as large and a good analyser: here more connections count, and the figure is right."""
    fields = {
        "scatter_ps": 0.75,
        "scatter_ohm": 0.075,
        "scatter_ff": 4.5,
        "residual": better_by(demo_scenario().residual, 12.0),
    }
    seeds = range(3)
    few = [simulated(seed, connections=4, **fields) for seed in seeds]
    now = np.mean([limit_of(one) for one in few])
    predicted = np.mean([limit_of(with_connections(one, 16)) for one in few])
    true = np.mean([limit_of(simulated(seed, connections=16, **fields)) for seed in seeds])
    assert predicted > 1.3 * now
    assert predicted == pytest.approx(true, rel=0.15)


def test_a_better_reference_gives_what_was_predicted(benches, measured_hz, limit_of, simulated):
    factor = 10.0 ** (-BETTER_DB / 20.0)
    predicted = np.mean([limit_of(with_better_reference(one, factor)) for one in benches])
    better = better_by(demo_scenario().residual, BETTER_DB)
    true = np.mean([limit_of(simulated(seed, residual=better)) for seed in range(len(benches))])
    assert predicted == pytest.approx(true, rel=0.15)
    assert predicted > 1.3 * measured_hz.mean()


def test_evidence_changes_one_wish_alone(benches):
    changed = with_given(benches[0], "short", "offset_delay_ps", 20.0, 0.1)
    assert changed.wishes[1].given["offset_delay_ps"] == (20.0, 0.1)
    assert "offset_delay_ps" not in benches[0].wishes[1].given
    assert changed.wishes[0] == benches[0].wishes[0]
    assert changed.observed == benches[0].observed


def test_a_standard_that_does_not_follow_its_model_is_asked_to(workshop, fitted):
    """A short whose phase and magnitude go astray together, beyond what a polynomial follows (invented)."""
    shop = workshop(changed={"short": lambda f: 1.0 - 0.06 * np.sin(f / 0.7e9) * (f / 6e9)})
    prepared = prepare(shop.bench(), shop.readings())
    found = plan(prepared)
    assert found.standard == "short"
    (remedy,) = [one for one in found.remedies if "follows its model" in one.what]
    assert remedy.what.startswith("make 'short' so that")
    assert remedy.at_most
    assert remedy.gain_hz > 0.0
    mended = fitted(with_model_for(prepared, found.kit, found.kit.definition("short")))
    assert mended.definition("short").misfit.max() < 0.1 * found.kit.definition("short").misfit.max()
    assert mended.limit.limit_hz == remedy.limit_hz
    assert mended.limit.limit_hz == pytest.approx(workshop().kit().limit.limit_hz, rel=0.15)


def test_a_limit_at_the_end_of_the_readings_asks_for_more_readings(workshop, limit_of):
    """Parts that follow their models, read by a good analyser: reading on is the remedy, up to the connector's top."""
    shop = workshop(frequency_hz=np.linspace(50e6, 3e9, 101))
    prepared = prepare(shop.bench(), shop.readings())
    found = plan(prepared)
    assert found.kit.limit.limit_hz == pytest.approx(3e9)
    further = next(one for one in found.remedies if one.what == "read on up to 4.5 GHz")
    assert further.at_most
    longer = with_longer_sweep(prepared, found.kit, 4.5e9)
    assert all(one.frequency_hz[-1] == pytest.approx(4.5e9, rel=0.01) for one in longer.observed)
    assert further.limit_hz == limit_of(longer)
    grown = workshop(frequency_hz=np.linspace(50e6, 4.475e9, 151))
    true = grown.kit().limit.limit_hz
    assert further.limit_hz == pytest.approx(true, rel=0.15)


def test_more_readings_are_not_asked_for_beyond_the_connector(workshop):
    shop = workshop(frequency_hz=np.linspace(50e6, 18e9, 121))
    prepared = prepare(replace(shop.bench(), within=0.2), shop.readings())
    found = plan(prepared)
    assert found.kit.limit.limit_hz == pytest.approx(18e9)
    assert not any("read on" in one.what for one in found.remedies)


def test_a_kit_that_is_good_nowhere_has_a_plan_all_the_same(benches):
    hopeless = replace(benches[1], bench=replace(benches[1].bench, within=1e-4))
    found = plan(hopeless)
    assert found.kit.limit.limit_hz == 0.0
    assert found.at_hz == benches[1].observed[0].frequency_hz[0]
    parts = sum(one.part for one in found.contributions)
    assert parts + found.misfit / found.bound == pytest.approx(1.0)
    assert "cannot be trusted at any frequency" in plan_text(found, measured=True)


def test_one_connection_stands_for_five_of_the_same_scatter(simulated):
    """What is assumed of the scatter stays assumed: no degrees of freedom are won by planning."""
    once = simulated(3, connections=1)
    assert once.connections == 1
    five = with_connections(once, 5)
    assert five.connections == 5
    lumped = [
        pair for pair in zip(once.sources, five.sources, strict=True) if isinstance(pair[0], LumpedSource)
    ]
    assert len(lumped) == 3
    for before, after in lumped:
        np.testing.assert_allclose(after.vectors[0], before.vectors[0] / np.sqrt(5.0))
        assert after.freedom == before.freedom
