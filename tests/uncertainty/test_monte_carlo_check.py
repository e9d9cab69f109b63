"""Monte Carlo against linear propagation: alike where the model is linear, and told where it is not."""

from dataclasses import replace

import numpy as np
import pytest
from scipy.special import ellipe
from scipy.stats import rice, t

from stdfit.circuits.standard import PARAMETERS
from stdfit.fitting.observed import Observed
from stdfit.fitting.problem import Problem, Quantity
from stdfit.pipeline import characterise
from stdfit.uncertainty.budget import inverse_of
from stdfit.uncertainty.monte_carlo import BAND_POINTS, compare_with_linear
from stdfit.uncertainty.region import CIRCULAR, circular, student
from stdfit.uncertainty.sources import LumpedSource, SmoothSource, WhiteSource
from stdfit.validity.linear_check import DIFFERENT, check_lines

DRAWS = 4000
FREQUENCY = np.linspace(50e6, 6e9, 100)
SIGMA = 0.005
"""Standard uncertainty per component of the example of JCGM 101:2008, 9.4."""

ON_A_LINE = 0.95 / np.sqrt(DRAWS)
CIRCLE = 0.73 / np.sqrt(DRAWS)
"""Relative standard deviation of a 95 % radius from normal draws: √(0.05·0.95/N) over density and radius."""


def load_problem(gamma0, free=("resistance_ohm", "inductance_ph"), noise=1.0):
    """A load with a known reflection at low frequency, fitted to readings with equal weights."""
    ohm = 50.0 * (1.0 + gamma0) / (1.0 - gamma0)
    starts = {"offset_z0_ohm": 50.0, "resistance_ohm": ohm}
    scales = {"resistance_ohm": 1.0, "inductance_ph": 10.0}
    quantities = tuple(
        Quantity(
            "load",
            one,
            "free" if one.name in free else "held",
            starts.get(one.name, 0.0),
            scale=scales.get(one.name, 1.0),
        )
        for one in PARAMETERS["load"]
    )
    blank = Observed.from_readings("load", "load", FREQUENCY, [np.zeros(FREQUENCY.size, dtype=complex)])
    weights = (np.full(FREQUENCY.size, noise**-2),)
    problem = Problem((blank,), quantities, (tuple(range(len(quantities))),), weights, 50.0)
    gamma, _ = problem.model(0, problem.values)
    return replace(problem, observed=(Observed.from_readings("load", "load", FREQUENCY, [gamma]),))


def compared_of(problem, sources, seed=5, draws=DRAWS):
    (one,) = compare_with_linear(problem, problem.values, sources, draws, np.random.default_rng(seed))
    return one


def white_load(gamma0):
    """A load whose fitted Γ has SIGMA in the real part; in the imaginary part in proportion to frequency."""
    noise = SIGMA * np.sqrt(FREQUENCY.size)
    problem = load_problem(gamma0, noise=noise)
    _, design = problem.model(0, problem.values, np.linspace(FREQUENCY[0], FREQUENCY[-1], BAND_POINTS))
    _, here = problem.model(0, problem.values)
    covariance = inverse_of((here.conj().T @ here).real / noise**2)
    real = np.sqrt(np.einsum("np,pq,nq->n", design.real, covariance, design.real))
    imag = np.sqrt(np.einsum("np,pq,nq->n", design.imag, covariance, design.imag))
    return problem, WhiteSource("noise", (noise**2,)), real, imag


def test_a_linear_problem_gives_the_linear_bounds(bench):
    """All kinds of sources on three standards at once, small: the ratio is 1 within the spread of a quantile.

    Forty frequencies of three standards are some ten independent figures: four standard deviations are allowed.
    """
    small = [
        SmoothSource("common", tuple(0.03 * p for p in bench.sources[0].profiles), common=True),
        SmoothSource("of each", tuple(0.03 * p for p in bench.sources[1].profiles), common=False),
        LumpedSource("lumped", tuple(0.03 * v for v in bench.sources[2].vectors), np.inf),
        WhiteSource("white", (1e-9, 2e-9, 3e-9)),
    ]
    # Evidence as sharp as the rest, so that the short's C-like terms stay where the model is straight.
    problem = bench.problem
    values = problem.expand(bench.scaled)
    rng = np.random.default_rng(6)
    place = next(i for i in problem.fitted if problem.quantities[i].evidence_u is not None)
    problem = problem.changed(place, evidence_u=0.02)
    found = compare_with_linear(problem, values, small, DRAWS, rng)
    assert [one.standard for one in found] == ["open", "short", "load"]
    for one in found:
        assert one.unsettled == 0.0
        assert one.frequency_hz.shape == one.drawn.shape == one.linear.shape == (BAND_POINTS,)
        ratio = one.drawn / one.linear
        assert np.abs(ratio - 1.0).max() < 4.0 * ON_A_LINE
    assert all("agree within" in line for line in check_lines(found, DRAWS))


