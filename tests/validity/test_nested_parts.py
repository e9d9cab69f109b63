"""Nested readings laid on lumped parts."""

import numpy as np
import pytest

from stdfit.base.errors import RequestError
from stdfit.trials.repeats import study_sweeps
from stdfit.uncertainty.connections import responses
from stdfit.validity.change.repeat_study import repeats_of, seen_parts

F = np.linspace(50e6, 6e9, 101)
SMA = (0.02, 0.2, 0.1)


def gamma_of(size, delay_ps):
    return size * np.exp(-4e-12j * np.pi * F * delay_ps)


def readings(gamma, parts):
    return gamma + np.asarray(parts) @ responses(gamma, F, 50.0).T


@pytest.mark.parametrize(
    "gamma, seen",
    [
        (gamma_of(-1.0, 25.0), [0, 1, 2]),
        # Of a flush open the resistance hardly shows; of a perfect load a shift does not.
        (gamma_of(1.0, 16.0), [1, 2]),
        (gamma_of(0.0, 0.0), [0, 2]),
        # Between a shift and an imbalance only the turn of the phase tells.
        (gamma_of(1.0, 0.0), [1]),
    ],
)
def test_which_parts_are_seen(gamma, seen):
    assert seen_parts(responses(gamma, F, 50.0), 1e-4, SMA) == seen


def test_noise_hides_parts():
    gamma = gamma_of(-1.0, 25.0)
    assert seen_parts(responses(gamma, F, 50.0), 10.0, SMA) == []


def test_parts_come_out_as_they_went_in():
    """A resistance of ± 10 mΩ from connection to connection, a shift of ± 1 ps from calibration to calibration."""
    gamma = gamma_of(-1.0, 25.0)
    parts = [[r, s, 0.0] for s in (-1.0, 1.0) for r in (-0.01, 0.01)]
    rng = np.random.default_rng(1)
    noise = 1e-6 * (rng.standard_normal((2, 4, F.size)).transpose(1, 2, 0) @ [1.0, 1j])
    found = repeats_of("s", "short", F, readings(gamma, parts) + noise, [[1, 1], [1, 1]], 50.0, [3e9], SMA)
    resistance, shift, _, at = found.rows
    assert [row.what for row in found.rows] == [
        "contact resistance",
        "plane shift",
        "contact reactance",
        "|ΔΓ|",
    ]
    assert resistance.found.sd[:2] == pytest.approx([0.0, 0.01 * np.sqrt(2.0)], rel=2e-3)
    assert shift.found.sd[0] == pytest.approx(np.sqrt(2.0), rel=2e-3)
    assert at.at_hz == pytest.approx(3e9, abs=3e7)
    assert at.found.sd[0] == pytest.approx(np.sqrt(2.0) * 4e-12 * np.pi * at.at_hz, rel=2e-3)


def test_refusals():
    with pytest.raises(RequestError, match="single reading"):
        repeats_of("s", "short", F, gamma_of(-1.0, 25.0)[None], [[1]], 50.0, [], SMA)
    with pytest.raises(RequestError, match="outside the readings"):
        repeats_of("s", "short", F, np.tile(gamma_of(-1.0, 25.0), (2, 1)), [[1, 1]], 50.0, [7e9], SMA)


def test_whole_sweeps():
    """Sixty designs, residuals drawn anew for each calibration: 2.8 % is one standard deviation of a rate; three below
    95 % are allowed for each, and one for the mean of all."""
    found = study_sweeps("short", [[2] * 4] * 5, 60, 2, long_run=200)
    assert len(found) == 6
    rates = np.array(list(found.values()), dtype=float)
    assert rates.min() >= 0.95 - 3.0 * 0.028
    assert 0.95 - 0.028 <= rates.mean() <= 0.99
