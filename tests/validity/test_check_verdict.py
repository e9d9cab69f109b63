"""E_n against figures worked by hand, the verdict on a whole curve, and the day's part of the bound."""

from dataclasses import replace

import numpy as np
import pytest
from scipy.special import ndtr

from stdfit.base.errors import PhysicsError
from stdfit.circuits.connectors import FAMILIES
from stdfit.circuits.error_box import seen_raw
from stdfit.uncertainty.connections import Repeatability
from stdfit.validity.device.bound import device_map, three_of
from stdfit.validity.device.check import AGREES, DOUBT, FAILS, SILENT, Check, Finding, compared, curve_factor
from stdfit.validity.device.check_day import Stack, correct_day, device_uncertainty
from stdfit.validity.device.check_value import Value

HERTZ = np.linspace(1e9, 5e9, 100)
ALL = np.ones(100, dtype=bool)
FLUSH = np.array([1.0, -1.0, 0.0])


def test_e_n_by_hand():
    """|0.30 + 0.01j − 0.30| = 0.01 and √(0.003² + 0.004²) = 0.005: E_n = 2; 0.006 of 0.01: 0.6."""
    value = Value("value", np.array([0.30, 0.30, 0.30]), np.array([0.004, 0.008, np.nan]))
    gamma = np.array([0.30 + 0.01j, 0.30 - 0.006j, 0.5])
    found = compared("x", HERTZ[:3], gamma, np.array([0.003, 0.006, 0.003]), value, ALL[:3])
    assert found.ratio == pytest.approx([2.0, 0.6])
    assert found.frequency_hz.tolist() == HERTZ[:2].tolist()  # nothing is known of the third
    assert found.largest == pytest.approx((2.0, 1e9, 0.005))
    assert found.inside() == 0.5
    assert found.inside(judged=False) is None
    assert found.agrees_to_hz == 0.0


def curve_of(ratios, judged=ALL, device="x"):
    return Finding(device, "value", HERTZ, np.zeros(100), np.asarray(ratios), np.ones(100), judged)


def ratios(beyond, size):
    return np.where(np.arange(100) < beyond, size, 0.5)


@pytest.mark.parametrize(
    "beyond, size, verdict",
    [
        (0, 0.0, AGREES),
        (5, 9.0, AGREES),  # five single points of a hundred may be outside
        (6, 1.26, DOUBT),
        (6, 1.28, FAILS),
        (100, 1.1, DOUBT),
        (100, np.inf, FAILS),
        (100, np.nan, FAILS),
    ],
)
def test_the_verdict_on_a_curve(beyond, size, verdict):
    assert curve_of(ratios(beyond, size)).verdict(curve_factor(1)) == verdict


def test_beyond_the_limit_nothing_is_judged():
    lower = np.arange(100) >= 6
    found = curve_of(ratios(6, 9.0), lower)
    assert found.verdict(1.27) == AGREES
    assert (found.inside(), found.inside(judged=False)) == (1.0, 0.0)
    assert found.largest[0] == 0.5
    assert curve_of(ratios(6, 9.0), ~ALL).verdict(1.27) == SILENT
    assert curve_of(ratios(0, 0.0)[::-1]).agrees_to_hz == 5e9


def test_nothing_against_nothing_is_no_difference():
    same = replace(curve_of(np.zeros(100)), bound=np.zeros(100))
    assert same.ratio.tolist() == [0.0] * 100
    other = replace(same, difference=np.full(100, 1e-9))
    assert np.isposinf(other.ratio).all()


def test_the_factor_of_curves():
    """Independent normal values, m = 4·curves: (2Φ(1.960·k) − 1)^m = 0.95 (derived)."""
    for curves in (1, 2, 3):
        inner = 2.0 * ndtr(1.959963985 * curve_factor(curves)) - 1.0
        assert inner ** (4 * curves) == pytest.approx(0.95, abs=1e-7)


def check_of(*findings):
    return Check("kit", ("open", "short", "load"), False, 1e9, 5e9, 5e9, findings, ())


def test_the_worst_device_decides():
    good, odd, bad = (curve_of(ratios(50, one), device=f"{one}") for one in (0.9, 1.2, 3.0))
    silent = replace(good, device="silent", tells=False)
    assert check_of(good, silent).verdict == AGREES
    assert check_of(good, odd).verdict == DOUBT
    assert check_of(odd, bad, good).verdict == FAILS
    assert check_of(silent).verdict == SILENT
    # Every finding that tells something counts, those of one device too.
    assert check_of(good, good, silent).factor == curve_factor(2)
    many = [replace(good, device=str(k)) for k in range(9)]
    assert check_of(*many).factor == curve_factor(9)


