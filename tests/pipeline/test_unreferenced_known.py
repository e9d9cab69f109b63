"""One or two known standards among raw readings: their kit's uncertainty enters, and they are no part of the result."""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.data.bench import read_bench
from stdfit.pipeline import fit_bench
from stdfit.pipeline.raw.known_standards import known_sources
from stdfit.pipeline.raw.references import looked_up
from stdfit.uncertainty.sources import SharedSource
from stdfit.validity.kit import curve, model, total_covariance
from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import parse_kit

NEW = {
    "short": ("short", [0.0, 1.5, 50.0, 0.0, 0.0, 0.0, 0.0]),
    "open": ("open", [5.2, 1.4, 50.0, 38.0, 0.0, 120.0, 0.0]),
    "load": ("load", [5.4, 0.0, 50.0, 50.3, 20.0, 0.0]),
    "offset short": ("short", [66.7, 1.5, 50.0, 0.0, 0.0, 0.0, 0.0]),
}
SAID = {
    "short": "given.offset_delay_ps = { value = 0.0, u = 0.1 }",
    "offset short": "given.offset_delay_ps = { value = 66.7, u = 0.1 }",
    "load": "given.resistance_ohm = { value = 50.3, u = 0.02 }",
}


def written(bench, said=SAID):
    """Write a bench of raw readings with what is said of its new standards; return the bench file's path."""
    path = bench.write()
    text = path.read_text(encoding="utf-8")
    for name, line in said.items():
        assert f'name = "{name}"\n' in text
        text = text.replace(f'name = "{name}"\n', f'name = "{name}"\n{line}\n')
    path.write_text(text, encoding="utf-8")
    return path


@pytest.fixture
def one_known(raw_bench):
    """Return a function that writes a bench with one known open; its arguments are what differs."""

    def make(**fields):
        known = (("known open", "open", ""),)
        return raw_bench(**{"new": NEW, "known": known, "noise": 1e-4, "shift_ps": 0.05, **fields})

    return make


def errors(bench, kit):
    f = bench.frequency_hz
    return {one.name: np.abs(curve(kit, one, f)[0] - bench.truth(one.name)).max() for one in kit.definitions}


def test_the_kit_holds_the_others_alone_and_names_its_ancestor(one_known, usual_kit):
    bench = one_known()
    kit = fit_bench(written(bench), created="2000-01-01")
    assert [one.name for one in kit.definitions] == list(NEW)
    assert not any(name.startswith("known open.") for name in kit.order)
    assert [one.name for one in kit.ancestors] == [usual_kit.name]
    assert {file.standard for file in kit.files} == {*NEW, "known open"}
    assert any(share.name.startswith("reference kit (") for share in kit.shares)
    assert max(errors(bench, kit).values()) < 0.02
    text = kit_text(kit)
    assert kit_text(parse_kit(text, bench.folder / "kit.toml")) == text


def test_what_the_kit_of_the_known_standard_warns_of_is_said_once_more(one_known, usual_kit):
    kit = replace(usual_kit, warnings=("it was assumed that pigs fly",))
    found = fit_bench(written(one_known(kit=kit)), created="2000-01-01")
    assert f"reference {usual_kit.name}: it was assumed that pigs fly" in found.warnings


def as_wide(kit, factor):
    """Return a kit whose standards are less well known by a factor; intervals follow."""
    definitions = tuple(
        replace(
            one,
            parameters=tuple(
                replace(
                    p,
                    u=factor * p.u,
                    low=p.value - factor * (p.value - p.low),
                    high=p.value + factor * (p.high - p.value),
                )
                for p in one.parameters
            ),
            combinations=(),
            misfit=factor * one.misfit,
        )
        for one in kit.definitions
    )
    shares = tuple(replace(one, covariances=factor**2 * one.covariances) for one in kit.shares)
    return replace(kit, definitions=definitions, shares=shares)


def test_a_known_standard_takes_the_place_of_lengths(one_known, exact_kit):
    """Without any length two exact ones fix the plane; losses, lines and C0 of the others still rest on assumptions."""
    said = {"load": SAID["load"]}
    known = (("known open", "open", ""), ("known short", "short", ""))
    bench = one_known(kit=exact_kit, known=known, noise=1e-5, shift_ps=0.0)
    kit = fit_bench(written(bench, said), created="2000-01-01")
    assert max(errors(bench, kit).values()) < 0.01
    assert not any("shift of the plane" in line for line in kit.warnings)


def test_the_worse_it_is_known_the_wider_the_bounds(one_known, usual_kit):
    said = {"load": SAID["load"]}
    known = (("known open", "open", ""), ("known short", "short", ""))
    bounds = []
    for factor in (1.0, 5.0):
        bench = one_known(folder=f"by-{factor:g}", kit=as_wide(usual_kit, factor), known=known)
        kit = fit_bench(written(bench, said), created="2000-01-01")
        bounds.append(curve(kit, kit.definition("short"), np.array([3e9]))[1][0])
    assert bounds[1] > 2.0 * bounds[0]


def test_its_covariance_enters_as_its_kit_says(one_known, usual_kit):
    """On its own readings, correlated with those of another one of the same kit, and on nobody else's."""
    known = (("known open", "open", ""), ("known short", "short", ""))
    bench = read_bench(written(one_known(known=known)))
    places = [k for k, one in enumerate(bench.standards) if one.from_kit is not None]
    f = np.array([1e9, 3e9, 5e9])
    sources = known_sources(dict(zip(places, looked_up(bench), strict=True)), f, len(bench.standards))
    assert {one.name.partition(" (")[0] for one in sources} <= {"reference kit", "reference misfit"}
    shared = [one for one in sources if isinstance(one, SharedSource)]
    designs = [model(usual_kit, usual_kit.definition(kind), f)[1] for kind in ("open", "short")]
    for source, share in zip(shared, [s for s in usual_kit.shares if s.covariances.any()], strict=True):
        for vectors, covariance in zip(source.vectors, share.covariances, strict=False):
            assert not any(own.any() for k, own in enumerate(vectors) if k not in places)
            for i, one in enumerate(places):
                for j, other in enumerate(places):
                    found = vectors[one] @ vectors[other].conj().T
                    wanted = designs[i] @ covariance @ designs[j].conj().T
                    np.testing.assert_allclose(found, wanted, rtol=1e-6, atol=1e-12)
    assert total_covariance(usual_kit.shares).any()
