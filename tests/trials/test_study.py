"""Many benches scored: the same for the same seed, however the work is shared, and figures as worked out by hand."""

import json
import re
from dataclasses import replace

import numpy as np
import pytest

from stdfit.base.errors import FitError, RequestError
from stdfit.cli import main
from stdfit.data.bench import read_bench
from stdfit.trials import demo_scenario, draw_bench, families, write_bench
from stdfit.trials import study as study_module
from stdfit.trials.devices import devices_inside
from stdfit.trials.like import scenario_like
from stdfit.trials.score import Score
from stdfit.trials.study import (
    DEMO,
    NOT_STATED,
    Trial,
    family_table,
    row_of,
    run,
    study_data,
    study_table,
    trial,
)


@pytest.fixture(scope="module")
def demo_row():
    (row,) = run([DEMO], 12, workers=1)
    return row


@pytest.fixture(scope="module")
def few():
    return run(["few points"], 2, seed=3, workers=1)


def test_a_plain_covariance_covers_little_and_the_bound_covers_the_truth(demo_row):
    """Method, section 4: residuals are smooth and shared, so s²(JᵀJ)⁻¹ is far too small."""
    assert demo_row.benches == 12
    assert demo_row.failed == 0
    assert demo_row.coverage_alone < 0.3
    assert demo_row.coverage >= 0.9


def test_the_same_seed_gives_the_same_figures(few):
    assert run(["few points"], 2, seed=3, workers=1) == few
    assert run(["few points"], 2, seed=4, workers=1) != few


def test_figures_do_not_depend_on_how_the_work_is_shared(few):
    assert run(["few points"], 2, seed=3, workers=2) == few


def test_a_bench_can_be_drawn_again_alone(few):
    each = [trial("few points", 3, number, 0.02) for number in range(2)]
    assert [row_of("few points", each)] == few


def test_rows_of_several_families_and_one_of_all():
    told = []
    rows = run(
        ["few points", "low top"], 1, seed=5, workers=1, tell=lambda done, total: told.append((done, total))
    )
    assert [(row.family, row.benches) for row in rows] == [("few points", 1), ("low top", 1), ("all", 2)]
    assert rows[2].coverage == pytest.approx((rows[0].coverage + rows[1].coverage) / 2.0)
    assert told == [(1, 2), (2, 2)]


def test_every_family_of_benches_is_in_the_table():
    assert set(family_table()) == {*families(), DEMO, *NOT_STATED}


def test_an_unknown_family_names_the_nearest_and_all():
    with pytest.raises(RequestError) as refused:
        run(["resonanse"], 1, workers=1)
    assert "no family 'resonanse'" in str(refused.value)
    assert "resonance" in str(refused.value).split("choose among")[0]
    named = refused.value.mend.partition("choose among: ")[2]
    assert set(re.findall("'([^']*)'", named)) >= {"plain", "drift", "good load, multimeter", DEMO}


def one_score(error, bound, alone, quantities, limit, limit_true):
    return Score("open", np.array(error), np.array(bound), np.array(alone), quantities, limit, limit_true)


def test_figures_of_a_tiny_case_worked_out_by_hand():
    first = one_score([1.0, 3.0, 1.0, 1.0], [2.0] * 4, [0.5] * 4, (True,), 0.5, True)
    second = one_score([1.0, 1.0, 1.0, 1.0], [2.0] * 4, [1.0] * 4, (False, True), 0.7, False)
    row = row_of("invented", [Trial((first, second), 1.0), Trial((first,), 0.5), None])
    assert (row.family, row.benches, row.failed) == ("invented", 3, 1)
    # Three curves: 3/4, 4/4 and 3/4 of the points inside; 0, 4/4 and 0 for the plain covariance.
    assert row.coverage == pytest.approx(2.5 / 3.0)
    assert row.coverage_alone == pytest.approx(1.0 / 3.0)
    assert row.quantities == pytest.approx(3.0 / 4.0)
    assert row.devices == pytest.approx(0.75)
    assert row.limits_true == pytest.approx(1.0 / 2.0)
    assert row.limit == pytest.approx(1.7 / 3.0)
    # Of 12 errors two are 3 and ten are 1: the 95 % quantile lies between the two largest.
    assert row.sharpness == pytest.approx(2.0 / 3.0)


def fail(*_, **__):
    raise FitError("no fit", "look at the readings")


