"""Raw readings against three or more references: corrected exactly, with the right errors attached."""

from dataclasses import replace

import numpy as np
import pytest

from stdfit.circuits.error_box import corrected, seen_raw
from stdfit.circuits.residual_map import device_weights
from stdfit.circuits.standard import PARAMETERS
from stdfit.uncertainty.budget import Share
from stdfit.uncertainty.region import CIRCULAR
from stdfit.uncertainty.sources import LumpedSource, SharedSource, SmoothSource
from stdfit.validity.device.joint import joint_covariance
from stdfit.validity.kit import curve, misfit_at, model

SETS = tuple(
    (f"{which} {kind}", kind, which) for which in ("before", "after") for kind in ("open", "short", "load")
)
"""The same three references, read twice."""


def source(prepared, name):
    (found,) = [one for one in prepared.sources if one.name == name]
    return found


def with_more(kit, values):
    """Return a kit with more standards: name -> (kind, values), defined like the first of the same kind."""
    more = []
    for name, (kind, own) in values.items():
        like = next(one for one in kit.definitions if one.kind == kind)
        parameters = tuple(
            replace(p, value=v, low=v, high=v, u=0.0, of="", role="held")
            for p, v in zip(like.parameters, own, strict=True)
        )
        more.append(
            replace(like, name=name, parameters=parameters, combinations=(), misfit=0.0 * like.misfit + 1e-3)
        )
    ladder = tuple(replace(rung, standards_hz=rung.standards_hz + (0.0,) * len(more)) for rung in kit.ladder)
    return replace(kit, definitions=(*kit.definitions, *more), ladder=ladder)


def test_exact_references_without_noise_give_the_truth(raw_bench, exact_kit):
    bench = raw_bench(kit=exact_kit)
    prepared = bench.prepared()
    assert [one.name for one in prepared.observed] == ["open", "short", "load"]
    for one in prepared.observed:
        np.testing.assert_allclose(one.gamma, bench.truth(one.name), rtol=0, atol=1e-10)


def test_the_same_as_an_independent_library(raw_bench):
    """scikit-rf's one-port correction on the same definitions and readings."""
    skrf = pytest.importorskip("skrf", reason="scikit-rf is not installed")
    bench = raw_bench(connections=1, noise=1e-3, seed=4)
    prepared = bench.prepared()
    f = bench.frequency_hz
    frequency = skrf.Frequency.from_f(f, unit="hz")

    def network(gamma):
        return skrf.Network(frequency=frequency, s=np.asarray(gamma).reshape(-1, 1, 1), z0=50)

    def read(name):
        return np.loadtxt(bench.folder / f"{name}-1.s1p", comments=("!", "#")) @ np.array(
            [[0.0], [1.0], [1j]]
        )

    calibration = skrf.calibration.OnePort(
        ideals=[network(model(bench.kit, bench.kit.definition(part), f)[0]) for _, part, _ in bench.known],
        measured=[network(read(name)) for name, _, _ in bench.known],
        is_reciprocal=False,
    )
    for one in prepared.observed:
        theirs = calibration.apply_cal(network(read(one.name))).s[:, 0, 0]
        np.testing.assert_allclose(one.gamma, theirs, rtol=0, atol=1e-9)


def test_the_kit_holds_the_new_standards_and_names_its_reference(raw_bench, usual_kit):
    warned = replace(usual_kit, warnings=("one connection of each standard",))
    kit = raw_bench(kit=warned, noise=1e-4, shift_ps=0.1).fitted()
    assert [one.name for one in kit.definitions] == ["open", "short", "load"]
    assert {one.standard for one in kit.files} == {
        "open", "short", "load", "known open", "known short", "known load"
    }  # fmt: skip
    (ancestor,) = kit.ancestors
    assert (ancestor.name, ancestor.created, ancestor.of) == (usual_kit.name, "2000-01-01", "")
    assert f"reference {usual_kit.name}: one connection of each standard" in kit.warnings
    assert sum("drift of the analyser is not in the bounds" in one for one in kit.warnings) == 1


def test_the_truth_lies_within_the_bounds(raw_bench):
    bench = raw_bench(noise=1e-4, shift_ps=0.1, seed=2)
    kit = bench.fitted()
    for one in kit.definitions:
        gamma, bound = curve(kit, one, bench.frequency_hz)
        assert (np.abs(gamma - bench.truth(one.name)) <= bound).all()
        assert bound.max() < 0.02


