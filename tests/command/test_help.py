"""Help and wrong usage answer at once: nothing heavy is loaded for them."""

import re
import subprocess
import sys
from pathlib import Path

import pytest

HEAVY = {"numpy", "scipy", "lmfit", "pandas", "matplotlib", "tomlkit", "msgspec", "rich", "asyncio"}
COMMANDS = ("demo", "new", "fit", "show", "curve", "limit")


def loaded_by(*arguments):
    """Return the top packages that the installed command imports, and its exit code."""
    script = Path(sys.executable).with_name("stdfit")
    done = subprocess.run(
        [sys.executable, "-X", "importtime", script, *arguments],
        capture_output=True,
        encoding="utf-8",
        timeout=60,
    )
    names = re.findall(r"^import time:.*\| +(\S+)$", done.stderr, re.MULTILINE)
    assert "argparse" in names
    return {name.split(".")[0] for name in names}, done.returncode


@pytest.mark.parametrize(
    "arguments, code",
    [
        (["--help"], 0),
        (["fit", "--help"], 0),
        (["fti"], 2),
        (["fit"], 2),
        (["limit", "k", "--within", "2"], 2),
    ],
)
def test_nothing_heavy_is_loaded(command, arguments, code):
    loaded, ended = loaded_by(*arguments)
    assert ended == code
    assert loaded & HEAVY == set()


def test_this_test_sees_what_is_loaded(command, kit_file):
    loaded, ended = loaded_by("show", str(kit_file))
    assert ended == 0
    assert {"numpy", "msgspec"} <= loaded
    assert loaded & {"lmfit", "pandas", "matplotlib"} == set()


def test_show_curve_and_limit_need_no_fit(command, kit_file):
    """The kit file holds all that they need, and lmfit takes a second to load."""
    for name in ("curve", "limit"):
        loaded, ended = loaded_by(name, str(kit_file))
        assert ended == 0
        assert loaded & {"lmfit", "pandas", "matplotlib"} == set()


def test_help_names_every_command(command, tmp_path):
    text = command(tmp_path, "--help").stdout
    for name in COMMANDS:
        assert re.search(rf"^ +{name} ", text, re.MULTILINE)
        one = command(tmp_path, name, "--help")
        assert (one.returncode, one.stderr) == (0, "")
        assert "--json" in one.stdout
        assert "%%" not in one.stdout
    assert "%%" not in text
