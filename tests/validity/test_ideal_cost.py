"""What ideal standards would cost: exactly, at the worst passive device."""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.validity.device.bound import all_phases, device_map, three_of
from stdfit.validity.device.ideal import cost_of_ideal

GRID = np.array([1e9, 3e9, 6e9])
SOURCE = {"load": {"load.resistance_ohm": 0.1}}


def map_of(kit):
    return device_map(kit, three_of(kit), GRID)


def test_ideal_standards_cost_nothing(by_hand):
    np.testing.assert_allclose(cost_of_ideal(map_of(by_hand(SOURCE))), 0.0, atol=1e-12)


def test_a_line_that_all_share_turns_every_device(by_hand):
    """|Γ·e^{2jωτ} − Γ| = 2·sin ωτ, exactly, however far it turns (derived)."""
    line = [25.0, 0.0, 50.0]
    kit = by_hand(
        SOURCE,
        {
            "open": ("open", [*line, 0.0, 0.0, 0.0, 0.0]),
            "short": ("short", [*line, 0.0, 0.0, 0.0, 0.0]),
        },
    )
    np.testing.assert_allclose(
        cost_of_ideal(map_of(kit)), 2.0 * np.sin(2.0 * np.pi * GRID * 25e-12), rtol=1e-9
    )


def test_small_deviations_cost_what_the_closed_forms_say(by_hand):
    """D = −δL, T = −(δO − δS)/2, M = −[(δO + δS)/2 − δL]: U. Stumper, Adv. Radio Sci. 1, 2003, 1–8."""
    errors = map_of(by_hand(SOURCE))
    off = 1e-5 * np.array([1.0 + 2.0j, -0.5j, 0.7])
    found = cost_of_ideal(replace(errors, standards=np.array([1.0, -1.0, 0.0]) + np.tile(off, (3, 1))))
    d, t, m = -off[2], -(off[0] - off[1]) / 2.0, -((off[0] + off[1]) / 2.0 - off[2])
    device = all_phases()
    assert found == pytest.approx(np.abs(d + t * device + m * device**2).max(), rel=1e-3)


def test_no_device_is_shown_worse_than_it_says(by_hand):
    """Möbius maps by their cross-ratio: an independent way to the shown reflection."""
    rng = np.random.default_rng(8)
    errors = map_of(by_hand(SOURCE))
    off = 0.3 * (rng.standard_normal((3, 3)) + 1j * rng.standard_normal((3, 3)))
    standards = np.array([1.0, -1.0, 0.0]) + off
    cost = cost_of_ideal(replace(errors, standards=standards))
    device = np.sqrt(rng.random(2000)) * np.exp(2j * np.pi * rng.random(2000))
    for (opened, short, load), worst in zip(standards, cost, strict=True):
        ratio = (device - load) * (opened - short) / ((device - short) * (opened - load))
        # (w − 0)(1 + 1)/((w + 1)(1 − 0)) = ratio
        shown = ratio / (2.0 - ratio)
        assert np.isfinite(worst)
        assert np.abs(shown - device).max() <= 1.02 * worst


def test_a_device_that_is_shown_as_infinite(by_hand):
    """A short that reads +0.6 beside an open at +1: by the cross-ratio Γ = 0.75 is shown as infinite (derived)."""
    errors = map_of(by_hand(SOURCE))
    standards = np.tile([1.0, 0.6, 0.0], (3, 1)).astype(complex)
    assert np.isposinf(cost_of_ideal(replace(errors, standards=standards))).all()


def test_two_that_are_the_same_cannot_be_taken_for_ideal(by_hand):
    errors = map_of(by_hand(SOURCE))
    same = np.tile([1.0, 1.0, 0.0], (3, 1)).astype(complex)
    assert np.isposinf(cost_of_ideal(replace(errors, standards=same))).all()
    two = by_hand(SOURCE, {"short": None, "wide": ("open", [30.0, 0.0, 50.0, 0.0, 0.0, 0.0, 0.0])})
    assert np.isposinf(cost_of_ideal(map_of(two))).all()