def test_sources_of_the_reference_kit_are_its_covariances_through_the_quadratic(raw_bench):
    """Variance and correlation between two new standards, for each source and correlation length."""
    bench = raw_bench()
    prepared, kit, f = bench.prepared(), bench.kit, bench.frequency_hz
    references = np.stack([model(kit, one, f)[0] for one in kit.definitions], axis=1)
    designs = np.stack([model(kit, one, f)[1] for one in kit.definitions], axis=1)
    gamma = np.stack([one.gamma for one in prepared.observed], axis=1)
    combined = np.einsum("nki,nip->nkp", device_weights(references, gamma), designs)
    pairs = np.concatenate([combined.real, combined.imag], axis=1)
    for share in kit.shares:
        name = f"reference kit ({kit.name}: {share.name.replace(' (', ', ').replace(')', '')})"
        found = source(prepared, name)
        assert (found.freedom, isinstance(found, SharedSource)) == (share.freedom, True)
        assert len(found.vectors) == share.covariances.shape[0]
        for vectors, covariance in zip(found.vectors, share.covariances, strict=True):
            stack = np.stack(vectors, axis=1)
            rows = np.concatenate([stack.real, stack.imag], axis=1)
            expected = pairs @ covariance @ np.swapaxes(pairs, 1, 2)
            size = np.abs(expected).max(axis=(1, 2), keepdims=True)
            np.testing.assert_allclose(
                (rows @ np.swapaxes(rows, 1, 2)) / size, expected / size, rtol=0, atol=1e-6
            )


def test_misfits_of_references_act_on_all_standards_as_one_function(raw_bench, usual_kit):
    loud = replace(
        usual_kit,
        definitions=tuple(replace(one, misfit=0.0 * one.misfit + 0.004) for one in usual_kit.definitions),
    )
    prepared = raw_bench(kit=loud).prepared()
    f = prepared.observed[0].frequency_hz
    references = np.stack([model(loud, one, f)[0] for one in loud.definitions], axis=1)
    for place, name in enumerate(("open", "short", "load")):
        found = source(prepared, f"reference misfit ({name})")
        assert isinstance(found, SmoothSource)
        assert found.common
        for one, profile in zip(prepared.observed, found.profiles, strict=True):
            weight = device_weights(references, one.gamma[:, None])[:, 0, place]
            np.testing.assert_allclose(
                profile, weight * misfit_at(loud.definition(name), f) / CIRCULAR, rtol=1e-9
            )


def test_one_error_of_all_references_is_one_error_of_all_new_standards(raw_bench, exact_kit):
    """All references' planes are wrong by the same unknown delay: then so are those of all that is corrected with them.

    A shift of the plane by t turns every Γ by 2ωt: a covariance of rank one over all standards, known in closed form.
    """
    u_ps = 0.5
    shared = "short.offset_delay_ps"
    definitions = tuple(
        replace(
            one,
            parameters=tuple(
                replace(p, of=shared, u=u_ps, low=p.value - 1.0, high=p.value + 1.0)
                if p.name == "offset_delay_ps"
                else p
                for p in one.parameters
            ),
        )
        for one in exact_kit.definitions
    )
    one_error = Share("plane", np.inf, np.array([[[u_ps**2]]]))
    kit = raw_bench(
        kit=replace(exact_kit, definitions=definitions, order=(shared,), shares=(one_error,))
    ).fitted()
    part = replace(kit, shares=tuple(one for one in kit.shares if one.name.startswith("reference kit (")))
    assert len(part.shares) == 1
    # The load of the kit has no line; its plane shifts with a delay all the same.
    f = np.array([1e9, 3e9, 5e9])
    turn = np.stack(
        [-2j * 2 * np.pi * f * u_ps * 1e-12 * model(kit, one, f)[0] for one in kit.definitions], axis=1
    )
    rows = np.stack([turn.real, turn.imag], axis=2).reshape(f.size, 6)
    joint = joint_covariance(part, f)
    largest = np.abs(joint).max(axis=(1, 2), keepdims=True)
    np.testing.assert_allclose(
        joint / largest, rows[:, :, None] * rows[:, None, :] / largest, rtol=0, atol=0.03
    )


