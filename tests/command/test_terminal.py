"""On a terminal: a bar from two seconds on, lines that fit; in a pipe neither; with --quiet only results and errors."""

import json
import os
import re
import shutil
import struct
import subprocess
import sys
import time
from pathlib import Path

import pytest

from stdfit.cli import main
from stdfit.cli.fold import fold

fcntl = pytest.importorskip("fcntl", reason="a terminal is imitated as POSIX has it")
pty = pytest.importorskip("pty")
termios = pytest.importorskip("termios")
COMMAND = Path(sys.executable).with_name("stdfit")
# A command that lasts as long as it is told to; what it prints comes at the end.
SLOW = """
import sys, time
from stdfit import cli
from stdfit.cli import kit_commands, screen
def show(asked):
    with screen.progress("standards") as told:
        for done in range(10):
            time.sleep(float(sys.argv[2]) / 10)
            if told:
                told(done + 1, 10)
    screen.tell("warning: so it is")
    screen.print_text("the answer")
    screen.say("next: no more")
    return 0
kit_commands.show = show
sys.exit(cli.main(["show", "kit.toml", *sys.argv[3:]]))
"""


def on_terminal(*arguments, columns=80, **variables):
    """Run on a terminal of so many columns; return what it shows and the exit code."""
    outer, inner = pty.openpty()
    fcntl.ioctl(inner, termios.TIOCSWINSZ, struct.pack("HHHH", 40, columns, 0, 0))
    usual = {
        name: value for name, value in os.environ.items() if name not in ("NO_COLOR", "COLUMNS", "LINES")
    }
    with subprocess.Popen(
        [str(one) for one in arguments],
        stdin=inner,
        stdout=inner,
        stderr=inner,
        env={**usual, "TERM": "xterm", **variables},
    ) as done:
        os.close(inner)
        shown = b""
        while True:
            try:
                part = os.read(outer, 65536)
            except OSError:  # the other end is closed
                break
            if not part:
                break
            shown += part
    os.close(outer)
    return shown.decode().replace("\r\n", "\n"), done.returncode


def slow(seconds, *options, **variables):
    return on_terminal(sys.executable, "-c", SLOW, "-", seconds, *options, **variables)


def without_codes(text):
    return re.sub(r"\x1b\[[0-9;?]*[A-Za-z]", "", text)


COLOURS = r"\x1b\[[0-9;]*[39][0-9]m|\x1b\[38;"


def test_a_bar_appears_after_two_seconds_and_is_gone_at_the_end():
    shown, code = slow(2.8)
    assert code == 0
    assert "standards" in shown and "of 10" in without_codes(shown)
    assert re.search(COLOURS, shown)
    assert "\x1b[?25h" in shown, "the cursor is back"
    assert shown.endswith("stdfit: warning: so it is\nthe answer\nnext: no more\n")
    last = without_codes(shown).split("\r")[-1]
    assert "standards" not in last


def test_no_bar_before_two_seconds():
    shown, code = slow(0.5)
    assert (shown, code) == ("stdfit: warning: so it is\nthe answer\nnext: no more\n", 0)


def test_no_colour_where_none_is_wanted():
    shown, _ = slow(2.4, NO_COLOR="1")
    assert "standards" in shown
    assert re.search(COLOURS, shown) is None


def test_no_bar_on_a_terminal_that_cannot_take_it_back():
    shown, _ = slow(2.4, TERM="dumb")
    assert shown == "stdfit: warning: so it is\nthe answer\nnext: no more\n"


def test_quiet_is_quiet_on_a_terminal():
    assert slow(2.4, "--quiet") == ("the answer\n", 0)


def test_lines_fit_the_terminal_and_stay_as_they_are_in_a_pipe(command, kit_file):
    piped = command(kit_file.parent, "show", "kit.toml").stdout
    assert max(map(len, piped.splitlines())) > 100
    for columns in (80, 100):
        shown, code = on_terminal(COMMAND, "show", kit_file, columns=columns, TERM="dumb")
        assert code == 0
        assert max(map(len, shown.splitlines())) <= columns
        # Nothing is lost: the words are those of the pipe, in their order.
        assert shown.split() == piped.split()
        assert "\x1b" not in shown


def test_warnings_fit_the_terminal(command, demo, tmp_path):
    folder, _ = demo
    text = (folder / "bench" / "bench.toml").read_text(encoding="utf-8")
    bench = folder / "bench" / "unstated.toml"
    bench.write_text(
        re.sub(r"\[analyser.residual\].*?(?=\n\[\[)", "", text, flags=re.DOTALL), encoding="utf-8"
    )
    shown, code = on_terminal(COMMAND, "fit", bench, "-o", tmp_path / "k.toml", TERM="dumb")
    assert code == 0
    warning = shown[shown.index("stdfit: warning: no analyser residuals") :].splitlines()
    assert len(warning[0]) <= 80 and warning[1].startswith("  ")


