"""What goes wrong is told in one or two lines on stderr, with the right exit code, and no traceback."""

import os
import signal
import subprocess
import sys
import textwrap
from pathlib import Path

import pytest

from stdfit.base.errors import FitError
from stdfit.cli import main

SMALL = Path(__file__).parents[1] / "files" / "valid" / "kit" / "small.toml"


def told(done, code):
    """Check an answer that is not a result; return its lines."""
    assert done.returncode == code
    assert done.stdout == ""
    lines = done.stderr.splitlines()
    assert 1 <= len(lines) <= 2
    assert lines[0].startswith("stdfit: ")
    return lines


USAGE = {
    "nothing": ([], "no command given"),
    "unknown command": (["fti"], "no command 'fti'"),
    "unknown option": (["show", SMALL, "--colour"], "unrecognized arguments: --colour"),
    "no kit": (["show"], "required: KIT"),
    "tolerance of 1": (["limit", SMALL, "--within", "1"], "'1' does not lie between 0 and 1"),
    "tolerance of 0": (["limit", SMALL, "--within", "0"], "'0' does not lie between 0 and 1"),
    "tolerance nan": (["limit", SMALL, "--within", "nan"], "'nan' does not lie between 0 and 1"),
    "tolerance in words": (["limit", SMALL, "--within", "two"], "'two' is not a number"),
    "no points": (["curve", SMALL, "--points", "0"], "no whole number between 1 and 100000"),
    "half a point": (["curve", SMALL, "--points", "1.5"], "no whole number between 1 and 100000"),
    "endless points": (["curve", SMALL, "--points", "inf"], "no whole number between 1 and 100000"),
    "frequency in words": (["curve", SMALL, "--at", "1GHz"], "'1GHz' is not a number"),
}


@pytest.mark.parametrize("arguments, words", USAGE.values(), ids=USAGE)
def test_wrong_usage(arguments, words, capsys):
    with pytest.raises(SystemExit) as ended:
        main([str(one) for one in arguments])
    assert ended.value.code == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert words in err
    assert err.startswith("stdfit: ")
    assert err.count("\n") == 2
    assert "--help" in err.splitlines()[1]


REQUESTS = {
    "no such kit": (["show", "none.toml"], "none.toml: no such kit file"),
    "no such bench": (["fit", "none"], "none: no such bench file"),
    "folder without bench": (["fit", "."], "the folder holds no bench.toml"),
    "folder without readings": (["new", "."], "no readings of standards found"),
    "no such folder": (["new", "none"], "none: no such folder"),
    "unknown standard": (["curve", SMALL, "--standard", "thru"], "no standard named 'thru'"),
    "above the readings": (["curve", SMALL, "--at", "7e9"], "7000000000 Hz lies outside the readings"),
    "zero frequency": (["curve", SMALL, "--at", "0"], "0 Hz lies outside the readings"),
    "frequency nan": (["curve", SMALL, "--at", "nan"], "nan Hz lies outside the readings"),
}


