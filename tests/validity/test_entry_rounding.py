"""Joint rounding: at least as good as each value on its own, and as good as looking at everything."""

import itertools

import numpy as np
import pytest

from stdfit.circuits.standard import PARAMETERS, reflection
from stdfit.fitting.reduced import PULL, Target, cost_of
from stdfit.validity.entry.rounding import jointly, plainly
from stdfit.validity.entry.units import nearest_number, typing_of, units_from

SIZES = {
    "open": [40.0, 2.0, 1.0, 40.0, 3000.0, 400.0, 40.0],
    "short": [40.0, 2.0, 1.0, 20.0, 3000.0, 400.0, 40.0],
    "load": [20.0, 2.0, 1.0, 0.6, 80.0, 30.0],
}


def random_target(rng, kind):
    centre = np.array([50.0 if one.unit == "Ω" else 0.0 for one in PARAMETERS[kind]])
    full = centre + rng.normal(size=centre.size) * SIZES[kind]
    full[1] = abs(full[1])
    grid = np.linspace(50e6, 6e9, 129)
    gamma, _ = reflection(kind, full, grid, 50.0)
    return Target(kind, full, grid, 0.002 + 0.018 * grid / 6e9, 50.0, gamma)


@pytest.mark.parametrize("words", [[], ["loss=dB", "delay=two-way-mm", "capacitance=fF"]])
@pytest.mark.parametrize("digits", [1, 2, 3, 5])
def test_never_worse_than_plain_and_mostly_far_better(digits, words):
    rng = np.random.default_rng(digits)
    gains = []
    for kind in ("open", "short", "load") * 3:
        target = random_target(rng, kind)
        typing = typing_of(kind, units_from(words, None), [digits] * target.full.size)
        places = range(target.full.size)
        plain = cost_of(target, typing.meant(plainly(typing, target.full, places), places, target.full))
        found = jointly(target, typing, target.full, places, places)
        costs = cost_of(target, typing.meant(found, places, target.full))
        assert costs[0] <= plain
        for numbers in found:
            assert [nearest_number(float(one), digits) for one in numbers] == numbers.tolist()
        gains.append(np.sqrt(costs[0] / plain))
    assert np.median(gains) < 0.2


def test_as_good_as_all_combinations_within_reach():
    """Delay and C0 of an open, with two digits: all pairs far beyond the valley in which they trade off."""
    grid = np.linspace(50e6, 4e9, 129)
    full = np.array([18.47, 0.0, 50.0, 43.3, 0.0, 0.0, 0.0])
    gamma, _ = reflection("open", full, grid, 50.0)
    target = Target("open", full, grid, np.full(grid.size, 0.01), 50.0, gamma)
    typing = typing_of("open", units_from([], None), [2] * 7)
    first = sorted({nearest_number(k / 10, 2) for k in range(-1500, 1501)})
    tried = np.array([[d, 0.0, 50.0, c, 0.0, 0.0, 0.0] for d, c in itertools.product(range(10, 30), first)])
    (found, *_) = jointly(target, typing, full, [0, 3], [0, 3])

    def judged(values):
        return cost_of(target, values) + ((PULL * (values - full) / target.sizes) ** 2).sum(axis=-1)

    assert judged(typing.meant(found, [0, 3], full)) <= judged(tried).min() * (1.0 + 1e-9)


def test_what_may_not_move_is_rounded_on_its_own_and_the_others_follow():
    rng = np.random.default_rng(5)
    target = random_target(rng, "open")
    typing = typing_of("open", units_from([], None), [2, 4, 4, 4, 4, 4, 4])
    (numbers, *_) = jointly(target, typing, target.full, range(7), [3, 4, 5, 6])
    assert numbers[:3].tolist() == [nearest_number(float(target.full[k]), (2, 4, 4)[k]) for k in range(3)]
    alone = plainly(typing, target.full, range(7))
    assert abs(numbers[3] - alone[3]) > 1.0  # 0.1 ps and more are made up for by fF


def test_a_loss_does_not_fall_below_zero():
    rng = np.random.default_rng(6)
    for _ in range(5):
        target = random_target(rng, "short")
        full = target.full.copy()
        full[1] = 1e-3
        typing = typing_of("short", units_from(["loss=dB"], None), [1] * 7)
        (numbers, *_) = jointly(target, typing, full, range(7), range(7))
        assert typing.meant(numbers, range(7), full)[1] >= 0.0


def test_nothing_to_type():
    target = random_target(np.random.default_rng(7), "load")
    typing = typing_of("load", units_from([], None), [4] * 6)
    assert jointly(target, typing, target.full, [], []).tolist() == [[0.0] * 6]
