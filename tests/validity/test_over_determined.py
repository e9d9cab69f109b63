"""What five standards keep beyond their models through unknown error terms: the size of the models' errors."""

import numpy as np
import pytest

from stdfit.circuits.standard import reflection
from stdfit.fitting.unknown_box import coupled
from stdfit.uncertainty.smooth import bumps
from stdfit.uncertainty.sources import LumpedSource, SharedSource, SmoothSource, WhiteSource
from stdfit.validity.over_determined import explain, model_error

F = np.linspace(50e6, 6e9, 201)
SPAN = (F[0], F[-1])
EVERY = slice(None)
PARTS = [
    ("short", [0.0, 1.5, 50.0, 0.4, 0.0, 0.0, 0.0]),
    ("open", [5.0, 1.4, 49.7, 38.0, 0.0, 120.0, 0.0]),
    ("load", [5.0, 0.0, 50.3, 50.2, 20.0, 0.0]),
    ("short", [33.3, 1.6, 50.1, 0.2, 0.0, 0.0, 0.0]),
    ("short", [66.7, 1.5, 49.8, 0.0, 0.0, 0.0, 0.0]),
]
GAMMA = np.stack([reflection(kind, values, F, 50.0)[0] for kind, values in PARTS], axis=1)
UNEQUAL = np.array([0.04, 0.2, 4.7, 0.04, 0.04])
NOBODY = np.zeros((0, 0))


def smooth(rng, size, length_hz=1e9):
    """Draw smooth errors of all standards with E|e|² = size², shape (n, s)."""
    basis = bumps(F, *SPAN, length_hz)
    heights = rng.standard_normal((basis.shape[1], len(PARTS), 2)) @ [1.0, 1j]
    return size / np.sqrt(2.0) * basis @ heights


def fit(weights=None, delays=False):
    """Return B, derivatives and steps of a fit of each standard's own delay, or of error terms alone."""
    weights = np.broadcast_to(np.ones(len(PARTS)) if weights is None else weights, GAMMA.shape)
    rest, weight = coupled(GAMMA, weights)
    design = np.zeros((F.size, len(PARTS), len(PARTS) if delays else 0), dtype=complex)
    if delays:
        turning = -4e-12j * np.pi * F[:, None] * GAMMA
        design[:, np.arange(len(PARTS)), np.arange(len(PARTS))] = turning
    acting = np.einsum("nsp,nst->ntp", design.conj(), weight)
    normal = np.einsum("nsp,nsq->pq", acting, design).real
    # The plane is known: all delays together are not told by the readings.
    known = np.eye(normal.shape[0]) * np.trace(normal) * 1e-4 if delays else 0.0
    return rest, design, acting @ np.linalg.inv(normal + known) if delays else acting


def found_in(error, sources=(), weights=None, delays=False, points=EVERY):
    """Return what is found of errors, of all standards alike and of each alone."""
    rest, design, step = fit(weights, delays)
    moved = np.einsum("nsp,ns->p", step, error).real
    residual = np.einsum("nst,nt->ns", rest, error - design @ moved)
    evidence = np.zeros((design.shape[2], 0))
    explained = explain(rest, design, step, F, SPAN, sources, evidence, points)
    return model_error(residual, rest, explained, points)


def drawn(error, sources=(), **changed):
    """Return the size that is found for all standards alike."""
    return found_in(error, sources, **changed)[0]


def rms(values):
    return float(np.sqrt(np.mean(np.abs(values) ** 2)))


@pytest.mark.parametrize("weights", [None, UNEQUAL], ids=["equal", "unequal"])
@pytest.mark.parametrize("delays", [False, True], ids=["terms alone", "delays too"])
def test_errors_of_known_size_are_found(weights, delays):
    """The largest power in the neighbourhood counts, and eight draws of a few independent values scatter: a factor 1.5.

    The weights differ as they do where a load repeats a hundred times better than an offset short.
    """
    found = [
        rms(drawn(smooth(np.random.default_rng(seed), 0.01), weights=weights, delays=delays))
        for seed in range(8)
    ]
    assert 0.01 / 1.5 < np.mean(found) < 0.01 * 1.5


def test_the_size_follows_the_error_and_not_its_phase():
    error = smooth(np.random.default_rng(1), 0.01)
    once = drawn(error)
    np.testing.assert_allclose(drawn(3j * error), 3.0 * once, rtol=1e-9)
    np.testing.assert_array_equal(drawn(error, points=slice(None, None, 4)), once[::4])


def test_what_error_terms_follow_is_no_error_of_the_models():
    """δD + δT·Γ + δM·Γ², smooth or not, is the analyser's."""
    rng = np.random.default_rng(2)
    terms = 0.1 * rng.standard_normal((3, F.size, 1, 2)) @ [1.0, 1j]
    assert drawn(terms[0] + terms[1] * GAMMA + terms[2] * GAMMA**2).max() < 1e-9


def test_nothing_is_found_on_clean_readings():
    assert drawn(np.zeros(GAMMA.shape, dtype=complex)).max() == 0.0


