"""`stdfit export`: files appear in a folder, over nothing that is not its own."""

import json
import shlex
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from stdfit.base.errors import RequestError
from stdfit.cli import main
from stdfit.data.readings import read_reading
from stdfit.validity.kit import curve
from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import read_kit

SMALL = Path(__file__).parents[1] / "files" / "valid" / "kit" / "small.toml"
FILES = ["joint-covariance.csv", "load.s1p", "open.s1p", "short.s1p", "standards.csv"]


def names(folder):
    return sorted(path.name for path in folder.iterdir())


def refused(capsys, *arguments):
    """Run what must be refused; return the two lines."""
    assert main([str(one) for one in arguments]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err.count("\n") == 2
    return err


def test_it_writes_and_says_what_to_do_next(kit_file, command, tmp_path):
    done = command(tmp_path, "export", kit_file, "deep/folder")
    assert (done.returncode, done.stderr) == (0, "")
    lines = done.stdout.splitlines()
    assert lines[0] == f"{Path('deep/folder/open.s1p')}: open"
    assert names(tmp_path / "deep" / "folder") == FILES
    for line in lines[-2:]:
        following = shlex.split(line.strip().removeprefix("next: ").removeprefix("stdfit ").split("  ")[0])
        assert command(tmp_path, *following).returncode == 0
    kit = read_kit(kit_file)
    sweep = read_reading(tmp_path / "deep" / "folder" / "short.s1p", exported=True)
    assert sweep.frequency_hz.size == 201
    assert (sweep.frequency_hz[0], sweep.frequency_hz[-1]) == (50e6, 6e9)
    expected, _ = curve(kit, kit.definition("short"), sweep.frequency_hz)
    np.testing.assert_allclose(sweep.gamma, expected, rtol=0, atol=1e-15)


@pytest.mark.parametrize(
    "options, expected",
    [
        (["--from", "1e9", "--to", "5e9", "--points", "9"], np.linspace(1e9, 5e9, 9)),
        (["--from", "1e8", "--to", "1e9", "--points", "11", "--spacing", "log"], np.geomspace(1e8, 1e9, 11)),
        (
            ["--at", *["8e8", "1e8", "2e8", "3e8", "4e8", "5e8", "6e8", "7e8", "1e8"]],
            np.arange(1e8, 9e8, 1e8),
        ),
    ],
)
def test_the_grid_is_the_users(kit_file, tmp_path, capsys, options, expected):
    assert main(["export", str(kit_file), str(tmp_path), "--json", *options]) == 0
    data = json.loads(capsys.readouterr().out)
    np.testing.assert_allclose(data["frequencies_hz"], expected, rtol=1e-12)
    assert [(Path(one["file"]).name, one["standard"]) for one in data["files"]] == [
        ("open.s1p", "open"),
        ("short.s1p", "short"),
        ("load.s1p", "load"),
        ("standards.csv", None),
        ("joint-covariance.csv", None),
    ]
    assert all(Path(one["file"]).is_file() for one in data["files"])
    np.testing.assert_allclose(
        read_reading(tmp_path / "open.s1p", exported=True).frequency_hz, expected, rtol=1e-12
    )


def test_its_own_files_are_overwritten_with_the_same_bytes(kit_file, tmp_path, capsys):
    assert main(["export", str(kit_file), str(tmp_path), "--points", "20"]) == 0
    assert main(["export", str(kit_file), str(tmp_path)]) == 0
    first = {path.name: path.read_bytes() for path in tmp_path.iterdir()}
    assert main(["export", str(kit_file), str(tmp_path)]) == 0
    assert {path.name: path.read_bytes() for path in tmp_path.iterdir()} == first
    assert capsys.readouterr().err == ""


def test_files_of_an_earlier_export_are_told(kit_file, tmp_path, capsys):
    assert main(["export", str(kit_file), str(tmp_path)]) == 0
    (tmp_path / "open.s1p").rename(tmp_path / "old.s1p")
    (tmp_path / "notes.txt").write_text("of the old open", encoding="utf-8")
    capsys.readouterr()
    assert main(["export", str(kit_file), str(tmp_path)]) == 0
    told = f"stdfit: {tmp_path / 'old.s1p'} is of an earlier export, and was left as it is\n"
    assert capsys.readouterr().err == told


@pytest.mark.parametrize("name", ["load.s1p", "standards.csv", "joint-covariance.csv"])
@pytest.mark.parametrize(
    "content", ["", "mine\n", "standard,frequency_hz,gamma_re,gamma_im,bound\n", "\xff" * 9999]
)
def test_a_file_of_somebody_else_is_kept_and_nothing_is_written(kit_file, tmp_path, capsys, name, content):
    (tmp_path / name).write_text(content, encoding="latin-1")
    err = refused(capsys, "export", kit_file, tmp_path)
    assert err.startswith(f"stdfit: {tmp_path / name}: exists and was not written by this command\n")
    assert names(tmp_path) == [name]
    assert (tmp_path / name).read_text(encoding="latin-1") == content


@pytest.mark.parametrize(
    "name, content",
    [
        ("open-1.s1p", "# Hz S RI R 50\n1 0 0\n"),
        ("both.S2P", ""),
        ("bench.toml", 'format = "stdfit-bench/1"\n'),
        ("autumn.toml", 'format = "stdfit-bench/1"\n'),
    ],
)
def test_no_definitions_beside_readings(kit_file, tmp_path, capsys, name, content):
    (tmp_path / name).write_text(content, encoding="utf-8")
    err = refused(capsys, "export", kit_file, tmp_path)
    assert err == (
        f"stdfit: {tmp_path}: holds readings or a bench file ('{name}'), and definitions beside them would pass for "
        f"readings\nname a folder of its own, such as {tmp_path / 'standards'}\n"
    )
    assert names(tmp_path) == [name]


def test_a_kit_file_beside_it_is_no_obstacle(kit_file, tmp_path):
    (tmp_path / "kit.toml").write_bytes(Path(kit_file).read_bytes())
    assert main(["export", str(tmp_path / "kit.toml"), str(tmp_path)]) == 0


def test_a_definition_among_the_readings_is_refused_by_a_fit(kit_file, tmp_path, capsys):
    bench = Path(kit_file).parent
    assert main(["export", str(kit_file), str(tmp_path / "standards")]) == 0
    for file in [*bench.glob("*.s1p"), bench / "bench.toml"]:
        (tmp_path / file.name).write_bytes(file.read_bytes())
    (tmp_path / "open-1.s1p").write_bytes((tmp_path / "standards" / "open.s1p").read_bytes())
    capsys.readouterr()
    err = refused(capsys, "fit", tmp_path)
    assert err.startswith(
        f"stdfit: {tmp_path / 'open-1.s1p'}: a definition that 'stdfit export' wrote, and no reading\n"
    )
    assert "kit.toml" not in names(tmp_path)


def test_places_where_no_export_can_go(kit_file, tmp_path, capsys):
    (tmp_path / "file").write_text("mine", encoding="utf-8")
    assert "a file stands where the folder should be" in refused(
        capsys, "export", kit_file, tmp_path / "file"
    )
    assert "below: cannot be made: " in refused(capsys, "export", kit_file, tmp_path / "file" / "below")
    (tmp_path / "out" / "short.s1p").mkdir(parents=True)
    assert "a folder stands where the file should go" in refused(capsys, "export", kit_file, tmp_path / "out")
    assert names(tmp_path / "out") == ["short.s1p"]
    (tmp_path / "links").mkdir()
    (tmp_path / "links" / "open.s1p").symlink_to(tmp_path / "nowhere")
    assert "was not written by this command" in refused(capsys, "export", kit_file, tmp_path / "links")


@pytest.mark.parametrize(
    "options, words",
    [
        (["--to", "6.1e9"], "6100000000 Hz lies outside the readings of 'open'"),
        (["--at", "7e9"], "7000000000 Hz lies outside the readings of 'open'"),
        (["--at", "nan"], "nan Hz lies outside"),
        (["--from", "2e9", "--to", "1e9"], "no band from 2000000000 to 1000000000 Hz"),
        (["--from", "-1"], "no band from -1"),
        (["--points", "1"], "at least two points"),
        (["--at", "1e9", "--points", "5"], "--at and --points are asked for at once"),
        (["--at", "1e9", "--from", "0"], "--at and --from are asked for at once"),
        (["--at", "1e9", "--spacing", "log"], "--at and --spacing are asked for at once"),
    ],
)
def test_wrong_grids_write_nothing(kit_file, tmp_path, capsys, options, words):
    assert words in refused(capsys, "export", kit_file, tmp_path / "out", *options)
    assert names(tmp_path) == []


def test_a_stop_in_the_middle_leaves_whole_files_only(kit_file, tmp_path, capsys, monkeypatch):
    from stdfit.writing import safely

    whole = safely.write_whole

    def full(path, text):
        if path.name == "load.s1p":
            raise RequestError(
                "cannot be written: No space left on device", "choose another place", file=path
            )
        whole(path, text)

    monkeypatch.setattr(safely, "write_whole", full)
    assert "No space left" in refused(capsys, "export", kit_file, tmp_path)
    assert names(tmp_path) == ["open.s1p", "short.s1p"]
    assert read_reading(tmp_path / "short.s1p", exported=True).frequency_hz.size == 201


def test_hostile_names_stay_in_the_folder(kit_file, tmp_path, capsys):
    kit = read_kit(kit_file)
    hostile = ("../../up", "/abs", "C:\\x? *")
    definitions = tuple(replace(one, name=name) for one, name in zip(kit.definitions, hostile, strict=True))
    (tmp_path / "kit.toml").write_text(
        kit_text(replace(kit, definitions=definitions, session=None)), encoding="utf-8"
    )
    assert main(["export", str(tmp_path / "kit.toml"), str(tmp_path / "out")]) == 0
    assert names(tmp_path / "out") == [
        "C-x.s1p",
        "abs.s1p",
        "joint-covariance.csv",
        "standards.csv",
        "up.s1p",
    ]
    assert names(tmp_path) == ["kit.toml", "out"]
    assert f"{tmp_path / 'out' / 'up.s1p'}: ../../up\n" in capsys.readouterr().out


def test_the_kit_on_the_shelf(tmp_path):
    assert main(["export", str(SMALL), str(tmp_path)]) == 0
    assert "standards.csv" in names(tmp_path)