def test_connections_of_references_are_counted(raw_bench):
    """A shift of a reference's plane by s ps is an error of 2ωs·|Γ| of it, divided by √connections."""
    prepared = raw_bench(connections=4, shift_ps=0.5, noise=1e-4).prepared()
    found = source(prepared, "reference connections (plane shift)")
    f = prepared.observed[0].frequency_hz
    kit = raw_bench().kit
    references = np.stack([model(kit, one, f)[0] for one in kit.definitions], axis=1)
    weights = device_weights(references, prepared.observed[0].gamma[:, None])[:, 0]
    size = 4e-12 * np.pi * f[:, None] * np.abs(references * weights) * prepared.scatter.sd[1] / 2.0
    np.testing.assert_allclose(np.abs(found.vectors[0][0]), size, rtol=0.02, atol=2e-5)
    assert prepared.scatter.sd[1] == pytest.approx(0.5, rel=0.4)
    assert found.freedom == prepared.scatter.freedom[1]


def test_drift_between_two_sets(raw_bench, exact_kit):
    """A cable that turns by 2° between the sets: half of it, over √3, independent for each standard."""
    turn = np.radians(2.0)
    bench = raw_bench(kit=exact_kit, known=SETS, turn={"before": -turn / 2, "after": turn / 2})
    prepared = bench.prepared()
    assert not any("drift" in warning for warning in prepared.warnings)
    found = source(prepared, "drift (between sets)")
    assert isinstance(found, SharedSource)
    f = bench.frequency_hz
    for s, one in enumerate(prepared.observed):
        np.testing.assert_allclose(one.gamma, bench.truth(one.name), atol=3e-4)
        own = found.vectors[0][s]
        # A cable that turns lies behind the source match M, so that Γ goes to Γ − jφΓ·(1 − MΓ).
        match = bench.terms()[:, 2]
        half = 0.5 * turn * f / f[-1] * np.abs(one.gamma * (1.0 - match * one.gamma)) / np.sqrt(3.0)
        np.testing.assert_allclose(np.abs(own[:, s]), half, rtol=1e-3)
        assert not np.delete(own, s, axis=1).any()


def test_drift_over_more_than_two_sets_is_their_sample_covariance(raw_bench, exact_kit):
    known = tuple(
        (f"{w} {kind}", kind, w) for w in ("1", "2", "3", "4") for kind in ("open", "short", "load")
    )
    turns = dict(zip("1234", (0.0, 0.01, -0.02, 0.03), strict=True))
    bench = raw_bench(kit=exact_kit, known=known, turn=turns)
    prepared = bench.prepared()
    found = source(prepared, "drift (between sets)")
    assert found.freedom == 3.0
    variance = (np.abs(found.vectors[0][1][-1]) ** 2).sum()
    gamma = prepared.observed[1].gamma[-1]
    size = np.abs(gamma * (1.0 - bench.terms()[-1, 2] * gamma)) ** 2
    assert variance == pytest.approx(size * np.var(list(turns.values()), ddof=1), rel=0.02)


def test_a_standard_that_drifts_away_widens_its_bound(raw_bench):
    still = raw_bench("still", known=SETS, noise=1e-4, shift_ps=0.05).fitted()
    moved = raw_bench(
        "moved", known=SETS, noise=1e-4, shift_ps=0.05, turn={"before": -0.01, "after": 0.01}
    ).fitted()
    f = np.array([5e9])
    for name in ("open", "short"):
        bounds = [curve(kit, kit.definition(name), f)[1][0] for kit in (still, moved)]
        assert bounds[1] > bounds[0] + 0.002
    far = raw_bench(
        "far", known=SETS, noise=1e-4, shift_ps=0.05, turn={"before": -0.05, "after": 0.05}
    ).fitted()
    assert far.limit.limit_hz < 0.7 * still.limit.limit_hz
    assert ": drift, " in far.limit.reason


FIFTH = {
    "long short": ("short", [70.0, 1.0, 50.0, 5.0, 0.0, 0.0, 0.0]),
    "mismatch": ("load", [0.0, 0.0, 50.0, 25.0, 20.0, 0.0]),
}


def of_one_set(names):
    return tuple((f"known {name}", name, "") for name in names)


def test_four_and_five_sound_references_agree(raw_bench, exact_kit):
    for count in (4, 5):
        kit = with_more(exact_kit, FIFTH)
        names = [one.name for one in kit.definitions][:count]
        bench = raw_bench(kit=kit, known=of_one_set(names), noise=1e-4, shift_ps=0.05)
        prepared = bench.prepared()
        assert not any("contradict" in warning for warning in prepared.warnings)
        for one in prepared.observed:
            np.testing.assert_allclose(one.gamma, bench.truth(one.name), atol=5e-3)