@pytest.mark.parametrize("weights", [None, UNEQUAL], ids=["equal", "unequal"])
def test_noise_is_explained(weights):
    """By a source of its size; a tenth of the noise and less passes for errors of the models by chance."""
    rng = np.random.default_rng(3)
    noise = 1e-3 * (rng.standard_normal(GAMMA.shape) + 1j * rng.standard_normal(GAMMA.shape))
    stated = [WhiteSource("noise", (1e-6,) * len(PARTS))]
    unexplained = rms(drawn(noise, weights=weights))
    assert unexplained > 1e-3
    assert rms(drawn(noise, stated, weights=weights)) < 0.5 * unexplained


def of_kind(kind, size):
    """Return a source that leaves errors of a size, and draws of it."""
    shape = np.ones((F.size, len(PARTS))) * (1.0 + 0.5j * np.arange(len(PARTS))) / np.sqrt(2.0)
    if kind == "smooth":
        profiles = tuple(np.full(F.size, size / np.sqrt(2.0), dtype=complex) for _ in PARTS)
        return SmoothSource("scatter", profiles, common=False), lambda rng: smooth(rng, size)
    vectors = tuple(size * shape[:, k] * np.exp(-2e-9j * k * F) for k in range(len(PARTS)))
    if kind == "lumped":
        source = LumpedSource("connections", vectors, 4.0)
        return source, lambda rng: rng.standard_normal(len(PARTS)) * np.stack(vectors, axis=1)
    patterns = [np.exp(-2e-9j * q * F) for q in range(4)]
    each = tuple(np.stack([own * pattern for pattern in patterns], axis=1) for own in vectors)
    return SharedSource("kit", (each,)), lambda rng: np.stack(each, axis=1) @ rng.standard_normal(4)


@pytest.mark.parametrize("kind", ["smooth", "lumped", "shared"])
def test_what_sources_leave_is_expected_and_explained(kind):
    """The mean over 200 draws of a few random numbers each is good to about 5 % at one frequency."""
    source, draw = of_kind(kind, 0.01)
    rest, _ = coupled(GAMMA, np.ones(GAMMA.shape))
    nothing = np.zeros((*GAMMA.shape, 0), dtype=complex)
    found = explain(rest, nothing, nothing, F, SPAN, [source], NOBODY, EVERY)
    drawn_errors = [draw(np.random.default_rng(seed)) for seed in range(200)]
    left = [(np.abs(np.einsum("nst,nt->ns", rest, error)) ** 2).sum(axis=1) for error in drawn_errors]
    assert np.mean(left) == pytest.approx(found.power.mean(), rel=0.1)
    np.testing.assert_allclose(np.mean(left, axis=0), found.power, rtol=0.25)
    assert not found.white.any()
    ten_times, _ = of_kind(kind, 0.1)
    assert max(drawn(error, [ten_times]).max() for error in drawn_errors[:3]) < 1e-9


def test_evidence_leaves_something_too():
    """A length that is wrong by what it is stated to is no error of a model; by ten times as much, it is."""
    rest, _ = coupled(GAMMA, np.ones(GAMMA.shape))
    design = np.zeros((F.size, len(PARTS), 1), dtype=complex)
    design[:, 3, 0] = -4e-12j * np.pi * F * GAMMA[:, 3]
    residual = np.einsum("nst,ntp->ns", rest, -design * 0.5)
    nothing = np.zeros(design.shape, dtype=complex)

    def found(u_ps):
        explained = explain(rest, design, nothing, F, SPAN, [], np.array([[u_ps]]), EVERY)
        return rms(model_error(residual, rest, explained, EVERY)[0])

    assert found(0.5) < 0.4 * found(1e-6)
    assert found(0.05) > 0.9 * found(1e-6)


@pytest.mark.parametrize("culprit", range(len(PARTS)))
def test_one_standard_that_alone_is_wrong_is_not_told_too_small(culprit):
    """Shared out among five an error of one looks smaller than it is; what it would be alone is what it is."""
    error = np.zeros(GAMMA.shape, dtype=complex)
    error[:, culprit] = 0.01 * np.exp(1e-9j * F)
    common, each = found_in(error)
    rest, _ = coupled(GAMMA, np.ones(GAMMA.shape))
    seen = (np.abs(rest[..., culprit]) ** 2).sum(axis=1) > 0.15
    assert np.count_nonzero(seen) > 50
    assert (each[culprit, seen] > 0.0099).all()
    assert (each >= common).all()
    assert rms(common) < 0.0075


def test_a_standard_that_the_others_do_not_need_is_told_innocent():
    """Where its pattern differs from what is left, a standard is taken to be wrong by no more than all alike."""
    error = np.zeros(GAMMA.shape, dtype=complex)
    error[:, 1] = 0.01
    common, each = found_in(error)
    assert np.median(each[2] / common) < 1.2


def test_errors_are_no_better_seen_where_the_fit_is_drawn_from_elsewhere():
    """A fit to the lowest fifth carries its errors up; what is left there is then larger, and no better seen."""
    weights = np.where(F < 1.2e9, 1.0, 1e-9)[:, None] * np.ones(len(PARTS))
    rest, design, step = fit(weights, delays=True)
    evidence = np.zeros((design.shape[2], 0))
    shown = explain(rest, design, step, F, SPAN, [], evidence, EVERY).shown
    np.testing.assert_array_less(shown, (np.abs(rest) ** 2).sum(axis=(1, 2)) * (1.0 + 1e-9))
    assert shown[-1] > 1.0
