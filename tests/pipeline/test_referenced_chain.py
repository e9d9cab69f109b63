"""A kit from a kit from a kit: uncertainty only grows, ancestors are told, and shared ones are counted so."""

import json
from dataclasses import replace

import numpy as np
import pytest

from stdfit.circuits.standard import reflection
from stdfit.cli import main
from stdfit.data.bench import read_bench
from stdfit.pipeline import choose_all, kit_of, prepare_bench, read_sweeps, settle
from stdfit.pipeline.raw.inherited import LIFTED, never_surer
from stdfit.validity.device.bound import device_bound, device_map, three_of
from stdfit.validity.kit import Ancestor, curve
from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import parse_kit, read_kit

ROUNDING = 0.98
"""Bounds are kept at a few hundred frequencies of the readings, with straight lines between them."""


def inherited(reference, gamma, frequency_hz):
    """Return what a kit puts into a device that is measured with it."""
    return device_bound(device_map(reference, three_of(reference), frequency_hz), gamma[:, None])[:, 0]


def moved(rng):
    """Three new standards, drawn inside the model family."""
    return {
        "open": ("open", [rng.uniform(10, 60), 1.0, 50.0, rng.uniform(20, 60), 0.0, 100.0, 0.0]),
        "short": ("short", [rng.uniform(10, 60), 1.0, 50.0, rng.uniform(0, 15), 0.0, 0.0, 0.0]),
        "load": ("load", [0.0, 0.0, 50.0, rng.uniform(49, 51), rng.uniform(-40, 40), 0.0]),
    }


@pytest.mark.parametrize("seed", range(3))
def test_uncertainty_only_grows_along_a_chain(raw_bench, workshop, seed):
    """Three kits, each the reference of the next: no bound is below what the kit before puts into it."""
    rng = np.random.default_rng([29, seed])
    kit = workshop(residual_db=rng.uniform(38, 50), connections=int(rng.integers(2, 5)), seed=seed).kit()
    for step in range(2):
        values = moved(rng)
        bench = raw_bench(f"step {step}", kit=kit, new=values, noise=1e-4, shift_ps=0.1, seed=seed + step)
        following = bench.fitted()
        f = np.linspace(1e8, min(one.read_top_hz for one in following.definitions), 60)
        for one in following.definitions:
            gamma, bound = curve(following, one, f)
            assert (bound >= ROUNDING * inherited(kit, gamma, f)).all(), (step, one.name)
            if step == 0:
                # The references are exactly what their kit says, so that this is the truth's error.
                assert (np.abs(gamma - true_at(values[one.name], f)) <= bound).all()
        kit = following


@pytest.mark.parametrize("seed", range(3))
def test_copies_of_the_references_are_less_sure_than_these(raw_bench, workshop, seed):
    """Standards that reflect like the references: each has the bound of its own reference, and more."""
    rng = np.random.default_rng([31, seed])
    kit = workshop(residual_db=rng.uniform(38, 50), connections=int(rng.integers(2, 5)), seed=seed).kit()
    copies = {one.name: (one.kind, one.values) for one in kit.definitions}
    following = raw_bench(kit=kit, new=copies, noise=1e-4, shift_ps=0.1, seed=seed).fitted()
    f = np.linspace(1e8, min(one.read_top_hz for one in following.definitions), 60)
    for one in following.definitions:
        known = curve(kit, kit.definition(one.name), f)[1]
        assert (curve(following, one, f)[1] >= ROUNDING * known).all(), one.name
    assert following.limit.limit_hz <= kit.limit.limit_hz


def true_at(standard, frequency_hz):
    kind, values = standard
    return reflection(kind, values, frequency_hz, 50.0)[0]


