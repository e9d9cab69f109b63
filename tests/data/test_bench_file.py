"""Bench files: values, defaults, patterns, folders."""

import os
from pathlib import Path

import numpy as np
import pytest

from stdfit.base.errors import BenchError
from stdfit.data.bench import parse_bench, read_bench
from stdfit.data.bench_files import matching_files

BENCHES = Path(__file__).parents[1] / "files" / "valid" / "bench"


def test_a_corrected_bench():
    bench = read_bench(BENCHES / "corrected.toml")
    assert (bench.name, bench.connector, bench.reference_ohm) == ("Invented workshop set", "SMA", 50.0)
    assert (bench.within, bench.highest_hz, bench.state, bench.date) == (0.02, None, "corrected", None)
    first, short, load = bench.standards
    assert [path.name for path in first.files] == ["plain-ri.s1p", "db-ghz.s1p"]
    assert (first.kind, first.port, first.polynomial, first.same_offset_as) == ("open", 1, "chosen", None)
    assert (short.given["offset_delay_ps"].value, short.given["offset_delay_ps"].u) == (12.0, 0.5)
    assert load.same_offset_as == "short"
    assert load.given["resistance_ohm"].u == 0.02


def test_stated_residuals_become_linear_bounds():
    residual = read_bench(BENCHES / "corrected.toml").residual
    np.testing.assert_array_equal(residual.frequency_hz, [50e6, 3e9, 6e9])
    # 40 dB is 1/100; 0.18 dB is 10^(0.18/20) − 1 = 0.020939.
    assert residual.directivity[2] == pytest.approx(0.01, rel=1e-14)
    assert residual.source_match[2] == pytest.approx(10**-1.7, rel=1e-14)
    assert residual.reflection_tracking[2] == pytest.approx(0.0209395, rel=1e-5)
    with pytest.raises(ValueError, match="read-only"):
        residual.directivity[0] = 0
    assert read_bench(BENCHES / "one-residual.toml").residual.directivity.shape == (1,)


def test_defaults_and_values_without_uncertainty():
    bench = read_bench(BENCHES / "little.toml")
    assert (bench.reference_ohm, bench.within, bench.residual) == (50.0, 0.02, None)
    given = bench.standards[0].given
    assert (given["c0"].value, given["c0"].u) == (45.0, None)
    assert (given["offset_delay_ps"].value, given["offset_delay_ps"].u) == (-1.5, None)


def test_a_raw_bench():
    bench = read_bench(BENCHES / "raw.toml")
    assert (bench.reference_ohm, bench.within, bench.highest_hz) == (75.0, 0.05, 3e9)
    assert (bench.state, bench.date) == ("raw", "2024-05-01")
    known, match, short = bench.standards
    assert (known.from_kit, known.standard) == (BENCHES / "raw.toml", "open")
    # Named twice and matched by a pattern: once.
    assert [path.name for path in known.files].count("two-port.s2p") == 1
    assert (match.port, short.polynomial) == (2, "even")


def bench_in(folder, readings='["open-*.s1p"]'):
    return parse_bench(
        'format = "stdfit-bench/1"\nkit = {name = "x", connector = "y"}\nanalyser = {state = "corrected"}\n'
        f'[[standard]]\nname = "open"\nkind = "open"\nreadings = {readings}\n',
        folder / "bench.toml",
    )


def files_of(bench):
    return [path.name for path in bench.standards[0].files]


def test_patterns_sort_naturally(tmp_path):
    for number in (10, 2, 1, 11):
        (tmp_path / f"open-{number}.s1p").write_text("x")
    assert files_of(bench_in(tmp_path)) == [f"open-{n}.s1p" for n in (1, 2, 10, 11)]


def test_absolute_and_parent_patterns(tmp_path):
    (tmp_path / "inner").mkdir()
    (tmp_path / "open-1.s1p").write_text("x")
    assert files_of(bench_in(tmp_path / "inner", '["../open-*.s1p"]')) == ["open-1.s1p"]
    assert files_of(bench_in(tmp_path / "inner", f"['{tmp_path}/open-?.s1p']")) == ["open-1.s1p"]
    assert files_of(bench_in(tmp_path / "inner", f"['{tmp_path}/open-1.s1p']")) == ["open-1.s1p"]


def test_a_name_with_brackets_and_a_folder_that_matches(tmp_path):
    (tmp_path / "open[1].s1p").write_text("x")
    (tmp_path / "open-2.s1p").mkdir()
    (tmp_path / "open-3.s1p").write_text("x")
    assert files_of(bench_in(tmp_path, '["open[1].s1p", "open-*"]')) == ["open[1].s1p", "open-3.s1p"]


def test_one_file_through_a_link_is_one_connection(tmp_path):
    (tmp_path / "open-1.s1p").write_text("x")
    (tmp_path / "open-2.s1p").symlink_to("open-1.s1p")
    assert files_of(bench_in(tmp_path)) == ["open-1.s1p"]


def test_loops_of_links_do_not_hang(tmp_path):
    (tmp_path / "a").mkdir()
    for name in ("l1", "l2", "l3"):
        (tmp_path / "a" / name).symlink_to(tmp_path)
    (tmp_path / "a" / "open-1.s1p").write_text("x")
    (tmp_path / "self.s1p").symlink_to("self.s1p")
    assert files_of(bench_in(tmp_path, '["**/open-*.s1p"]')) == ["open-1.s1p"]
    with pytest.raises(BenchError) as caught:
        bench_in(tmp_path, '["nothing*/x"]')
    assert caught.value.key == "standard[open].readings"


def test_too_many_files(tmp_path):
    for number in range(1001):
        (tmp_path / f"open-{number}.s1p").touch()
    with pytest.raises(BenchError, match="more than 1000 files"):
        matching_files(["open-*"], tmp_path / "bench.toml", "k")


def test_a_folder_stands_for_its_bench_file(tmp_path):
    with pytest.raises(BenchError, match=r"holds no bench\.toml"):
        read_bench(tmp_path)
    (tmp_path / "bench.toml").write_bytes((BENCHES / "corrected.toml").read_bytes())
    with pytest.raises(BenchError, match="no file matches"):
        read_bench(tmp_path)
    with pytest.raises(BenchError, match="no such bench file"):
        read_bench(tmp_path / "other.toml")
    with pytest.raises(BenchError, match="cannot be read"):
        read_bench("a\0b")


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="no named pipes on this system")
def test_a_pipe_does_not_hang(tmp_path):
    os.mkfifo(tmp_path / "bench.toml")
    with pytest.raises(BenchError, match="not an ordinary file"):
        read_bench(tmp_path)


def test_a_giant_is_refused(tmp_path):
    with (tmp_path / "bench.toml").open("wb") as file:
        file.truncate(5 * 2**20)
    with pytest.raises(BenchError, match="larger than 4 MB"):
        read_bench(tmp_path)
