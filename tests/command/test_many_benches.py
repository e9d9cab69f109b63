"""Several benches in one go: each kit beside its bench, and one bad bench stops no other."""

import json
import os
import shutil
import signal
import sys
from pathlib import Path

import pytest

from stdfit.cli import many_benches
from stdfit.cli.exit_codes import DONE, OWN_FAULT, WRONG_INPUT


@pytest.fixture
def shelf(demo, tmp_path):
    """Three copies of the demonstration's bench without kits; the second lacks its readings."""
    folder, _ = demo
    for name in ("a", "b", "c"):
        shutil.copytree(folder / "bench", tmp_path / name)
        (tmp_path / name / "kit.toml").unlink()
    for file in (tmp_path / "b").glob("open-*.s1p"):
        file.unlink()
    return tmp_path


def test_a_bad_bench_stops_no_other(command, shelf):
    done = command(shelf, "fit", "a", "b", "c")
    assert done.returncode == WRONG_INPUT
    assert "b/bench.toml" in done.stderr and "no file matches 'open-1.s1p'" in done.stderr
    assert "2 of 3 benches fitted, 1 not: see above" in done.stdout
    assert (shelf / "a" / "kit.toml").exists() and (shelf / "c" / "kit.toml").exists()
    assert not (shelf / "b" / "kit.toml").exists()


def test_the_kits_are_those_of_one_bench_alone(command, shelf):
    command(shelf, "fit", "a", "c", "--within", "0.03")
    together = (shelf / "c" / "kit.toml").read_text(encoding="utf-8")
    command(shelf, "fit", "c", "--within", "0.03")
    assert (shelf / "c" / "kit.toml").read_text(encoding="utf-8") == together


def test_as_json_with_what_failed(command, shelf):
    done = command(shelf, "fit", "a", "b", "c", "--json")
    told = json.loads(done.stdout)
    assert [one["bench"] for one in told["kits"]] == ["a", "c"]
    assert told["kits"][0]["kit_file"] == str(Path("a") / "kit.toml")
    assert [(one["bench"], one["exit_code"]) for one in told["failed"]] == [("b", WRONG_INPUT)]


def test_a_bench_named_twice_is_refused(command, shelf):
    done = command(shelf, "fit", "a", "a/bench.toml")
    assert done.returncode == WRONG_INPUT and "named twice" in done.stderr
    assert not (shelf / "a" / "kit.toml").exists()


@pytest.mark.parametrize("option", [("-o", "kit.toml"), ("--report", "page.html")])
def test_one_file_for_several_kits_is_refused(command, shelf, option):
    done = command(shelf, "fit", "a", "c", *option)
    assert done.returncode == WRONG_INPUT and f"{option[0]} names one file" in done.stderr
    assert not (shelf / "a" / "kit.toml").exists()


@pytest.mark.skipif(sys.platform != "linux", reason="replaces a function in processes that are forked")
def test_a_process_that_is_stopped_from_outside_takes_no_other_with_it(monkeypatch):
    def stopped(task):
        if task[0] == Path("bad"):
            os.kill(os.getpid(), signal.SIGKILL)
        return {"bench": str(task[0]), "code": DONE}

    monkeypatch.setattr(many_benches, "fit_one", stopped)
    stopped.__module__, stopped.__qualname__ = many_benches.__name__, "fit_one"
    tasks = [(Path(name), None, 0) for name in ("good", "bad", "fine")]
    outcomes = many_benches.run_each(tasks, None)
    assert [(one["bench"], one["code"]) for one in outcomes] == [
        ("good", DONE),
        ("bad", OWN_FAULT),
        ("fine", DONE),
    ]


def test_what_is_no_error_of_ours_is_told_too(monkeypatch, tmp_path):
    monkeypatch.setattr("stdfit.data.bench.read_bench", lambda path: 1 / 0)
    monkeypatch.setattr("tempfile.tempdir", str(tmp_path))
    found = many_benches.fit_one((Path("any"), None, 0))
    assert found["code"] == OWN_FAULT and "a fault of the program" in found["error"]
    (saved,) = tmp_path.glob("stdfit-fault-*.txt")
    assert "ZeroDivisionError" in saved.read_text(encoding="utf-8")
