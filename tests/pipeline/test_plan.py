"""What holds a kit back and what would move it: the predictions come true when the change is made."""

import json
from dataclasses import replace

import numpy as np
import pytest

from stdfit.base.errors import BenchError
from stdfit.cli import main
from stdfit.data.bench import parse_bench
from stdfit.fitting.observed import Observed
from stdfit.pipeline import choose_all, fit_bench, kit_of, prepare, settle
from stdfit.pipeline.imagined import imagine, imagined_sweeps
from stdfit.pipeline.plan import (
    BETTER_DB,
    Remedy,
    plan,
    ranked,
    with_better_reference,
    with_connections,
    with_given,
    with_longer_sweep,
    with_model_for,
)
from stdfit.pipeline.plan_text import plan_data, plan_text
from stdfit.trials import demo_scenario, draw_bench, write_bench
from stdfit.trials.score import bench_of
from stdfit.uncertainty.sources import LumpedSource, SmoothSource, WhiteSource
from stdfit.writing.numbers import frequency

SEEDS = 6
"""The limit of a kit differs by half of itself from one of these benches to the next: what a change does to it is
compared on the same six, whose parts and analyser's errors stay the same."""

PLANNED = """\
format = "stdfit-bench/1"
kit = { name = "Planned set (invented)", connector = "SMA" }
analyser.state = "corrected"
analyser.residual.frequency_hz = [50e6, 3e9, 6e9]
analyser.residual.directivity_db = [46, 44, 40]
analyser.residual.source_match_db = [46, 39, 34]
analyser.residual.reflection_tracking_db = [0.01, 0.09, 0.18]
plan = { from_hz = 50e6, to_hz = 6e9, points = 239, connections = 4 }

[[standard]]
name = "open"
kind = "open"

[[standard]]
name = "short"
kind = "short"

[[standard]]
name = "load"
kind = "load"
given.resistance_ohm = { value = 50.1, u = 0.02 }
"""


def kit_from(prepared):
    return kit_of(prepared, settle(prepared, choose_all(prepared)), created="2000-01-01")


def limit_of(prepared):
    return kit_from(prepared).limit.limit_hz


def simulated(seed, **fields):
    """Prepare the demo's kind of bench, with some fields of the scenario changed."""
    scenario = replace(demo_scenario(), **fields)
    return prepare(*bench_of(draw_bench(scenario, np.random.default_rng([66, seed]))))


def better_by(told, decibels):
    """Return a statement of residuals that are all smaller by so many decibels."""
    factor = 10.0 ** (-decibels / 20.0)
    tracking = factor * (10.0 ** (told.reflection_tracking_db / 20.0) - 1.0)
    return replace(
        told,
        directivity_db=told.directivity_db + decibels,
        source_match_db=told.source_match_db + decibels,
        reflection_tracking_db=20.0 * np.log10(1.0 + tracking),
    )


@pytest.fixture(scope="module")
def benches():
    return [simulated(seed) for seed in range(SEEDS)]


@pytest.fixture(scope="module")
def measured_hz(benches):
    return np.array([limit_of(one) for one in benches])


@pytest.fixture(scope="module")
def first(benches):
    """The plan of one bench."""
    told = []
    found = plan(benches[0], lambda done, total: told.append((done, total)))
    assert told == [(k + 1, len(told)) for k in range(len(told))]
    return found


@pytest.fixture(scope="module")
def planned(tmp_path_factory):
    path = tmp_path_factory.mktemp("planned") / "bench.toml"
    path.write_text(PLANNED, encoding="utf-8")
    return path


@pytest.fixture(scope="module")
def expected(planned):
    return imagine(parse_bench(PLANNED, planned))


def test_contributions_make_up_the_bound(first):
    """The bound at the limit is the tolerance, its parts add to one, and they are ranked."""
    parts = [one.part for one in first.contributions]
    assert sum(parts) == pytest.approx(1.0, abs=1e-9)
    assert parts == sorted(parts, reverse=True)
    assert all(0.0 <= one.alone <= first.bound for one in first.contributions)
    assert first.bound == pytest.approx(first.kit.within, rel=1e-3)
    assert 0.0 <= first.misfit < first.bound
    assert first.kit.definition(first.standard).limit.limit_hz == first.kit.limit.limit_hz == first.at_hz


