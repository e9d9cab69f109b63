"""How time and memory are taken: ratios within one run, so that they hold on any machine."""

import subprocess
import sys
import time
from collections.abc import Callable, Sequence


def fastest(functions: Sequence[Callable[[], object]], rounds: int) -> list[float]:
    """Return the shortest time of each, in seconds; taken in turn, so that a busy moment hits all of them."""
    times = [[] for _ in functions]
    for _ in range(rounds):
        for own, function in zip(times, functions, strict=True):
            start = time.perf_counter()
            function()
            own.append(time.perf_counter() - start)
    return [min(own) for own in times]


def command(*words: str) -> Callable[[], object]:
    """Return a function that runs this Python with these words and fails when it fails."""
    return lambda: subprocess.run([sys.executable, *words], check=True, capture_output=True)


def child(*words: str) -> tuple[float, float]:
    """Run this Python with these words; return its processor time in seconds and its peak memory in bytes.

    The peak that the system keeps is of all children together, so a child of its own takes it.
    """
    code = (
        "import resource, subprocess, sys\n"
        "subprocess.run([sys.executable, *sys.argv[1:]], check=True, capture_output=True)\n"
        "used = resource.getrusage(resource.RUSAGE_CHILDREN)\n"
        "print(used.ru_utime + used.ru_stime, used.ru_maxrss)"
    )
    told = subprocess.run([sys.executable, "-c", code, *words], check=True, capture_output=True, text=True)
    seconds, peak = told.stdout.split()
    return float(seconds), float(peak) * (1 if sys.platform == "darwin" else 1024)
