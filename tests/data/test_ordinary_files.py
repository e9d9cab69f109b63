"""Pipes, devices, files without an end, lines without an end: told at once, never waited for."""

import hashlib
import os
import time
from pathlib import Path

import pytest

from stdfit.base.errors import BenchError, InputError, ReadingError
from stdfit.data import bench_files
from stdfit.data.bench import parse_bench
from stdfit.data.bench_files import matching_files
from stdfit.data.ordinary import beginning, digest, ordinary_bytes
from stdfit.data.plain_text import LONGEST_LINE, MOST_LINES
from stdfit.data.readings import read_reading
from stdfit.data.repeat_file import read_repeat_file
from stdfit.data.whole_text import whole_text

VALID = Path(__file__).parents[1] / "files" / "valid"
STRANGE = ["/dev/zero", "/dev/null", "/proc/kmsg", "/proc/self/mem", "/"]


@pytest.fixture
def pipe(tmp_path):
    os.mkfifo(tmp_path / "pipe")
    return tmp_path / "pipe"


def read(path):
    return whole_text(Path(path), "bench file", 1000, BenchError, "check the path")


@pytest.mark.parametrize("name", STRANGE)
def test_devices_are_no_files(name):
    if not Path(name).exists():
        pytest.skip("this system has none")
    began = time.perf_counter()
    assert beginning(Path(name), 100) == b""
    with pytest.raises(BenchError):
        read(name)
    with pytest.raises(ReadingError):
        read_reading(name)
    assert time.perf_counter() - began < 5.0


def test_a_pipe_is_no_file(pipe):
    assert ordinary_bytes(pipe, 100) is None
    assert beginning(pipe, 100) == b""
    with pytest.raises(BenchError, match="not an ordinary file"):
        read(pipe)
    with pytest.raises(ReadingError, match="not an ordinary file"):
        read_reading(pipe)


def test_a_pipe_that_takes_the_place_of_a_file_is_not_waited_for(pipe, tmp_path, monkeypatch):
    """Between the look at a file and its opening another may have come."""
    usual = VALID.stat()
    (tmp_path / "a.txt").write_text("x", encoding="utf-8")
    usual = (tmp_path / "a.txt").stat()
    with monkeypatch.context() as patch:
        patch.setattr(Path, "stat", lambda *_, **__: usual)
        assert ordinary_bytes(pipe, 100) is None


def test_the_beginning_of_a_file_without_an_end(tmp_path):
    path = tmp_path / "hole"
    with path.open("wb") as file:
        file.write(b"abc")
        file.truncate(2**40)
    assert beginning(path, 5) == b"abc\0\0"
    with pytest.raises(BenchError, match="larger than 0 MB"):
        read(path)


@pytest.mark.parametrize("unit", ["a.", "a . ", '"a".', "'a'.", 'a."b".'])
def test_endless_dotted_keys_are_refused_before_they_are_parsed(tmp_path, unit):
    path = tmp_path / "dots.toml"
    path.write_text("\nx = 1\n" + unit * 400 + "a = 1\n", encoding="utf-8")
    with pytest.raises(BenchError, match="more than 60 words in a row joined by points") as caught:
        whole_text(path, "bench file", 10**6, BenchError, "check the path")
    assert caught.value.line == 3


@pytest.mark.parametrize(
    "text", ["a.b.c = 1.5\n", "x = '" + "." * 500 + "'\n", "# " + "a b. " * 100, "[1.5, 2.5]" * 99]
)
def test_usual_points_are_not(tmp_path, text):
    path = tmp_path / "points.toml"
    path.write_text(text, encoding="utf-8")
    assert whole_text(path, "bench file", 10**6, BenchError, "check the path") == text


def bomb(tmp_path, name, raw):
    path = tmp_path / name
    path.write_bytes(raw)
    began = time.perf_counter()
    with pytest.raises(ReadingError) as caught:
        read_reading(path)
    assert time.perf_counter() - began < 10.0
    return caught.value


