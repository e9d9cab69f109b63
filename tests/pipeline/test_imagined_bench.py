"""A bench on which nothing is measured yet: what is predicted for it comes true, and what cannot be is refused."""

import numpy as np
import pytest

from stdfit.base.errors import BenchError
from stdfit.cli import main
from stdfit.data.bench import parse_bench
from stdfit.pipeline import fit_bench, prepare
from stdfit.pipeline.imagined import imagine, imagined_sweeps
from stdfit.uncertainty.sources import LumpedSource, SmoothSource, WhiteSource
from stdfit.writing.numbers import frequency

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


@pytest.fixture(scope="module")
def planned(tmp_path_factory):
    path = tmp_path_factory.mktemp("planned") / "bench.toml"
    path.write_text(PLANNED, encoding="utf-8")
    return path


@pytest.fixture(scope="module")
def expected(planned):
    return imagine(parse_bench(PLANNED, planned))


def test_what_is_predicted_before_measuring_comes_true(expected, measured_hz, limit_of, simulated):
    """The same connector, sweep and analyser, and nothing known of the parts: within 40 % of the mean.

    A single bench is a third of its limit away from the mean, so the mean of twelve has a tenth of it.
    """
    more = [limit_of(simulated(seed)) for seed in range(measured_hz.size, 12)]
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


def test_fit_refuses_a_bench_without_readings_and_says_what_to_do(planned, capsys):
    with pytest.raises(BenchError, match="no readings yet"):
        fit_bench(planned)
    assert main(["fit", str(planned)]) == 2
    told = capsys.readouterr()
    assert told.out == ""
    assert "standard[open].readings" in told.err
    assert "stdfit plan" in told.err
    assert not planned.with_name("kit.toml").exists()


def test_the_command_before_measuring(planned, expected, capsys, limit_of):
    """The analysers that are imagined are the same every time, and so is the plan."""
    assert main(["plan", str(planned)]) == 0
    told = capsys.readouterr()
    verdict = (
        f"predicted, before any reading: within 0.02 the kit is good to {frequency(limit_of(expected))}: "
    )
    assert told.out.startswith(verdict)
    assert "nothing is measured yet" in told.err


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


def test_a_drawing_is_looked_at_before_there_are_readings(planned):
    (planned.parent / "open.drawing.toml").write_text(
        """format = "stdfit-drawing/1"
[[part]]
name = "open"
kind = "open"
[[part.section]]
length_mm = { value = 6.0, tolerance = 0.05 }
inner_mm = { value = 1.52, tolerance = 0.01 }
outer_mm = { value = 3.5, tolerance = 0.02 }
[part.end]
form = "shielded"
pin_mm = { value = 0.0, tolerance = 0.03 }
pipe_mm = 8.0
""",
        encoding="utf-8",
    )
    text = PLANNED.replace('kind = "open"\n', 'kind = "open"\ngiven.from_drawing = "open.drawing.toml"\n')
    drawn = imagine(parse_bench(text, planned))
    wish = drawn.wishes[[one.name for one in drawn.observed].index("open")]
    assert wish.given["c0"][0] == pytest.approx(39.85, rel=0.01)  # Somlo 1967, 3.50/1.52 mm
    assert "c0" not in imagine(parse_bench(PLANNED, planned)).wishes[0].given