@pytest.mark.parametrize("arguments, words", REQUESTS.values(), ids=REQUESTS)
def test_wrong_input(arguments, words, capsys, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    assert main([str(one) for one in arguments]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert words in err
    assert err.count("\n") == 2


def test_the_installed_command_ends_with_the_same_codes(command, tmp_path):
    assert "no such kit file" in told(command(tmp_path, "show", "none.toml"), 2)[0]
    assert "no command 'fti'" in told(command(tmp_path, "fti"), 2)[0]
    assert command(tmp_path, "show", SMALL).returncode == 0
    version = command(tmp_path, "--version")
    assert version.returncode == 0
    assert version.stdout.startswith("stdfit ")


def test_sound_input_without_a_fit_ends_with_1(monkeypatch, capsys, tmp_path):
    def fails(*_, **__):
        raise FitError("the fit did not settle", "look at the readings")

    monkeypatch.setattr("stdfit.pipeline.fit_bench", fails)
    monkeypatch.setattr("stdfit.data.bench.read_bench", lambda path: None)
    monkeypatch.setattr("stdfit.cli.bench_commands.refuse_inputs", lambda *_: None)
    assert main(["fit", str(tmp_path), "-o", str(tmp_path / "kit.toml")]) == 1
    assert capsys.readouterr() == ("", "stdfit: the fit did not settle\nlook at the readings\n")


def test_a_fault_of_the_program_ends_with_3_and_saves_the_traceback(monkeypatch, capsys, tmp_path):
    def faulty(*_, **__):
        raise ZeroDivisionError("forced by a test")

    monkeypatch.setattr("tempfile.tempdir", str(tmp_path))
    monkeypatch.setattr("stdfit.writing.summary.summary", faulty)
    assert main(["show", str(SMALL)]) == 3
    out, err = capsys.readouterr()
    assert out == ""
    assert err.count("\n") == 1
    (saved,) = tmp_path.iterdir()
    assert err.rstrip().endswith(str(saved))
    text = saved.read_text(encoding="utf-8")
    assert text.startswith("Traceback")
    assert "forced by a test" in text


def test_a_file_that_may_not_be_read_is_wrong_input(monkeypatch, capsys, tmp_path):
    """A fault of the file system that no reader foresaw is still the user's to mend."""

    def forbidden(*_, **__):
        raise PermissionError(13, "Permission denied", "readings")

    monkeypatch.setattr(Path, "iterdir", forbidden)
    monkeypatch.setattr("stdfit.cli._drop_output", lambda: None)
    assert main(["new", str(tmp_path)]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err.splitlines()[0] == "stdfit: readings: Permission denied"
    assert err.count("\n") == 2


def test_no_file_is_overwritten_that_is_no_kit_file(kit_file, command, tmp_path):
    bench = kit_file.parent / "bench.toml"
    before = bench.read_bytes()
    (tmp_path / "notes.txt").write_text("mine")
    (tmp_path / "folder").mkdir()
    for target in (bench, tmp_path / "notes.txt", kit_file.parent / "open-1.s1p"):
        lines = told(command(tmp_path, "fit", bench, "-o", target), 2)
        assert lines == [f"stdfit: {target}: exists and is no kit file", "name another file with -o"]
    assert bench.read_bytes() == before
    assert (tmp_path / "notes.txt").read_text() == "mine"
    assert "a folder stands where" in told(command(tmp_path, "fit", bench, "-o", "folder"), 2)[0]
    assert "no such folder" in told(command(tmp_path, "fit", bench, "-o", "none/kit.toml"), 2)[0]
    assert sorted(path.name for path in tmp_path.iterdir()) == ["folder", "notes.txt"]


def test_a_place_where_no_kit_can_go_is_refused_before_the_work(kit_file, monkeypatch, tmp_path, capsys):
    def worked(*_, **__):
        pytest.fail("the fit was made for nothing")

    monkeypatch.setattr("stdfit.pipeline.fit_bench", worked)
    assert main(["fit", str(kit_file.parent), "-o", str(tmp_path)]) == 2
    assert "a folder stands where" in capsys.readouterr().err


def test_new_keeps_a_bench_file_that_is_there(demo, command):
    folder = demo[0] / "bench"
    before = (folder / "bench.toml").read_bytes()
    assert "exists already" in told(command(folder, "new", "."), 2)[0]
    assert (folder / "bench.toml").read_bytes() == before


def test_a_reader_that_goes_away_is_no_fault(command, kit_file):
    process = subprocess.Popen(
        [Path(sys.executable).with_name("stdfit"), "curve", kit_file, "--points", "20000"],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
    )
    assert process.stdout.readline() == b"standard,frequency_hz,gamma_re,gamma_im,bound\n"
    process.stdout.close()
    assert process.stderr.read() == b""
    process.stderr.close()
    assert process.wait(60) == 0


def test_output_on_a_full_disk_is_told(command, tmp_path):
    if not os.path.exists("/dev/full"):  # noqa: PTH110
        pytest.skip("this system has no /dev/full")
    with open("/dev/full", "w") as full:  # noqa: PTH123
        done = subprocess.run(
            [Path(sys.executable).with_name("stdfit"), "show", SMALL],
            stdout=full,
            stderr=subprocess.PIPE,
            encoding="utf-8",
            timeout=60,
        )
    assert done.returncode == 2
    assert done.stderr.splitlines()[0] == "stdfit: No space left on device"
    assert done.stderr.count("\n") == 2


STOPPED = """
    import os, signal, sys
    import stdfit.pipeline
    def stopped(*_, **__):
        os.kill(os.getpid(), signal.SIGINT)
        while True: pass
    stdfit.pipeline.fit_bench = stopped
    from stdfit.cli import main
    sys.exit(main(["fit", sys.argv[1], "-o", "kit.toml"]))
"""


def test_a_stop_by_the_user(kit_file, tmp_path):
    done = subprocess.run(
        [sys.executable, "-c", textwrap.dedent(STOPPED), kit_file.parent],
        cwd=tmp_path,
        capture_output=True,
        encoding="utf-8",
        timeout=60,
    )
    assert done.returncode == 128 + signal.SIGINT
    assert (done.stdout, done.stderr) == ("", "stdfit: stopped; nothing was half written\n")
    assert list(tmp_path.iterdir()) == []
