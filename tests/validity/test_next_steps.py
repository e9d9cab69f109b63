"""What would push a limit further: each kind of source halved, with limits that can be worked out by hand."""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.pipeline import with_limits
from stdfit.uncertainty.region import LINE
from stdfit.validity.limits import limits
from stdfit.validity.next_steps import MOST, SMALLEST_GAIN, next_steps
from stdfit.writing.plain_data import kit_data
from stdfit.writing.summary import PLANNED, STEPS_HEAD, step_lines

# A delay that is off by u turns Γ = ±1 by 4πfu, on a line: the bound is 1.96·4πfu, and halving u doubles the limit.
PS_FOR_2_GHZ = 0.02 / (LINE * 4.0 * np.pi * 2e9) * 1e12


def kinds(steps):
    return [step.kind for step in steps]


def test_half_the_source_twice_the_limit(by_hand):
    """Derived: the bound is proportional to frequency and to the one source."""
    kit = with_limits(by_hand({"analyser residuals (tracking)": {"open.offset_delay_ps": PS_FOR_2_GHZ}}))
    assert kit.limit.limit_hz == pytest.approx(2e9, rel=1e-3)
    (step,) = next_steps(kit)
    assert step.kind == "analyser residuals"
    assert step.limit_hz == pytest.approx(4e9, rel=1e-3)


def test_sources_of_one_kind_are_halved_together(by_hand):
    """Derived: two parts of 1/√2 make one of 1; half of one of them alone leaves √(5/8) of the whole."""
    part = {"open.offset_delay_ps": PS_FOR_2_GHZ / np.sqrt(2.0)}
    whole = with_limits(by_hand({"connections (plane shift)": part, "connections (other scatter)": part}))
    assert next_steps(whole)[0].limit_hz == pytest.approx(4e9, rel=1e-3)
    apart = with_limits(by_hand({"connections (plane shift)": part, "noise": part}))
    assert [step.limit_hz for step in next_steps(apart)] == pytest.approx([2e9 * np.sqrt(1.6)] * 2, rel=1e-3)
    assert sorted(kinds(next_steps(apart))) == ["connections", "noise"]


def test_the_misfit_is_halved_as_it_is(by_hand):
    """Derived: with a misfit of 0.01 the tolerance leaves 0.01 to the source, with half of it 0.015."""
    kit = with_limits(
        by_hand({"noise": {"open.offset_delay_ps": PS_FOR_2_GHZ}}, misfits={"open": (0.01, 0.01)})
    )
    assert kit.limit.limit_hz == pytest.approx(1e9, rel=1e-3)
    found = {step.kind: step for step in next_steps(kit)}
    assert found["misfit"].limit_hz == pytest.approx(1.5e9, rel=1e-3)
    assert found["noise"].limit_hz == pytest.approx(2e9, rel=1e-3)
    assert kinds(next_steps(kit)) == ["noise", "misfit"]
    assert "'open'" in found["misfit"].action and "'short'" not in found["misfit"].action


def test_two_standards_that_end_alike_are_told_as_one_step(by_hand):
    kit = with_limits(
        by_hand(
            {
                "connections (plane shift)": {"open.offset_delay_ps": PS_FOR_2_GHZ},
                "analyser residuals (tracking)": {"short.offset_delay_ps": PS_FOR_2_GHZ},
            }
        )
    )
    (step,) = next_steps(kit)
    assert set(step.kind.split(" and ")) == {"connections", "analyser residuals"}
    assert step.limit_hz == pytest.approx(4e9, rel=1e-3)
    assert step.action.startswith("only all of this together moves the limit: ")
    assert "four times as many connections of 'open'" in step.action


def test_a_standard_that_would_end_it_soon_after_is_named_too(by_hand):
    """The short ends at 2 GHz, the open at 3: to come to 4 both have to be connected more often."""
    kit = with_limits(
        by_hand(
            {
                "connections (plane shift)": {"short.offset_delay_ps": PS_FOR_2_GHZ},
                "connections (other scatter)": {"open.offset_delay_ps": PS_FOR_2_GHZ * 2.0 / 3.0},
            }
        )
    )
    (step,) = next_steps(kit)
    assert step.limit_hz == pytest.approx(4e9, rel=1e-3)
    assert step.action == "make four times as many connections of 'open' and 'short'"


def test_nothing_is_promised_where_nothing_can_be_halved_enough(by_hand):
    """Four standards that end alike for four reasons: more than can be told as one step."""
    names = [("a", "noise"), ("b", "drift"), ("c", "connections"), ("d", "given values")]
    line = ("open", [0.0, 0.0, 50.0, 0.0, 0.0, 0.0, 0.0])
    made = {kind: {f"{name}.offset_delay_ps": PS_FOR_2_GHZ} for name, kind in names}
    flush = {"open": None, "short": None, "load": None}
    assert next_steps(with_limits(by_hand(made, {**flush, **{name: line for name, _ in names}}))) == ()