@pytest.mark.parametrize("parts", [1, 2])
def test_ten_devices_of_independent_errors_rarely_fail(parts):
    """Smooth normal errors on a line (1.960 σ) or circular (2.448 σ), of four values over the sweep, in ten devices.

    By line 6.5 % fail, by circle 1.8 % (3000 checks): of 300 up to 29 and 11 with 99.5 % confidence (binomial).
    """
    rng = np.random.default_rng(6)
    x = np.linspace(0.0, 1.0, 100)
    size, axes = np.linalg.eigh(np.exp(-8.0 * (x[:, None] - x) ** 2))
    smooth = (axes * np.sqrt(np.maximum(size, 0.0))).T
    errors = np.linalg.norm(rng.standard_normal((300, 10, parts, 100)) @ smooth, axis=2)
    errors /= {1: 1.959964, 2: 2.447747}[parts]
    checks = [check_of(*(curve_of(one, device=str(k)) for k, one in enumerate(ten))) for ten in errors]
    assert sum(one.verdict == FAILS for one in checks) <= {1: 29, 2: 11}[parts]


def stack_of(gamma, count=1):
    return Stack("x", "device", np.full((count, 8), gamma, dtype=complex))


def day_of(by_hand, device, *, sd=(0.0, 0.0, 0.0), noise=0.0, counts=(1, 1, 1), own=1):
    """A day whose scatter is known, of a kit without errors at +1, −1, 0."""
    kit = by_hand({})
    errors = device_map(kit, three_of(kit), np.linspace(1e9, 2e9, 8))
    box = np.array([0.05, 0.9, 0.1])
    standards = [
        stack_of(seen_raw(box, np.array(gamma)), count) for gamma, count in zip(FLUSH, counts, strict=True)
    ]
    day = correct_day(
        errors, standards, [stack_of(seen_raw(box, np.array(device)), own)], 50.0, FAMILIES["sma"]
    )
    nothing = tuple(np.zeros(8) for _ in range(4))
    return replace(day, scatter=Repeatability(np.array(sd), np.full(3, np.inf), True, nothing, noise))


def test_noise_of_the_day_by_hand(by_hand):
    """At Γ = 0 the load alone counts, once: 2.448·σ·√(1/2 + 1/3); at Γ = j the weights are as told below."""
    found = device_uncertainty(day_of(by_hand, 0.0, noise=1e-3, counts=(1, 1, 2), own=3), 0, 50.0)
    np.testing.assert_allclose(found, 2.4477468 * 1e-3 * np.sqrt(1 / 2 + 1 / 3), rtol=1e-6)
    # (j − 1)/2, −(1 + j)/2 and 2: ½ + ½ + 4, and one of the device's own.
    found = device_uncertainty(day_of(by_hand, 1j, noise=1e-3), 0, 50.0)
    np.testing.assert_allclose(found, 2.4477468 * 1e-3 * np.sqrt(6.0), rtol=1e-6)


def test_contacts_of_the_day_by_hand(by_hand):
    """A resistance of r = 10 mΩ moves Γ by r(1 − Γ)²/(2·50): 4e-4 at a short, 1e-4 at a load, nothing at an open."""
    found = device_uncertainty(day_of(by_hand, -1.0, sd=(0.01, 0.0, 0.0)), 0, 50.0)
    np.testing.assert_allclose(found, 1.959964 * 4e-4 * np.sqrt(2.0), rtol=1e-6)
    found = device_uncertainty(day_of(by_hand, 1.0, sd=(0.01, 0.0, 0.0)), 0, 50.0)
    np.testing.assert_allclose(found, 0.0, atol=1e-12)


def test_the_correction_is_exact(by_hand):
    day = day_of(by_hand, 0.3 - 0.4j)
    np.testing.assert_allclose(day.devices[0].gamma, 0.3 - 0.4j, atol=1e-14)


def test_readings_that_fix_nothing(by_hand):
    kit = by_hand({})
    errors = device_map(kit, three_of(kit), np.linspace(1e9, 2e9, 8))
    same = [stack_of(0.5) for _ in range(3)]
    with pytest.raises(PhysicsError, match="do not fix the analyser's error terms"):
        correct_day(errors, same, [stack_of(0.1)], 50.0, FAMILIES["sma"])