def test_remedies_are_ranked_by_gain(first):
    gains = [one.gain_hz for one in first.remedies]
    assert gains == sorted(gains, reverse=True)
    for one in first.remedies:
        assert one.gain_hz == one.limit_hz - first.kit.limit.limit_hz
    helping, useless = ranked(first.remedies)
    assert [*helping, *useless] == list(first.remedies)
    assert all(one.gain_hz > 1e6 for one in helping)


def test_every_kind_of_remedy_is_thought_of(first, benches):
    words = " / ".join(one.what for one in first.remedies)
    assert "make 10 connections of each standard" in words
    assert "make 5 connections" not in words  # the load has five already
    assert f"residuals are {BETTER_DB:.0f} dB smaller" in words
    assert "measure the offset length of 'open'" in words
    assert "measure the offset length of 'short'" in words
    assert "DC resistance" not in words  # it is given
    assert "read on up to" not in words  # the limit lies far below the last reading
    at = next(one for one in first.remedies if "10 connections" in one.what)
    assert at.limit_hz == limit_of(with_connections(benches[0], 10))


def test_ten_connections_give_what_was_predicted(benches, measured_hz):
    predicted = np.mean([limit_of(with_connections(one, 10)) for one in benches])
    true = np.mean([limit_of(simulated(seed, connections=10)) for seed in range(SEEDS)])
    assert predicted == pytest.approx(true, rel=0.15)
    assert predicted >= 0.98 * measured_hz.mean()


