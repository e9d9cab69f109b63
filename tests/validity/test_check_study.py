"""Simulated checks with a known truth: a good kit passes, a kit with a wrong open does not."""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.circuits.connectors import family_of
from stdfit.circuits.error_box import seen_raw
from stdfit.circuits.standard import reflection
from stdfit.uncertainty.connections import responses
from stdfit.validity.device.bound import device_bound, device_map, three_of
from stdfit.validity.device.check import AGREES, FAILS, Check, by_physics, compared
from stdfit.validity.device.check_day import Stack, correct_day, device_uncertainty
from stdfit.validity.device.check_value import Value
from stdfit.validity.kit import curve

GRID = np.linspace(50e6, 6e9, 51)
FAMILY = family_of("SMA")
CHECKS = 120

DEVICES = {
    "offset short": reflection("short", [110.0, 1.5, 50.0, 3.0, 0.0, 0.0, 0.0], GRID, 50.0)[0],
    "offset open": reflection("open", [40.0, 1.5, 50.0, 45.0, 0.0, 0.0, 0.0], GRID, 50.0)[0],
    "mismatch": reflection("load", [15.0, 0.0, 50.0, 25.0, 50.0, 10.0], GRID, 50.0)[0],
    "padded short": 0.3 * reflection("short", [30.0, 1.0, 50.0, 0.0, 0.0, 0.0, 0.0], GRID, 50.0)[0],
}


def raw_analyser(rng):
    """Directivity −25 dB, source match −20 dB, both with ripple (invented)."""
    one, two = (np.exp(2j * np.pi * (rng.random() - GRID * rng.uniform(0.2e-9, 3e-9))) for _ in range(2))
    directivity, match = 0.056 * (0.7 + 0.3 * one), 0.1 * (0.7 * two + 0.3)
    tracking = (1.0 + 0.05 * one) * np.exp(-2j * np.pi * GRID * 0.2e-9)
    return np.stack([directivity, tracking - directivity * match, match], axis=-1)


def truth_of(kit, rng):
    """Draw the true standards of a kit from what it says of itself: its sources, and a part of its misfits."""
    lengths = max(len(share.covariances) for share in kit.shares)
    length = int(rng.integers(lengths))
    shift = np.zeros(len(kit.order))
    for share in kit.shares:
        covariance = share.covariances[min(length, len(share.covariances) - 1)]
        shift += rng.multivariate_normal(shift * 0.0, covariance, method="svd")
    drawn = dict(zip(kit.order, shift, strict=True))
    true = {}
    for one in three_of(kit):
        values = [p.value + drawn.get(p.of, 0.0) for p in one.parameters]
        true[one.name] = reflection(one.kind, values, GRID, kit.reference_ohm)[0]
    return true


def day_of(kit, true, rng, connections=2, noise=1e-4):
    """Read three standards and three devices with a raw analyser, and correct them with the kit."""
    box = raw_analyser(rng)

    def read(gamma):
        parts = rng.standard_normal((connections, 3)) * [0.01, 0.15, 0.05]
        seen = gamma + parts @ responses(gamma, GRID, 50.0).T
        white = rng.standard_normal((2, *seen.shape))
        return seen_raw(box, seen + noise * (white[0] + 1j * white[1]))

    errors = device_map(kit, three_of(kit), GRID)
    standards = [Stack(one.name, one.kind, read(true[one.name])) for one in errors.definitions]
    devices = [Stack(name, "device", read(gamma)) for name, gamma in DEVICES.items()]
    return correct_day(errors, standards, devices, 50.0, FAMILY)


def check_of(kit, true, rng, **session):
    day = day_of(kit, true, rng, **session)
    judged = kit.limit.limit_hz >= GRID
    findings = []
    for place, (name, gamma) in enumerate(DEVICES.items()):
        bound = device_uncertainty(day, place, 50.0)
        value = Value("truth", gamma, np.zeros(GRID.size))
        findings.append(compared(name, GRID, day.devices[place].gamma, bound, value, judged))
    return Check(kit.name, ("open", "short", "load"), False, 0.0, 6e9, 6e9, tuple(findings), ())


