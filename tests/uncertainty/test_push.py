"""Sources pushed through the fit, against the full covariance matrix H·Σ·Hᵀ and against refits."""

import numpy as np
import pytest

from stdfit.fitting.problem import Problem
from stdfit.uncertainty.budget import shares_of
from stdfit.uncertainty.push import push, weighted
from stdfit.uncertainty.smooth import bumps, correlation_lengths
from stdfit.uncertainty.sources import LumpedSource, SmoothSource, WhiteSource

LENGTHS = range(5)


def grid(bench):
    return bench.problem.observed[0].frequency_hz


def response_of_fit(bench):
    """H, shape (p, 2·3·n): δθ by real and imaginary parts of all readings, one standard after another."""
    values = bench.problem.expand(bench.scaled)
    columns, weights = [], []
    for i, weight in enumerate(bench.problem.weights):
        _, design = bench.problem.model(i, values)
        columns.append(np.concatenate([design.real, design.imag]))
        weights.append(np.concatenate([weight, weight]))
    design, weight = np.concatenate(columns), np.concatenate(weights)
    _, precision = bench.problem.evidence()
    return np.linalg.solve(
        design.T @ (design * weight[:, None]) + np.diag(precision), (design * weight[:, None]).T
    )


def full_covariance(bench, source, kernel):
    """Σ of all readings, shape (2·3·n, 2·3·n), for one source; `kernel` is that of smooth functions."""
    n = grid(bench).size
    total = np.zeros((6 * n, 6 * n))
    if isinstance(source, WhiteSource):
        return np.diag(np.repeat(source.variances, 2 * n))
    acts = [_as_acting(source, i) for i in range(3)]
    for i in range(3):
        for j in range(3):
            block = (slice(2 * n * i, 2 * n * (i + 1)), slice(2 * n * j, 2 * n * (j + 1)))
            if isinstance(source, LumpedSource):
                total[block] = np.outer(acts[i][:, 0], acts[j][:, 0]) * (i == j)
            elif source.common or i == j:
                both = np.kron(np.eye(2), kernel)
                total[block] = acts[i] @ both @ acts[j].T
    return total


def _as_acting(source, i):
    """How the parts of a complex random value act on real and imaginary readings."""
    if isinstance(source, LumpedSource):
        return np.concatenate([source.vectors[i].real, source.vectors[i].imag])[:, None]
    real, imag = np.diag(source.profiles[i].real), np.diag(source.profiles[i].imag)
    return np.block([[real, -imag], [imag, real]])


def compare(found, expected, tolerance):
    size = np.sqrt(np.diag(expected))
    size = np.where(size > 0.0, size, 1.0)
    np.testing.assert_allclose(
        found / np.outer(size, size), expected / np.outer(size, size), rtol=0, atol=tolerance
    )


@pytest.mark.parametrize("length", LENGTHS)
@pytest.mark.parametrize("place", [0, 1], ids=["common", "of each standard"])
def test_smooth_sources_against_the_full_covariance(bench, place, length):
    """With the kernel of the same bumps the two must agree to rounding."""
    frequency = grid(bench)
    span = float(frequency[0]), float(frequency[-1])
    basis = bumps(frequency, *span, correlation_lengths(span[1] - span[0])[length])
    response = response_of_fit(bench)
    covariance = response @ full_covariance(bench, bench.sources[place], basis @ basis.T) @ response.T
    _, shares = bench.shares()
    compare(shares[place].covariances[length, 0], covariance, 1e-8)


@pytest.mark.parametrize("length", LENGTHS)
@pytest.mark.parametrize("place", [0, 1], ids=["common", "of each standard"])
def test_smooth_sources_against_the_gaussian_kernel(bench, place, length):
    """With exp(−Δ²/2ℓ²) itself, to the accuracy of the bumps."""
    frequency = grid(bench)
    scale = correlation_lengths(float(frequency[-1] - frequency[0]))[length]
    kernel = np.exp(-0.5 * ((frequency[:, None] - frequency) / scale) ** 2)
    response = response_of_fit(bench)
    covariance = response @ full_covariance(bench, bench.sources[place], kernel) @ response.T
    _, shares = bench.shares()
    compare(shares[place].covariances[length, 0], covariance, 3e-4)


@pytest.mark.parametrize("place", [2, 3], ids=["lumped", "white"])
def test_other_sources_against_the_full_covariance(bench, place):
    response = response_of_fit(bench)
    covariance = response @ full_covariance(bench, bench.sources[place], None) @ response.T
    _, shares = bench.shares()
    assert shares[place].covariances.shape[0] == 1
    compare(shares[place].covariances[0, 0], covariance, 1e-8)


def test_evidence_against_the_full_covariance(bench):
    """δθ = M⁻¹·P·δ(target), with variance 1/P of each target."""
    inverse, shares = bench.shares()
    _, precision = bench.problem.evidence()
    by_name = {share.name: share.covariances[0, 0] for share in shares}
    found = by_name["given values"] + by_name["assumed values"]
    compare(found, inverse[0] @ np.diag(precision) @ inverse[0], 1e-10)


