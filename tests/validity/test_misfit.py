"""What the readings keep beyond the model: a narrow resonance is told, noise alone is not."""

import numpy as np
import pytest

from stdfit.validity.kit import curve, misfit_at
from stdfit.validity.limits import limits
from stdfit.validity.misfit import running_maximum, vanishing_at_zero

CENTRE_HZ = 3.01e9
PEAK = 0.1


def resonance(width_hz):
    """A Lorentz line of full width `width_hz` that takes `PEAK` away."""
    return lambda f: 1.0 - PEAK / (1.0 + 2j * (f - CENTRE_HZ) / width_hz)


@pytest.mark.parametrize("connections", [1, 3])
@pytest.mark.parametrize("width_hz", [20e6, 60e6])
def test_a_resonance_narrower_than_a_fiftieth_of_the_sweep_is_not_hidden(workshop, width_hz, connections):
    """The sweep is 6 GHz wide: 60 MHz is a hundredth of it, 20 MHz less than a step between readings."""
    bench = workshop(
        frequency_hz=np.linspace(50e6, 6e9, 241),
        connections=connections,
        residual_db=50.0,
        changed={"open": resonance(width_hz)},
    )
    kit = bench.kit()
    opened = kit.definition("open")
    ((_, each),) = limits(kit, [0.03])
    assert CENTRE_HZ - 500e6 < each[0].limit_hz < CENTRE_HZ
    near = bench.frequency_hz[np.abs(bench.frequency_hz - CENTRE_HZ) < 2 * width_hz]
    gamma, bound = curve(kit, opened, near)
    error = np.abs(gamma - bench.truth("open", near))
    assert error.max() > 0.5 * PEAK
    assert (error <= bound).all()
    assert misfit_at(opened, near).max() > 0.7 * error.max()


@pytest.mark.parametrize("seed", range(3))
def test_noise_alone_gives_hardly_any_misfit(workshop, seed):
    """The largest of 200 noise values is about 3.3 standard deviations of a complex value; the bound adds
    1.73 standard deviations of what is explained. More than 6 per component, or a tenth of the tolerance,
    would be noise taken for a model's fault."""
    noise, connections = 5e-4, 4
    kit = workshop(
        frequency_hz=np.linspace(50e6, 6e9, 201),
        connections=connections,
        residual_db=70.0,
        noise=noise,
        shift_ps=0.0,
        seed=seed,
    ).kit()
    for definition in kit.definitions:
        assert definition.misfit.max() <= 6.0 * noise / np.sqrt(connections)
        assert definition.misfit.max() <= 0.1 * kit.within


def test_a_stated_residual_explains_what_it_may_cause(workshop):
    """The same ripple of 0.01 on the short is a misfit with a 60 dB analyser, and half of one at 36 dB."""

    def rippled(f):
        return 1.0 + 0.01 * np.exp(2j * np.pi * f / 1.5e9)

    good, modest = (
        workshop(residual_db=db, changed={"short": rippled}).kit().definition("short") for db in (60.0, 36.0)
    )
    assert np.median(good.misfit) > 0.005
    assert np.median(modest.misfit) < 0.6 * np.median(good.misfit)


def test_the_bound_on_the_model_vanishes_at_zero_frequency():
    f = np.linspace(10e6, 6e9, 200)
    bound = np.full(200, 0.01)
    falling = vanishing_at_zero(bound, f)
    low = f < 0.1 * f[-1]
    np.testing.assert_allclose(falling[low], 0.01 * np.sqrt(f[low] / (0.1 * f[-1])))
    np.testing.assert_array_equal(falling[~low], bound[~low])


def test_vanishing_never_raises_a_bound():
    rng = np.random.default_rng(3)
    f = np.linspace(10e6, 6e9, 100)
    bounds = rng.random((7, 100))
    assert (vanishing_at_zero(bounds, f) <= bounds).all()


def test_a_sweep_that_starts_high_keeps_its_bound():
    f = np.linspace(2e9, 6e9, 50)
    bound = np.full(50, 0.01)
    np.testing.assert_array_equal(vanishing_at_zero(bound, f), bound)


def test_running_maximum_against_a_loop():
    rng = np.random.default_rng(2)
    values = rng.random((2, 17))
    for reach in (1, 3, 20):
        loop = [[row[max(0, k - reach) : k + reach + 1].max() for k in range(17)] for row in values]
        np.testing.assert_array_equal(running_maximum(values, reach), loop)
