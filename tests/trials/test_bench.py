"""Whole benches: seeds, evidence, files, families, time."""

import time
import tomllib
from dataclasses import replace

import numpy as np
import pytest

from stdfit.base.errors import RequestError
from stdfit.trials import Scenario, StatedDecibels, demo_scenario, draw_bench, families, write_bench
from stdfit.trials.scenario import KINDS


@pytest.mark.parametrize("family", families())
def test_seed_gives_the_same_bench_and_another_seed_another(family):
    def once(seed):
        rng = np.random.default_rng(seed)
        return draw_bench(families()[family](rng), rng)

    first, again, other = once(51), once(51), once(52)
    for name in KINDS:
        assert np.array_equal(first.truth[name], again.truth[name])
        assert np.array_equal(first.readings[name], again.readings[name])
        assert first.given == again.given
        assert first.parts[name] != other.parts[name]


@pytest.mark.parametrize("family", families())
def test_readings_are_near_the_truth(family):
    rng = np.random.default_rng(53)
    for _ in range(5):
        bench = draw_bench(families()[family](rng), rng)
        counts = bench.scenario.counts()
        for name in KINDS:
            assert bench.readings[name].shape == (counts[name], bench.frequency_hz.size)
            off = np.abs(bench.readings[name] - bench.truth[name])
            assert 1e-5 < np.median(off) < 0.1
            assert off.max() < 0.3


def test_families_are_what_they_are_called():
    rng = np.random.default_rng(54)
    drawn = {name: family(rng) for name, family in families().items()}
    assert drawn["one connection"].connections == 1
    assert drawn["sixteen connections"].connections == 16
    assert drawn["few points"].frequency_hz.size == 101
    assert drawn["many points"].frequency_hz.size == 1601
    assert drawn["low top"].frequency_hz[-1] == 1e9
    assert drawn["high top"].frequency_hz[-1] == 20e9
    assert drawn["high top"].connector == "3.5 mm"
    assert (drawn["seventy-five ohm"].reference_ohm, drawn["seventy-five ohm"].connector) == (75.0, "N 75")
    assert 3e9 <= drawn["resonance"].resonance_hz <= 7e9 < drawn["resonance"].frequency_hz[-1] * 1.2
    assert drawn["bad connection"].bad_connection in KINDS
    assert drawn["glitches"].glitches > 0
    assert drawn["drift"].drift_deg > 0
    assert drawn["long residuals"].correlation == "long"
    assert drawn["short residuals"].correlation == "short"
    assert drawn["without evidence"].given_resistance_u_ohm is None


def test_resonance_family_stays_inside_the_sweep():
    rng = np.random.default_rng(55)
    for _ in range(100):
        scenario = families()["resonance"](rng)
        assert 3e9 <= scenario.resonance_hz < scenario.frequency_hz[-1]


@pytest.mark.parametrize("body", ["own", "shared"])
def test_evidence_is_drawn_around_the_truth_with_its_uncertainty(body):
    rng = np.random.default_rng(56)
    scenario = replace(demo_scenario(), body=body, given_resistance_u_ohm=0.02, given_delay_u_ps=0.5)
    off = {"resistance_ohm": [], "offset_delay_ps": []}
    for _ in range(600):
        bench = draw_bench(scenario, rng)
        assert ("open" in bench.given) == (body == "own")
        ohm = bench.given["load"]["resistance_ohm"]
        assert ohm.true == pytest.approx(bench.parts["load"].end.dc_resistance_ohm, rel=1e-9)
        ruler = bench.given["short"]["offset_delay_ps"]
        assert ruler.true == pytest.approx(bench.parts["short"].delay_s * 1e12)
        for key, evidence in (("resistance_ohm", ohm), ("offset_delay_ps", ruler)):
            off[key].append((evidence.value - evidence.true) / evidence.u)
    for values in off.values():
        assert abs(np.mean(values)) < 0.15
        assert np.std(values) == pytest.approx(1, abs=0.1)