def test_many_connections_where_connections_are_the_trouble():
    """Scatter five times as large and a good analyser: here more connections count, and the figure is right."""
    fields = {
        "scatter_ps": 0.75,
        "scatter_ohm": 0.075,
        "scatter_ff": 4.5,
        "residual": better_by(demo_scenario().residual, 12.0),
    }
    seeds = range(SEEDS // 2)
    few = [simulated(seed, connections=4, **fields) for seed in seeds]
    now = np.mean([limit_of(one) for one in few])
    predicted = np.mean([limit_of(with_connections(one, 16)) for one in few])
    true = np.mean([limit_of(simulated(seed, connections=16, **fields)) for seed in seeds])
    assert predicted > 1.3 * now
    assert predicted == pytest.approx(true, rel=0.15)


def test_a_better_reference_gives_what_was_predicted(benches, measured_hz):
    factor = 10.0 ** (-BETTER_DB / 20.0)
    predicted = np.mean([limit_of(with_better_reference(one, factor)) for one in benches])
    better = better_by(demo_scenario().residual, BETTER_DB)
    true = np.mean([limit_of(simulated(seed, residual=better)) for seed in range(SEEDS)])
    assert predicted == pytest.approx(true, rel=0.15)
    assert predicted > 1.3 * measured_hz.mean()


def test_what_is_predicted_before_measuring_comes_true(expected, measured_hz):
    """The same connector, sweep and analyser, and nothing known of the parts: within 40 % of the mean.

    A single bench is a third of its limit away from the mean, so the mean of twelve has a tenth of it.
    """
    more = [limit_of(simulated(seed)) for seed in range(SEEDS, 2 * SEEDS)]
    assert limit_of(expected) == pytest.approx(np.mean([*measured_hz, *more]), rel=0.4)


def test_the_prediction_stands_for_as_many_connections_as_are_planned(planned, expected):
    bench = parse_bench(PLANNED, planned)
    once = prepare(bench, imagined_sweeps(bench))
    assert expected.connections == bench.plan.connections == 4
    for own, single in zip(expected.sources, once.sources, strict=True):
        if isinstance(own, LumpedSource):
            for a, b in zip(own.vectors, single.vectors, strict=True):
                np.testing.assert_allclose(a, 0.5 * b)
        elif isinstance(own, WhiteSource):
            np.testing.assert_allclose(own.variances, np.array(single.variances) / 4.0)
        else:
            for a, b in zip(own.profiles, single.profiles, strict=True):
                np.testing.assert_array_equal(a, b)


def test_imagined_readings_are_the_usual_standards(planned):
    sweeps = imagined_sweeps(parse_bench(PLANNED, planned))
    assert set(sweeps) == {"open", "short", "load"}
    (sweep,) = sweeps["load"]
    assert (sweep.frequency_hz[0], sweep.frequency_hz[-1], sweep.frequency_hz.size) == (50e6, 6e9, 239)
    np.testing.assert_allclose(sweep.gamma, 0.1 / 100.1, rtol=1e-9)  # 50.1 Ω
    assert np.abs(sweeps["open"][0].gamma).min() > 0.97
    assert sweeps["short"][0].gamma[0] == pytest.approx(-1.0, abs=0.02)


def test_imagined_readings_are_off_by_what_is_stated(expected, planned):
    """All three residuals together stay within their stated bounds, added up, nearly everywhere."""
    exact = imagined_sweeps(parse_bench(PLANNED, planned))
    for k, one in enumerate(expected.observed):
        off = np.abs(one.gamma - exact[one.name][0].gamma)
        common = [s for s in expected.sources if isinstance(s, SmoothSource) and s.common]
        bound = 2.448 * sum(np.abs(source.profiles[k]) for source in common)
        assert len(common) == 3
        assert np.mean(off < bound) > 0.9
        assert off.max() > 0.0


def test_evidence_changes_one_wish_alone(benches):
    changed = with_given(benches[0], "short", "offset_delay_ps", 20.0, 0.1)
    assert changed.wishes[1].given["offset_delay_ps"] == (20.0, 0.1)
    assert "offset_delay_ps" not in benches[0].wishes[1].given
    assert changed.wishes[0] == benches[0].wishes[0]
    assert changed.observed == benches[0].observed


def test_a_standard_that_does_not_follow_its_model_is_asked_to(workshop):
    """A short whose phase and magnitude go astray together, beyond what a polynomial follows (invented)."""
    shop = workshop(changed={"short": lambda f: 1.0 - 0.06 * np.sin(f / 0.7e9) * (f / 6e9)})
    prepared = prepare(shop.bench(), shop.readings())
    found = plan(prepared)
    assert found.standard == "short"
    (remedy,) = [one for one in found.remedies if "follows its model" in one.what]
    assert remedy.what.startswith("make 'short' so that")
    assert remedy.at_most
    assert remedy.gain_hz > 0.0
    mended = kit_from(with_model_for(prepared, found.kit, found.kit.definition("short")))
    assert mended.definition("short").misfit.max() < 0.1 * found.kit.definition("short").misfit.max()
    assert mended.limit.limit_hz == remedy.limit_hz
    assert mended.limit.limit_hz == pytest.approx(workshop().kit().limit.limit_hz, rel=0.15)


def test_a_limit_at_the_end_of_the_readings_asks_for_more_readings(workshop):
    """Parts that follow their models, read by a good analyser: reading on is the remedy, up to the connector's top."""
    shop = workshop(frequency_hz=np.linspace(50e6, 3e9, 101))
    prepared = prepare(shop.bench(), shop.readings())
    found = plan(prepared)
    assert found.kit.limit.limit_hz == pytest.approx(3e9)
    further = next(one for one in found.remedies if one.what == "read on up to 4.5 GHz")
    assert further.at_most
    longer = with_longer_sweep(prepared, found.kit, 4.5e9)
    assert all(one.frequency_hz[-1] == pytest.approx(4.5e9, rel=0.01) for one in longer.observed)
    assert further.limit_hz == limit_of(longer)
    grown = workshop(frequency_hz=np.linspace(50e6, 4.475e9, 151))
    true = grown.kit().limit.limit_hz
    assert further.limit_hz == pytest.approx(true, rel=0.15)


def test_more_readings_are_not_asked_for_beyond_the_connector(workshop):
    shop = workshop(frequency_hz=np.linspace(50e6, 18e9, 121))
    prepared = prepare(replace(shop.bench(), within=0.2), shop.readings())
    found = plan(prepared)
    assert found.kit.limit.limit_hz == pytest.approx(18e9)
    assert not any("read on" in one.what for one in found.remedies)


def test_a_kit_that_is_good_nowhere_has_a_plan_all_the_same(benches):
    hopeless = replace(benches[1], bench=replace(benches[1].bench, within=1e-4))
    found = plan(hopeless)
    assert found.kit.limit.limit_hz == 0.0
    assert found.at_hz == benches[1].observed[0].frequency_hz[0]
    assert sum(one.part for one in found.contributions) == pytest.approx(1.0)
    assert "cannot be trusted at any frequency" in plan_text(found, measured=True)


def test_the_plan_in_words(first):
    lines = plan_text(first, measured=True).splitlines()
    assert lines[0].startswith("within 0.02 the kit is good to ")
    assert f"What makes up the bound of '{first.standard}' at" in "\n".join(lines)
    assert any(line.startswith("  misfit, added to the rest") for line in lines)
    at = lines.index("What would move the limit")
    best = ranked(first.remedies)[0][0]
    assert lines[at + 2].endswith(best.what)
    assert ("at most" in lines[at + 2]) == best.at_most
    assert "predicted" not in lines[0]


def test_the_plan_in_words_before_measuring(first):
    lines = plan_text(first, measured=False).splitlines()
    assert lines[0].startswith("predicted, before any reading: within 0.02")
    assert "follow their models" in lines[1]


def test_a_plan_without_a_remedy_says_so(first):
    idle = Remedy("polish the bench", first.kit.limit.limit_hz, 0.0, False)
    text = plan_text(replace(first, remedies=(idle,)), measured=True)
    assert "  none of the remedies that were tried moves it\n\nWhat would not\n  polish the bench\n" in text


def test_the_plan_as_data(first):
    data = plan_data(first)
    assert json.loads(json.dumps(data, allow_nan=False)) == data
    assert data["limit_hz"] == first.kit.limit.limit_hz
    assert data["held_back_by"] == first.standard
    assert [one["what"] for one in data["remedies"]] == [one.what for one in first.remedies]
    assert sum(one["part"] for one in data["sources"]) == pytest.approx(1.0)


def test_fit_refuses_a_bench_without_readings_and_says_what_to_do(planned, capsys):
    with pytest.raises(BenchError, match="no readings yet"):
        fit_bench(planned)
    assert main(["fit", str(planned)]) == 2
    told = capsys.readouterr()
    assert told.out == ""
    assert "standard[open].readings" in told.err
    assert "stdfit plan" in told.err
    assert not planned.with_name("kit.toml").exists()


def test_the_command_before_measuring(planned, expected, capsys):
    """The analysers that are imagined are the same every time, and so is the plan."""
    assert main(["plan", str(planned)]) == 0
    told = capsys.readouterr()
    verdict = (
        f"predicted, before any reading: within 0.02 the kit is good to {frequency(limit_of(expected))}: "
    )
    assert told.out.startswith(verdict)
    assert "nothing is measured yet" in told.err


def test_the_command_on_a_measured_bench(tmp_path, capsys):
    bench = draw_bench(demo_scenario(), np.random.default_rng([66, 0]))
    path = write_bench(bench, tmp_path)
    assert main(["plan", str(tmp_path), "--within", "0.03", "--json"]) == 0
    data = json.loads(capsys.readouterr().out)
    assert data["within"] == 0.03
    assert data["limit_hz"] == fit_bench(path, within=0.03, created="2000-01-01").limit.limit_hz
    assert {"what", "limit_hz", "gain_hz", "at_most"} == set(data["remedies"][0])


@pytest.mark.parametrize(
    "before, after, told",
    [
        (", connections = 4", ", conections = 4", "plan.conections"),
        ("to_hz = 6e9", "to_hz = 40e6", "plan.to_hz"),
        ("points = 239", "points = 7", "plan.points"),
        ("points = 239", "points = 239.5", "plan.points"),
        ("connections = 4", "connections = 0", "plan.connections"),
        ("from_hz = 50e6, ", "", "plan.from_hz"),
        ("plan = {", "# plan = {", "readings"),
    ],
)
def test_a_plan_that_cannot_be_is_refused(tmp_path, capsys, before, after, told):
    path = tmp_path / "bench.toml"
    assert before in PLANNED
    path.write_text(PLANNED.replace(before, after), encoding="utf-8")
    assert main(["plan", str(path)]) == 2
    shown = capsys.readouterr()
    assert shown.out == ""
    assert told in shown.err
    assert len(shown.err.splitlines()) <= 2


def test_points_and_connections_have_defaults(planned):
    text = PLANNED.replace(", points = 239, connections = 4", "")
    told = parse_bench(text, planned).plan
    assert (told.points, told.connections) == (201, 3)


def test_one_reading_only_says_how_many_connections_would_help():
    """A bench with one connection of each: two connections are among what is thought of, and never one."""
    found = simulated(3, connections=1)
    assert found.connections == 1
    many = with_connections(found, 5)
    assert many.connections == 5
    assert isinstance(many.observed[0], Observed)
    for before, after in zip(found.sources, many.sources, strict=True):
        if isinstance(before, LumpedSource):
            np.testing.assert_allclose(after.vectors[0], before.vectors[0] / np.sqrt(5.0))
            assert after.freedom == before.freedom
