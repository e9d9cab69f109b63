"""Two sessions compared: what cancels, what is found, and what it is called."""

import re
from dataclasses import replace

import numpy as np
import pytest

from stdfit.base.errors import RequestError
from stdfit.circuits.line import see_through_line
from stdfit.trials.wear_pair import Worn, draw_pair
from stdfit.trials.wear_study import quick_kit, wear_scenario
from stdfit.uncertainty.budget import Share, radius
from stdfit.uncertainty.connections import responses
from stdfit.validity.change import statistic as wear_statistic
from stdfit.validity.change.cause import CAPACITANCE, CAUSES, CONTACT, INDUCTANCE, SHIFT
from stdfit.validity.change.pairs import changes
from stdfit.validity.change.statistic import has_moved, pointwise_bound, project, unexplained
from stdfit.validity.change.wear import CHANGED, SAME, UNSURE, wear
from stdfit.validity.device.pairing import pair_up
from stdfit.validity.kit import Ancestor, misfit_at, model
from stdfit.validity.limit import first_gap

SEED = 31


def kits(worn=None, *, same=True, seed=SEED, **fields):
    """Two kits of one simulated set: autumn against spring."""
    scenario = replace(wear_scenario(), **fields)
    pair = draw_pair(scenario, np.random.default_rng(seed), same_calibration=same, worn=worn)
    old, new = (quick_kit(one) for one in pair)
    return (replace(old, calibration="A"), replace(new, calibration="A" if same else "B"))


@pytest.fixture(scope="module")
def unworn():
    return kits()


@pytest.fixture(scope="module")
def shifted():
    return kits(Worn("open", "plane shift", shift_ps=0.5))


@pytest.fixture(scope="module")
def resisting():
    return kits(Worn("short", "contact resistance", series_ohm=0.06))


def of(found, name):
    return next(one for one in found.standards if one.pair.one.name == name)


def test_nothing_has_changed(unworn):
    found = wear(*unworn)
    assert [one.verdict for one in found.standards] == [SAME, SAME, SAME]
    assert (found.verdict, found.retype) == (SAME, False)
    assert found.shared == "calibration of the analyser"


def test_what_has_not_changed_serves_as_far_as_no_hidden_change_spoils_it(unworn):
    """The better of two limits, each from its own bound on the error of the old definition."""
    old, new = unworn
    for one, change in zip(wear(old, new).standards, changes(old, new, pair_up(old, new).pairs), strict=True):
        assert one.verdict == SAME
        projected, f = project(change), change.frequency_hz
        below = f < one.old_limit_hz
        first, design = model(old, one.pair.one, f)
        second, again = model(new, one.pair.two, f)
        hidden = np.abs(projected.explained) + projected.unsure()
        hidden += radius(design, old.shares) + misfit_at(one.pair.one, f)
        differing = np.abs(first - second) + radius(again, new.shares) + misfit_at(one.pair.two, f)
        reach = max(first_gap(f, bound, old.within)[0] for bound in (hidden, differing))
        assert one.old_limit_hz == pytest.approx(reach, rel=0.02)
        assert min(hidden[below].max(), differing[below].max()) <= old.within * 1.001


def test_a_change_as_large_as_the_tolerance_that_may_hide_is_no_room_for_the_old_bound(unworn):
    """Nothing is common, and the hidden change alone uses up most of the tolerance: the old limit is not repeated."""
    one = of(wear(unworn[0], replace(unworn[1], calibration="B")), "open")
    assert one.verdict == SAME
    assert one.unsure > 0.5 * unworn[0].within
    assert 0.0 < one.old_limit_hz < 0.95 * one.pair.one.limit.limit_hz


def test_a_plane_shift_is_found_named_and_measured(shifted):
    found = wear(*shifted)
    one = of(found, "open")
    assert (one.verdict, found.verdict) == (CHANGED, CHANGED)
    (cause,) = one.explained.causes
    assert cause.name == "plane shift"
    assert abs(cause.value - 0.5) <= cause.u95 < 0.3
    length, wide = cause.length_um
    assert (length, wide) == pytest.approx((cause.value * 299.792458, cause.u95 * 299.792458))
    assert [of(found, name).verdict for name in ("short", "load")] == [SAME, SAME]