def test_many_connections_average_to_the_truth_behind_the_residuals():
    scenario = Scenario(
        frequency_hz=np.linspace(50e6, 6e9, 101), residual=StatedDecibels.perfect(), connections=400
    )
    bench = draw_bench(scenario, np.random.default_rng(57))
    for name in KINDS:
        # One connection is off by up to 2·2π·6 GHz·0.15 ps = 0.011; the mean of 400 by a twentieth of that.
        assert np.max(np.abs(bench.readings[name].mean(axis=0) - bench.truth[name])) < 0.0025


def test_written_files_read_back_equal(tmp_path):
    rng = np.random.default_rng(58)
    for family in ("seventy-five ohm", "with evidence", "shared body"):
        bench = draw_bench(families()[family](rng), rng)
        path = write_bench(bench, tmp_path / family, name='Invented "set" of parts')
        table = tomllib.loads(path.read_text(encoding="utf-8"))
        assert table["format"] == "stdfit-bench/1"
        assert table["kit"]["name"] == 'Invented "set" of parts'
        assert table["kit"]["reference_impedance_ohm"] == bench.scenario.reference_ohm
        assert table["analyser"]["residual"]["source_match_db"] == bench.residual.source_match_db.tolist()
        for standard in table["standard"]:
            readings = bench.readings[standard["name"]]
            assert len(standard["readings"]) == len(readings)
            for file_name, gamma in zip(standard["readings"], readings, strict=True):
                text = (path.parent / file_name).read_text(encoding="utf-8")
                assert text.splitlines()[0].startswith("! simulated, invented data")
                assert text.splitlines()[1] == f"# HZ S RI R {bench.scenario.reference_ohm:g}"
                columns = np.loadtxt(path.parent / file_name, comments=["!", "#"])
                assert np.array_equal(columns[:, 0], bench.frequency_hz)
                assert np.array_equal(columns[:, 1] + 1j * columns[:, 2], gamma)
            given = bench.given.get(standard["name"], {})
            assert standard.get("given", {}) == {k: {"value": e.value, "u": e.u} for k, e in given.items()}
            assert standard.get("same_offset_as") == bench.same_offset_as.get(standard["name"])
        assert not list(path.parent.glob("*.part"))


def test_real_readings_are_not_overwritten(tmp_path):
    bench = draw_bench(demo_scenario(), np.random.default_rng(59))
    mine = tmp_path / "short-2.s1p"
    mine.write_text("# HZ S RI R 50\n1e9 -1 0\n", encoding="utf-8")
    with pytest.raises(RequestError, match=r"short-2\.s1p: would overwrite"):
        write_bench(bench, tmp_path)
    assert [path.name for path in tmp_path.iterdir()] == ["short-2.s1p"]
    mine.unlink()
    assert write_bench(bench, tmp_path) == write_bench(bench, tmp_path) == tmp_path / "bench.toml"


def test_demo_is_a_believable_workshop():
    scenario = demo_scenario()
    assert (scenario.frequency_hz[0], scenario.frequency_hz[-1]) == (50e6, 6e9)
    assert np.all(np.diff(scenario.frequency_hz) > 0)
    bench = draw_bench(scenario, np.random.default_rng(60))
    assert set(bench.given) == {"load"}
    assert 0.97 < abs(bench.truth["open"][-1]) < 0.999
    assert 0.97 < abs(bench.truth["short"][-1]) < 0.9999
    assert 0.01 < abs(bench.truth["load"][-1]) < 0.1


@pytest.mark.parametrize(
    ("fixed", "message"),
    [
        ({"connections": 0}, "without a reading"),
        ({"connections": {"open": 3}}, "not given for each"),
        ({"bad_connection": "opne"}, "no standard is called 'opne'"),
        ({"noise": -1e-4}, "cannot be negative"),
        ({"frequency_hz": [1e9, 1e9]}, "does not rise"),
    ],
)
def test_impossible_scenarios_are_refused(fixed, message):
    with pytest.raises(RequestError, match=message):
        replace(demo_scenario(), **fixed)


def test_a_bench_is_drawn_in_ten_milliseconds():
    scenario = Scenario(
        frequency_hz=np.linspace(10e6, 6e9, 401), residual=demo_scenario().residual, connections=5
    )
    rng = np.random.default_rng(61)
    taken = []
    for _ in range(30):
        start = time.process_time()
        draw_bench(scenario, rng)
        taken.append(time.process_time() - start)
    assert np.median(taken) < 0.010
