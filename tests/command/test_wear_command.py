"""The command: text, data, rows, exit codes and refusals."""

import csv
import io
import json

import numpy as np
import pytest

from stdfit.trials.files import write_bench
from stdfit.trials.wear_pair import Worn, draw_pair
from stdfit.trials.wear_study import wear_scenario


@pytest.fixture(scope="module")
def place(command, tmp_path_factory):
    """Spring, and autumn with 0.1 Ω more in the short, read with one calibration; spring as a kit."""
    folder = tmp_path_factory.mktemp("wear")
    worn = Worn("short", "contact resistance", series_ohm=0.1)
    pair = draw_pair(wear_scenario(), np.random.default_rng(20), same_calibration=True, worn=worn)
    for name, simulated in zip(("spring", "autumn"), pair, strict=True):
        bench = write_bench(simulated, folder / name, f"Boathouse set, {name}")
        text = bench.read_text("utf-8").replace(
            'state = "corrected"', 'state = "corrected"\ncalibration = "lab kit, first of May"'
        )
        bench.write_text(text, "utf-8")
    done = command(folder, "fit", "spring")
    assert done.returncode == 0, done.stderr
    return folder


def test_kit_against_a_new_bench(command, place):
    done = command(place, "wear", "spring/kit.toml", "autumn")
    assert done.returncode == 1
    assert done.stderr == ""
    assert "short: contact resistance +" in done.stdout
    assert "mΩ" in done.stdout
    assert "sharper by a factor" in done.stdout
    assert done.stdout.splitlines()[-1].startswith("changed: short; ")


def test_kit_against_kit_says_the_same(command, place):
    assert command(place, "fit", "autumn").returncode == 0
    by_bench = command(place, "wear", "spring/kit.toml", "autumn", "--json")
    by_kit = command(place, "wear", "spring/kit.toml", "autumn/kit.toml", "--json")
    assert (by_bench.returncode, by_kit.returncode) == (1, 1)
    assert json.loads(by_bench.stdout) == json.loads(by_kit.stdout)
    told = json.loads(by_kit.stdout)
    assert told["shared_correction"] == "calibration of the analyser"
    assert [one["verdict"] for one in told["standards"]] == ["not changed", "changed", "not changed"]
    ((cause,),) = told["standards"][1]["explained_by"]
    assert (cause["cause"], cause["unit"]) == ("contact resistance", "Ω")
    assert abs(cause["value"] - 0.1) <= cause["u95"]


def test_rows(command, place):
    done = command(place, "wear", "spring/kit.toml", "autumn", "--csv")
    rows = list(csv.DictReader(io.StringIO(done.stdout)))
    assert {row["standard"] for row in rows} == {"open", "short", "load"}
    for row in rows[::97]:
        ratio = float(row["difference"]) / float(row["bound"])
        assert float(row["normalised"]) == pytest.approx(ratio)


def test_the_same_readings_again_are_refused(command, place):
    done = command(place, "wear", "spring/kit.toml", "spring")
    assert done.returncode == 2
    assert "15 files of readings are in both kits: nothing was read anew" in done.stderr


def test_the_same_kit_is_refused(command, place):
    done = command(place, "wear", "spring/kit.toml", "spring/kit.toml")
    assert (done.returncode, done.stdout) == (2, "")
    assert "both are the same kit file" in done.stderr


@pytest.mark.parametrize(
    ("old", "new", "options", "words"),
    [
        ("nowhere.toml", "autumn", [], "no such kit file"),
        ("spring/bench.toml", "autumn", [], "a bench file, where a kit file is wanted"),
        ("spring/kit.toml", "nowhere.toml", [], "no such kit file"),
        ("spring/kit.toml", "spring/open-1.s1p", [], "a file of readings, where a kit file is wanted"),
        ("spring/kit.toml", ".", [], "holds no bench.toml"),
        ("spring/kit.toml", "autumn", ["--json", "--csv"], "--csv and --json"),
    ],
)
def test_wrong_input_ends_with_two_lines_and_code_2(command, place, old, new, options, words):
    done = command(place, "wear", old, new, *options)
    assert (done.returncode, done.stdout) == (2, "")
    assert words in done.stderr
    assert done.stderr.count("\n") == 2
