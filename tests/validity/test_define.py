"""Definitions in trade units and in words."""

import numpy as np
import pytest

from stdfit.uncertainty.budget import expanded


def by_name(definition):
    return {parameter.name: parameter for parameter in definition.parameters}


@pytest.fixture(scope="module")
def kit(workshop):
    given = {
        "load": {"resistance_ohm": (50.3, 0.01)},
        "open": {"offset_loss_gohm_per_s": (1.0,)},
        "short": {"offset_delay_ps": (25.0, 0.1)},
    }
    return workshop(given=given).kit()


def test_a_combination_is_the_sum_of_its_parts(kit):
    opened, short = kit.definition("open"), kit.definition("short")
    parts = by_name(opened)
    (sum_of_open,) = opened.combinations
    assert sum_of_open.value == pytest.approx(
        parts["offset_delay_ps"].value + 1e-3 * parts["offset_z0_ohm"].value * parts["c0"].value, rel=1e-12
    )
    parts = by_name(short)
    (sum_of_short,) = short.combinations
    assert sum_of_short.value == pytest.approx(
        parts["offset_delay_ps"].value + parts["l0"].value / parts["offset_z0_ohm"].value, rel=1e-12
    )


def test_the_uncertainty_of_a_combination_comes_from_the_joint_covariance(kit):
    opened = kit.definition("open")
    (combination,) = opened.combinations
    direction = np.zeros((1, len(kit.order)))
    direction[0, kit.order.index("open.offset_delay_ps")] = 1.0
    direction[0, kit.order.index("open.c0")] = 0.05
    u, u95 = expanded(direction, kit.shares)
    # What is left of a misfit comes on top; on readings that the model follows it is little.
    assert u[0] <= combination.u == pytest.approx(u[0], rel=0.02)
    assert u95[0] <= combination.high - combination.value == pytest.approx(u95[0], rel=0.02)
    assert combination.value - combination.low == pytest.approx(
        combination.high - combination.value, rel=1e-9
    )
    parts = by_name(opened)
    assert combination.u < 0.2 * parts["offset_delay_ps"].u  # the readings fix the sum, hardly the parts


def test_what_trades_off_is_told(kit):
    opened = kit.definition("open")
    assert opened.combinations[0].correlation < -0.9
    assert any("delay and C0 trade off" in note for note in opened.notes)
    short = kit.definition("short")
    assert not any("trade off" in note for note in short.notes) or short.combinations[0].correlation < -0.9


def test_roles(kit):
    assert by_name(kit.definition("open"))["offset_loss_gohm_per_s"].role == "held"
    assert by_name(kit.definition("open"))["offset_delay_ps"].role == "free"
    assert by_name(kit.definition("open"))["c0"].role == "assumed"
    assert by_name(kit.definition("open"))["c1"].role == "unused"
    assert by_name(kit.definition("short"))["offset_delay_ps"].role == "given"
    assert by_name(kit.definition("load"))["resistance_ohm"].role == "given"


def test_held_and_unused_values_have_no_uncertainty_and_no_place_in_the_covariance(kit):
    for definition in kit.definitions:
        for parameter in definition.parameters:
            if parameter.role in ("held", "unused"):
                assert (parameter.u, parameter.of) == (0.0, "")
                assert parameter.low == parameter.value == parameter.high
            else:
                assert parameter.of in kit.order
                assert parameter.low < parameter.value < parameter.high


def test_a_given_value_comes_out_hardly_worse_than_it_went_in(kit):
    """The weights of the readings are near the best ones, not the best: that may cost a little."""
    resistance = by_name(kit.definition("load"))["resistance_ohm"]
    assert resistance.u <= 1.03 * 0.01
    assert abs(resistance.value - 50.3) <= 0.02
    assert by_name(kit.definition("short"))["offset_delay_ps"].u <= 1.03 * 0.1


def test_what_was_assumed_is_told(kit):
    (note,) = [note for note in kit.definition("open").notes if "assumed evidence" in note]
    assert "C0" in note
    assert "offset_loss" not in note


def test_a_negative_delay_is_kept_and_explained(workshop):
    values = {
        "open": ("open", [-3.0, 0.0, 50.0, 40.0, 0.0, 0.0, 0.0]),
        "short": ("short", [-3.0, 0.0, 50.0, 0.0, 0.0, 0.0, 0.0]),
        "load": ("load", [0.0, 0.0, 50.0, 50.3, 20.0, 0.0]),
    }
    kit = workshop(values=values).kit()
    short = kit.definition("short")
    delay = by_name(short)["offset_delay_ps"]
    assert delay.value == pytest.approx(-3.0, abs=delay.high - delay.value)
    assert delay.value < 0.0
    assert any(note.startswith("the delay is negative: ") for note in short.notes)
    assert not any("the delay is negative" in note for note in kit.definition("load").notes)


def test_a_loss_at_its_bound_is_told(workshop):
    """Readings with a little gain ask for a negative loss, which no passive part has."""
    bench = workshop(changed={"short": lambda f: 1.0 + 0.004 * np.sqrt(f / 6e9)}, residual_db=50.0)
    kit = bench.kit()
    short = kit.definition("short")
    loss = by_name(short)["offset_loss_gohm_per_s"]
    assert loss.value == 0.0
    assert loss.role == "at its bound"
    assert loss.u > 0.0
    assert any("held at 0 with the uncertainty of the free fit" in note for note in short.notes)


def test_a_given_value_that_the_readings_contradict_is_told_loudly(workshop):
    """A ruler that is 7 ps off at u = 0.5 ps: note and warning name value, unit and distance; a right one is quiet."""
    values = workshop().values
    true = values["short"][1][0]
    wrong, right = (
        workshop(given={"short": {"offset_delay_ps": (true + off, 0.5)}}).kit() for off in (7.0, 0.3)
    )
    (said,) = [line for line in wrong.warnings if "given was" in line]
    assert said.startswith(
        f"short: offset delay: given was {true + 7.0:g} ± 0.5 ps, and the readings pull it to "
    )
    assert "check the value, its unit" in said
    assert not any("given was" in line for line in right.warnings)
