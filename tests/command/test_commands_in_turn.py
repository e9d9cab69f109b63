"""new → fit → show → curve → limit, on the demo's readings, as a user would go."""

import csv
import io
import json
import shutil

import numpy as np
import pytest

from stdfit.cli import main
from stdfit.validity.kit import curve
from stdfit.validity.limits import limits
from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import read_kit
from stdfit.writing.summary import limit_lines, summary

HEADER = ["standard", "frequency_hz", "gamma_re", "gamma_im", "bound"]


@pytest.fixture(scope="module")
def shed(demo, tmp_path_factory, command):
    """A folder with readings only, then `new`, then `fit`."""
    folder = tmp_path_factory.mktemp("shed")
    for path in (demo[0] / "bench").glob("*.s1p"):
        shutil.copy(path, folder)
    new = command(folder, "new", ".")
    fit = command(folder, "fit", ".")
    return folder, new, fit


def test_new_names_what_it_found_and_what_to_do_next(shed):
    folder, new, _ = shed
    assert (new.returncode, new.stderr) == (0, "")
    lines = new.stdout.splitlines()
    assert lines[0].startswith("open: open-1.s1p, open-2.s1p")
    assert lines[-2] == "bench file: bench.toml"
    assert lines[-1].endswith("stdfit fit .")
    assert "<--" in (folder / "bench.toml").read_text(encoding="utf-8")


def test_fit_ends_with_verdict_and_next_command(shed):
    folder, _, fit = shed
    assert fit.returncode == 0
    lines = fit.stdout.splitlines()
    assert lines[-4] == "kit file: kit.toml"
    assert lines[-3].startswith("within 0.02 the kit is good to ")
    assert lines[-2].startswith("next: stdfit plan bench.toml")
    assert lines[-1].lstrip().startswith("stdfit limit kit.toml")
    assert (folder / "kit.toml").exists()


def test_show_says_what_fit_said(shed, command):
    folder, _, fit = shed
    show = command(folder, "show", "kit.toml")
    assert (show.returncode, show.stderr) == (0, "")
    assert fit.stdout.startswith(show.stdout.split("\nWarnings\n")[0].rstrip("\n"))


def test_fit_takes_a_bench_file_a_tolerance_and_a_name(shed, capsys, tmp_path):
    folder, _, _ = shed
    other = str(tmp_path / "other.toml")
    assert main(["fit", str(folder / "bench.toml"), "--within", "0.05", "-o", other, "--json"]) == 0
    data = json.loads(capsys.readouterr().out)
    kit = read_kit(tmp_path / "other.toml")
    assert data["within"] == kit.within == 0.05
    assert data["limit_hz"] == kit.limit.limit_hz
    assert data["kit_file"] == str(tmp_path / "other.toml")
    assert kit.limit.limit_hz >= read_kit(folder / "kit.toml").limit.limit_hz


def test_a_bench_file_of_another_name_gives_the_same_kit_under_that_name(shed, command):
    folder, _, _ = shed
    shutil.copy(folder / "bench.toml", folder / "shelf.toml")
    assert command(folder, "fit", "shelf.toml").returncode == 0
    without_date = [
        [line for line in path.read_text(encoding="utf-8").splitlines() if "created" not in line]
        for path in (folder / "shelf.kit.toml", folder / "kit.toml")
    ]
    assert without_date[0] == without_date[1]


def test_the_kit_file_is_all_that_later_commands_need(shed, command, tmp_path):
    shutil.copy(shed[0] / "kit.toml", tmp_path)
    kit = read_kit(tmp_path / "kit.toml")
    assert command(tmp_path, "show", "kit.toml").stdout == summary(kit)
    assert command(tmp_path, "limit", "kit.toml").stdout == limit_lines(kit, limits(kit, [kit.within]))
    assert rows_of_curve(command(tmp_path, "curve", "kit.toml", "--at", "1e9").stdout)[0][0] == "open"


def test_a_kit_file_read_and_written_is_the_same(kit_file):
    assert kit_text(read_kit(kit_file)).encode() == kit_file.read_bytes()


def test_show_as_json(kit_file, command):
    done = command(kit_file.parent, "show", kit_file, "--json")
    data = json.loads(done.stdout)
    kit = read_kit(kit_file)
    assert data["reason"] == kit.limit.reason
    assert [one["name"] for one in data["standards"]] == ["open", "short", "load"]
    for one, definition in zip(data["standards"], kit.definitions, strict=True):
        assert [p["value"] for p in one["parameters"]] == definition.values.tolist()


