"""`stdfit repeat`: nested readings written to files (invented data)."""

import json

import numpy as np
import pytest

from stdfit.cli import main
from stdfit.trials.repeats import draw_readings, draw_workbench

COUNTS = [[2, 2, 2], [2, 2], [1, 2, 1]]
HEAD = """format = "stdfit-repeatability/1"
name = "Hilltop workshop (invented data)"
connector = "SMA"
"""


def table(day, connections, standard="short", kind="short"):
    return (
        f'[[repeatability]]\nstandard = "{standard}"\nkind = "{kind}"\ncalibration = "{day}"\n'
        f"connections = {connections}\n"
    )


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    path, rng = tmp_path_factory.mktemp("repeats"), np.random.default_rng(4)
    bench = draw_workbench("short", rng, long_run=2)
    readings = iter(draw_readings(bench, COUNTS, rng))
    text = HEAD
    for day, counts in zip("abc", COUNTS, strict=True):
        for number, repeats in enumerate(counts, start=1):
            for repeat in range(repeats):
                rows = zip(bench.frequency_hz.tolist(), next(readings).tolist(), strict=True)
                lines = ["# HZ S RI R 50", *(f"{f!r} {g.real!r} {g.imag!r}" for f, g in rows)]
                (path / f"{day}-{number}-{repeat + 1}.s1p").write_text("\n".join(lines), encoding="utf-8")
        text += table(day, [f"{day}-{number + 1}-*.s1p" for number in range(len(counts))])
    (path / "repeatability.toml").write_text(text, encoding="utf-8")
    return path


@pytest.fixture
def run(folder, capsys):
    def call(*options, text=None):
        target = folder
        if text is not None:
            target = folder / "other.toml"
            target.write_text(text, encoding="utf-8")
        code = main(["repeat", str(target), *map(str, options)])
        out, err = capsys.readouterr()
        return code, out, err

    return call


def test_text(run):
    code, out, err = run("--at", "1e9", "3e9")
    assert (code, err) == (0, "")
    lines = out.splitlines()
    assert "short: 3 calibrations, 8 connections, 14 readings" in lines
    assert any(line.startswith("  plane shift ") and " ps (" in line for line in lines)
    assert any(
        line.startswith("  |ΔΓ| at 1.01 GHz ") or line.startswith("  |ΔΓ| at 1 GHz ") for line in lines
    )
    assert lines[-1].startswith("worth making: ")


def test_json_says_the_same(run):
    code, out, _ = run("--json")
    said = json.loads(out)
    (short,) = said["standards"]
    assert code == 0
    assert short["readings"] == COUNTS
    assert [one["what"] for one in short["components"]].count("|ΔΓ|") == 4
    shift = next(one for one in short["components"] if one["what"] == "plane shift")
    assert shift["connection"]["low_95"] < 0.15 < shift["connection"]["high_95"]
    assert shift["u_of_mean_holds_calibration"] is True
    assert shift["u_of_mean"]["1"] > shift["u_of_mean"]["10"] > 0.0
    assert shift["worth_making_95"][0] <= shift["worth_making"] <= shift["worth_making_95"][1]


def test_what_the_design_does_not_tell(run):
    code, out, _ = run(text=HEAD + table("a", ["a-1-1.s1p", "a-2-1.s1p"]))
    assert code == 0
    assert "not told apart" in out
    assert "with one calibration only" in out.splitlines()[-1]
    lacks = "calibration; the calibration's part is not known, and not in it"
    assert lacks in out
    assert lacks not in run()[1]
    code, out, _ = run(text=HEAD + table("a", ["a-1-*.s1p"]))
    assert code == 0
    assert out.splitlines()[-1].startswith("connections are not told apart from calibrations")
    said = json.loads(run("--json", text=HEAD + table("a", ["a-1-*.s1p"]))[1])
    assert said["standards"][0]["components"][0]["calibration"] is None
    assert said["standards"][0]["components"][0]["worth_making"] is None
    assert set(said["standards"][0]["components"][0]["u_of_mean"].values()) == {None}
    assert said["standards"][0]["components"][0]["u_of_mean_holds_calibration"] is False
    table_of_means = out.split("standard uncertainty of a mean")[1].splitlines()
    assert all(line.count("not known") == 6 for line in table_of_means if "shift" in line or "ΔΓ" in line)


def test_a_list_of_names_is_one_connection(run):
    code, out, _ = run(text=HEAD + table("a", [["a-1-1.s1p", "a-1-2.s1p"], "a-2-*.s1p"]))
    assert code == 0
    assert "short: 1 calibration, 2 connections, 4 readings" in out.splitlines()


@pytest.mark.parametrize(
    "text, said",
    [
        ("format = 1", "begins with format"),
        ("[", "not valid TOML"),
        (HEAD, "[[repeatability]]"),
        (HEAD + "port = 1\n" + table("a", ["a-1-*.s1p"]), "unknown key"),
        (HEAD + table("a", ["none-*.s1p"]), "no file matches"),
        (HEAD + table("a", []), "the list is empty"),
        (HEAD + table("a", [1]), "neither a file name nor a list"),
        (HEAD + table("a", [[]]), "neither a file name nor a list"),
        (HEAD + table("a", ["a-1-*.s1p"]) + table("b", ["a-1-1.s1p"]), "belongs to two connections"),
        (HEAD + table("a", ["a-1-*.s1p"]) + table("b", ["b-1-*.s1p"], kind="open"), "another kind"),
        (HEAD + table("a", ["a-1-1.s1p"]), "a single reading"),
        (HEAD + table("a", ["a-1-*.s1p"], kind="pad"), "is not known"),
        (HEAD + table("a", ["a-1-*.s1p"], kind="open"), "short"),
    ],
)
def test_refusals(run, text, said):
    code, out, err = run(text=text)
    assert (code, out) == (2, "")
    assert said in err
    assert err.startswith("stdfit: ")
    assert err.count("\n") <= 2


def test_frequencies_outside_are_refused(run, folder, capsys):
    assert run("--at", "9e9")[0] == 2
    assert main(["repeat", str(folder / "none.toml")]) == 2
    assert "no such repeatability file" in capsys.readouterr().err
