"""What physics says of devices of which nothing is known, against devices made from the formulas."""

import numpy as np
import pytest

from stdfit.circuits.line import see_through_line
from stdfit.circuits.standard import reflection
from stdfit.validity.device.check import AGREES, FAILS, SILENT, by_physics
from stdfit.validity.device.check_physics import plain_line, reflects_fully, steady_loss

GRID = np.linspace(50e6, 6e9, 121)
ALL = np.ones(GRID.size, dtype=bool)
BOUND = np.linspace(1e-3, 1e-2, GRID.size)

LINES = {
    "offset short": ("short", [55.0, 1.5, 50.0, 3.0, 0.0, 0.0, 0.0]),
    "offset open": ("open", [40.0, 1.0, 50.0, 45.0, 0.0, 300.0, 0.0]),
    "long line": ("short", [400.0, 2.0, 50.4, 0.0, 0.0, 0.0, 0.0]),
    "other impedance": ("short", [60.0, 1.0, 51.0, 0.0, 0.0, 0.0, 0.0]),
    "flush": ("short", [0.0, 1.0, 50.0, 1.0, 0.0, 0.0, 0.0]),
}


def verdicts(gamma, bound=BOUND, judged=ALL, expect=None):
    findings = by_physics("x", GRID, gamma, bound, judged, 50.0, expect)
    return {one.against: one.verdict(1.3) for one in findings}


@pytest.mark.parametrize("kind, values", LINES.values(), ids=LINES)
def test_a_plain_line_is_found_for_what_it_is(kind, values):
    gamma, _ = reflection(kind, values, GRID, 50.0)
    # Weak evidence pulls a little.
    assert (np.abs(plain_line(GRID, gamma, BOUND, 50.0) - gamma) < 0.2 * BOUND).all()
    assert (np.abs(steady_loss(GRID, gamma, BOUND) - np.abs(gamma)) < 0.2 * BOUND).all()
    told = verdicts(gamma, expect="line")
    assert (told["steady loss"], told["a plain line"]) == (AGREES, AGREES)
    assert told["|Γ| ≤ 1"] in (AGREES, SILENT)  # a lossy line lies well inside the circle


@pytest.mark.parametrize("size, verdict", [(0.5, AGREES), (4.0, FAILS)])
def test_a_ripple_on_a_full_reflection(size, verdict):
    """Residual directivity of half the bound passes, of four bounds does not; a gain shows too."""
    gamma, _ = reflection("short", [110.0, 1.5, 50.0, 3.0, 0.0, 0.0, 0.0], GRID, 50.0)
    assert verdicts(gamma + size * BOUND)["steady loss"] == verdict
    assert verdicts(gamma * (1.0 + 4.0 * BOUND))["|Γ| ≤ 1"] == FAILS


def test_a_line_of_two_impedances_is_steady_but_no_plain_line():
    """Nothing is lost in a step of impedance, so that only who expects a plain line is told."""
    end, _ = reflection("short", [40.0, 0.0, 50.0, 0.0, 0.0, 0.0, 0.0], GRID, 50.0)
    seen = see_through_line(
        end,
        GRID,
        delay_s=np.array([60e-12]),
        loss_ohm_per_s=np.array([0.0]),
        z0_ohm=np.array([40.0]),
        reference_ohm=50.0,
    ).gamma
    assert set(verdicts(seen, bound=0.2 * BOUND).values()) == {AGREES}
    assert verdicts(seen, bound=0.2 * BOUND, expect="line")["a plain line"] == FAILS


def test_losses_are_found_again_and_gains_are_none():
    """Conductors and dielectrics, −ln |Γ| = 0.02·√x + 0.01·x; a gain is nearest to no loss at all."""
    x = GRID / GRID[-1]
    lossy = np.exp(-0.02 * np.sqrt(x) - 0.01 * x) * np.exp(-20j * x)
    np.testing.assert_allclose(steady_loss(GRID, lossy, BOUND), np.abs(lossy), rtol=1e-6)
    np.testing.assert_array_equal(steady_loss(GRID, 1.0 / lossy, BOUND), 1.0)


@pytest.mark.parametrize("kind, sign", [("short", 1.0), ("open", -1.0)])
def test_conductors_lose_most_where_the_current_is_largest(kind, sign):
    """Mean of I² on a line of phase θ: (1 ± sin θ/θ)/2; so −ln |Γ| = p√f(1 ± sin θ/θ), p = rτ/Z0 at 1 GHz (derived)."""
    gamma, _ = reflection(kind, [80.0, 1.0, 50.0, 0.0, 0.0, 0.0, 0.0], GRID, 50.0)
    theta = 4.0 * np.pi * GRID * 80e-12
    expected = 1e9 * 80e-12 / 50.0 * np.sqrt(GRID / 1e9) * (1.0 + sign * np.sin(theta) / theta)
    np.testing.assert_allclose(-np.log(np.abs(gamma)), expected, rtol=0.03, atol=1e-5)
    np.testing.assert_allclose(steady_loss(GRID, gamma, BOUND), np.abs(gamma), atol=3e-5)


@pytest.mark.parametrize("seed", range(5))
def test_an_error_within_the_bound_never_shows(seed):
    """The loss of the device itself is among those that are looked at, and is off by no more than the error."""
    rng = np.random.default_rng(seed)
    gamma, _ = reflection(
        "short", [*rng.uniform([20.0, 0.5], [200.0, 3.0]), 50.0, 2.0, 0.0, 0.0, 0.0], GRID, 50.0
    )
    turn = np.exp(2j * np.pi * (rng.random() - rng.uniform(-1e-9, 1e-9) * GRID))
    seen = gamma + 0.9 * BOUND * turn
    assert (np.abs(np.abs(seen) - steady_loss(GRID, seen, BOUND)) <= BOUND).all()


def test_no_line_has_a_gain():
    """Of a line with a loss below zero the nearest that there can be has none."""
    gaining, _ = reflection("short", [110.0, -3.0, 50.0, 3.0, 0.0, 0.0, 0.0], GRID, 50.0)
    assert np.abs(gaining).max() > 1.01
    assert np.abs(plain_line(GRID, gaining, BOUND, 50.0)).max() <= 1.0 + 1e-12
    assert verdicts(gaining, bound=0.3 * BOUND, expect="line")["a plain line"] == FAILS


def test_a_device_inside_the_circle_tells_nothing():
    inside = 0.3 * np.exp(-2j * GRID / GRID[-1])
    assert verdicts(inside) == {"|Γ| ≤ 1": SILENT}
    assert not reflects_fully(inside)
    # A bound so wide that the device might lie outside tells at least that.
    assert verdicts(inside, bound=np.ones(GRID.size)) == {"|Γ| ≤ 1": AGREES}


def test_gain_of_a_few_single_frequencies_is_none():
    gamma, _ = reflection("short", LINES["offset short"][1], GRID, 50.0)
    gamma[[3, 50, 51]] *= 1.2
    assert verdicts(gamma)["|Γ| ≤ 1"] == AGREES


def test_only_what_is_judged_is_fitted():
    lower = GRID < 3e9
    gamma, _ = reflection("short", LINES["offset short"][1], GRID, 50.0)
    spoilt = np.where(lower, gamma, 0.6 * gamma)
    found = verdicts(spoilt, judged=lower, expect="line")
    assert set(found.values()) == {AGREES}
    assert verdicts(gamma, judged=~ALL) == {"|Γ| ≤ 1": SILENT}
    assert set(verdicts(gamma, expect="passive")) == {"|Γ| ≤ 1"}
