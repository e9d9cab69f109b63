"""Adapters removed and put back: exact maps, their errors to first order, and what an estimate costs."""

from dataclasses import replace

import numpy as np
import pytest
import skrf

from stdfit.base.errors import BenchError, ReadingError, RequestError
from stdfit.base.records import Sweep
from stdfit.circuits.standard import reflection
from stdfit.circuits.two_port import terms_by_s
from stdfit.data.bench_records import AdapterEntry, Given, StatedResidual
from stdfit.pipeline import characterise, prepare
from stdfit.pipeline.adapters.acting import adapter_sources_on, residual_sources
from stdfit.pipeline.adapters.brought import brought
from stdfit.pipeline.adapters.known import Determined, Estimated
from stdfit.pipeline.adapters.planes import Planes, planes_of
from stdfit.trials.adapters import draw_adapter, s_parameters
from stdfit.uncertainty.connections import assumed_repeatability
from stdfit.uncertainty.region import CIRCULAR
from stdfit.validity.adapter import Adapter, s_at, symmetric_root, term_vectors
from stdfit.validity.kit import Ancestor, curve
from stdfit.validity.thru import LineTerm
from stdfit.writing.adapter_file import adapter_text

F = np.linspace(50e6, 6e9, 101)
BARREL = AdapterEntry("barrel", delay_ps=Given(95.0, 3.0), loss_db=Given(0.1, 0.05), z0_ohm=Given(50.0, 0.5))


