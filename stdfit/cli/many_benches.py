"""Many benches in one go: a process for each core, and one bad bench stops no other."""

from __future__ import annotations

import os
import signal
import sys

from stdfit.base.shown import shown
from stdfit.cli.exit_codes import DONE, OWN_FAULT
from stdfit.cli.faults import told
from stdfit.cli.screen import print_json, progress, say, tell
from stdfit.cli.targets import check_target, default_target, refuse_inputs, write_kit

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    import argparse
    from collections.abc import Callable, Sequence
    from pathlib import Path
    from typing import Any

    Task = tuple[Path, float | None, int]
    Outcome = dict[str, Any]

STOPPED = "its process was stopped from outside\nis there enough memory? fit it alone to see"


def fit_each(asked: argparse.Namespace) -> int:
    """Characterise the kits of several benches, each beside its bench."""
    # The work is parallel already: a second layer of threads would only get in its way.
    for library in ("OPENBLAS", "OMP", "MKL"):
        os.environ.setdefault(f"{library}_NUM_THREADS", "1")
    _refuse(asked)
    tasks = [(path, asked.within, asked.monte_carlo) for path in asked.bench]
    with progress("benches", threads=False) as done:
        outcomes = run_each(tasks, done)
    good = [one for one in outcomes if one["code"] == DONE]
    failed = [one for one in outcomes if one["code"] != DONE]
    if asked.json:
        print_json(
            {
                "kits": [{**one["kit"], "bench": one["bench"], "kit_file": one["kit_file"]} for one in good],
                "failed": [
                    {"bench": one["bench"], "error": one["error"], "exit_code": one["code"]} for one in failed
                ],
            }
        )
    for one in good:
        for warning in one["warnings"]:
            tell(f"{one['bench']}: warning: {warning}")
    for one in failed:
        # Errors are said whatever else is left out; most name their file themselves.
        bench = shown(one["bench"])
        named = "" if one["error"].startswith(bench) else f"{bench}: "
        print(f"stdfit: {named}{one['error']}", file=sys.stderr)
    if not asked.json:
        _say(good, len(outcomes))
    return max(int(one["code"]) for one in outcomes)


def run_each(tasks: Sequence[Task], done: Callable[[int, int], None] | None) -> list[Outcome]:
    """Return what became of each task, in their order."""
    from concurrent.futures import ProcessPoolExecutor, as_completed
    from concurrent.futures.process import BrokenProcessPool
    from multiprocessing import get_context

    import stdfit.pipeline.path  # noqa: F401
    from stdfit.fitting.solve import load_solver

    # Here, so that processes that are forked need not import it again.
    load_solver()

    found: dict[int, Outcome] = {}
    cores = len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else os.cpu_count() or 1
    context = get_context("fork" if sys.platform == "linux" else "spawn")

    def run(places: Sequence[int], workers: int) -> None:
        with ProcessPoolExecutor(workers, mp_context=context, initializer=_quietly_stopped) as pool:
            futures = {pool.submit(fit_one, tasks[place]): place for place in places}
            for future in as_completed(futures):
                try:
                    found[futures[future]] = future.result()
                except BrokenProcessPool:
                    continue
                if done is not None:
                    done(len(found), len(tasks))

    run(range(len(tasks)), min(cores, len(tasks)))
    # A process that the system stops takes its pool with it: what is left is done one by one, each in its own.
    for place in range(len(tasks)):
        if place not in found:
            run([place], 1)
        if place not in found:
            found[place] = {"bench": str(tasks[place][0]), "code": OWN_FAULT, "error": STOPPED}
    return [found[place] for place in range(len(tasks))]


def fit_one(task: Task) -> Outcome:
    """Characterise one kit and write it; return what is to be said of it, whatever happens."""
    path, within, draws = task
    try:
        from stdfit.data.bench import read_bench
        from stdfit.pipeline import fit_bench
        from stdfit.writing.plain_data import kit_data

        bench = read_bench(path)
        target = default_target(bench.path)
        check_target(target)
        refuse_inputs(bench, target)
        kit = fit_bench(bench, within=within, draws=draws)
        write_kit(kit, target)
    except Exception as fault:
        code, error = told(fault)
        return {"bench": str(path), "code": code, "error": error}
    return {
        "bench": str(path),
        "code": DONE,
        "kit": kit_data(kit),
        "kit_file": str(target),
        "warnings": kit.warnings,
    }


def _quietly_stopped() -> None:
    """Let the keys that stop the command stop a process without a word."""
    signal.signal(signal.SIGINT, signal.SIG_DFL)


def _refuse(asked: argparse.Namespace) -> None:
    """Refuse what makes sense for one bench only, and a bench that is named twice."""
    from stdfit.base.errors import RequestError
    from stdfit.data.bench import BENCH_NAME

    for option, value in (("-o", asked.output), ("--report", asked.report)):
        if value is not None:
            raise RequestError(
                f"{option} names one file, and there are {len(asked.bench)} benches",
                "leave it out: each kit goes beside its bench; 'stdfit report KIT' makes its page",
            )
    seen: dict[Path, Path] = {}
    for path in asked.bench:
        try:
            file = (path / BENCH_NAME if path.is_dir() else path).resolve()
        except (OSError, ValueError, RuntimeError):
            continue
        if file in seen:
            raise RequestError("the same bench is named twice", "name it once", file=path)
        seen[file] = path


def _say(good: Sequence[Outcome], count: int) -> None:
    """Print one line for each kit, and how many there are."""
    from stdfit.writing.aligned import aligned
    from stdfit.writing.numbers import good_to

    if good:
        rows = [["kit file", "within", "good to", "ends because"]]
        rows += [
            [one["kit_file"], f"{kit['within']:g}", good_to(kit["limit_hz"]), kit["reason"]]
            for one in good
            for kit in (one["kit"],)
        ]
        say("\n".join(aligned(rows, indent="")))
    failed = count - len(good)
    say(f"{len(good)} of {count} benches fitted" + (f", {failed} not: see above" if failed else ""))
