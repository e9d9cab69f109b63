"""What there is to see of a kit: parts that add up to the bound, bands that a Monte Carlo run confirms."""

import time
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from stdfit.circuits.residual_map import separation
from stdfit.circuits.standard import IDEAL
from stdfit.uncertainty.budget import Share, kind_of, parts_of_variance
from stdfit.validity.device.bound import device_bound, device_map, three_of
from stdfit.validity.evidence.element import element_of
from stdfit.validity.evidence.sharing import MISFIT, STATED, shared_out
from stdfit.validity.evidence.standard import standard_evidence
from stdfit.validity.evidence.whole import MAGNITUDES, kit_evidence
from stdfit.validity.kit import curve, model, total_covariance


@pytest.fixture(scope="module")
def evidence(modest_kit):
    return [standard_evidence(modest_kit, definition) for definition in modest_kit.definitions]


def test_the_parts_add_up_to_the_bound_everywhere(modest_kit, evidence):
    for definition, one in zip(modest_kit.definitions, evidence, strict=True):
        gamma, bound = curve(modest_kit, definition, one.frequency_hz)
        assert np.array_equal(one.gamma, gamma)
        assert np.allclose(one.bound, bound, rtol=1e-13)
        assert np.allclose(one.parts.sum(axis=0), one.bound, rtol=1e-12)
        assert (one.parts >= 0.0).all()
        assert one.kinds[-1] == MISFIT
        assert np.array_equal(one.parts[-1], one.misfit)
        assert len(set(one.kinds)) == len(one.kinds)
        assert one.ideal == IDEAL[one.kind]


def test_the_parts_go_as_the_variances_that_reasons_are_told_by(modest_kit, evidence):
    """At one frequency a kind has the variance of its sources."""
    one, place = evidence[0], 120
    _, design = model(modest_kit, modest_kit.definitions[0], one.frequency_hz[place : place + 1])
    parts = parts_of_variance(design, modest_kit.shares)[:, 0]
    for kind, part in zip(one.kinds[:-1], one.parts[:-1, place], strict=True):
        wanted = sum(
            p for share, p in zip(modest_kit.shares, parts, strict=True) if kind_of(share.name) == kind
        )
        assert part == pytest.approx(wanted * one.u95[place], rel=1e-9)


@settings(max_examples=50, deadline=None)
@given(seed=st.integers(0, 2**32 - 1), lengths=st.integers(1, 4), sources=st.integers(0, 5))
def test_any_shares_add_up(seed, lengths, sources):
    rng = np.random.default_rng(seed)
    design = rng.standard_normal((7, 3)) + 1j * rng.standard_normal((7, 3))
    design[0] = 0.0
    shares = []
    for k in range(sources):
        factor = rng.standard_normal((lengths if k % 2 else 1, 3, 3)) * 10.0 ** rng.uniform(-6, 0)
        shares.append(Share(f"kind {k // 2} ({k})", np.inf, factor @ np.swapaxes(factor, 1, 2)))
    misfit = rng.uniform(0.0, 1.0, 7)
    u95 = rng.uniform(0.0, 1.0, 7) * bool(shares)
    u95[0] = 0.0
    kinds, parts = shared_out(design, shares, u95, misfit)
    assert parts.shape == (len(kinds), 7)
    assert np.allclose(parts.sum(axis=0), u95 + misfit, rtol=1e-12)
    assert kinds[-1] == (MISFIT if shares else STATED)


def test_the_band_of_an_element_holds_what_the_covariance_draws(modest_kit):
    """4000 times, with the joint covariance at one correlation length: a band is the largest over the lengths."""
    rng = np.random.default_rng(7)
    kit = replace(
        modest_kit,
        shares=(Share("all", np.inf, total_covariance(modest_kit.shares)[None]),),
    )
    covariance = kit.shares[0].covariances[0]
    size = np.sqrt(np.diag(covariance))
    value, vector = np.linalg.eigh(covariance / size[:, None] / size)
    drawn = rng.standard_normal((4000, size.size)) @ (vector * np.sqrt(np.maximum(value, 0.0))).T * size
    f = np.array([1e9, 3e9, 6e9])
    for definition in kit.definitions:
        found = element_of(kit, definition, f)
        fitted = np.tile(definition.values, (4000, 1))
        for k, parameter in enumerate(definition.parameters):
            if parameter.of:
                fitted[:, k] += drawn[:, kit.order.index(parameter.of)]
        wanted = 1.96 * _elements(definition.kind, fitted, f).std(axis=1)
        middle = _elements(definition.kind, definition.values[None], f)[:, 0]
        assert np.allclose(found.values, middle, rtol=1e-9, atol=1e-12)
        assert np.allclose(found.u95, wanted, rtol=0.06, atol=1e-6)
        if found.u95_of_rest is not None:
            delay = drawn[:, kit.order.index(definition.parameters[0].of)]
            elements = _elements(definition.kind, fitted, f)
            away = elements - elements.mean(axis=1, keepdims=True)
            slope = (away * delay[:, None]).mean(axis=1) / (delay**2).mean()
            rest = away - slope[:, None] * delay[:, None]
            assert np.allclose(found.u95_of_rest, 1.96 * rest.std(axis=1), rtol=0.06, atol=1e-6)


