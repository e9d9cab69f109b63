"""`stdfit history`: a folder of kit files drawn from the demo's covariances (invented data)."""

import csv
import io
import json
from dataclasses import replace

import numpy as np
import pytest

from stdfit.cli import main
from stdfit.trials.histories import Change, draw_kits, own_sd
from stdfit.writing.history_text import COLUMNS
from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import read_kit


@pytest.fixture(scope="module")
def folder(kit_file, tmp_path_factory):
    """Six kits in which the open drifts, two months apart; one of them beside its bench in a folder of its own."""
    path, kit = tmp_path_factory.mktemp("shelf"), read_kit(kit_file)
    change = Change("open", "offset_delay_ps", 10.0 * own_sd(kit, "open", "offset_delay_ps"))
    for k, one in enumerate(draw_kits(kit, 6, change, np.random.default_rng(3))):
        day = f"2024-{2 * k + 1:02d}-15"
        target = path / "last" / "kit.toml" if k == 5 else path / f"{day}.toml"
        target.parent.mkdir(exist_ok=True)
        target.write_text(kit_text(replace(one.kit, measured=day)), encoding="utf-8")
    (path / "bench.toml").write_text('format = "stdfit-bench/1"\n', encoding="utf-8")
    (path / "last" / "bench.toml").write_text('format = "stdfit-bench/1"\n', encoding="utf-8")
    broken = (
        (path / "2024-01-15.toml").read_text(encoding="utf-8").replace("within = 0.02", "within = 2.0", 1)
    )
    (path / "broken.toml").write_text(broken, encoding="utf-8")
    return path


@pytest.fixture
def run(folder, capsys):
    def call(*options, where=folder):
        code = main(["history", str(where), *map(str, options)])
        out, err = capsys.readouterr()
        return code, out, err

    return call


def test_text(run):
    code, out, err = run("--same-calibration")
    assert (code, err) == (0, "")
    lines = out.splitlines()
    assert lines[0].endswith(": 6 kits, 2024-01-15 to 2024-11-15")
    assert "open: offset delay + Z0·C0 [ps]" in lines
    assert sum("last/kit.toml" in line for line in lines) >= 3
    assert "  left out: bench.toml: no kit file" in lines
    assert any(line.startswith("  left out: broken.toml: kit.within: ") for line in lines)
    assert not any("last/bench.toml" in line for line in lines)
    assert lines[-1].startswith("open: offset delay + Z0·C0: a drift of +")
    assert lines[-1].endswith(" matings")


def test_json_says_the_same(run):
    code, out, _ = run("--same-calibration", "--json", "--to", "1e9", "--within", "0.03")
    said = json.loads(out)
    assert code == 0
    course = said["courses"][0]
    assert (course["standard"], course["verdict"], course["per"]) == ("open", "drift", "mating")
    assert course["drift"]["low_95"] < course["drift"]["value"] < course["drift"]["high_95"]
    assert (course["left"]["to_hz"], course["left"]["within"]) == (1e9, 0.03)
    assert course["left"]["low"] < course["left"]["value"] < course["left"]["high"]
    assert said["courses"][1]["left"]["high"] is None
    assert [one["file"] for one in said["left_out"]] == ["bench.toml", "broken.toml"]


def test_other_names_are_told_beside_the_columns(folder, run, tmp_path):
    for k, path in enumerate(sorted(folder.glob("2024-*.toml"))):
        kit = read_kit(path)
        (tmp_path / path.name).write_text(kit_text(replace(kit, name=f"set {k % 2}")), encoding="utf-8")
    code, out, err = run("--csv", where=tmp_path)
    assert code == 0
    assert out.splitlines()[0] == ",".join(COLUMNS)
    assert (
        err.startswith("stdfit: warning: the kits have 2 names: 'set 0', 'set 1': ") and err.count("\n") == 1
    )
    code, out, err = run(where=tmp_path)
    assert "  the kits have 2 names: 'set 0', 'set 1': " in out and err == ""


def test_csv(run):
    code, out, _ = run("--csv")
    rows = list(csv.DictReader(io.StringIO(out)))
    assert code == 0
    assert tuple(rows[0]) == COLUMNS
    assert len(rows) == 18
    assert float(rows[0]["low_95"]) < float(rows[0]["value"]) < float(rows[0]["high_95"])
    assert [row["matings"] for row in rows[:6]] == ["20", "40", "60", "80", "100", "120"]


def test_plot_is_the_same_bytes_twice_and_overwrites_plots_alone(run, tmp_path):
    plot = tmp_path / "shelf.svg"
    code, _, err = run("--plot", plot)
    first = plot.read_bytes()
    assert code == 0
    assert str(plot) in err
    assert first.startswith(b"<?xml")
    assert b"<dc:date>" not in first
    assert run("--plot", plot)[0] == 0
    assert plot.read_bytes() == first
    plot.write_text("<svg/>", encoding="utf-8")
    code, out, err = run("--plot", plot)
    assert (code, out) == (2, "")
    assert "no plot of a history" in err
    assert plot.read_text(encoding="utf-8") == "<svg/>"


def test_plot_does_not_follow_a_link_that_leads_nowhere(run, tmp_path):
    plot, elsewhere = tmp_path / "shelf.svg", tmp_path / "elsewhere.svg"
    plot.symlink_to(elsewhere)
    code, out, err = run("--plot", plot)
    assert (code, out) == (2, "")
    assert "no plot of a history" in err
    assert plot.is_symlink()
    assert not elsewhere.exists()


def test_a_tolerance_that_no_definition_keeps_is_told_in_words(run):
    code, out, _ = run("--within", "1e-300")
    words = "not within 1e-300 even now, from the first reading on"
    assert code == 0
    assert any(words in line and "open" in line for line in out.splitlines())
    assert any(words in note for note in json.loads(run("--within", "1e-300", "--json")[1])["notes"])
    assert "even now" not in run()[1]


@pytest.mark.parametrize(
    "options, said",
    [
        (["--plot", "shelf.png"], "let its name end in .svg"),
        (["--plot", "no/such/shelf.svg"], "no such folder"),
        (["--csv", "--json"], "leave one of them out"),
        (["--to", "1e12"], "outside the readings of 'open'"),
    ],
)
def test_refusals(run, options, said):
    code, out, err = run(*options)
    assert (code, out) == (2, "")
    assert said in err
    assert err.count("\n") <= 2


def test_folders_without_a_history(run, tmp_path):
    code, out, err = run(where=tmp_path / "none")
    assert (code, out) == (2, "")
    assert "no such folder" in err
    code, out, err = run(where=tmp_path)
    assert (code, out) == (2, "")
    assert "fewer than two kits" in err
    (tmp_path / "fake.toml").write_text('format = "stdfit-kit/1"\n', encoding="utf-8")
    assert "fake.toml" in run(where=tmp_path)[2]
