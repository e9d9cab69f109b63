"""An adapter from known standards behind it: exact where all is exact, refused where the bench is none."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from stdfit.base.errors import BenchError, FitError
from stdfit.base.records import Sweep
from stdfit.circuits.error_box import seen_raw
from stdfit.circuits.standard import reflection
from stdfit.circuits.two_port import box_of
from stdfit.data.bench_records import AdapterEntry, Bench, Given, StandardEntry, StatedResidual
from stdfit.pipeline.adapters.determined import adapter_from
from stdfit.trials.adapters import draw_adapter, s_parameters
from stdfit.validity.ancestry import Origin

F = np.linspace(50e6, 4e9, 81)
KIT = Path("reference.toml")
NOTHING = StatedResidual([1e9], [0.0 + 1e-30], [1e-30], [1e-30])


@pytest.fixture(scope="module")
def kit(workshop):
    """A kit without any uncertainty: its definitions are the truth."""
    made = workshop().kit()
    exact = tuple(replace(one, misfit=np.zeros(one.misfit.size), read_top_hz=6e9) for one in made.definitions)
    shares = tuple(replace(one, covariances=0.0 * one.covariances) for one in made.shares)
    return replace(made, definitions=exact, shares=shares)


def bench(**fields):
    names = ("open", "short", "load")
    usual = {
        "path": Path("bench.toml"),
        "name": "Invented barrel",
        "connector": "SMA",
        "reference_ohm": 50.0,
        "within": 0.02,
        "highest_hz": None,
        "state": "corrected",
        "residual": NOTHING,
        "standards": tuple(
            StandardEntry(one, one, (), from_kit=KIT, standard=one, behind="barrel") for one in names
        ),
        "adapters": (AdapterEntry("barrel"),),
    }
    return Bench(**{**usual, **fields})


def sweeps_of(kit, s, f=F):
    return {
        one.name: [
            Sweep(f, seen_raw(box_of(s), reflection(one.kind, one.values, f, 50.0)[0]), 50.0, one.name)
        ]
        for one in kit.definitions
    }


def determined(kit, s, f=F, **fields):
    return adapter_from(
        bench(**fields), sweeps_of(kit, s, f), created="2000-01-01", origins={KIT: Origin(kit, "a" * 64)}
    )


@pytest.mark.parametrize("seed", range(5))
@pytest.mark.parametrize("delay_ps", [95.0, 430.0])
def test_exact_standards_and_no_noise_give_the_adapter(kit, seed, delay_ps):
    s = s_parameters(draw_adapter(np.random.default_rng(seed), 1e-12 * delay_ps), F)
    found = determined(kit, s)
    np.testing.assert_allclose(found.s, s, atol=1e-10)
    assert found.band == (F[0], F[-1])
    assert [one.name for one in found.ancestors] == [kit.name]


def test_the_line_that_is_most_like_it(kit):
    """Sections of 50 ± 1 Ω add up to a delay of 95 ps beside two steps of up to 15 fF, each worth 0.375 ps at most."""
    s = s_parameters(draw_adapter(np.random.default_rng(3)), F)
    delay, loss, z0 = determined(kit, s).line
    assert delay.low < 95.75 and delay.high > 95.0
    assert delay.high - delay.low < 1.5
    assert loss.low < 3.0 and loss.high > 1.0
    assert abs(z0.value - 50.0) < 1.5


def test_connections_and_residuals_set_the_bounds(kit):
    s = s_parameters(draw_adapter(np.random.default_rng(0)), F)
    sure = determined(kit, s)
    stated = StatedResidual([1e9], [0.01], [1e-30], [1e-30])
    unsure = determined(kit, s, residual=stated)
    # δD alone, a radius of 0.01, goes straight into S11.
    added = np.sqrt(unsure.s_bounds[:, 0] ** 2 - sure.s_bounds[:, 0] ** 2)
    np.testing.assert_allclose(added, 0.01, rtol=0.05)
    assert any("one connection of each standard" in warning for warning in sure.warnings)


def test_an_adapter_with_gain_is_told(kit):
    s = s_parameters(draw_adapter(np.random.default_rng(0)), F)
    louder = s * np.array([1.0, 1.05, 1.0])
    assert not any("gives more than it takes" in one for one in determined(kit, s).warnings)
    assert any("gives more than it takes" in one for one in determined(kit, louder).warnings)


def test_a_sign_that_cannot_be_told_is_told(kit):
    f = np.linspace(5.0e9, 5.1e9, 31)
    s = s_parameters(draw_adapter(np.random.default_rng(0), 800e-12), f)
    with pytest.raises(FitError, match="the sign of S21 of 'barrel' cannot be told"):
        determined(kit, s, f)
    told = determined(kit, s, f, adapters=(AdapterEntry("barrel", delay_ps=Given(800.0, 2.0)),))
    np.testing.assert_allclose(told.s, s, atol=1e-10)


def known(of, **fields):
    return replace(next(one for one in bench().standards if one.name == of), **fields)


@pytest.mark.parametrize(
    ("fields", "key", "what"),
    [
        ({"adapters": ()}, "adapter", "the table is missing"),
        ({"state": "raw"}, "analyser.state", "from corrected readings"),
        ({"adapters": (AdapterEntry("barrel", file=KIT),)}, "adapter[barrel].file", "known already"),
        ({"standards": bench().standards[:2]}, "standard", "2 of the 3 known standards"),
        (
            {"standards": (*bench().standards[:2], StandardEntry("load", "load", (), behind="barrel"))},
            "standard[load].from_kit",
            "determined from known standards",
        ),
        (
            {"standards": (*bench().standards, known("open", name="again"))},
            "standard[again].standard",
            "the same known standard as 'open'",
        ),
        (
            {"standards": (*bench().standards[:2], known("load", standard="lode"))},
            "standard[load].standard",
            "the kit holds no standard 'lode'",
        ),
    ],
)
def test_what_is_no_bench_of_an_adapter_is_refused(kit, fields, key, what):
    sweeps = {**sweeps_of(kit, s_parameters(draw_adapter(np.random.default_rng(0)), F))}
    with pytest.raises(BenchError, match=what.replace("[", r"\[")) as refused:
        adapter_from(bench(**fields), sweeps, origins={KIT: Origin(kit, "a" * 64)})
    assert refused.value.key == key
