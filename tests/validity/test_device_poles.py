"""Corrections that show a passive device as infinite, and frequencies at which nothing can be computed."""

import numpy as np
import pytest

from stdfit.base.errors import RequestError
from stdfit.cli import main
from stdfit.validity.device.bound import device_map, three_of
from stdfit.validity.device.ideal import largest_change
from stdfit.validity.kit import curve

IDEAL = np.array([1.0, -1.0, 0.0], dtype=complex)


@pytest.mark.parametrize("standards", [(0.9, 0.5, -0.3), (0.3j, -1.0, 0.8)])
def test_a_pole_within_the_circle_makes_the_change_endless(standards):
    assert largest_change(IDEAL, np.array(standards, dtype=complex)) == np.inf


def test_a_change_of_nothing_and_a_common_turn():
    assert largest_change(IDEAL, IDEAL) == pytest.approx(0.0, abs=1e-12)
    assert largest_change(IDEAL, IDEAL * np.exp(0.1j)) == pytest.approx(abs(np.exp(0.1j) - 1.0))
    assert largest_change(np.array([1.0, 1.0, 0.0], dtype=complex), IDEAL) == np.inf


def test_frequencies_too_close_to_zero_are_refused(usual_kit, tmp_path, capsys):
    f = np.array([1e-300])
    with pytest.raises(RequestError, match="cannot be computed at 1e-300 Hz"):
        curve(usual_kit, usual_kit.definitions[0], f)
    with pytest.raises(RequestError, match="cannot be computed"):
        device_map(usual_kit, three_of(usual_kit), f)
    for command in ("curve", "device"):
        assert main([command, "kits/boathouse-loft-sma/kit.toml", "--at", "1e-300"]) == 2
        out, err = capsys.readouterr()
        assert out == ""
        assert err.count("\n") == 2