def made(covariance=None, seed=1, f=F):
    """An adapter with errors of its own, invented."""
    known = f[:: f.size // 10]
    known = np.append(known, f[-1]) if known[-1] != f[-1] else known
    covariance = np.zeros((6, 6)) if covariance is None else covariance
    return Adapter(
        name="barrel",
        reference_ohm=50.0,
        created="2000-01-01",
        version="0.0.0",
        frequency_hz=f,
        s=s_parameters(draw_adapter(np.random.default_rng(seed)), f),
        known_hz=known,
        covariance=np.broadcast_to(covariance, (known.size, 6, 6)),
        freedom=np.inf,
        line=(LineTerm(95.0, 0.1, 94.8, 95.2), LineTerm(2.0, 0.1, 1.8, 2.2), LineTerm(50.0, 0.1, 49.8, 50.2)),
    )


@pytest.fixture
def covariance():
    root = 1e-3 * np.random.default_rng(5).standard_normal((6, 6))
    return root @ root.T


def planes(known, **fields):
    return Planes({known.name: known}, **{"calibrated_with": None, "behind": {}, **fields})


def standards(bench, **fields):
    return replace(bench, standards=tuple(replace(one, **fields) for one in bench.standards))


def gammas(seed=2):
    rng = np.random.default_rng(seed)
    return 0.5 * (rng.standard_normal((3, F.size)) + 1j * rng.standard_normal((3, F.size)))


def test_a_calibration_with_an_adapter_is_the_inverse_of_being_behind_it():
    known = Determined(made(), "0" * 64)
    behind = planes(known, behind={"short": "barrel"}).passage("short", F)
    removed = planes(known, calibrated_with="barrel").passage("short", F)
    np.testing.assert_allclose(removed.on(behind.on(gammas())), gammas(), atol=1e-12)
    np.testing.assert_allclose(behind.on(removed.on(gammas())), gammas(), atol=1e-12)
    np.testing.assert_allclose(behind.back(gammas()), removed.on(gammas()), atol=1e-12)


def test_an_independent_library_removes_it_alike():
    """scikit-rf: the inverse of the two-port, cascaded with what is read."""
    known = Determined(made(), "0" * 64)
    passage = planes(known, behind={"short": "barrel"}).passage("short", F)
    frequency = skrf.Frequency.from_f(F, unit="hz")
    s11, s21, s22 = s_at(known.adapter, F).T
    network = skrf.Network(
        frequency=frequency, s=np.array([[s11, s21], [s21, s22]]).transpose(2, 0, 1), z0=50
    )
    gamma = gammas()[0]
    read = skrf.Network(frequency=frequency, s=gamma[:, None, None], z0=50)
    np.testing.assert_allclose(passage.on(gamma), (network.inv**read).s[:, 0, 0], atol=1e-9)


@pytest.mark.parametrize("way", [{"behind": {"short": "barrel"}}, {"calibrated_with": "barrel"}])
def test_slopes_and_powers_are_derivatives(way):
    """Errors of S and of the reading, put in as small changes of both."""
    known = Determined(made(), "0" * 64)
    passage = planes(known, **way).passage("short", F)
    gamma, small = gammas()[0], 1e-7
    read = passage.back(gamma)
    moved = (passage.on(read + small) - passage.on(read - small)) / (2 * small)
    np.testing.assert_allclose(passage.slopes(gamma)[0], moved, rtol=1e-6)
    change = small * (gammas(3).T + 0.1)
    turned = Determined(replace(known.adapter, s=known.adapter.s + change), "0" * 64)
    shown = planes(turned, **way).passage("short", F).on(read)
    terms = (terms_by_s(s_at(known.adapter, F)) @ change[..., None])[..., 0]
    (step,) = passage.steps
    expected = (step.powers(*passage.planes(gamma)) * terms).sum(axis=1)
    np.testing.assert_allclose(shown - gamma, expected, atol=1e-3 * np.abs(expected).max())


def test_the_six_numbers_make_the_covariance(covariance):
    vectors = term_vectors(made(covariance), F)
    real = np.stack([vectors.real, vectors.imag], axis=2).reshape(F.size, 6, 6)
    np.testing.assert_allclose(
        real @ np.swapaxes(real, 1, 2), np.broadcast_to(covariance, (F.size, 6, 6)), atol=1e-15
    )
    np.testing.assert_allclose(
        symmetric_root(covariance[None])[0] @ symmetric_root(covariance[None])[0], covariance
    )


def test_between_its_frequencies_and_outside():
    coarse, fine = made(f=F[::2]), made()
    np.testing.assert_allclose(s_at(coarse, F[::2]), coarse.s, atol=0)
    np.testing.assert_allclose(s_at(coarse, F), fine.s, atol=2e-4)
    with pytest.raises(RequestError, match="7000000000 Hz lies outside the band of the adapter 'barrel'"):
        s_at(fine, np.array([1e9, 7e9]))


def test_errors_of_a_standard_behind_it_have_the_variance_of_the_terms(workshop, covariance):
    """E|δ0 + δ1·Γ + δ2·Γ²|² from the covariance, for every correlation length."""
    bench = standards(workshop().bench(), behind="barrel")
    prepared = prepare(workshop().bench(), workshop().readings())
    found = planes(
        Determined(made(covariance), "0" * 64), behind={one.name: "barrel" for one in bench.standards}
    )
    passages = [found.passage(one.name, F) for one in prepared.observed]
    silent = assumed_repeatability(prepared.observed, (0.0, 0.0, 0.0), 0.0)
    (source, *rest) = adapter_sources_on(prepared.observed, passages, found, silent, 50.0)
    assert source.name == "adapter (barrel: as determined)"
    assert all(not np.any(own) for other in rest for length in other.vectors for own in length)
    for k, one in enumerate(prepared.observed):
        powers = one.gamma[:, None] ** np.arange(3)
        whole = np.repeat(powers, 2, axis=1) * np.tile([1.0, 1j], 3)
        expected = np.einsum("ni,ij,nj->n", whole, covariance, whole.conj()).real
        for length in source.vectors:
            np.testing.assert_allclose((np.abs(length[k]) ** 2).sum(axis=1), expected, rtol=2e-4)


@pytest.mark.parametrize("way", [{"behind": {"open": "barrel"}}, {"calibrated_with": "barrel"}])
def test_residuals_act_in_the_plane_of_the_reading(workshop, way):
    """δD + δT·m + δM·m² is added to the reading, and the adapter removed from the sum."""
    observed = prepare(workshop().bench(), workshop().readings()).observed[0]
    passage = planes(Determined(made(), "0" * 64), **way).passage("open", F)
    stated = StatedResidual([1e9], [1e-6], [1e-6], [1e-6])
    read = passage.back(observed.gamma)
    sources = residual_sources([observed], [passage], stated)
    for source, power in zip(sources, range(3), strict=True):
        off = passage.on(read + 1e-6 * read**power) - observed.gamma
        np.testing.assert_allclose(source.profiles[0] * CIRCULAR, off, rtol=1e-4)


def read_behind(workshop, passage):
    """The workshop's readings as they would have been through an adapter."""
    return {
        name: [replace(one, gamma=passage.back(one.gamma)) for one in own]
        for name, own in workshop.readings().items()
    }


def test_an_estimate_widens_the_bound_by_its_delay(workshop):
    """A shift of the plane by u turns Γ by 2ωu: 3 ps are 1.96·2·2πf·3 ps at |Γ| = 1."""
    shop = workshop(noise=1e-6, shift_ps=1e-4, residual_db=120.0)
    plain = characterise(shop.bench(), shop.readings())
    exact = replace(BARREL, loss_db=Given(1e-4, 1e-9), z0_ohm=Given(50.0, 1e-9))
    bench = replace(standards(shop.bench(), behind="barrel"), adapters=(exact,))
    passage = planes_of(bench).passage("short", F)
    kit = characterise(bench, read_behind(shop, passage))
    at = np.array([0.5e9, 1e9])
    for name in ("open", "short"):
        gamma, bound = curve(kit, kit.definition(name), at)
        old, narrow = curve(plain, plain.definition(name), at)
        np.testing.assert_allclose(gamma, old, atol=2e-4)
        np.testing.assert_allclose(bound - narrow, 1.96 * 4 * np.pi * at * 3e-12, rtol=0.02)
    assert "adapter" in kit.definition("short").limit.reason


def test_what_is_assumed_of_an_estimate_is_told(workshop):
    shop = workshop()
    bench = replace(
        standards(shop.bench(), behind="barrel"), adapters=(replace(BARREL, loss_db=None, z0_ohm=None),)
    )
    kit = characterise(bench, read_behind(shop, planes_of(bench).passage("short", F)))
    (told,) = [one for one in kit.warnings if one.startswith("adapter barrel")]
    assert "a loss of 0.05 ± 0.05 dB at 1 GHz and an impedance of 50 ± 0.5 Ω assumed" in told


def test_impedance_of_an_estimate_to_first_order():
    """A line of Z0 + dZ adds ρ = dZ/2Zr at one end and −ρ·e^(−2γl) at the other, which shows a load behind it off by
    |1 − e^(2γl)|·ρ (derived)."""
    known = Estimated("barrel", Given(95.0, 1e-9), Given(1e-9, 1e-9), Given(50.0, 0.5), 50.0)
    sources = {one.part: one.vectors[0] for one in known.term_sources(F, (F[0], F[-1]))}
    rho = 0.5 / 100.0
    expected = np.abs(1.0 - np.exp(4j * np.pi * F * 95e-12)) * rho
    np.testing.assert_allclose(np.abs(sources["impedance"][:, 0, 0]), expected, atol=1e-9)
    np.testing.assert_allclose(sources["impedance"][:, 1], 0.0, atol=1e-9)


def test_the_kit_names_where_its_adapter_comes_from(workshop, tmp_path):
    old = Ancestor("Old kit (invented)", "2000-01-01", "b" * 64)
    file = tmp_path / "barrel.adapter.toml"
    adapter = replace(made(1e-8 * np.eye(6)), ancestors=(old,), warnings=("two of three were dirty",))
    file.write_text(adapter_text(adapter), encoding="utf-8")
    shop = workshop()
    bench = replace(standards(shop.bench(), behind="barrel"), adapters=(AdapterEntry("barrel", file=file),))
    kit = characterise(bench, read_behind(shop, planes_of(bench).passage("short", F)))
    assert kit.ancestors == (old,)
    assert "adapter barrel: two of three were dirty" in kit.warnings
    assert any(share.name == "adapter (barrel: as determined)" for share in kit.shares)
    truth, _ = reflection("short", shop.values["short"][1], F, 50.0)
    gamma, bound = curve(kit, kit.definition("short"), F)
    assert (np.abs(gamma - truth) <= bound).mean() > 0.9


def test_readings_outside_the_band_are_refused(workshop, tmp_path):
    file = tmp_path / "barrel.adapter.toml"
    file.write_text(adapter_text(made(f=F[:51])), encoding="utf-8")
    bench = replace(
        standards(workshop().bench(), behind="barrel"), adapters=(AdapterEntry("barrel", file=file),)
    )
    with pytest.raises(ReadingError, match="outside the band of the adapter 'barrel'"):
        brought(bench, workshop().readings(), planes_of(bench))
    cut = replace(bench, highest_hz=float(F[50]))
    assert brought(cut, workshop().readings(), planes_of(cut))["short"][0].frequency_hz[-1] == F[50]


def test_an_adapter_of_another_reference_impedance_is_refused(workshop, tmp_path):
    file = tmp_path / "barrel.adapter.toml"
    file.write_text(adapter_text(replace(made(), reference_ohm=75.0)), encoding="utf-8")
    bench = replace(
        standards(workshop().bench(), behind="barrel"), adapters=(AdapterEntry("barrel", file=file),)
    )
    with pytest.raises(BenchError, match="the adapter is of 75 Ω, and the bench of 50 Ω"):
        planes_of(bench)


def test_an_adapter_of_which_nothing_is_known_is_refused(workshop):
    bench = replace(standards(workshop().bench(), behind="barrel"), adapters=(AdapterEntry("barrel"),))
    with pytest.raises(BenchError, match="nothing is said of this adapter"):
        characterise(bench, workshop().readings())


def test_known_standards_are_no_part_of_a_kit(workshop, tmp_path):
    bench = standards(workshop().bench(), behind="barrel", from_kit=tmp_path / "kit.toml", standard="open")
    with pytest.raises(RequestError, match="determine the adapter 'barrel'"):
        characterise(replace(bench, adapters=(BARREL,)), workshop().readings())


def test_two_adapters_one_after_the_other():
    """Calibrated with one and behind another: Γ = A⁻¹(B(m))."""
    one, other = Determined(made(seed=1), "0" * 64), Determined(replace(made(seed=2), name="other"), "1" * 64)
    both = Planes({"barrel": one, "other": other}, "other", {"short": "barrel"})
    alone = [
        planes(other, calibrated_with="other").passage("short", F),
        planes(one, behind={"short": "barrel"}).passage("short", F),
    ]
    read = gammas()[0]
    gamma = alone[1].on(alone[0].on(read))
    passage = both.passage("short", F)
    np.testing.assert_allclose(passage.on(read), gamma, atol=1e-12)
    np.testing.assert_allclose(
        passage.slopes(gamma)[0],
        alone[1].slopes(gamma)[0] * alone[0].slopes(alone[1].back(gamma))[0],
        rtol=1e-9,
    )
    assert [step.known.name for step in passage.steps] == ["other", "barrel"]


def test_sweeps_without_adapters_are_left_alone(workshop):
    shop = workshop()
    readings = shop.readings()
    kept = brought(shop.bench(), readings, planes_of(shop.bench()))
    assert all(a is b for name in readings for a, b in zip(readings[name], kept[name], strict=True))
    assert isinstance(kept["open"][0], Sweep)
