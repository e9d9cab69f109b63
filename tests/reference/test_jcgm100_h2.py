"""Simultaneous resistance and reactance measurement: JCGM 100:2008, annex H.2 (published).

Five repeats of voltage V, current I and phase φ; R = V cosφ/I, X = V sinφ/I, Z = V/I. The annex goes two
ways: the means of V, I, φ propagated with their covariances (approach 1), and R, X, Z of each repeat averaged
(approach 2). They differ in second order, and only the second reproduces every printed digit from the raw
readings: u(X) is 0.2955 by approach 2 and 0.2956 by approach 1, printed as 0.295.
"""

import numpy as np
import pytest

from stdfit.uncertainty.budget import Share, expanded

VOLT, MILLIAMPERE, RADIAN = np.array(
    [
        (5.007, 19.663, 1.0456),
        (4.994, 19.639, 1.0438),
        (5.005, 19.640, 1.0468),
        (4.990, 19.685, 1.0428),
        (4.999, 19.678, 1.0433),
    ]
).T
READINGS = np.stack([VOLT, MILLIAMPERE * 1e-3, RADIAN])
U, J, PHI = READINGS.mean(axis=1)  # voltage, current, phase
R, X, Z = U * np.cos(PHI) / J, U * np.sin(PHI) / J, U / J
JACOBIAN = np.array([[R / U, -R / J, -X], [X / U, -X / J, R], [Z / U, -Z / J, 0.0]])


EACH = np.stack([VOLT * np.cos(RADIAN), VOLT * np.sin(RADIAN), VOLT]) / (MILLIAMPERE * 1e-3)
APPROACHES = {"means propagated": (READINGS, JACOBIAN), "repeats averaged": (EACH, np.eye(3))}


def budget_of(approach):
    """Return the directions of R, X, Z and the only share: the covariance of the means of five repeats."""
    repeats, directions = APPROACHES[approach]
    return directions, [Share("repeats", 4.0, np.cov(repeats)[None] / repeats.shape[1])]


def test_values():
    for found in (np.array([R, X, Z]), EACH.mean(axis=1)):
        assert found == pytest.approx([127.732, 219.847, 254.260], abs=5e-4)


@pytest.mark.parametrize(("approach", "digit"), [("repeats averaged", 5e-4), ("means propagated", 7e-4)])
def test_standard_uncertainties(approach, digit):
    u, _ = expanded(*budget_of(approach))
    assert u == pytest.approx([0.071, 0.295, 0.236], abs=digit)


@pytest.mark.parametrize("approach", APPROACHES)
@pytest.mark.parametrize(("one", "other", "known"), [(0, 1, -0.588), (0, 2, -0.485), (1, 2, 0.993)])
def test_correlations(approach, one, other, known):
    """u²(a + b) − u²(a − b) = 4 u(a, b), with the uncertainties of sums that the budget gives."""
    directions, shares = budget_of(approach)
    a, b = directions[one], directions[other]
    (u_a, u_b, plus, minus), _ = expanded(np.stack([a, b, a + b, a - b]), shares)
    assert (plus**2 - minus**2) / (4 * u_a * u_b) == pytest.approx(known, abs=5e-4)


def test_expanded_uncertainty_takes_four_degrees_of_freedom():
    """t(95 %, ν = 4) = 2.776 (JCGM 100:2008, table G.2)."""
    u, u95 = expanded(*budget_of("means propagated"))
    assert u95 / u == pytest.approx([2.776] * 3, abs=5e-4)