def test_the_same_seed_gives_the_same_bands(bench):
    values = bench.problem.expand(bench.scaled)
    first, again, other = (
        compare_with_linear(bench.problem, values, bench.sources, 300, np.random.default_rng(seed))
        for seed in (7, 7, 8)
    )
    assert all((a.drawn == b.drawn).all() for a, b in zip(first, again, strict=True))
    assert all((a.drawn != b.drawn).any() for a, b in zip(first, other, strict=True))


def test_progress_is_told(bench):
    told = []
    values = bench.problem.expand(bench.scaled)
    rng = np.random.default_rng(9)
    compare_with_linear(bench.problem, values, bench.sources, 450, rng, lambda *done: told.append(done))
    assert told == [(200, 450), (400, 450), (450, 450)]


def test_the_published_example_of_a_squared_magnitude():
    """JCGM 101:2008, 9.4 (from memory): δY = X1² + X2², u = 0.005, r = 0; the 95 % quantile taken as in the check."""
    rng = np.random.default_rng(10)
    for x1, mean, u, first_order in ((0.010, 150e-6, 111.8e-6, 100e-6), (0.0, 50e-6, 50e-6, 0.0)):
        drawn = rng.normal(x1, SIGMA, 400_000) ** 2 + rng.normal(0.0, SIGMA, 400_000) ** 2
        # Of 400 000 draws the mean has 0.16 % of u, u itself less than 0.4 %: four of each are allowed.
        assert drawn.mean() == pytest.approx(mean, abs=4.0 * 0.0016 * u)
        assert drawn.std() == pytest.approx(u, rel=4.0 * 0.004)
        assert 2.0 * x1 * SIGMA == pytest.approx(first_order, abs=1e-12)
    assert np.quantile(np.sqrt(drawn), 0.95) == pytest.approx(CIRCULAR * SIGMA, rel=4.0 * 0.73 / 632.0)


def test_the_magnitude_of_an_ideal_load_is_not_linear():
    """At Γ = 0 the drawn u(|Γ|) is that of a distance from the origin, and linear propagation is far from it.

    With deviations a ≥ b along the axes E|Γ|² = a² + b² and E|Γ| = √(2/π)·a·E(1 − b²/a²), E the complete elliptic
    integral (derived; a circle gives √(π/2)·a, L. Rayleigh); u has a relative deviation below 1/√N.
    """
    problem, source, real, imag = white_load(0.0)
    one = compared_of(problem, [source])
    large, small = np.maximum(real, imag), np.minimum(real, imag)
    mean = np.sqrt(2.0 / np.pi) * large * ellipe(1.0 - (small / large) ** 2)
    expected = np.sqrt(large**2 + small**2 - mean**2)
    np.testing.assert_allclose(one.drawn_magnitude_u, expected, rtol=4.0 / np.sqrt(DRAWS))
    np.testing.assert_allclose(one.linear_magnitude_u, real, rtol=4.0 / np.sqrt(2.0 * DRAWS))
    at = int(np.argmin(np.abs(imag / real - 1.0)))
    assert imag[at] / real[at] == pytest.approx(1.0, abs=0.03)
    assert one.drawn_magnitude_u[at] == pytest.approx(SIGMA * np.sqrt(2.0 - np.pi / 2.0), rel=0.07)
    # The bound on Γ itself is linear all the same.
    np.testing.assert_allclose(one.drawn, one.linear, rtol=4.0 * ON_A_LINE)
    assert one.drawn[at] == pytest.approx(CIRCULAR * SIGMA, rel=0.03 + 4.0 * CIRCLE)
    lines = check_lines([one], DRAWS)
    assert "agree within" in lines[0]
    assert lines[1].startswith("load: the uncertainty of |Γ| alone is not linear at 0.05 …")
    assert lines[1].endswith("use the bound on Γ")


