"""Names with line ends and escape sequences never reach the terminal as they are; any output encoding will do."""

import json
import os
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

from stdfit.cli import main

SMALL = Path(__file__).parents[1] / "files" / "valid" / "kit" / "small.toml"
ROOT = Path(__file__).parents[2]
NAMES = ["\x1b[31mred", "a\nb", "\x9b2J", "\u202eevil", "\u2028x", "x\udcff", "\x07"]
PLACES = {
    "show": ["show", "NAME"],
    "curve": ["curve", "NAME"],
    "limit": ["limit", "NAME"],
    "device": ["device", "NAME"],
    "sheet": ["sheet", "NAME"],
    "compare": ["compare", str(SMALL), "NAME"],
    "wear": ["wear", str(SMALL), "NAME"],
    "check": ["check", str(SMALL), "NAME"],
    "export": ["export", "NAME", "out"],
    "fit": ["fit", "NAME"],
    "plan": ["plan", "NAME"],
    "new": ["new", "NAME"],
    "adapter": ["adapter", "NAME"],
    "history": ["history", "NAME"],
    "repeat": ["repeat", "NAME"],
    "trials": ["trials", "NAME"],
}


def harmless(text):
    assert all(letter.isprintable() for letter in text.replace("\n", "")), ascii(text)
    text.encode("utf-8")


def wrong(arguments, capsys):
    """Run a command that must refuse; return its message."""
    try:
        code = main(arguments)
    except SystemExit as ended:
        code = ended.code
    out, err = capsys.readouterr()
    assert (code, out) == (2, "")
    assert err.count("\n") == 2
    harmless(err)
    return err


@pytest.mark.parametrize("name", NAMES, ids=ascii)
@pytest.mark.parametrize("command", PLACES)
def test_names_that_are_not_there(command, name, capsys, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    said = wrong([name if one == "NAME" else one for one in PLACES[command]], capsys)
    assert ascii(name)[1:-1].replace("\\'", "'") in ascii(said).replace("\\\\", "\\")


@pytest.mark.parametrize("name", NAMES, ids=ascii)
@pytest.mark.parametrize(
    "arguments",
    [
        ["NAME"],
        ["show", str(SMALL), "NAME"],
        ["show", str(SMALL), "--xNAME"],
        ["curve", str(SMALL), "--at", "NAME"],
        ["curve", str(SMALL), "--points", "NAME"],
        ["curve", str(SMALL), "--standard", "NAME"],
        ["limit", str(SMALL), "--within", "NAME"],
        ["device", str(SMALL), "--standards", "NAME", "open", "open"],
        ["sheet", str(SMALL), "--accepts", "NAME"],
        ["sheet", str(SMALL), "--units", "NAME=NAME"],
        ["sheet", str(SMALL), "--digits", "NAME"],
        ["export", str(SMALL), "out", "--spacing", "NAME"],
        ["trials", "--seed", "NAME"],
        ["trials", "--family", "NAME"],
    ],
    ids=lambda one: " ".join(one).replace(str(SMALL), "KIT"),
)
def test_values_of_options(arguments, name, capsys, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    wrong([one.replace("NAME", name) for one in arguments], capsys)


@pytest.mark.parametrize("target", [".", "", "..", "/", "./", "\0", "x" * 300, "a/" * 3000])
@pytest.mark.parametrize("command", ["fit", "adapter", "report", "history"])
def test_places_where_no_file_can_go(command, target, readings, capsys, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    assert main(["new", "in"]) == 0
    capsys.readouterr()
    where = {"report": str(SMALL), "history": "."}.get(command, "in")
    wrong([command, where, "--plot" if command == "history" else "-o", target], capsys)
    assert [path.name for path in tmp_path.iterdir()] == ["in"]


@pytest.fixture
def readings(tmp_path):
    folder = tmp_path / "in"
    folder.mkdir()
    for path in (ROOT / "kits" / "boathouse-loft-sma").glob("*-[12].s1p"):
        shutil.copy(path, folder)
    return folder


@pytest.mark.parametrize("name", NAMES, ids=ascii)
def test_results_under_such_names(name, readings, capsys, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    folder = readings.rename(tmp_path / name)
    shutil.copy(folder / "load-1.s1p", folder / f"{name}.s1p")
    assert main(["new", name]) == 0
    target = f"{name}.toml"
    assert main(["fit", name, "-o", target]) == 0
    assert main(["export", target, f"{name}-out", "--points", "9"]) == 0
    assert main(["history", "."]) == 2
    out, err = capsys.readouterr()
    harmless(out + err)
    assert main(["fit", name, "-o", target, "--json"]) == 0
    out, err = capsys.readouterr()
    harmless(out + err)
    assert json.loads(out)["kit_file"] == target
    assert (tmp_path / target).is_file()


@pytest.mark.parametrize("code", ["ascii", "latin-1", "cp1252", "utf-8"])
@pytest.mark.parametrize(
    "arguments", [["show", SMALL], ["show", SMALL, "--json"], ["fit", "--help"], ["show", "Ω.toml"]]
)
def test_a_terminal_that_knows_few_letters(code, arguments, tmp_path):
    done = subprocess.run(
        [sys.executable, "-m", "stdfit.cli", *arguments],
        cwd=tmp_path,
        capture_output=True,
        env={**os.environ, "PYTHONIOENCODING": code, "PYTHONUTF8": "0"},
        timeout=120,
    )
    out, err = done.stdout.decode(code), done.stderr.decode(code)
    assert done.returncode == (2 if "Ω.toml" in arguments else 0), err
    assert "fault of the program" not in err and "Traceback" not in err
    if "--json" in arguments:
        assert json.loads(out)["standards"]