def test_a_bench_without_a_kit_is_counted(monkeypatch):
    plain = study_module.score
    turns = iter([plain, fail])
    monkeypatch.setattr(study_module, "score", lambda *a, **k: next(turns)(*a, **k))
    (row,) = run(["few points"], 2, seed=3, workers=1)
    assert (row.benches, row.failed) == (2, 1)
    assert row == replace(row_of("few points", [trial_of_first(), None]), benches=2)
    assert "1 of the benches gave no kit" in study_table([row])


def trial_of_first():
    """Score the first bench of the same family and seed with the real score."""
    rng = np.random.default_rng([study_module.zlib.crc32(b"few points"), 3, 0])
    from stdfit.trials.score import score

    simulated = draw_bench(families()["few points"](rng), rng)
    kit, scores = score(simulated)
    return Trial(tuple(scores), devices_inside(kit, simulated, rng))


def test_nothing_but_failures_is_told_and_is_valid_json(monkeypatch, capsys):
    monkeypatch.setattr(study_module, "score", fail)
    monkeypatch.setattr(study_module.os, "cpu_count", lambda: 1)
    assert main(["trials", "--family", "few points", "--benches", "2", "--json"]) == 0
    (row,) = json.loads(capsys.readouterr().out)["families"]
    assert (row["benches"], row["failed"], row["coverage"], row["sharpness"]) == (2, 2, None, None)


def test_other_faults_are_not_swallowed(monkeypatch):
    def broken(*_, **__):
        raise ZeroDivisionError

    monkeypatch.setattr(study_module, "score", broken)
    with pytest.raises(ZeroDivisionError):
        run(["few points"], 1, workers=1)


def test_the_table_is_markdown_and_the_data_hold_the_same(few):
    head, rule, line = study_table(few).splitlines()
    assert head.startswith("| family | benches |")
    assert re.fullmatch(r"(\|---)+\|", rule)
    assert head.count("|") == rule.count("|") == line.count("|")
    assert line.startswith(f"| few points | 2 | {100 * few[0].coverage:.1f} % |")
    (data,) = study_data(few)["families"]
    assert data["coverage"] == few[0].coverage
    assert json.loads(json.dumps(data, allow_nan=False)) == data


@pytest.mark.parametrize("family", ["demo", "seventy-five ohm", "shared body", "with evidence"])
def test_a_scenario_like_a_bench_has_what_the_bench_has(family, tmp_path):
    rng = np.random.default_rng(64)
    bench = draw_bench(family_table()[family](rng), rng)
    asked = bench.scenario
    like = scenario_like(write_bench(bench, tmp_path))
    assert like.connector == asked.connector
    assert like.reference_ohm == asked.reference_ohm
    np.testing.assert_array_equal(like.frequency_hz, asked.frequency_hz)
    assert like.counts() == asked.counts()
    assert like.body == asked.body
    for key in ("frequency_hz", "directivity_db", "source_match_db", "reflection_tracking_db"):
        np.testing.assert_allclose(getattr(like.residual, key), getattr(asked.residual, key), rtol=1e-9)
    assert like.given_resistance_u_ohm == asked.given_resistance_u_ohm
    assert like.given_delay_u_ps == asked.given_delay_u_ps
    # White and trace noise together, and the scatter as it was estimated from a handful of connections.
    assert asked.noise * 0.7 < like.noise < 1.5 * np.hypot(asked.noise, asked.trace_noise)
    assert 0.3 < like.scatter_ps / asked.scatter_ps < 3.0
    scored = run([], 1, like=like, workers=1)
    assert [(row.family, row.benches, row.failed) for row in scored] == [("like the bench", 1, 0)]


def test_a_bench_of_other_standards_is_refused(tmp_path):
    path = write_bench(draw_bench(demo_scenario(), np.random.default_rng(65)), tmp_path)
    text = path.read_text(encoding="utf-8")
    path.write_text(text[: text.rindex("[[standard]]")], encoding="utf-8")
    assert len(read_bench(path).standards) == 2
    with pytest.raises(RequestError, match="one open, one short and one load"):
        scenario_like(path)


def test_the_command_prints_the_table(capsys, monkeypatch):
    monkeypatch.setattr(study_module.os, "cpu_count", lambda: 1)
    arguments = ["trials", "--family", "few points", "--benches", "2", "--seed", "3"]
    assert main(arguments) == 0
    assert capsys.readouterr().out == study_table(run(["few points"], 2, seed=3, workers=1)) + "\n"
    assert main(["trials", "--family", "few point", "--benches", "1"]) == 2
    told = capsys.readouterr()
    assert told.out == ""
    assert told.err.startswith("stdfit: no family 'few point'")