@pytest.mark.parametrize(
    "arguments",
    [
        ("fit", "bench", "-o", "other.toml"),
        ("export", "bench/kit.toml", "standards"),
        ("demo", "--out", "again"),
        ("new", "drafted"),
    ],
    ids=lambda arguments: arguments[0],
)
def test_quiet_commands_that_write_files_say_nothing(demo, arguments, tmp_path, monkeypatch, capsys):
    shutil.copytree(demo[0] / "bench", tmp_path / "bench")
    (tmp_path / "drafted").mkdir()
    for file in (tmp_path / "bench").glob("*.s1p"):
        shutil.copy(file, tmp_path / "drafted")
    monkeypatch.chdir(tmp_path)
    before = set(tmp_path.rglob("*"))
    assert main([*arguments, "--quiet"]) == 0
    assert capsys.readouterr() == ("", "")
    assert set(tmp_path.rglob("*")) > before


@pytest.mark.parametrize(
    "arguments",
    [("show",), ("limit",), ("curve", "--points", "3"), ("sheet",), ("device",), ("compare", "ideal")],
)
def test_quiet_commands_that_answer_still_do(kit_file, capsys, arguments):
    call = [arguments[0], str(kit_file), *arguments[1:]]
    assert main(call) == 0
    loud = capsys.readouterr()
    assert main([*call, "--quiet"]) == 0
    quiet = capsys.readouterr()
    assert quiet.out == loud.out != ""
    assert quiet.err == ""


def test_quiet_json_is_json_alone(command, demo):
    done = command(demo[0], "fit", "bench", "-o", "json.toml", "--json", "--quiet")
    assert json.loads(done.stdout)["kit_file"] == "json.toml"
    assert (done.stderr, done.returncode) == ("", 0)


def test_quiet_errors_are_told(command, tmp_path):
    done = command(tmp_path, "fit", "nowhere.toml", "--quiet")
    assert done.returncode == 2
    assert done.stderr.startswith("stdfit: nowhere.toml: no such bench file")


def test_every_command_can_be_quiet(capsys):
    with pytest.raises(SystemExit):
        main(["--help"])
    names = re.findall(r"^    ([a-z]+) ", capsys.readouterr().out, re.MULTILINE)
    assert len(names) > 15
    for name in names:
        with pytest.raises(SystemExit):
            main([name, "--help"])
        assert "--quiet" in capsys.readouterr().out, name


@pytest.mark.parametrize("columns", [80, 64])
@pytest.mark.parametrize("arguments", [("compare", "ideal"), ("limit",), ("device",), ("show",)])
def test_every_table_fits_the_terminal(kit_file, command, arguments, columns):
    call = (arguments[0], kit_file, *arguments[1:])
    piped = command(kit_file.parent, *call).stdout
    shown, code = on_terminal(COMMAND, *call, columns=columns, TERM="dumb")
    assert code == 0
    assert max(map(len, shown.splitlines())) <= columns
    assert sorted(shown.split()) == sorted(piped.split())


def test_a_wide_table_is_folded_in_its_columns():
    table = """\
In words:
  standard  verdict                by chance  largest          change known within
  open      too uncertain to tell  100 %      0.85 at 1.5 GHz  0.036 up to 3.9 GHz
            changed                                            |Γ| = 1
and so on"""
    assert (
        fold(table, 60)
        == """\
In words:
  standard  verdict      by chance  largest      change
                                                 known
                                                 within
  open      too          100 %      0.85 at      0.036 up to
            uncertain               1.5 GHz      3.9 GHz
            to tell
            changed                              |Γ| = 1
and so on"""
    )
    # Where words do not allow it, lines are folded as lines.
    assert max(map(len, fold(table, 48).splitlines())) <= 48
    bars = "asked                good to   ends because\n|Z| near 75 Ω within 3 %  5.41 GHz  load: most of it, and more"
    assert max(map(len, fold(bars, 50).splitlines())) <= 50


def test_folding():
    text = "  open   4.22 GHz  analyser residuals, 78 % of the variance, most of it tracking"
    assert fold(text, 200) == text
    assert fold(text, 50) == (
        "  open   4.22 GHz  analyser residuals, 78 % of the\n                   variance, most of it tracking"
    )
    note = "  open: a length of 12 GHz that is told and told and told again"
    assert fold(note, 24).splitlines()[1].startswith("    ")
    assert fold("a b", 1) == "a b"
    assert fold("| a | " + "b " * 100, 20) == "| a | " + "b " * 100
    assert "12\n" not in fold(note, 50 - 28)


def test_folding_nonsense_takes_no_time():
    began = time.perf_counter()
    for text in (" " * 10**5, "x" * 10**5, "a  " * 10**5, "\n" * 10**5):
        assert fold(text, 80).split() == text.split()
    assert time.perf_counter() - began < 5.0