@pytest.mark.parametrize("odd", ["open", "mismatch"])
def test_the_one_of_five_references_that_disagrees_is_named(raw_bench, exact_kit, odd):
    kit = with_more(exact_kit, FIFTH)
    names = [one.name for one in kit.definitions]
    bench = raw_bench(kit=kit, known=of_one_set(names), wrong={odd: 0.03}, noise=1e-4, shift_ps=0.05)
    told = [warning for warning in bench.prepared().warnings if "contradict" in warning]
    assert len(told) == 1
    assert told[0].startswith(f"the known standard 'known {odd}' contradicts the others")
    assert "the others agree without it" in told[0]


def test_of_four_references_none_can_be_told_to_be_the_wrong_one(raw_bench, exact_kit):
    kit = with_more(exact_kit, FIFTH)
    names = [one.name for one in kit.definitions][:4]
    bench = raw_bench(kit=kit, known=of_one_set(names), wrong={"short": 0.03}, noise=1e-4, shift_ps=0.05)
    told = [warning for warning in bench.prepared().warnings if "contradict" in warning]
    assert len(told) == 1
    assert "which of the four is wrong only a fifth would tell" in told[0]


def test_readings_above_what_a_reference_is_known_to_are_cut_off(raw_bench, exact_kit):
    first = replace(
        exact_kit.definitions[0],
        read_top_hz=3e9,
        fit_top_hz=3e9,
        limit=replace(exact_kit.definitions[0].limit, limit_hz=3e9),
    )
    kit = replace(
        exact_kit,
        definitions=(first, *exact_kit.definitions[1:]),
        limit=replace(exact_kit.limit, limit_hz=3e9),
    )
    prepared = raw_bench(kit=kit).prepared()
    assert all(one.frequency_hz[-1] <= 3e9 for one in prepared.observed)
    (told,) = [warning for warning in prepared.warnings if "left out" in warning]
    assert told.startswith("the readings above 3 GHz are left out: 'open' of the kit")


def test_a_glitch_in_a_reference_does_not_reach_the_others(raw_bench, exact_kit):
    """Unmended, a third of it would stand in the load at that frequency: 0.017."""
    spoiled = np.zeros(101)
    spoiled[40] = 0.05
    bench = raw_bench(kit=exact_kit, changed={("known load", 1): spoiled}, noise=1e-5, shift_ps=0.1)
    prepared = bench.prepared()
    assert any("known load-2.s1p: 1 single point" in warning for warning in prepared.warnings)
    assert not any("this connection lies" in warning for warning in prepared.warnings)
    for one in prepared.observed:
        error = one.gamma - bench.truth(one.name)
        assert abs(error[40] - 0.5 * (error[39] + error[41])) < 1e-3


def test_a_bad_connection_of_a_reference_is_left_out(raw_bench, exact_kit):
    bench = raw_bench(
        kit=exact_kit, connections=5, changed={("known short", 2): 0.05}, noise=1e-5, shift_ps=0.02
    )
    prepared = bench.prepared()
    told = [warning for warning in prepared.warnings if "this connection lies" in warning]
    assert len(told) == 1
    assert "known short-3.s1p" in told[0]
    for one in prepared.observed:
        np.testing.assert_allclose(one.gamma, bench.truth(one.name), atol=3e-3)


def test_lumped_errors_of_new_connections_stay_independent(raw_bench):
    """What the new standards' own connections do is no error of the references."""
    prepared = raw_bench(noise=1e-4, shift_ps=0.1).prepared()
    own = [one for one in prepared.sources if isinstance(one, LumpedSource)]
    assert [one.name for one in own] == [
        "connections (contact resistance)",
        "connections (plane shift)",
        "connections (contact reactance)",
    ]


def test_raw_readings_are_what_the_error_terms_make_of_them():
    """The fixture's analyser, there and back."""
    box = np.array([[0.05 + 0.01j, 0.8j, 0.1]])
    gamma = np.array([0.3 - 0.4j])
    np.testing.assert_allclose(corrected(box, seen_raw(box, gamma)), gamma, rtol=1e-14)
    assert {one.name for one in PARAMETERS["load"]} >= {"offset_delay_ps"}
