"""Physics of the pieces: limits, symmetry, and values from outside."""

import numpy as np
import pytest

from stdfit.trials.elements import ChipPairEnd, LineSection, PinEnd, PlateEnd, Resonator, StepCapacitance
from stdfit.trials.parts import Part, reflection

FREQUENCY = np.linspace(0.0, 20e9, 501)


def two_port(piece, frequency):
    """The chain matrix of a piece: it carries (1, 0) to (A, C) and (0, 1) to (B, D)."""
    one, zero = np.ones(frequency.size, complex), np.zeros(frequency.size, complex)
    a, c = piece.carry((one, zero), frequency)
    b, d = piece.carry((zero, one), frequency)
    return a, b, c, d


@pytest.mark.parametrize(
    "piece",
    [
        LineSection(51.3, 40e-12, 2e9, 4e-4, 0.4e-6),
        StepCapacitance(8e-15),
        Resonator(4e9, 50, 0.01, across=True),
        Resonator(4e9, 50, 20.0, across=False),
    ],
)
def test_every_piece_is_reciprocal(piece):
    a, b, c, d = two_port(piece, FREQUENCY)
    np.testing.assert_allclose(a * d - b * c, 1, atol=1e-12)


def test_lossless_line_turns_an_ideal_open():
    part = Part("open", 50.0, (LineSection(50.0, 30e-12),), PinEnd(0.0, 1e12))
    expected = np.exp(-2j * 2 * np.pi * FREQUENCY * 30e-12)
    np.testing.assert_allclose(reflection(part, FREQUENCY), expected, atol=1e-12)


def test_conversions_at_fifty_ohm():
    # 1 ps of one-way delay = 20 fF = 50 pH = 0.720 degrees at 1 GHz (derived: 2*360*1e9*1e-12).
    spot = [1e9]
    delay = Part("open", 50.0, (LineSection(50.0, 1e-12),), PinEnd(0.0, 1e12))
    farads = Part("open", 50.0, (), PinEnd(20e-15, 1e12))
    henries = Part("short", 50.0, (), PlateEnd(50e-12, 0.0))
    assert -np.angle(reflection(delay, spot)[0], deg=True) == pytest.approx(0.720, abs=1e-9)
    assert -np.angle(reflection(farads, spot)[0], deg=True) == pytest.approx(0.720, abs=1e-4)
    assert -np.angle(-reflection(henries, spot)[0], deg=True) == pytest.approx(0.720, abs=1e-4)


def test_quarter_wave_has_the_loss_of_the_first_order():
    # Over a quarter of a wave the standing wave's heat is the mean one: |Γ| of a short behind it is
    # exp(-2αl), αl = r τ/(2 Z0) at 1 GHz (first order in the loss; derived).
    part = Part("short", 50.0, (LineSection(50.0, 250e-12, 2e8),), PlateEnd(0.0, 0.0))
    expected = np.exp(-2e8 * 250e-12 / 50)
    assert abs(reflection(part, [1e9])[0]) == pytest.approx(expected, abs=2e-5)


def test_radiation_grows_with_the_fourth_power():
    part = Part("open", 50.0, (), PinEnd(30e-15, 40e9, radiation_s=1e-4))
    loss = 1 - np.abs(reflection(part, [1.5e9, 3e9, 6e9]))
    assert loss[2] == pytest.approx(0.0099, rel=0.03)
    assert loss[1] / loss[0] == pytest.approx(16, rel=0.05)


def test_load_at_dc_is_its_resistors_in_parallel():
    end = ChipPairEnd((99.0, 102.0), (0.5e-9, 0.6e-9), (10e-15, 20e-15), 50e-15)
    ohm = 99.0 * 102.0 / 201.0
    assert end.dc_resistance_ohm == pytest.approx(ohm, rel=1e-12)
    gamma = reflection(Part("load", 50.0, (), end), [0.0])[0]
    assert gamma == pytest.approx((ohm - 50) / (ohm + 50), abs=1e-14)


def test_roughness_doubles_the_resistance_at_most():
    smooth = two_port(LineSection(50.0, 10e-12, 2e9), FREQUENCY[1:])[1].real
    rough = two_port(LineSection(50.0, 10e-12, 2e9, roughness_m=50e-6), FREQUENCY[1:])[1].real
    assert np.all(rough / smooth > 1.5)
    assert np.all(rough / smooth < 2.01)
