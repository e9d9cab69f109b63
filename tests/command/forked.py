"""The command in a process forked from one that has imported the packages: a second less for every run.

Everything else is as in a terminal: a process, a folder, an exit code and two streams of its own.
"""

import multiprocessing
import os
import subprocess
import tempfile
from pathlib import Path

CAN_FORK = "forkserver" in multiprocessing.get_all_start_methods()


def run_forked(folder, arguments, timeout):
    """Return what `subprocess.run` would: arguments, exit code, standard output and standard error as text."""
    server = multiprocessing.get_context("forkserver")
    server.set_forkserver_preload(["lmfit", "pandas", "stdfit.cli", "stdfit.pipeline"])
    with tempfile.TemporaryDirectory() as scratch:
        streams = [Path(scratch) / name for name in ("stdout", "stderr")]
        process = server.Process(target=_as_in_a_terminal, args=(folder, arguments, streams))
        process.start()
        process.join(timeout)
        if process.is_alive():
            process.kill()
            raise subprocess.TimeoutExpired(arguments, timeout)
        written = [stream.read_text(encoding="utf-8") for stream in streams]
        return subprocess.CompletedProcess(arguments, process.exitcode, *written)


def _as_in_a_terminal(folder, arguments, streams):
    from stdfit.cli import main

    for descriptor, stream in enumerate(streams, start=1):
        os.dup2(os.open(stream, os.O_WRONLY | os.O_CREAT), descriptor)
    os.chdir(folder)
    raise SystemExit(main(arguments))
