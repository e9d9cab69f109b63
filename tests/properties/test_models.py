"""What holds for every standard, whatever its values."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from stdfit.circuits.standard import PARAMETERS, reflection

FREQUENCY = np.concatenate([[0.0], np.geomspace(1e3, 20e9, 60)])
settings.register_profile("models", deadline=None, max_examples=120, derandomize=True)
MODELS = settings.get_profile("models")


def within(low, high):
    return st.floats(low, high, allow_nan=False, allow_subnormal=False)


DELAY, LOSS, Z0 = within(0.0, 300.0), within(0.0, 10.0), within(30.0, 80.0)
ENDS = {
    "open": st.tuples(within(0, 200), within(-500, 500), within(-100, 100), within(-10, 10)),
    "short": st.tuples(within(0, 200), within(-500, 500), within(-100, 100), within(-10, 10)),
    "load": st.tuples(within(0, 500), within(0, 500), within(0, 200)),
}


@st.composite
def passive(draw, kinds=("open", "short", "load"), loss=LOSS):
    kind = draw(st.sampled_from(kinds))
    return kind, [draw(DELAY), draw(loss), draw(Z0), *draw(ENDS[kind])]


def end_of(kind, values):
    """Γ at zero frequency in closed form."""
    return {"open": 1.0, "short": -1.0}.get(kind, (values[3] - 50.0) / (values[3] + 50.0))


@MODELS
@given(passive())
def test_passive_standards_reflect_no_more_than_they_get(standard):
    gamma, _ = reflection(*standard, FREQUENCY, 50.0)
    assert np.abs(gamma).max() <= 1.0 + 1e-9


@MODELS
@given(passive(kinds=("open", "short"), loss=st.just(0.0)), within(-300.0, 0.0))
def test_lossless_standards_reflect_everything_even_with_negative_delay(standard, delay):
    kind, values = standard
    for changed in (values, [delay, *values[1:]]):
        gamma, _ = reflection(kind, changed, FREQUENCY, 50.0)
        np.testing.assert_allclose(np.abs(gamma), 1.0, rtol=0, atol=1e-9)


@MODELS
@given(passive())
def test_zero_frequency_is_the_bare_end(standard):
    gamma, jacobian = reflection(*standard, np.array([0.0]), 50.0)
    assert gamma[0] == pytest.approx(end_of(*standard), abs=1e-12)
    assert np.isfinite(jacobian).all()


@MODELS
@given(passive())
def test_low_frequencies_lead_to_zero_frequency(standard):
    """But for the residual resistance of the loss formula, r²τ/(4π·10⁹·Z0), and its like in shunt."""
    kind, values = standard
    residual_ohm = (values[1] * 1e9) ** 2 * values[0] * 1e-12 / (4e9 * np.pi * values[2])
    gamma, _ = reflection(kind, values, np.array([1.0]), 50.0)
    assert abs(gamma[0] - end_of(kind, values)) <= 2.0 * residual_ohm / 50.0 + 2e-5


@MODELS
@given(passive(loss=st.just(0.0)))
def test_without_loss_the_curve_has_no_jump_anywhere(standard):
    """Neighbouring frequencies have neighbouring reflections: 10 ns bounds the slope of all of these."""
    kind, values = standard
    f = np.array([0.0, 1e-3, 1.0, 1e3, 1e6])
    gamma, _ = reflection(kind, values, f, 50.0)
    assert (np.abs(np.diff(gamma)) <= 1e-8 * np.diff(f) + 1e-14).all()


@MODELS
@given(st.sampled_from(["open", "short"]), within(0.1, 40.0))
def test_delay_turns_the_phase_backwards(kind, delay):
    """Time factor e^{+jωt}: a longer line has a more negative phase, a shorter one a more positive."""
    values = [0.0, 0.0, 50.0, 0.0, 0.0, 0.0, 0.0]
    f = np.array([1e9])
    plain, longer, shorter = (reflection(kind, [d, *values[1:]], f, 50.0)[0][0] for d in (0.0, delay, -delay))
    assert np.angle(longer / plain) == pytest.approx(-4e-3 * np.pi * delay, rel=1e-9)
    assert np.angle(shorter / plain) == pytest.approx(4e-3 * np.pi * delay, rel=1e-9)


@MODELS
@given(passive())
def test_only_ratios_of_impedances_matter(standard):
    """All impedances doubled, the reference among them, give the same Γ."""
    kind, values = standard
    scaled = list(values)
    units = {"offset_loss_gohm_per_s": 2.0, "offset_z0_ohm": 2.0, "resistance_ohm": 2.0, "inductance_ph": 2.0}
    for place, parameter in enumerate(PARAMETERS[kind]):
        name = parameter.name
        factor = units.get(name, 2.0 if name.startswith("l") else 0.5 if name.startswith("c") else 1.0)
        scaled[place] *= factor
    gamma, _ = reflection(kind, values, FREQUENCY, 50.0)
    other, _ = reflection(kind, scaled, FREQUENCY, 100.0)
    np.testing.assert_allclose(other, gamma, rtol=0, atol=1e-9)


@MODELS
@given(passive())
def test_derivatives_predict_small_changes(standard):
    """A change of every parameter by a small part of a trade unit, to second order."""
    kind, values = standard
    gamma, jacobian = reflection(kind, values, FREQUENCY, 50.0)
    step = 1e-4 * np.where(np.arange(len(values)) % 2, -1.0, 1.0)
    plus, _ = reflection(kind, np.array(values) + step, FREQUENCY, 50.0)
    minus, _ = reflection(kind, np.array(values) - step, FREQUENCY, 50.0)
    expected = 2.0 * jacobian @ step
    np.testing.assert_allclose(
        plus - minus, expected, rtol=0, atol=1e-6 * max(1e-6, np.abs(expected).max()) + 1e-12
    )
    assert np.isfinite(gamma).all()