def test_the_end_of_the_readings_is_said(by_hand):
    kit = with_limits(by_hand({"noise": {"open.offset_delay_ps": PS_FOR_2_GHZ / 4.0}}))
    (step,) = next_steps(kit)
    assert (kit.limit.limit_hz, step.kind) == (6e9, "end of readings")
    # The open's bound reaches the tolerance at 8 GHz, below the 9 GHz that are tried.
    assert step.limit_hz == pytest.approx(8e9, rel=1e-2)
    assert "read on up to 9 GHz" in step.action and "'open', 'short' and 'load'" in step.action


def test_a_limit_that_was_lowered_by_hand_does_not_count(by_hand):
    """All standards end with their readings, and the kit below them: the steps are those of the standards."""
    kit = with_limits(by_hand({"noise": {"open.offset_delay_ps": PS_FOR_2_GHZ / 4.0}}))
    assert next_steps(replace(kit, limit=replace(kit.limit, limit_hz=1e9))) == next_steps(kit)


def test_the_top_of_the_connector_is_said(by_hand):
    source = {"noise": {"open.offset_delay_ps": PS_FOR_2_GHZ / 4.0}}
    for top_hz, limit_hz in ((4e9, 4e9), (10e6, 0.0)):
        (step,) = next_steps(with_limits(by_hand(source, top_hz=top_hz)))
        assert (step.kind, step.limit_hz) == ("next mode", limit_hz)
    (step,) = next_steps(with_limits(by_hand(source, top_hz=7e9)))
    assert step.kind == "end of readings"
    assert "up to 7 GHz" in step.action
    assert step.limit_hz == 7e9


def test_a_kit_without_sources_says_nothing(by_hand):
    assert next_steps(with_limits(replace(by_hand({}), shares=()))) == ()


def test_a_limit_of_0_can_be_lifted(by_hand):
    """Derived: a resistance off by u moves Γ by u/100, whatever the frequency."""
    kit = with_limits(by_hand({"given values": {"load.resistance_ohm": 2.0 * 1.5 / LINE}}))
    assert kit.limit.limit_hz == 0.0
    (step,) = next_steps(kit)
    assert (step.kind, step.limit_hz) == ("given values", 6e9)


def test_evidence_is_named_with_what_tells_it(by_hand):
    kit = by_hand({"given values": {"load.resistance_ohm": 2.0 * 1.5 / LINE}})
    load = kit.definition("load")
    roles = tuple(
        replace(one, role="given") if one.name == "resistance_ohm" else one for one in load.parameters
    )
    known = replace(
        kit,
        definitions=tuple(replace(one, parameters=roles) if one is load else one for one in kit.definitions),
    )
    (step,) = next_steps(with_limits(known))
    assert step.action == "measure again, twice as well, what was given: resistance of 'load' (a multimeter)"


@pytest.mark.parametrize("within", [0.01, 0.015, 0.02])
def test_steps_are_limits_of_the_kit_with_one_kind_halved(modest_kit, within):
    kit = with_limits(replace(modest_kit, within=within))
    steps = next_steps(kit)
    assert 0 < len(steps) <= MOST
    assert [step.limit_hz for step in steps] == sorted((step.limit_hz for step in steps), reverse=True)
    for step in steps:
        shares = tuple(
            replace(one, covariances=one.covariances / 4.0) if one.name.split(" (")[0] == step.kind else one
            for one in kit.shares
        )
        wrong = 0.5 if step.kind == "misfit" else 1.0
        definitions = tuple(replace(one, misfit=wrong * one.misfit) for one in kit.definitions)
        ((whole, _),) = limits(replace(kit, shares=shares, definitions=definitions), [within])
        assert whole.limit_hz == pytest.approx(step.limit_hz, rel=1e-12)
        assert step.limit_hz >= (1.0 + SMALLEST_GAIN) * kit.limit.limit_hz
        assert "\n" not in step.action


def test_steps_are_told_in_json_and_the_best_two_in_words(modest_kit):
    steps = next_steps(modest_kit)
    assert [one["limit_hz"] for one in kit_data(modest_kit)["next_steps"]] == [one.limit_hz for one in steps]
    lines = step_lines(modest_kit)
    assert lines[:2] == ["", STEPS_HEAD + PLANNED]
    assert len(lines) == 2 + min(2, len(steps))
    assert lines[2].endswith(steps[0].action)
    assert step_lines(replace(modest_kit, shares=())) == []