def test_a_bound_below_what_is_inherited_is_lifted(raw_bench):
    """A kit made too sure by hand: the misfit takes what lacks, and no more."""
    prepared = raw_bench(noise=1e-4, shift_ps=0.1).prepared()
    kit = kit_of(prepared, settle(prepared, choose_all(prepared)), created="2000-01-01")
    sure = replace(kit, shares=tuple(replace(one, covariances=1e-4 * one.covariances) for one in kit.shares))
    lifted = never_surer(sure, prepared)
    for before, after in zip(sure.definitions, lifted.definitions, strict=True):
        f = after.misfit_hz
        gamma, bound = curve(lifted, after, f)
        least = inherited(raw_bench().kit, gamma, f)
        np.testing.assert_allclose(bound, np.maximum(least, curve(sure, before, f)[1]), rtol=0.02, atol=2e-5)
    assert all(LIFTED in one.notes for one in lifted.definitions)
    assert lifted.limit.limit_hz < sure.limit.limit_hz or lifted.limit.limit_hz == kit.limit.limit_hz


def test_corrected_readings_are_not_lifted(usual_kit, benches, fitted):
    kit = fitted(benches[0])
    assert never_surer(kit, benches[0]) is kit


def test_ancestors_are_named_along_the_chain(raw_bench, usual_kit, tmp_path):
    first = raw_bench("first", noise=1e-4, shift_ps=0.1)
    second = first.fitted()
    third = raw_bench(
        "second", kit=replace(second, name="Second set"), noise=1e-4, shift_ps=0.1, seed=5
    ).fitted()
    (one, other) = third.ancestors
    assert (one.name, one.of) == ("Second set", "")
    assert (other.name, other.of) == (usual_kit.name, one.sha256)
    assert other.sha256 == second.ancestors[0].sha256
    names = [share.name for share in third.shares]
    assert any(
        name.startswith("reference kit (Second set: reference kit, Simulated bench: ") for name in names
    )
    text = kit_text(third)
    assert kit_text(parse_kit(text, "kit.toml")) == text


def test_two_kits_with_one_ancestor_count_as_if_their_errors_went_together(raw_bench, exact_kit, usual_kit):
    """Of an error that two kits may share, the sum of g = 2 has at most twice the sum of the variances."""

    def prepared_with(folder, ancestors):
        own = replace(usual_kit, name="one of two", ancestors=ancestors)
        other = replace(usual_kit, name="the other", ancestors=ancestors)
        bench = raw_bench(folder, kit=own)
        path = bench.write()
        (bench.folder / "other.toml").write_text(kit_text(other), encoding="utf-8")
        text = path.read_text(encoding="utf-8")
        head, _, tail = text.rpartition('from_kit = "reference.toml"')
        path.write_text(f'{head}from_kit = "other.toml"{tail}', encoding="utf-8")
        read = read_bench(path)
        return prepare_bench(read, read_sweeps(read))

    apart = prepared_with("apart", ())
    shared = prepared_with("shared", (Ancestor("the common one", "1999-01-01", "a" * 64),))
    name = "reference kit (the other: analyser residuals, tracking)"
    (before,), (after,) = ([one for one in p.sources if one.name == name] for p in (apart, shared))
    for one, two in zip(before.vectors[0], after.vectors[0], strict=True):
        size = np.abs(one).max()
        np.testing.assert_allclose(
            (two @ two.conj().T) / size**2, 2.0 * (one @ one.conj().T) / size**2, atol=1e-9
        )
    assert sum("have an ancestor or readings in common" in one for one in shared.warnings) == 1
    assert not any("have an ancestor or readings in common" in one for one in apart.warnings)


def test_the_command_from_kit_to_kit_to_plan(raw_bench, capsys):
    path = raw_bench(noise=1e-4, shift_ps=0.1).write()
    assert main(["fit", str(path), "--monte-carlo", "100"]) == 0
    said = capsys.readouterr()
    assert "Its references, and theirs\n  Simulated bench, 2000-01-01 (SHA-256 " in said.out
    assert "drift of the analyser is not in the bounds" in said.err
    kit = read_kit(path.parent / "kit.toml")
    assert len(kit.ancestors) == 1
    assert kit.checks
    assert main(["show", str(path.parent / "kit.toml"), "--json"]) == 0
    assert json.loads(capsys.readouterr().out)["ancestors"][0]["sha256"] == kit.ancestors[0].sha256
    assert main(["plan", str(path)]) == 0
    told = capsys.readouterr().out
    assert "take references that are known 6 dB better" in told
    assert "connections of each reference" in told
    assert "connections of each new standard" in told
    assert "read on up to" not in told
