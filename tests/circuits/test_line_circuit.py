"""An offset line: against chain matrices and a general-purpose library; derivatives and limits."""

import numpy as np
import pytest

from stdfit.circuits.line import see_through_line

FREQUENCY = np.linspace(20e6, 9e9, 61)
PASSIVE = 0.8 * np.exp(1j * np.linspace(0.0, 5.0, FREQUENCY.size))
LINE = {"delay_s": 31e-12, "loss_ohm_per_s": 2.3e9, "z0_ohm": 51.7, "reference_ohm": 50.0}


def seen(termination=PASSIVE, frequency=FREQUENCY, **changes):
    return see_through_line(termination, frequency, **{**LINE, **changes})


def chain_matrix_reflection(termination, frequency, delay_s, loss_ohm_per_s, z0_ohm, reference_ohm):
    """Γ by the ABCD matrix of a uniform line: D. M. Pozar, Microwave Engineering, table 4.1 (memory)."""
    omega, root = 2 * np.pi * frequency, np.sqrt(frequency / 1e9)
    length = 1j * omega * delay_s + (1 + 1j) * loss_ohm_per_s * delay_s / (2 * z0_ohm) * root
    zc = z0_ohm + (1 - 1j) * loss_ohm_per_s / (2 * omega) * root
    load = reference_ohm * (1 + termination) / (1 - termination)
    a, b, c, d = np.cosh(length), zc * np.sinh(length), np.sinh(length) / zc, np.cosh(length)
    z = (a * load + b) / (c * load + d)
    return (z - reference_ohm) / (z + reference_ohm)


@pytest.mark.parametrize("reference", [50.0, 75.0])
@pytest.mark.parametrize("loss", [0.0, 2.3e9, 30e9])
def test_agrees_with_the_chain_matrix(loss, reference):
    changes = {"loss_ohm_per_s": loss, "reference_ohm": reference}
    expected = chain_matrix_reflection(PASSIVE, FREQUENCY, **{**LINE, **changes})
    np.testing.assert_allclose(seen(**changes).gamma, expected, rtol=0, atol=1e-13)


def library_reflection(loss, termination):
    """Γ behind a line of resistance and skin inductance per length, from scikit-rf's distributed circuit."""
    skrf = pytest.importorskip("skrf", reason="scikit-rf is not installed")
    z0, delay = LINE["z0_ohm"], LINE["delay_s"]
    skin = loss * np.sqrt(FREQUENCY / 1e9)  # series R per second of delay; ωL of the skin is the same
    media = skrf.media.DistributedCircuit(
        skrf.Frequency.from_f(FREQUENCY, unit="hz"),
        z0_port=50.0,
        C=np.full(FREQUENCY.size, 1.0 / z0),
        L=z0 + skin / (2 * np.pi * FREQUENCY),
        R=skin,
        G=np.zeros(FREQUENCY.size),
    )
    s = media.line(delay, "m").s
    return s[:, 0, 0] + s[:, 0, 1] * s[:, 1, 0] * termination / (1 - s[:, 1, 1] * termination)


@pytest.mark.parametrize("termination", [1.0, -1.0, 0.0, 0.3 - 0.6j])
def test_agrees_with_a_distributed_circuit_to_second_order_in_loss(termination):
    """The trade's formula is the exact line to first order in loss: half the loss, a quarter of the gap.

    Exact line: scikit-rf's media.DistributedCircuit, an independent implementation.
    """
    gamma = np.full(FREQUENCY.size, complex(termination))
    np.testing.assert_allclose(
        seen(gamma, loss_ohm_per_s=0.0).gamma, library_reflection(0.0, gamma), rtol=0, atol=1e-12
    )
    whole, half = (
        np.abs(seen(gamma, loss_ohm_per_s=loss).gamma - library_reflection(loss, gamma))
        for loss in (2e9, 1e9)
    )
    effect = np.abs(seen(gamma, loss_ohm_per_s=2e9).gamma - seen(gamma, loss_ohm_per_s=0.0).gamma)
    assert np.max(whole) < 0.02 * np.max(effect)
    np.testing.assert_allclose(np.max(half) / np.max(whole), 0.25, rtol=0.05)