@pytest.mark.parametrize("gamma0", [0.005, 0.010, 0.050])
def test_the_magnitude_of_a_good_load_is_rice_distributed(gamma0):
    """S. O. Rice, Bell Syst. Tech. J. 24, 1945, 46–156 (from memory): |x| of a circular normal value about gamma0."""
    problem, source, real, imag = white_load(gamma0)
    one = compared_of(problem, [source], seed=11)
    at = int(np.argmin(np.abs(imag / real - 1.0)))
    expected = rice.std(gamma0 / real[at], scale=real[at])
    assert one.drawn_magnitude_u[at] == pytest.approx(expected, rel=0.03 + 4.0 / np.sqrt(2.0 * DRAWS))
    assert one.magnitude[at] == pytest.approx(gamma0, rel=1e-6)
    bent = [line for line in check_lines([one], DRAWS) if "|Γ| alone" in line]
    assert bool(bent) == (gamma0 < 0.01)


@pytest.mark.parametrize("freedom", [3.0, 4.0, 8.0])
def test_a_part_of_few_degrees_of_freedom_gives_students_factor(freedom):
    """A contact resistance seen by R alone: the error lies on a line, and its 95 % radius is Student's t times u."""
    problem = load_problem(0.01, free=("resistance_ohm",))
    _, design = problem.model(0, problem.values)
    sd = 1e-4
    column = problem.fitted.index(next(i for i in problem.fitted if "resistance" in problem.names()[i]))
    vector = sd * design[:, column] / np.abs(design[0, column])
    one = compared_of(problem, [LumpedSource("contact", (vector,), freedom)], seed=12)
    quantile = t.ppf(0.975, freedom)
    spread = np.sqrt(0.05 * 0.95 / DRAWS) / (2.0 * t.pdf(quantile, freedom)) / quantile
    np.testing.assert_allclose(one.drawn / sd, student(freedom), rtol=4.0 * spread)
    np.testing.assert_allclose(one.linear / sd, student(freedom), rtol=4.0 * spread)
    # Both are of the same draws: the tails of Student's t are no curvature.
    np.testing.assert_allclose(one.drawn, one.linear, rtol=0.01)


@pytest.mark.parametrize("freedom", [3.0, 5.0, 12.0])
def test_scatter_of_few_degrees_of_freedom_gives_the_factor_of_a_circle(freedom):
    """Real and imaginary part share one estimate of the scatter: √(2·F0.95(2, ν)) where they are equally large."""
    problem = load_problem(0.0)
    source = SmoothSource("scatter", (np.full(FREQUENCY.size, 1e-4 + 0j),), common=False, freedom=freedom)
    one = compared_of(problem, [source], seed=13)
    plain = compared_of(problem, [replace(source, freedom=np.inf)], seed=13)
    # Where the plain band has the factor of a circle, to a tenth of the way from a line's.
    factor = plain.linear / np.sqrt(plain.linear_magnitude_u**2 + 1e-30)
    at = int(np.argmin(np.abs(factor - CIRCULAR)))
    assert factor[at] == pytest.approx(CIRCULAR, rel=0.03)
    p = 0.05 ** (1.0 + 2.0 / freedom) * circular(freedom)
    spread = np.sqrt(0.05 * 0.95 / DRAWS) / p / circular(freedom)
    growth = circular(freedom) / CIRCULAR
    assert one.drawn[at] / plain.linear[at] == pytest.approx(growth, rel=0.03 + 4.0 * spread)
    assert one.linear[at] / plain.linear[at] == pytest.approx(growth, rel=0.03 + 4.0 * spread)


def test_the_kit_keeps_what_the_check_said(workshop):
    """A plain bench in the model family: bounds agree, the same check every time, and none unless asked for."""
    shop = workshop()
    first, again = (
        characterise(shop.bench(), shop.readings(), created="2000-01-01", draws=1000) for _ in range(2)
    )
    assert first.checks == again.checks
    assert [line.partition(":")[0] for line in first.checks if "linear bounds" in line] == [
        "open",
        "short",
        "load",
    ]
    assert all(f"{DIFFERENT:.0%}".replace("%", " %") not in line for line in first.checks)
    assert shop.kit().checks == ()
