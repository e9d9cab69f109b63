"""docs/walkthrough.md: its files are written, its commands run, and what they print is what stands in the page.

The readings are those that the page has the program write, simulated with a fixed seed (invented data).
"""

import re
import shlex
import shutil
from pathlib import Path

import pytest
from printed import missing

from stdfit.cli import main

PAGE = Path(__file__).parents[1] / "docs" / "walkthrough.md"


def steps_of(text):
    """Yield what the page does: (line, file, content) and (line, command, what it prints)."""
    for found in re.finditer(r"^```(toml|console)\n(.*?)^```$", text, re.MULTILINE | re.DOTALL):
        line = text.count("\n", 0, found.start()) + 1
        if found[1] == "toml":
            yield line, None, found[2]
            continue
        for command, printed in re.findall(r"^\$ (.*)\n((?:(?!\$ ).*\n)*)", found[2], re.MULTILINE):
            yield line, command, printed


def run(command, capsys):
    """Run one line of the page; return what it prints on standard output."""
    program, *arguments = shlex.split(command)
    if program == "cp":
        shutil.copy(*arguments)
        return ""
    assert program == "stdfit", command
    main(arguments)
    return capsys.readouterr().out


def test_the_page_is_what_happens(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    text = PAGE.read_text(encoding="utf-8")
    ran = set()
    for line, command, content in steps_of(text):
        if command is None:
            (name,) = re.findall(r"^# (\S+\.toml)", content.splitlines()[0])
            (tmp_path / name).write_text(content, encoding="utf-8")
            continue
        printed = run(command, capsys)
        gap = missing(content, printed)
        assert gap is None, f"walkthrough.md, line {line}, {command}: {gap}\n{printed}"
        ran.add(" ".join(command.split()[:2]))
    assert {f"stdfit {name}" for name in ("demo", "new", "fit", "plan", "sheet", "wear", "check")} <= ran


def test_the_page_is_short():
    assert len(PAGE.read_text(encoding="utf-8").splitlines()) <= 200


@pytest.mark.parametrize(
    ("shown", "printed", "gap"),
    [
        ("a  1.0  b …\n", "a 1.01 b c 7\n", None),
        ("a  1.0  b …\n", "a 1.0 d c\n", "a  1.0  b …"),
        ("a 0.0090\n", "a 0.0099\n", "a 0.0090"),
        ("a 1.00\n…\nc\n", "a 1.01\nb\nc\n", None),
        ("a\n…\n", "a\nb\nc\n", None),
        ("a  1\n", "a 1\n", None),
        ("a 1\n", "a 2\n", "a 1"),
        ("a\nc\n", "a\nb\nc\n", "c"),
        ("a\n", "a\nb\n", "(and then) b"),
        ("…\nd\n", "a\nb\n", "d"),
    ],
)
def test_the_test_sees_what_is_stale(shown, printed, gap):
    assert missing(shown, printed) == gap
