"""Readings that are called corrected and look raw: asked about, and never without cause. Simulated, invented data."""

from pathlib import Path

import numpy as np
import pytest

from stdfit.base.records import Sweep
from stdfit.circuits.standard import reflection
from stdfit.data.readings import read_reading
from stdfit.data.uncorrected import delay_ps, like_uncorrected

GRID = np.linspace(40e6, 3e9, 401)
SHARED = Path(__file__).parents[3] / "shared" / "readings"


def readings(delay, factor=1.0):
    """An open, a short and a load behind a line, seen through a constant factor."""
    values = {
        "open": [delay, 1.0, 50.0, 40.0, 0.0, 0.0, 0.0],
        "short": [delay, 1.0, 50.0, 3.0, 0.0, 0.0, 0.0],
        "load": [delay, 1.0, 50.0, 50.5, 30.0, 0.0],
    }
    return {
        kind: (kind, [Sweep(GRID, factor * reflection(kind, own, GRID, 50.0)[0])])
        for kind, own in values.items()
    }


def test_a_cable_is_asked_about():
    (told,) = like_uncorrected(readings(3500.0), {})
    assert told.startswith(
        "were these read without the analyser's correction? 'open', 'short' seen behind 350"
    )
    assert "'load'" not in told
    assert 'state = "raw"' in told


def test_a_long_line_that_is_given_is_none():
    assert like_uncorrected(readings(3500.0), {"open": 3500.0, "short": 3480.0}) == ()
    (told,) = like_uncorrected(readings(3500.0), {"open": 3500.0, "short": 20.0})
    assert "'short'" in told and "'open'" not in told


@pytest.mark.parametrize("delay", [0.0, 20.0, 330.0, 900.0])
def test_standards_are_not(delay):
    assert like_uncorrected(readings(delay), {}) == ()


def test_size_and_phase_at_the_low_end():
    (told,) = like_uncorrected(readings(20.0, 0.7), {})
    assert "|Γ| of 'open' is 0.70 at the low end" in told
    (told,) = like_uncorrected(readings(20.0, np.exp(1.5j)), {})
    assert "the phase of 'short' is off by 8" in told
    assert like_uncorrected(readings(20.0, 0.9 * np.exp(0.5j)), {}) == ()


def test_delay():
    assert delay_ps(GRID, np.exp(-4e-12j * np.pi * GRID * 250.0)) == pytest.approx(250.0)
    # 40 ns turn by more than half a turn from point to point.
    assert delay_ps(GRID, np.exp(-4e-9j * np.pi * GRID * 30.0)) is None
    assert delay_ps(GRID, np.zeros(GRID.size, dtype=complex)) is None


@pytest.mark.skipif(not SHARED.is_dir(), reason="the measured readings are not beside the project")
def test_measured_readings():
    def read(folder, files):
        return {kind: (kind, [read_reading(SHARED / folder / file)]) for kind, file in files.items()}

    raw = read("switched", {"open": "open-1.s1p", "short": "short-1.s1p", "load": "match-1.s1p"})
    assert "'open', 'short' seen behind 35" in like_uncorrected(raw, {})[0]
    assert (
        like_uncorrected(read("sma-male", {one: f"{one}.s1p" for one in ("open", "short", "load")}), {}) == ()
    )
