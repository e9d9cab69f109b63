"""Two-ports between analyser and standard: derived relations, derivatives by differences, an independent library."""

import numpy as np
import pytest

from stdfit.circuits.error_box import corrected, seen_raw
from stdfit.circuits.line import see_through_line
from stdfit.circuits.two_port import (
    box_of,
    line_two_port,
    loss_of_decibels,
    product_of,
    s_by_terms,
    terms_by_reading,
    terms_by_s,
)

F = np.linspace(0.5e9, 8e9, 7)
LINE = {"delay_s": 95e-12, "loss_ohm_per_s": 2e9, "z0_ohm": 53.0, "reference_ohm": 50.0}


def random_complex(seed, *shape):
    rng = np.random.default_rng(seed)
    return 0.4 * (rng.standard_normal(shape) + 1j * rng.standard_normal(shape))


@pytest.fixture
def s():
    return line_two_port(F, **LINE).s


def test_a_line_is_what_a_standard_sees_of_its_offset(s):
    gamma = random_complex(1, F.size)
    seen = see_through_line(gamma, F, **LINE).gamma
    np.testing.assert_allclose(seen_raw(box_of(s), gamma), seen, atol=1e-14)
    np.testing.assert_allclose(corrected(box_of(s), seen), gamma, atol=1e-14)
    np.testing.assert_allclose(product_of(box_of(s)), s[:, 1] ** 2, atol=1e-15)


@pytest.mark.parametrize(
    ("name", "key", "step"),
    [("by_delay", "delay_s", 1e-17), ("by_loss", "loss_ohm_per_s", 1e4), ("by_z0", "z0_ohm", 1e-5)],
)
def test_derivatives_of_a_line(name, key, step):
    up, down = (line_two_port(F, **{**LINE, key: LINE[key] + d}).s for d in (step, -step))
    found = getattr(line_two_port(F, **LINE), name)
    np.testing.assert_allclose(found, (up - down) / (2 * step), rtol=1e-6, atol=1e-7 * np.abs(found).max())


def test_first_order_errors_behind_a_two_port(s):
    gamma, change = random_complex(2, F.size), 1e-6 * random_complex(3, F.size, 3)
    read = seen_raw(box_of(s), gamma)
    shown = corrected(box_of(s + change), read)
    terms = (terms_by_s(s) @ change[..., None])[..., 0]
    expected = (terms * gamma[:, None] ** np.arange(3)).sum(axis=1)
    np.testing.assert_allclose(shown - gamma, expected, atol=2e-11)
    np.testing.assert_allclose(
        s_by_terms(s) @ terms_by_s(s), np.broadcast_to(np.eye(3), (7, 3, 3)), atol=1e-14
    )


def test_errors_of_readings_behind_a_two_port(s):
    gamma, alpha = random_complex(4, F.size), 1e-6 * random_complex(5, F.size, 3)
    read = seen_raw(box_of(s), gamma)
    off = (alpha * read[:, None] ** np.arange(3)).sum(axis=1)
    shown = corrected(box_of(s), read + off)
    expected = (terms_by_reading(box_of(s), alpha) * gamma[:, None] ** np.arange(3)).sum(axis=1)
    np.testing.assert_allclose(shown - gamma, expected, atol=2e-11)


def test_decibels_are_one_way_at_1_ghz():
    """0.1 dB is 10^(-0.1/20) of the wave. The skin effect adds 1 − j Ω to the 50 Ω: a mismatch of 0.014, whose echo is
    worth up to 0.014² of the wave, 0.002 dB."""
    loss = loss_of_decibels(0.1, 95e-12, 50.0)
    line = line_two_port(
        np.array([1e9, 4e9]), delay_s=95e-12, loss_ohm_per_s=loss, z0_ohm=50.0, reference_ohm=50.0
    )
    np.testing.assert_allclose(20 * np.log10(np.abs(line.s[:, 1])), [-0.1, -0.2], atol=0.002)


def test_a_lossless_line_of_the_reference_impedance_reflects_nothing():
    line = line_two_port(F, delay_s=95e-12, loss_ohm_per_s=0.0, z0_ohm=50.0, reference_ohm=50.0)
    np.testing.assert_allclose(line.s[:, [0, 2]], 0.0, atol=1e-15)
    np.testing.assert_allclose(line.s[:, 1], np.exp(-2j * np.pi * F * 95e-12), atol=1e-14)
