"""The command, run in a folder of its own."""

import subprocess
import sys
from pathlib import Path

import pytest
from forked import CAN_FORK, run_forked

COMMAND = Path(sys.executable).with_name("stdfit")


def run_in(folder, *arguments):
    """Run the command; no traceback may ever come out of it."""
    words = [*map(str, arguments)]
    done = run_forked(folder, words, timeout=60) if CAN_FORK else run_installed(folder, words, timeout=60)
    assert "Traceback" not in done.stdout + done.stderr
    return done


def run_installed(folder, words, timeout):
    """Run the command that stands beside this Python."""
    return subprocess.run(
        [COMMAND, *words], cwd=folder, capture_output=True, encoding="utf-8", timeout=timeout
    )


@pytest.fixture(scope="session")
def command():
    """Return a function (folder, arguments) that runs the installed command."""
    if not COMMAND.exists():
        pytest.skip("the command is not installed beside this Python")
    return run_in


@pytest.fixture(scope="session")
def demo(command, tmp_path_factory):
    """Run the demo once; return its folder and what it printed."""
    folder = tmp_path_factory.mktemp("demo")
    return folder, command(folder, "demo", "--out", "bench")


@pytest.fixture(scope="session")
def kit_file(demo):
    """The demo's kit file, to be read only."""
    folder, done = demo
    assert done.returncode == 0, done.stderr
    return folder / "bench" / "kit.toml"