def _elements(kind, values, frequency_hz):
    """C in fF, L in pH or Z in Ω by the formulas of the models, shape (r, draws, n)."""
    f = frequency_hz
    if kind == "open":
        return (values[:, 3:] @ np.array([f**0, 1e-12 * f, 1e-21 * f**2, 1e-30 * f**3]))[None]
    if kind == "short":
        return (values[:, 3:] @ np.array([f**0, 1e-12 * f, 1e-21 * f**2, 1e-30 * f**3]))[None]
    w = 2.0 * np.pi * f
    branch = values[:, 3:4] + 1j * w * values[:, 4:5] * 1e-12
    z = branch / (1.0 + 1j * w * values[:, 5:6] * 1e-15 * branch)
    return np.stack([z.real, z.imag])


def test_a_band_that_is_the_trade_off_is_said_to_be(usual_kit, workshop):
    """Without a ruler C0 is known as well as it is assumed; with the delay given there is nothing to trade."""
    f = np.linspace(50e6, 6e9, 11)
    assert element_of(usual_kit, usual_kit.definition("open"), f).traded
    ruled = workshop(given={"open": {"offset_delay_ps": (25.0, 1e-4)}}, polynomial="constant").kit()
    assert not element_of(ruled, ruled.definition("open"), f).traded


def test_readings_stand_beside_the_model(modest_kit, evidence):
    for one in evidence:
        kept = one.readings
        gamma, _ = curve(modest_kit, modest_kit.definition(one.name), kept.frequency_hz)
        assert np.array_equal(kept.residual, kept.gamma - gamma)
        connections = kept.connections
        assert connections.deviations.shape == (3, connections.frequency_hz.size)
        assert np.abs(connections.deviations.sum(axis=0)).max() < 1e-6
        which, away, where = connections.farthest()
        place = int(np.flatnonzero(connections.frequency_hz == where)[0])
        assert abs(connections.deviations[which - 1, place]) == pytest.approx(away, rel=1e-12)
        assert away == np.abs(connections.deviations).max()


def test_connections_scatter_as_is_expected(workshop):
    """Of 30 connections each, drawn as shifts and noise, about 95 % of the deviations lie within the radius."""
    kit = workshop(connections=30).kit()
    inside = []
    for definition in kit.definitions:
        one = standard_evidence(kit, definition).readings.connections
        inside.append(np.abs(one.deviations) <= one.expected)
    assert 0.88 < np.concatenate([one.ravel() for one in inside]).mean() < 0.995


def test_without_readings_there_are_none(modest_kit):
    bare = replace(modest_kit, session=None)
    assert standard_evidence(bare, bare.definitions[0]).readings is None
    means = [replace(one, connection_hz=None, deviations=None) for one in modest_kit.session.means]
    older = replace(modest_kit, session=replace(modest_kit.session, means=tuple(means)))
    assert standard_evidence(older, older.definitions[0]).readings.connections is None
    means = [replace(one, frequency_hz=one.frequency_hz + 1e12) for one in modest_kit.session.means]
    elsewhere = replace(modest_kit, session=replace(modest_kit.session, means=tuple(means)))
    assert standard_evidence(elsewhere, elsewhere.definitions[0]).readings is None


def test_a_kit_of_stated_bounds_has_one_part(modest_kit):
    bare = replace(modest_kit, shares=(), order=(), session=None)
    one = standard_evidence(bare, bare.definitions[0])
    assert one.kinds == (STATED,)
    assert np.array_equal(one.parts[0], one.bound)
    assert not one.element.u95.any()
    assert one.element.u95_of_rest is None
    assert kit_evidence(bare).bounds.shape == (121, len(MAGNITUDES))


def test_the_kit_as_a_whole(modest_kit):
    whole = kit_evidence(modest_kit)
    assert whole.names == ("open", "short", "load")
    errors = device_map(modest_kit, three_of(modest_kit), whole.frequency_hz[::40])
    assert np.allclose(whole.bounds[::40, 0], device_bound(errors, np.zeros(1))[:, 0])
    around = 0.3 * np.exp(2j * np.pi * np.arange(500) / 500)
    assert np.allclose(whole.bounds[::40, 2], device_bound(errors, around).max(axis=1), rtol=0.01)
    assert np.array_equal(whole.separation, separation(whole.standards))
    assert whole.pair(0) == ("open", "short")
    assert kit_evidence(replace(modest_kit, definitions=modest_kit.definitions[:2])) is None


def test_standards_without_a_common_band_are_no_whole(modest_kit):
    first, *others = modest_kit.definitions
    low = replace(first, read_low_hz=1e6, read_top_hz=2e6, fit_low_hz=1e6, fit_top_hz=2e6)
    assert kit_evidence(replace(modest_kit, definitions=(low, *others))) is None


def test_it_takes_little_time(workshop):
    kit = workshop(frequency_hz=np.linspace(50e6, 6e9, 1001), residual_db=40.0).kit()
    start = time.process_time()
    for definition in kit.definitions:
        standard_evidence(kit, definition)
    kit_evidence(kit)
    assert time.process_time() - start < 1.0  # half of it is the aim on an idle machine