def test_good_kits_rarely_fail(modest_kit):
    """A verdict has a false alarm in at most 5 %; of 120 checks up to 10 with 95 % confidence (binomial)."""
    rng = np.random.default_rng(3)
    found = [check_of(modest_kit, truth_of(modest_kit, rng), rng) for _ in range(CHECKS)]
    verdicts = [one.verdict for one in found]
    assert verdicts.count(FAILS) <= 10
    assert verdicts.count(AGREES) >= 0.75 * CHECKS
    inside = np.mean([one.inside() for check in found for one in check.findings])
    # Bounds are the largest over the correlation lengths, and so wider than of 95 %; far too wide were no check.
    assert 0.93 <= inside < 0.9999


def test_one_connection_of_everything_rarely_fails_either(modest_kit):
    """The family's repeatability is assumed then: larger than what is drawn here."""
    rng = np.random.default_rng(4)
    verdicts = [
        check_of(modest_kit, truth_of(modest_kit, rng), rng, connections=1).verdict for _ in range(30)
    ]
    assert verdicts.count(FAILS) <= 4


def wrong_open(kit, true, times):
    """Move the true open by a multiple of its bound, square to its reflection: a phase."""
    gamma, bound = curve(kit, kit.definition("open"), GRID)
    return {**true, "open": gamma * np.exp(1j * times * bound)}


def test_an_open_that_is_wrong_by_three_bounds_fails(modest_kit):
    """Of 20 kits whose open turns three bounds further than they say nearly all fail; the offset open tells it."""
    rng = np.random.default_rng(5)
    found = [
        check_of(modest_kit, wrong_open(modest_kit, truth_of(modest_kit, rng), 3.0), rng) for _ in range(20)
    ]
    verdicts = [one.verdict for one in found]
    assert verdicts.count(FAILS) >= 18
    assert verdicts.count(AGREES) == 0


@pytest.mark.parametrize("kind", ["open", "short"])
def test_a_gross_error_shows_on_a_device_of_which_nothing_is_known(modest_kit, kind):
    """A standard that reflects 0.85 of what the kit says: a ripple on |Γ|, and a gain here and there."""
    rng = np.random.default_rng(6)
    true = truth_of(modest_kit, rng)
    true = {**true, kind: true[kind] * 0.85}
    day = day_of(modest_kit, true, rng)
    judged = modest_kit.limit.limit_hz >= GRID
    bound = device_uncertainty(day, 0, 50.0)
    findings = by_physics("offset short", GRID, day.devices[0].gamma, bound, judged, 50.0)
    assert [one.against for one in findings] == ["|Γ| ≤ 1", "steady loss"]
    assert FAILS in [one.verdict(1.5) for one in findings]


def test_the_day_widens_the_bound(modest_kit):
    """Nothing of the day: the kit's part is left. Fewer connections: wider."""
    rng = np.random.default_rng(7)
    true = truth_of(modest_kit, rng)
    day = day_of(modest_kit, true, rng)
    still = replace(
        day.scatter, sd=np.zeros(3), noise=0.0, leftover=tuple(np.zeros(GRID.size) for _ in range(7))
    )
    kit_part = device_bound(day.errors, day.devices[1].gamma[:, None])[:, 0]
    np.testing.assert_allclose(device_uncertainty(replace(day, scatter=still), 1, 50.0), kit_part, rtol=1e-12)
    whole = device_uncertainty(day, 1, 50.0)
    assert (whole > kit_part).all()
    single = replace(day, devices=tuple(replace(one, deviations=one.deviations[:1]) for one in day.devices))
    assert (device_uncertainty(single, 1, 50.0) > whole).all()
