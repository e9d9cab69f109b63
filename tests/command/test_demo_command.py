"""`stdfit demo`: fitted against true, and what to do next."""

import json
import shlex

from stdfit.cli import main
from stdfit.data.bench import read_bench
from stdfit.writing.kit_reading import read_kit


def test_it_ends_with_the_paths_and_what_to_do_next(demo, command):
    folder, done = demo
    assert done.returncode == 0
    lines = done.stdout.splitlines()
    assert lines[-6:-3] == [
        "readings and bench file: bench/bench.toml",
        "kit file: bench/kit.toml",
        "report: bench/report.html",
    ]
    assert lines[-3].startswith("next: open bench/report.html ")
    assert lines[-2].lstrip().startswith("stdfit show bench/kit.toml")
    next_one = shlex.split(lines[-2].lstrip().removeprefix("stdfit ").split("  ")[0])
    assert command(folder, *next_one).returncode == 0


def test_fitted_stands_beside_true(demo):
    text = demo[1].stdout
    assert "Fitted against true" in text
    assert text.count(" yes") > 10
    inside, of = text.split("lies inside the bound in ")[1].split(" comparisons")[0].split(" of ")
    assert int(inside) >= 0.9 * int(of)


def test_its_files_are_there_and_are_read(demo):
    folder = demo[0] / "bench"
    bench = read_bench(folder)
    assert [entry.kind for entry in bench.standards] == ["open", "short", "load"]
    assert all(file.exists() for entry in bench.standards for file in entry.files)
    kit = read_kit(folder / "kit.toml")
    assert kit.name == bench.name
    assert "invented" in kit.name
    assert {one.file for one in kit.files} == {file.name for entry in bench.standards for file in entry.files}
    assert not list(folder.glob("*.part"))
    assert not list(folder.glob(".*"))


def test_as_json(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    assert main(["demo", "--json"]) == 0
    data = json.loads(capsys.readouterr().out)
    assert {"quantities", "curves", "bench_file", "kit_file"} <= set(data)
    assert (tmp_path / data["kit_file"]).exists()
    assert {one["standard"] for one in data["curves"]} == {"open", "short", "load"}
    for one in data["curves"]:
        assert one["inside"] == (one["error"] <= one["bound"])


def test_it_does_not_write_over_what_is_not_its_own(command, tmp_path):
    (tmp_path / "mine").mkdir()
    (tmp_path / "mine" / "bench.toml").write_text("mine")
    done = command(tmp_path, "demo", "--out", "mine")
    assert done.returncode == 2
    assert "choose another folder" in done.stderr
    assert (tmp_path / "mine" / "bench.toml").read_text() == "mine"
    assert [path.name for path in (tmp_path / "mine").iterdir()] == ["bench.toml"]


def test_a_file_stands_where_its_folder_should_go(command, tmp_path):
    (tmp_path / "file").write_text("mine")
    done = command(tmp_path, "demo", "--out", "file")
    assert (done.returncode, done.stdout) == (2, "")
    assert done.stderr.startswith("stdfit: file: File exists\n")
    assert done.stderr.count("\n") == 2