def test_a_contact_resistance_of_a_short_is_found_although_its_model_has_none(resisting):
    one = of(wear(*resisting), "short")
    assert one.verdict == CHANGED
    (cause,) = one.explained.causes
    assert (cause.name, cause.unit) == ("contact resistance", "Ω")
    assert abs(cause.value - 0.06) <= cause.u95


def test_on_a_load_contact_and_load_resistance_are_one_cause():
    one = of(wear(*kits(Worn("load", "", series_ohm=0.1))), "load")
    assert one.verdict == CHANGED
    assert [cause.name for cause in one.explained.causes] == ["resistance of the load or of its contact"]


def test_evidence_that_is_given_again_does_not_hide_a_change_of_the_load():
    """A stale multimeter's reading holds both definitions; the readings are compared all the same."""
    worn = Worn("load", "", series_ohm=0.1)
    assert of(wear(*kits(worn, given_resistance_u_ohm=0.001)), "load").verdict == CHANGED


def test_the_shared_calibration_makes_the_test_sharper(shifted):
    found = wear(*shifted)
    alone = wear(shifted[0], replace(shifted[1], calibration="B"))
    assert alone.shared == ""
    for one, other in zip(found.standards, alone.standards, strict=True):
        assert one.sharper > 1.5
        assert one.unsure * one.sharper == pytest.approx(other.unsure, rel=0.2)
        assert other.sharper == 1.0


def test_a_change_that_matters_and_could_not_be_seen_is_too_uncertain_to_tell(shifted):
    """Without a shared calibration 0.5 ps is lost in the analyser's errors, and 0.005 is less than these."""
    strict = replace(shifted[0], within=0.005)
    assert [one.verdict for one in wear(strict, replace(shifted[1], calibration="B")).standards] == [
        UNSURE
    ] * 3
    assert of(wear(shifted[0], replace(shifted[1], calibration="B")), "open").verdict == SAME


def test_the_users_word_does_what_the_kits_say(shifted):
    old, new = (replace(one, calibration="") for one in shifted)
    assert wear(old, new).shared == ""
    by_word, by_name = wear(old, new, same_calibration=True), wear(*shifted)
    assert [one.tested for one in by_word.standards] == [one.tested for one in by_name.standards]


def test_the_same_numbers_twice(shifted):
    assert [one.tested for one in wear(*shifted).standards] == [
        one.tested for one in wear(*shifted).standards
    ]


def test_other_orders_and_grids_play_no_part(shifted):
    """The readings are compared, so a definition that is off by far changes the comparison only between grid points."""
    old, new = shifted
    wrong = tuple(
        replace(one, parameters=tuple(replace(p, value=p.value * 1.01) for p in one.parameters))
        for one in new.definitions
    )
    before, after = (wear(old, one).standards[0] for one in (new, replace(new, definitions=wrong)))
    assert after.tested.statistic == pytest.approx(before.tested.statistic, rel=1e-6)


def test_a_change_that_no_connector_makes_is_told_as_another_cause(unworn):
    """A narrow notch of 0.01, a hundred times the noise, is none of the lumped parts."""
    old, new = unworn
    first, *others = new.session.means
    notch = 0.01 / (1.0 + 1j * (first.frequency_hz - 3e9) / 50e6)
    spoilt = replace(new.session, means=(replace(first, gamma=first.gamma - notch), *others))
    one = wear(old, replace(new, session=spoilt)).standards[0]
    assert (one.verdict, one.other_cause) == (CHANGED, True)
    assert abs(one.rest.at_hz - 3e9) < 0.2e9


def test_a_large_change_is_not_taken_for_several():
    """20 standard uncertainties: what the imperfect correction makes of it must not ask for a second cause."""
    one = of(wear(*kits(Worn("short", "", shift_ps=3.0))), "short")
    assert [cause.name for cause in one.explained.causes] == ["plane shift"]
    assert not one.other_cause


def test_one_shift_of_all_full_reflections_is_told_as_what_drift_would_do(unworn):
    old, new = unworn
    turned = tuple(
        replace(one, gamma=one.gamma * np.exp(-4j * np.pi * one.frequency_hz * 0.8e-12))
        for one in new.session.means
    )
    found = wear(old, replace(new, session=replace(new.session, means=turned)))
    told = re.match(r"open, short: all have moved by about (\+0\.\d+) ps, as the drift", found.notes[0])
    assert float(told[1]) == pytest.approx(0.8, abs=0.2)
    assert wear(old, new).notes == ()


