"""`stdfit compare`: text, JSON and CSV say the same; its exit code is 0 whatever the difference."""

import csv
import io
import json
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from stdfit.cli import main
from stdfit.pipeline import with_limits
from stdfit.validity.kit import curve
from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import read_kit

SMALL = Path(__file__).parents[1] / "files" / "valid" / "kit" / "small.toml"


def said(capsys, *arguments):
    assert main([str(one) for one in arguments]) == 0
    out, err = capsys.readouterr()
    assert err == ""
    return out


@pytest.fixture
def other_file(kit_file, tmp_path):
    """A kit like the demo's: its load is 1 Ω higher, its open has another name."""
    kit = read_kit(kit_file)
    first, second, load = kit.definitions
    higher = tuple(
        replace(p, value=p.value + 1.0, low=p.low + 1.0, high=p.high + 1.0)
        if p.name == "resistance_ohm"
        else p
        for p in load.parameters
    )
    changed = (replace(first, name="cap"), second, replace(load, parameters=higher))
    path = tmp_path / "other.toml"
    path.write_text(
        kit_text(replace(kit, name="Other set", definitions=changed, files=(), session=None)),
        encoding="utf-8",
    )
    return path


def test_a_kit_beside_itself(kit_file, command, tmp_path):
    done = command(tmp_path, "compare", kit_file, kit_file)
    assert (done.returncode, done.stderr) == (0, "")
    assert done.stdout.splitlines()[-1] == "the kits do not differ"
    assert "source files are in both kits: errors in common cancel" in done.stdout


def test_a_kit_beside_ideal_standards(kit_file, capsys):
    out = said(capsys, "compare", kit_file, "ideal")
    lines = out.splitlines()
    assert lines[0].endswith(" against ideal standards")
    assert lines[-1].startswith("the kits differ by more than their bounds")
    data = json.loads(said(capsys, "compare", kit_file, "ideal", "--json"))
    assert data["verdict"] == lines[-1]
    kit = read_kit(kit_file)
    gamma, bound = curve(kit, kit.definition("short"), np.array([2e9]))
    (row,) = [row for row in data["table"] if (row["what"], row["frequency_hz"]) == ("short", 2e9)]
    assert row["difference"] == pytest.approx(abs(gamma[0] + 1.0), rel=1e-12)
    assert row["in_bounds"] == pytest.approx(abs(gamma[0] + 1.0) / bound[0], rel=1e-12)
    assert [one["what"] for one in data["as_kits"]] == [
        "directivity",
        "reflection tracking",
        "source match",
        "device of |Γ| = 1",
    ]


def test_a_small_difference(kit_file, other_file, capsys):
    out = said(capsys, "compare", kit_file, other_file)
    assert "open / cap: matched by their kind, open" in out
    assert "both kits carry analyser residuals" in out
    data = json.loads(said(capsys, "compare", kit_file, other_file, "--json"))
    load = data["standards"][2]
    assert load["names"] == ["load", "load"]
    assert load["largest"] == pytest.approx(0.01, rel=0.1)
    assert data["standards"][0]["matched_by"] == "kind"
    assert data["standards"][0]["largest"] == 0.0
    rows = list(csv.DictReader(io.StringIO(said(capsys, "compare", kit_file, other_file, "--csv"))))
    own = [row for row in rows if (row["of"], row["what"]) == ("standard", "load")]
    assert max(float(row["in_bounds"]) for row in own) == load["largest_in_bounds"]
    assert {row["of"] for row in rows} == {"standard", "kit"}
    for low, top in load["within_bounds_hz"]:
        assert all(
            float(row["in_bounds"]) <= 1.0 + 1e-9 for row in own if low <= float(row["frequency_hz"]) <= top
        )
    assert any(float(row["in_bounds"]) > 1.0 for row in own)


def test_frequencies_of_the_user(kit_file, capsys):
    out = said(capsys, "compare", kit_file, "ideal", "--at", "3e9", "1.25e9")
    rows = out.split("At some frequencies")[1].splitlines()[2:4]
    assert [row.split("  ")[1] for row in rows] == ["1.25 GHz", "3 GHz"]
    rows = list(
        csv.DictReader(io.StringIO(said(capsys, "compare", kit_file, "ideal", "--at", "1e9", "--csv")))
    )
    assert len(rows) == 7
    assert {row["frequency_hz"] for row in rows} == {"1000000000.0"}


def test_a_kit_that_holds_no_three_standards(capsys):
    out = said(capsys, "compare", SMALL, "ideal")
    assert "As kits" not in out
    assert "not compared as kits: of open, short and load not all have counterparts" in out


def test_without_a_bound_there_is_no_ratio(kit_file, tmp_path, capsys):
    """Two kits without sources and without misfits: every difference is beyond all bounds."""
    kit = read_kit(kit_file)
    from stdfit.validity.device.compare import compare
    from stdfit.validity.device.pairing import ideal_like
    from stdfit.writing.compare_text import compare_data, compare_text, table_frequencies

    parts = tuple(
        replace(
            one, parameters=tuple(replace(p, of="") for p in one.parameters), misfit=np.zeros(one.misfit.size)
        )
        for one in kit.definitions
    )
    found = compare(replace(kit, definitions=parts, order=(), shares=()), ideal_like(kit))
    at = table_frequencies(found)
    assert "(without end)" in compare_text(found, at)
    data = json.loads(json.dumps(compare_data(found, at), allow_nan=False))
    assert data["standards"][0]["largest_in_bounds"] is None


@pytest.mark.parametrize(
    "change, words",
    [
        ({"reference_ohm": 75.0}, "different reference impedances, 50 and 75 Ω"),
        ({"connector": "BNC"}, "different connectors, SMA and BNC"),
    ],
)
def test_what_cannot_be_compared(kit_file, tmp_path, capsys, change, words):
    path = tmp_path / "other.toml"
    other = with_limits(replace(read_kit(kit_file), session=None, **change))
    path.write_text(kit_text(other), encoding="utf-8")
    assert main(["compare", str(kit_file), str(path)]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert words in err
    assert err.count("\n") == 2


@pytest.mark.parametrize(
    "arguments, words",
    [
        (["none.toml"], "none.toml: no such kit file"),
        (["./ideal"], "ideal: no such kit file"),
        (["ideal", "--at", "7e9"], "7000000000 Hz lies outside the readings"),
        (["ideal", "--at", "1e-300"], "cannot be computed at 1e-300 Hz"),
        (["ideal", "--csv", "--json"], "--csv and --json are asked for at once"),
    ],
)
def test_wrong_requests(kit_file, tmp_path, capsys, monkeypatch, arguments, words):
    monkeypatch.chdir(tmp_path)
    assert main(["compare", str(kit_file), *arguments]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert words in err
    assert err.count("\n") == 2


def test_ideal_is_a_word_unless_it_is_a_path(kit_file, tmp_path, capsys, monkeypatch):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "ideal").write_bytes(kit_file.read_bytes())
    assert "against ideal standards" in said(capsys, "compare", kit_file, "ideal")
    assert "the kits do not differ" in said(capsys, "compare", kit_file, "./ideal")
