"""Runs that are killed, two at once, a full disk: a few of what `python tests/fuzz/kill.py --kills 200` does."""

import os
import subprocess
import sys
from pathlib import Path

import pytest


@pytest.mark.skipif(not hasattr(os, "fork"), reason="this system cannot fork")
def test_no_kit_file_is_torn():
    done = subprocess.run(
        [sys.executable, Path(__file__).with_name("kill.py"), "--kills", "4", "--rounds", "1"],
        capture_output=True,
        encoding="utf-8",
        timeout=300,
    )
    assert done.returncode == 0, done.stdout + done.stderr
    assert "torn: 0;" in done.stdout
    assert "left after a later run: 0" in done.stdout