def test_two_changes_at_once_are_both_told():
    one = of(wear(*kits(Worn("short", "", shift_ps=0.8, series_ohm=0.15))), "short")
    assert {cause.name for cause in one.explained.causes} == {"contact resistance", "plane shift"}


def test_where_the_sweep_is_low_shift_and_capacitance_cannot_be_told_apart():
    """Below 0.3 GHz an open's capacitance is a delay to first order, 20 fF a picosecond: both are told."""
    low = np.linspace(10e6, 300e6, 201)
    one = of(wear(*kits(Worn("open", "", shift_ps=4.0), frequency_hz=low)), "open")
    told = {cause.name for causes in (one.explained.causes, *one.explained.instead) for cause in causes}
    assert {"plane shift", "capacitance at the connector"} <= told


def test_the_unit_of_each_cause_is_what_it_says():
    """Against exact circuits: 1 pH in series and 1 fF across, at 1 GHz, Γ of an offset short."""
    f, zr = np.array([1e9]), 50.0
    gamma = see_through_line(
        np.array([-1.0 + 0j]), f, delay_s=30e-12, loss_ohm_per_s=0.0, z0_ohm=zr, reference_ohm=zr
    ).gamma
    basis = responses(gamma, f, zr)
    z = zr * (1 + gamma) / (1 - gamma)
    series = z + 2j * np.pi * f * 1e-12
    across = 1.0 / (1.0 / z + 2j * np.pi * f * 1e-15)
    for changed, kind, per_unit in ((series, INDUCTANCE, 1.0 / zr), (across, CAPACITANCE, 1e-3 * zr)):
        exact = (changed - zr) / (changed + zr) - gamma
        assert basis @ np.array(kind.parts) * per_unit == pytest.approx(exact, rel=1e-3)


def test_the_pointwise_bound_is_that_of_its_parts(unworn):
    """Noise alone: 2.448 standard deviations per component."""
    (change, *_) = changes(*unworn, pair_up(*unworn).pairs)
    alone = replace(change, effects=())
    assert pointwise_bound(alone) == pytest.approx(2.4477 * change.noise_sd, rel=1e-4)


def test_no_difference_is_no_change(unworn):
    (change, *_) = changes(*unworn, pair_up(*unworn).pairs)
    projected = project(replace(change, difference=np.zeros(change.frequency_hz.size)))
    assert (has_moved(projected).statistic, has_moved(projected).chance) == (0.0, 1.0)
    assert unexplained(projected).chance == 1.0


def test_kits_without_readings_are_compared_by_their_definitions(shifted):
    found = wear(*(replace(one, session=None) for one in shifted))
    assert {one.by for one in found.standards} == {"definitions"}
    assert of(found, "open").verdict == CHANGED
    assert "definitions are compared" in found.notes[0]


def test_definitions_with_other_orders_share_nothing(shifted):
    old, new = (replace(one, session=None) for one in shifted)
    other = replace(new, definitions=tuple(replace(one, shape="other") for one in new.definitions))
    found = wear(old, other)
    assert {one.sharper for one in found.standards} == {1.0}
    assert "other orders or ranges" in found.notes[1]


def test_nothing_is_seen_beyond_the_common_band(unworn):
    old, new = unworn
    first = new.session.means[0]
    low = first.frequency_hz <= 2e9
    cut = replace(
        first,
        **{
            name: getattr(first, name)[low]
            for name in ("frequency_hz", "gamma", "calibration_sd", "session_sd")
        },
    )
    shorter = replace(new, session=replace(new.session, means=(cut, *new.session.means[1:])))
    assert wear(old, shorter).standards[0].difference.frequency_hz[-1] <= 2e9


@pytest.mark.parametrize(
    ("fields", "words"),
    [
        ({"connector": "N"}, "different connectors, 'SMA' and 'N'"),
        ({"reference_ohm": 75.0}, "different reference impedances, 50 and 75"),
    ],
)
def test_what_cannot_be_compared_is_refused(unworn, fields, words):
    with pytest.raises(RequestError, match=words):
        wear(unworn[0], replace(unworn[1], **fields))


def test_the_other_side_of_a_connector_is_another(unworn):
    with pytest.raises(RequestError, match="different connectors"):
        wear(
            *(
                replace(one, connector=word)
                for one, word in zip(unworn, ("SMA male", "SMA jack"), strict=True)
            )
        )