@pytest.mark.parametrize("name", ["x.s1p", "x.csv", "x.ts", "x"])
@pytest.mark.parametrize("unit", [b"!\n", b"#\r\n", b"! 1 2 3\r", b"1 2\n"])
def test_comments_without_an_end(tmp_path, name, unit):
    assert bomb(tmp_path, name, unit * (2 * MOST_LINES)).what == f"more than {MOST_LINES} lines"


@pytest.mark.parametrize("unit", [b"1 ", b"x", b"1,", b"!", b"\xe9"])
def test_a_line_without_an_end(tmp_path, unit):
    head = b"# Hz S RI R 50\n1e8 1 0\r\n"
    fault = bomb(tmp_path, "x.s1p", head + unit * (2 * LONGEST_LINE))
    assert fault.what == f"longer than {LONGEST_LINE} characters"
    assert fault.line == 3


def test_a_long_reading_is_none_of_these(tmp_path):
    rows = (f"{1e6 + 1e4 * k!r} {0.123456789012345!r} {-0.987654321098765!r}" for k in range(100_001))
    path = tmp_path / "long.s1p"
    path.write_text("# Hz S RI R 50\n" + "\n! a comment\n\n".join(rows), encoding="utf-8")
    assert read_reading(path).frequency_hz.size == 100_001


def test_a_pattern_does_not_look_through_a_whole_disk(tmp_path, monkeypatch):
    for k in range(30):
        (tmp_path / f"folder-{k}").mkdir()
    monkeypatch.setattr(bench_files, "MOST_LOOKED_AT", 20)
    for pattern in ("**/*.s1p", "*/*.s1p", "folder-1/../*/x.s1p"):
        with pytest.raises(BenchError, match="looks at more than 20 files and folders"):
            matching_files([pattern], tmp_path / "bench.toml", "readings")


def test_patterns_pass_rings_and_locked_places(tmp_path):
    (tmp_path / "ring").symlink_to("ring")
    (tmp_path / "up").symlink_to("..")
    (tmp_path / "a").mkdir()
    (tmp_path / "a" / "self").symlink_to(".")
    (tmp_path / "a" / "x.s1p").write_text("x", encoding="utf-8")
    for pattern in ("**/*.s1p", "*/x.s1p", "a/self/self/x.*", "**/**/x.s1p"):
        (found,) = matching_files([pattern], tmp_path / "bench.toml", "readings")
        assert found.resolve() == tmp_path / "a" / "x.s1p"


def test_a_reading_that_is_a_ring_of_links_in_a_repeatability_file(tmp_path):
    for name in ("a-1", "b-1"):
        (tmp_path / f"{name}.s1p").symlink_to(f"{name}.s1p")
    text = 'format = "stdfit-repeatability/1"\nname = "x"\nconnector = "SMA"\n[[repeatability]]\nstandard = "short"\n'
    text += 'kind = "short"\ncalibration = "a"\nconnections = ["a-*.s1p", "b-*.s1p"]\n'
    (tmp_path / "repeatability.toml").write_text(text, encoding="utf-8")
    described = read_repeat_file(tmp_path)
    with pytest.raises(ReadingError, match="a link that leads back to itself"):
        read_reading(described.entries[0].connections[0][0])


@pytest.mark.parametrize(
    "number, how", [("1e308", "large"), ("-1e16", "large"), ("1e-320", "small"), ("-1e-31", "small")]
)
def test_numbers_that_leave_arithmetic_no_room(number, how):
    text = (VALID / "bench" / "corrected.toml").read_text(encoding="utf-8")
    path = VALID / "bench" / "x.toml"
    assert parse_bench(text, path).within == 0.02
    with pytest.raises(BenchError, match=f"is too {how} to be meant"):
        parse_bench(text.replace("within = 0.02", f"within = {number}"), path)


def test_the_digest_of_a_file_is_of_all_of_it_and_of_nothing_without_an_end(tmp_path, pipe):
    path = tmp_path / "reading.s1p"
    path.write_bytes(b"abc" * 10**6)
    assert digest(path) == hashlib.sha256(b"abc" * 10**6).hexdigest()
    with path.open("r+b") as file:
        file.truncate(2**40)
    with pytest.raises(InputError, match="larger than 64 MB"):
        digest(path)
    with pytest.raises(InputError, match="not an ordinary file"):
        digest(pipe)
