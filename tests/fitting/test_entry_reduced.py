"""Reduced definitions: the first-order equivalents of the trade, no poor minimum, and values that stay sensible."""

import numpy as np
import pytest

from stdfit.circuits.standard import PARAMETERS, reflection
from stdfit.fitting.reduced import Target, cost_of, misses, refit

DEFAULT = {"offset_z0_ohm": 50.0, "resistance_ohm": 50.0}


def target(kind, top_hz=6e9, low_hz=50e6, tight=1.0, **full):
    values = values_of(kind, **full)
    grid = np.linspace(low_hz, top_hz, 129)
    gamma, _ = reflection(kind, values, grid, 50.0)
    return Target(kind, values, grid, tight * (0.002 + 0.018 * grid / top_hz), 50.0, gamma)


def values_of(kind, **given):
    return np.array([given.get(one.name, DEFAULT.get(one.name, 0.0)) for one in PARAMETERS[kind]])


def reduced(aim, *names):
    base = values_of(aim.kind)
    places = [aim.place(name) for name in names]
    base[places] = aim.full[places]
    return dict(zip([one.name for one in PARAMETERS[aim.kind]], refit(aim, places, base), strict=True))


@pytest.mark.parametrize(
    ("kind", "full", "term", "expected"),
    [
        # Derived: at 50 Ω 1 ps of one-way delay ↔ 20 fF ↔ 50 pH; a line adds Z0·τ − Zr²·τ/Z0 to a load's L.
        ("open", {"offset_delay_ps": 20.0, "c0": 20.0}, "offset_delay_ps", 21.0),
        ("open", {"offset_delay_ps": 2.0, "c0": 20.0}, "c0", 60.0),
        ("short", {"offset_delay_ps": 20.0, "l0": 50.0}, "offset_delay_ps", 21.0),
        ("short", {"offset_delay_ps": 2.0, "l0": 50.0}, "l0", 150.0),
        ("load", {"offset_delay_ps": 10.0, "offset_z0_ohm": 55.0}, "inductance_ph", 550.0 - 25000 / 55.0),
        ("load", {"inductance_ph": 25.0}, "capacitance_ff", -10.0),
    ],
)
def test_at_low_frequency_one_term_takes_over_the_role_of_another(kind, full, term, expected):
    # Bounds so tight that no value is held near the full one for its own sake.
    aim = target(kind, top_hz=0.5e9, tight=1e-2, **full)
    assert reduced(aim, term)[term] == pytest.approx(expected, rel=2e-3)


def test_everything_accepted_changes_nothing():
    aim = target("open", offset_delay_ps=20.0, offset_loss_gohm_per_s=1.0, c0=40.0, c2=600.0)
    assert (refit(aim, range(7), aim.full) == aim.full).all()


@pytest.mark.parametrize("delay", [-30.0, 5.0, 60.0, 200.0])
@pytest.mark.parametrize(("kind", "first"), [("open", {"c0": 60.0, "c2": 900.0}), ("short", {"l0": 40.0})])
def test_no_delay_of_a_dense_scan_is_better(kind, first, delay):
    aim = target(kind, top_hz=9e9, offset_delay_ps=delay, offset_loss_gohm_per_s=2.0, **first)
    found = refit(aim, [0], values_of(kind))
    scan = np.repeat(values_of(kind)[None], 3001, axis=0)
    scan[:, 0] = np.linspace(-300.0, 300.0, 3001)
    assert cost_of(aim, found) <= cost_of(aim, scan).min() * (1.0 + 1e-6)


def test_the_better_of_two_valleys_is_found():
    """A C2 left out: delay and C0 follow it from 32 ps and −270 fF, thirty times closer than from 18 ps and 0 fF."""
    full = {"offset_delay_ps": 16.2, "offset_loss_gohm_per_s": 1.075, "c0": 39.8, "c2": 615.0}
    aim = target("open", top_hz=4.2e9, **full)
    scan = np.repeat(values_of("open")[None], 61 * 81, axis=0)
    delays, first = np.meshgrid(np.linspace(-30.0, 90.0, 61), np.linspace(-1000.0, 1000.0, 81))
    scan[:, 0], scan[:, 3] = delays.ravel(), first.ravel()
    found = refit(aim, [0, 3], values_of("open", offset_delay_ps=16.2, c0=39.8))
    assert cost_of(aim, found) < cost_of(aim, scan).min()


def test_no_random_start_leads_to_much_less():
    """Of 3 × 40 searches with the same door from random starts none saves a tenth of the error and 2 % of the bound."""
    from stdfit.fitting import reduced as module

    rng = np.random.default_rng(3)
    cases = [
        ("open", {"offset_delay_ps": 60.0, "c0": 50.0, "c2": 300.0}, [0, 3]),
        (
            "short",
            {"offset_delay_ps": 30.0, "offset_loss_gohm_per_s": 2.0, "l0": 20.0, "l2": -200.0},
            [0, 1, 4],
        ),
        ("load", {"offset_delay_ps": 25.0, "resistance_ohm": 50.6, "inductance_ph": 120.0}, [3, 4, 5]),
    ]
    for kind, full, free in cases:
        aim = target(kind, **full)
        own = np.sqrt(cost_of(aim, refit(aim, free, values_of(kind))))
        for _ in range(40):
            start = values_of(kind)
            start[free] += (
                rng.normal(size=len(free)) * np.array([40.0, 2.0, 50.0, 1.0, 100.0, 60.0, 1.0])[free]
            )
            other = np.sqrt(cost_of(aim, module._search(aim, free, start, start)))
            assert own <= max(1.1 * other, other + 0.02)


def test_a_negative_loss_is_held_at_zero():
    """A resistance of the load above 50 Ω pulls an accepted loss below zero where nothing else may follow."""
    aim = target("open", offset_delay_ps=30.0, c0=40.0)
    free = [0, 1]
    base = values_of("open", offset_delay_ps=30.0)
    found = refit(aim, free, base)
    assert found[1] >= 0.0
    gain = target("open", offset_delay_ps=30.0, offset_loss_gohm_per_s=-1.0)
    assert refit(gain, free, values_of("open", offset_delay_ps=30.0))[1] == 0.0


def test_a_line_is_not_carried_off_to_stand_for_a_resistance():
    """A line of 5 Ω and 1500 GΩ/s would follow this load better, on paper."""
    aim = target("load", top_hz=10e9, resistance_ohm=51.2, inductance_ph=60.0)
    found = reduced(aim, "offset_delay_ps", "offset_loss_gohm_per_s", "offset_z0_ohm", "capacitance_ff")
    assert abs(found["offset_z0_ohm"] - 50.0) < 10.0
    assert found["offset_loss_gohm_per_s"] < 100.0


def test_nonsense_is_refused_and_not_followed():
    aim = target("open", offset_delay_ps=30.0)
    wild = np.array([[30.0, 0.0, -1.0, 0, 0, 0, 0], [1e300, 1e300, 50.0, 0, 0, 0, 0], aim.full])
    cost = cost_of(aim, wild)
    assert cost[0] > 1e90 and cost[1] > 1e90 and cost[2] == 0.0
    assert np.isfinite(misses(aim, wild)[1]).all()