def rows_of_curve(text):
    header, *rows = csv.reader(io.StringIO(text))
    assert header == HEADER
    return [(name, *map(float, numbers)) for name, *numbers in rows]


def test_curve_by_default(kit_file, command):
    """0 < f ≤ the top of the fit range, each standard in turn, all digits."""
    done = command(kit_file.parent, "curve", kit_file)
    assert (done.returncode, done.stderr) == (0, "")
    rows = rows_of_curve(done.stdout)
    kit = read_kit(kit_file)
    for definition in kit.definitions:
        own = np.array([row[1:] for row in rows if row[0] == definition.name])
        assert len(own) == 201
        assert own[0, 0] > 0.0
        assert own[-1, 0] == definition.fit_top_hz
        assert (np.diff(own[:, 0]) > 0.0).all()
        gamma, bound = curve(kit, definition, own[:, 0])
        np.testing.assert_array_equal(own[:, 1] + 1j * own[:, 2], gamma)
        np.testing.assert_array_equal(own[:, 3], bound)
    assert [row[0] for row in rows[::201]] == ["open", "short", "load"]


@pytest.fixture
def curve_of(kit_file, capsys):
    """Return a function that runs `curve` in this process and returns what it prints."""

    def run(*arguments):
        assert main(["curve", str(kit_file), *arguments]) == 0
        out, err = capsys.readouterr()
        assert err == ""
        return out

    return run


def test_curve_of_some_standards_at_some_points(kit_file, curve_of):
    rows = rows_of_curve(curve_of("--standard", "load", "--standard", "open", "--points", "7"))
    assert [row[0] for row in rows] == ["load"] * 7 + ["open"] * 7
    one = rows_of_curve(curve_of("--standard", "short", "--points", "1"))
    assert [row[:2] for row in one] == [("short", read_kit(kit_file).definition("short").fit_top_hz)]
    rows = rows_of_curve(curve_of("--at", "1e9", "2.5e9", "50000000"))
    assert [row[1] for row in rows] == [1e9, 2.5e9, 5e7] * 3
    last = rows_of_curve(curve_of("--standard", "open", "--at", "6e9"))
    assert [row[1] for row in last] == [6e9]  # up to the last reading, above the fit range


def test_curve_as_json(curve_of):
    data = json.loads(curve_of("--at", "1e9", "--json"))["curve"]
    assert [list(row) for row in data] == [HEADER] * 3
    assert [tuple(row.values()) for row in data] == rows_of_curve(curve_of("--at", "1e9"))


def test_limit_as_json_has_the_fixed_form(kit_file, command):
    done = command(kit_file.parent, "limit", kit_file, "--within", "0.01", "0.05", "--json")
    assert (done.returncode, done.stderr) == (0, "")
    data = json.loads(done.stdout)
    assert list(data) == ["limits"]
    assert [one["within"] for one in data["limits"]] == [0.01, 0.05]
    kit = read_kit(kit_file)
    for one, (whole, each) in zip(data["limits"], limits(kit, [0.01, 0.05]), strict=True):
        assert list(one) == ["within", "kit", "standards"]
        assert one["kit"] == {"limit_hz": whole.limit_hz, "reason": whole.reason}
        assert one["standards"] == [
            {"name": name, "limit_hz": limit.limit_hz, "reason": limit.reason}
            for name, limit in zip(["open", "short", "load"], each, strict=True)
        ]


def test_limit_by_default_is_the_limit_in_the_file(kit_file, command):
    data = json.loads(command(kit_file.parent, "limit", kit_file, "--json").stdout)
    kit = read_kit(kit_file)
    (one,) = data["limits"]
    assert one["within"] == kit.within
    assert one["kit"] == {"limit_hz": kit.limit.limit_hz, "reason": kit.limit.reason}


def test_a_standard_that_fails_from_the_first_point_on_has_0(kit_file, command):
    done = command(kit_file.parent, "limit", kit_file, "--within", "1e-6", "--json")
    (one,) = json.loads(done.stdout)["limits"]
    assert [standard["limit_hz"] for standard in one["standards"]] == [0.0, 0.0, 0.0]
    assert one["kit"]["limit_hz"] == 0.0
    assert all(standard["reason"] for standard in one["standards"])


def test_every_result_is_json_without_nan(kit_file, capsys):
    for arguments in (["show"], ["curve", "--points", "3"], ["limit"]):
        assert main([arguments[0], str(kit_file), *arguments[1:], "--json"]) == 0
        json.loads(capsys.readouterr().out, parse_constant=lambda word: pytest.fail(word))
