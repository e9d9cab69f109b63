"""Raw readings against references without an adapter, of new standards behind one."""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.base.errors import RequestError
from stdfit.base.records import Sweep
from stdfit.circuits.error_box import seen_raw
from stdfit.circuits.two_port import box_of
from stdfit.data.bench_records import AdapterEntry, Given, StandardEntry
from stdfit.pipeline import characterise, prepare_bench
from stdfit.pipeline.adapters.planes import planes_of
from stdfit.validity.kit import curve
from stdfit.writing.kit_file import kit_text

KINDS = ("open", "short", "load")
BARREL = AdapterEntry("barrel", delay_ps=Given(95.0, 0.2), loss_db=Given(0.1, 0.01), z0_ohm=Given(50.0, 0.1))


@pytest.fixture(scope="module")
def shops(workshop):
    """The same references and new standards, in good order."""
    new = {
        "new open": ("open", [20.0, 1.0, 50.0, 30.0, 0.0, 200.0, 0.0]),
        "new short": ("short", [30.0, 1.0, 50.0, 2.0, 0.0, 0.0, 0.0]),
    }
    quiet = {"noise": 1e-5, "shift_ps": 0.02, "residual_db": 100.0}
    return workshop(**quiet), workshop(**quiet, values=new, seed=7)


@pytest.fixture
def raw_bench(shops, tmp_path):
    """A bench of raw readings, and readings with an analyser that is far from ideal."""
    known, new = shops
    path = tmp_path / "reference.toml"
    path.write_text(kit_text(known.kit()), encoding="utf-8")
    bench = replace(
        new.bench(),
        state="raw",
        residual=None,
        adapters=(BARREL,),
        standards=(
            *(StandardEntry(name, name, (), from_kit=path, standard=name) for name in KINDS),
            *(replace(one, behind="barrel") for one in new.bench().standards),
        ),
    )
    f = new.frequency_hz
    box = box_of(np.stack([0.05 * np.exp(-1j * f / 1e9), 0.9 * np.exp(-3j * f / 1e9), 0.1 + 0j * f], axis=-1))
    passage = planes_of(bench).passage("new open", f)
    readings = {**known.readings(), **new.readings()}
    sweeps = {
        name: [
            Sweep(f, seen_raw(box, one.gamma if name in KINDS else passage.back(one.gamma)), 50.0, one.name)
            for one in own
        ]
        for name, own in readings.items()
    }
    return bench, sweeps


def test_they_come_back_to_their_plane(raw_bench, shops):
    bench, sweeps = raw_bench
    kit = characterise(bench, sweeps)
    assert [one.name for one in kit.definitions] == ["new open", "new short"]
    f = shops[1].frequency_hz
    for one in kit.definitions:
        gamma, bound = curve(kit, one, f)
        assert (np.abs(gamma - shops[1].truth(one.name, f)) <= bound).mean() > 0.9
        assert bound.max() < 0.07
    kinds = {share.name.partition(" (")[0] for share in kit.shares}
    assert {"adapter", "reference kit", "reference connections"} <= kinds


def test_what_adapters_add_stands_beside_what_the_references_do(raw_bench):
    bench, sweeps = raw_bench
    f = np.array([1e9, 2e9])
    sure = replace(BARREL, delay_ps=Given(95.0, 1e-6))
    bounds = [
        curve(kit, kit.definition("new short"), f)[1]
        for kit in (
            characterise(replace(bench, adapters=(one,)), sweeps)
            for one in (BARREL, sure, replace(BARREL, delay_ps=Given(95.0, 0.4)))
        )
    ]
    added = [np.sqrt(np.maximum(own**2 - bounds[1] ** 2, 0.0)) for own in bounds]
    # A shift of the plane by u turns a full reflection by 2·2πf·u.
    np.testing.assert_allclose(added[2], 1.96 * 4e-12 * np.pi * f * 0.4, rtol=0.15)
    assert (bounds[2] > bounds[0]).all() and (bounds[0] > bounds[1]).all()


def test_without_three_references_it_is_refused(raw_bench):
    bench, sweeps = raw_bench
    few = replace(bench, standards=bench.standards[1:])
    with pytest.raises(RequestError, match="need three known standards") as refused:
        characterise(few, sweeps)
    assert refused.value.key == "standard[new open].behind"


def test_errors_of_references_are_carried_through_the_adapter(raw_bench):
    """What the references do to a corrected reading, times dΓ by that reading: with the adapter and without."""
    bench, sweeps = raw_bench
    plain = replace(bench, adapters=(), standards=tuple(replace(one, behind=None) for one in bench.standards))
    before, after = prepare_bench(plain, sweeps), prepare_bench(bench, sweeps)
    f = np.asarray(after.observed[0].frequency_hz)
    passage = planes_of(bench).passage("new open", f)
    np.testing.assert_allclose(passage.back(after.observed[0].gamma), before.observed[0].gamma, atol=1e-12)
    slope = passage.slopes(np.asarray(after.observed[0].gamma))[0]
    own = {source.name: source for source in before.sources if source.name.startswith("reference kit (")}
    found = {source.name: source for source in after.sources if source.name in own}
    assert len(own) == len(found) > 3
    for name, source in own.items():
        for old, new in zip(source.vectors, found[name].vectors, strict=True):
            np.testing.assert_allclose(new[0], old[0] * slope[:, None], rtol=1e-9, atol=1e-18)