def test_another_plane_is_refused(unworn, monkeypatch):
    """All full reflections turned by 20 ps: nobody's pin has moved by 6 mm."""
    old, new = unworn
    turned = tuple(
        replace(one, gamma=one.gamma * np.exp(-4j * np.pi * one.frequency_hz * 20e-12))
        for one in new.session.means
    )
    with pytest.raises(RequestError, match="reference planes of the kits lie"):
        wear(old, replace(new, session=replace(new.session, means=turned)))
    # The shift is found by what it is, wherever it stands among the causes.
    monkeypatch.setitem(CAUSES, "open", (SHIFT, CONTACT, CAPACITANCE))
    monkeypatch.setitem(CAUSES, "short", (SHIFT, CONTACT, INDUCTANCE))
    with pytest.raises(RequestError, match="reference planes of the kits lie"):
        wear(old, replace(new, session=replace(new.session, means=turned)))


def test_a_law_that_is_not_finite_is_refused(unworn):
    """Hardly any degrees of freedom, or sizes whose squares overflow: no verdict comes from them."""
    (change, *_) = changes(*unworn, pair_up(*unworn).pairs)
    projected = project(change)
    spoilt = replace(projected, shares=(replace(projected.shares[0], freedom=1e-300), *projected.shares[1:]))
    with pytest.raises(RequestError, match="too large or too little known"):
        has_moved(spoilt)
    with pytest.raises(RequestError, match="too large or too little known"):
        has_moved(replace(projected, found=np.full(projected.found.size, 1e200)))


def test_lumped_parts_are_told_as_what_they_are_at_the_connector():
    """They are no part of the standard's own C0 or L0."""
    reactive = [kind for kinds in CAUSES.values() for kind in kinds if kind.unit in ("fF", "pH")]
    assert len(reactive) == 3
    assert all(kind.name.endswith(" at the connector") for kind in reactive)


def test_no_common_band_is_refused(unworn):
    old, new = unworn
    above = tuple(
        replace(one, read_low_hz=7e9, read_top_hz=9e9, fit_low_hz=7e9, fit_top_hz=9e9)
        for one in new.definitions
    )
    with pytest.raises(RequestError, match="no band in common"):
        wear(old, replace(new, definitions=above))


def test_calibrations_that_contradict_the_users_word_are_refused(unworn):
    old, new = unworn
    with pytest.raises(RequestError, match="the kits name two, 'A' and 'B'"):
        wear(old, replace(new, calibration="B"), same_calibration=True)


def test_the_users_word_is_refused_where_the_analyser_corrected_nothing(unworn):
    bare = tuple(replace(one, shares=one.shares[3:], calibration="") for one in unworn)
    assert not any(share.name.startswith("analyser") for one in bare for share in one.shares)
    with pytest.raises(RequestError, match="did not correct itself"):
        wear(*bare, same_calibration=True)


def test_one_reference_kit_is_known_by_its_file_and_another_is_not(unworn):
    reference = Ancestor("Reference", "2000-01-01", "a" * 64)
    bare = [replace(one, shares=one.shares[3:], calibration="", ancestors=(reference,)) for one in unworn]
    assert wear(*bare).shared == "reference kit"
    other = replace(bare[1], ancestors=(replace(reference, sha256="b" * 64),))
    assert wear(bare[0], other).shared == ""


def test_chances_are_honest_under_their_own_law(unworn, monkeypatch):
    """Differences drawn from their own errors: 5 % of 400 below 5 %, within 1.7 … 8.3 % (binomial, 3 deviations)."""
    monkeypatch.setattr(wear_statistic, "DRAWS", 1500)
    (change, *_) = changes(*unworn, pair_up(*unworn).pairs)
    projected = project(change)
    rng = np.random.default_rng(8)
    total = np.linalg.cholesky(projected.covariances[0])
    # Known variances, so that the degrees of freedom do not blur the law.
    sure = replace(projected, shares=(Share("all", np.inf, (total @ total.T)[None]),))
    below = [
        has_moved(replace(sure, found=total @ rng.standard_normal(total.shape[0]))).chance < 0.05
        for _ in range(400)
    ]
    assert 0.017 < np.mean(below) < 0.083
    few = replace(sure, shares=(replace(sure.shares[0], freedom=4.0),))
    far = replace(few, found=3.0 * total[:, 0])
    assert has_moved(far).chance > has_moved(replace(far, shares=sure.shares)).chance
    assert has_moved(far).inflation > 1.5
