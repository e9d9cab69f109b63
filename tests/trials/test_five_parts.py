"""A workshop without a reference: five parts, a ruler, a multimeter, raw readings, and a truth outside the models.

The long study behind the figures is `stdfit trials --family "no reference" --benches 200`.
"""

import numpy as np
import pytest

from stdfit.circuits.error_box import corrected, solve_error_box
from stdfit.trials.five_parts import LENGTHS_PS, Workshop, draw_five_parts, score_five_parts
from stdfit.trials.study import WITHOUT_REFERENCE, family_names, family_table, row_of, run, trial
from stdfit.validity.kit import curve

BENCHES = 5
SPREAD = 0.10
"""Standard deviation of the part of a bench's points that lie inside, from bench to bench (200 benches)."""

TOP_HZ = 6e9
STANDARDS = {"short", "open", "load", "offset short 1", "offset short 2"}


@pytest.fixture(scope="module")
def scored():
    """Fewer points than the families have: a bench then takes about a second."""
    drawn = [
        draw_five_parts(Workshop(points=101), np.random.default_rng([7, seed])) for seed in range(BENCHES)
    ]
    return [(one, *score_five_parts(one)) for one in drawn]


def test_errors_at_the_top_are_small(scored):
    """Asked of 200 benches at 6 GHz are medians of 0.02 (open), 0.01 (short) and 0.01 (load): five stay below too."""
    at_top = {"open": 0.02, "short": 0.01, "load": 0.01}
    for name, allowed in at_top.items():
        errors = []
        for simulated, kit, _ in scored:
            gamma, _ = curve(kit, kit.definition(name), np.array([TOP_HZ]))
            errors.append(abs(gamma[0] - simulated.truth_at(name, [TOP_HZ])[0]))
        assert np.median(errors) <= allowed


def test_bounds_hold(scored):
    """0.95 less three standard deviations of a mean of five benches."""
    inside = np.mean([[one.inside for one in scores] for _, _, scores in scored])
    assert inside >= 0.95 - 3.0 * SPREAD / np.sqrt(BENCHES)


def test_bounds_are_not_idle(scored):
    """The mean bound is at most three times what would just have held 95 % of the errors; half of it holds less."""
    error = np.concatenate([one.error for _, _, scores in scored for one in scores])
    bound = np.concatenate([one.bound for _, _, scores in scored for one in scores])
    assert bound.mean() < 3.0 * np.quantile(error, 0.95)
    assert np.mean(error <= 0.3 * bound) < 0.9


def test_a_plain_covariance_covers_little(scored):
    assert np.mean([one.inside_alone for _, _, scores in scored for one in scores]) < 0.5


def test_limits_are_far_and_true(scored):
    """Of 25 limits that hold in 95 % of the cases four or more fail once in 25 times; those of a bench go together."""
    true = [one.limit_true for _, _, scores in scored for one in scores]
    assert np.mean(true) >= 0.85
    assert np.mean([one.limit for _, _, scores in scored for one in scores]) > 0.8


def test_what_is_drawn():
    """Nominal lengths are told; the true ones scatter about them by what is stated, and so does the multimeter."""
    drawn = [draw_five_parts(Workshop(points=21), np.random.default_rng(seed)) for seed in range(40)]
    assert set(drawn[0].parts) == STANDARDS
    assert drawn[0].bench.state == "raw"
    off = []
    for one in drawn:
        for entry in one.bench.standards:
            if entry.name in LENGTHS_PS:
                given = entry.given["offset_delay_ps"]
                assert given.value == LENGTHS_PS[entry.name]
                off.append((1e12 * one.parts[entry.name].delay_s - given.value) / given.u)
    assert np.std(off) == pytest.approx(1.0, abs=0.2)
    told = [one.bench.standards[2].given["resistance_ohm"] for one in drawn]
    true = [50.0 * (1 + g) / (1 - g) for g in (one.truth_at("load", [0.0])[0].real for one in drawn)]
    assert np.std([t.value - r for t, r in zip(told, true, strict=True)]) == pytest.approx(0.02, rel=0.4)


def test_raw_readings_are_the_truth_behind_one_error_box():
    """Without scatter and noise three of the parts correct the other two exactly."""
    workshop = Workshop(points=21, scatter_ps=0.0, scatter_ohm=0.0, noise=0.0, connections=1)
    one = draw_five_parts(workshop, np.random.default_rng(5))
    f = one.frequency_hz
    true = np.stack([one.truth_at(name, f) for name in one.parts], axis=1)
    raw = np.stack([one.sweeps[name][0].gamma for name in one.parts], axis=1)
    shown = corrected(solve_error_box(true[:, :3], raw[:, :3])[:, None], raw)
    np.testing.assert_allclose(shown, true, rtol=0, atol=1e-9)
    assert np.abs(raw - true).max() > 0.1


def test_one_known_standard_is_no_part_of_what_is_scored():
    one = draw_five_parts(Workshop(points=41), np.random.default_rng(8), known="open")
    assert set(one.parts) == {*STANDARDS, "known open"}
    kit, scores = score_five_parts(one)
    assert {score.standard for score in scores} == STANDARDS
    assert len(kit.ancestors) == 1


def test_families_without_a_reference_are_families():
    assert set(WITHOUT_REFERENCE) == {"no reference", "no reference, one known"}
    assert set(WITHOUT_REFERENCE) <= set(family_names())
    assert not set(WITHOUT_REFERENCE) & set(family_table())
    rows = run(["no reference"], 1, seed=3, workers=1)
    assert rows == [row_of("no reference", [trial("no reference", 3, 0, 0.02)])]
    assert rows[0].failed == 0
