"""The study of the next steps: what is halved is half, and each change is a new fit of the same standards."""

import numpy as np
import pytest

from stdfit.trials.families import economy_residual
from stdfit.trials.steps_study import STEPS, halved, main, ratios


def test_statements_are_halved():
    whole = economy_residual()
    half = halved(whole).bounds(whole.frequency_hz)
    np.testing.assert_allclose(half, 0.5 * np.array(whole.bounds(whole.frequency_hz)), rtol=1e-12)


@pytest.fixture(scope="module")
def found():
    return ratios("plain", 1, 1)


def test_estimates_come_true_roughly(found):
    """Half as large an error or more connections lead on: the estimates are mostly low, and none is wild."""
    assert found
    assert set(found) <= set(STEPS)
    assert all(0.8 < ratio < 3.0 for ratio in found.values())


def test_the_study_prints_a_table(capsys):
    assert main(["--benches", "1", "--family", "plain"]) == 0
    lines = capsys.readouterr().out.splitlines()
    assert lines[1] == "|---|---|---|---|"
    assert 3 <= len(lines) <= 2 + len(STEPS)
    assert all(line.count("|") == 5 for line in lines)