@pytest.mark.parametrize(
    ("key", "field", "radius"),
    [("delay_s", "by_delay", 2e-12), ("loss_ohm_per_s", "by_loss", 1e9), ("z0_ohm", "by_z0", 2.0)],
)
def test_derivatives_by_the_line(contour_derivative, key, field, radius):
    expected = contour_derivative(lambda value: seen(**{key: value}).gamma, LINE[key], radius)
    np.testing.assert_allclose(
        getattr(seen(), field), expected, rtol=1e-9, atol=1e-11 * np.abs(expected).max()
    )


def test_derivative_by_the_termination(contour_derivative):
    expected = contour_derivative(lambda change: seen(PASSIVE + change).gamma, 0.0, 0.05)
    np.testing.assert_allclose(seen().by_termination, expected, rtol=1e-9)


def test_at_zero_frequency_the_line_has_no_effect():
    result = seen(np.array([0.3 + 0.1j]), np.array([0.0]))
    assert result.gamma[0] == pytest.approx(0.3 + 0.1j, abs=1e-15)
    assert result.by_termination[0] == pytest.approx(1.0, abs=1e-14)
    for derivative in (result.by_delay, result.by_loss, result.by_z0):
        assert abs(derivative[0]) < 1e-15


@pytest.mark.parametrize("end", [1.0, 0.2j])
def test_without_loss_the_effect_dies_out_linearly_with_frequency(end):
    far, near = (
        abs(seen(np.array([complex(end)]), np.array([f]), loss_ohm_per_s=0.0).gamma[0] - end)
        for f in (1e6, 1e5)
    )
    assert near > 0.0
    assert near == pytest.approx(far / 10, rel=1e-3)


def test_a_short_behind_loss_keeps_a_residual_resistance_towards_zero_frequency():
    """Zc·γl → r²τ/(4π·10⁹·Z0) as f → 0: a property of the trade's convention, derived here.

    It is 80 µΩ for 1 GΩ/s, 50 ps and 50 Ω, which no reading shows.
    """
    r, delay, z0 = 20e9, 50e-12, 50.0
    gamma = see_through_line(
        np.array([-1.0 + 0j]),
        np.array([1e-3]),
        delay_s=delay,
        loss_ohm_per_s=r,
        z0_ohm=z0,
        reference_ohm=50.0,
    ).gamma[0]
    residual = 50.0 * (1 + gamma) / (1 - gamma)
    assert residual.real == pytest.approx(r**2 * delay / (4e9 * np.pi * z0), rel=1e-3)


def test_a_lossless_line_keeps_full_reflection():
    for end in (1.0, -1.0, np.exp(0.7j)):
        gamma = seen(np.full(FREQUENCY.size, complex(end)), loss_ohm_per_s=0.0, z0_ohm=63.0).gamma
        np.testing.assert_allclose(np.abs(gamma), 1.0, rtol=0, atol=1e-13)


def test_a_lossless_line_of_the_reference_impedance_only_turns_the_phase():
    gamma = seen(loss_ohm_per_s=0.0, z0_ohm=50.0).gamma
    expected = PASSIVE * np.exp(-4j * np.pi * FREQUENCY * LINE["delay_s"])
    np.testing.assert_allclose(gamma, expected, rtol=0, atol=1e-13)


def test_loss_takes_away_reflection_as_the_square_root_of_frequency():
    """Round trip: −20 log10(e)·(rτ/Z0)·√(f/1 GHz) in dB, the real part of the trade's formula.

    Ends alone hide it, since the loss acts where current flows; in the product of an open and a short the
    complex impedance of the line cancels to first order.
    """
    frequency = np.array([1e9, 4e9])
    line = {"z0_ohm": 50.0, "loss_ohm_per_s": 0.5e9}
    opened, shorted = (seen(np.full(2, end), frequency, **line).gamma for end in (1.0 + 0j, -1.0 + 0j))
    expected = -20 * np.log10(np.e) * 0.5e9 * LINE["delay_s"] / 50.0 * np.array([1.0, 2.0])
    np.testing.assert_allclose(10 * np.log10(np.abs(opened * shorted)), expected, rtol=2e-3)