def test_everything_known_adds_up_to_the_inverse(bench):
    """Where the weights are the true inverse variances, white noise and evidence together give M⁻¹."""
    white = WhiteSource("white", (1 / 1e5,) * 3)
    even = Problem(
        bench.problem.observed,
        bench.problem.quantities,
        bench.problem.columns,
        (np.full(grid(bench).size, 1e5),) * 3,
        50.0,
    )
    inverse, shares = type(bench)(even, [white], bench.scaled).shares()
    compare(sum(share.covariances[0, 0] for share in shares), inverse[0], 1e-9)


@pytest.mark.parametrize("cut", [14, 27, 41])
def test_cuts_are_separate_fits_of_shorter_ranges(bench, cut):
    frequency = grid(bench)
    span = float(frequency[0]), float(frequency[-1])
    inverse, shares = bench.shares(cuts=(14, 27, 41))
    place = (14, 27, 41).index(cut)
    values = bench.problem.expand(bench.scaled)
    part = slice(0, cut)
    short_sources = [
        SmoothSource(s.name, tuple(p[part] for p in s.profiles), s.common)
        if isinstance(s, SmoothSource)
        else LumpedSource(s.name, tuple(v[part] for v in s.vectors), s.freedom)
        if isinstance(s, LumpedSource)
        else s
        for s in bench.sources
    ]
    alone = [
        push(
            bench.problem.model(i, values)[1][part],
            weighted(bench.problem.model(i, values)[1], bench.problem.weights[i])[part],
            np.zeros(cut, dtype=complex),
            frequency[part],
            span,
            short_sources,
            i,
            [cut],
        )
        for i in range(3)
    ]
    _, precision = bench.problem.evidence()
    expected_inverse, expected = shares_of(alone, short_sources, precision, [])
    compare(inverse[place], expected_inverse[0], 1e-7)
    for found, known in zip(shares, expected, strict=False):
        for length in range(known.covariances.shape[0]):
            compare(found.covariances[length, place], known.covariances[length, 0], 1e-7)


@pytest.mark.parametrize("cut", [14, 41])
def test_the_step_of_a_cut_is_the_least_squares_solution_of_its_range(bench, cut):
    """M⁻¹(Σ Re(Jᴴ W r) + P·pull) solves the weighted least squares problem of the readings up to the cut."""
    rng = np.random.default_rng(3)
    rest = [1e-3 * (rng.standard_normal(41) + 1j * rng.standard_normal(41)) for _ in range(3)]
    pushed = bench.pushed(cuts=(14, 41), residual=rest)
    place = (14, 41).index(cut)
    _, precision = bench.problem.evidence()
    pull = rng.standard_normal(precision.size) * np.where(precision > 0.0, 0.1, 0.0)
    inverse, _ = bench.shares(cuts=(14, 41))
    step = inverse[place] @ (sum(one.projected[place] for one in pushed) + precision * pull)
    rows, targets = [], []
    values = bench.problem.expand(bench.scaled)
    for i, weight in enumerate(bench.problem.weights):
        root = np.sqrt(weight[:cut])
        design = bench.problem.model(i, values)[1][:cut] * root[:, None]
        reading = rest[i][:cut] * root
        rows += [design.real, design.imag]
        targets += [reading.real, reading.imag]
    rows.append(np.diag(np.sqrt(precision)))
    targets.append(np.sqrt(precision) * pull)
    expected, *_ = np.linalg.lstsq(np.concatenate(rows), np.concatenate(targets), rcond=None)
    np.testing.assert_allclose(step, expected, rtol=1e-7, atol=1e-9 * np.abs(expected).max())


def test_long_sweeps_are_summed_in_blocks(bench, monkeypatch):
    _, whole = bench.shares()
    monkeypatch.setattr("stdfit.uncertainty.push.BLOCK", 7)
    _, blocks = bench.shares()
    for one, other in zip(whole, blocks, strict=True):
        for known, found in zip(one.covariances[:, 0], other.covariances[:, 0], strict=True):
            compare(found, known, 1e-7)


def test_doubling_a_source_makes_its_covariance_fourfold(bench):
    doubled = [
        SmoothSource(s.name, tuple(2 * p for p in s.profiles), s.common)
        if isinstance(s, SmoothSource)
        else LumpedSource(s.name, tuple(2 * v for v in s.vectors), s.freedom)
        if isinstance(s, LumpedSource)
        else WhiteSource(s.name, tuple(4 * v for v in s.variances))
        for s in bench.sources
    ]
    _, once = bench.shares()
    _, twice = bench.shares(doubled)
    for one, other in list(zip(once, twice, strict=True))[:4]:
        for small, large in zip(one.covariances[:, 0], other.covariances[:, 0], strict=True):
            compare(large, 4.0 * small, 1e-9)


def test_no_smooth_source_is_no_trouble(bench):
    _, shares = bench.shares(bench.sources[2:])
    assert [share.name for share in shares] == ["lumped", "white", "given values", "assumed values"]
