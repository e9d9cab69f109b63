"""Commands that simulate: demo, trials."""

from __future__ import annotations

from stdfit.cli.exit_codes import DONE
from stdfit.cli.report_commands import check_page, write_page
from stdfit.cli.screen import print_json, print_text, progress, say
from stdfit.cli.targets import check_target, write_kit

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    import argparse


def demo(asked: argparse.Namespace) -> int:
    """Simulate a bench and characterise it."""
    if asked.walkthrough:
        return _walkthrough(asked)
    from stdfit.pipeline import fit_bench
    from stdfit.trials.demo import compare, compare_curves, write_demo
    from stdfit.trials.demo_text import demo_data, demo_text
    from stdfit.writing.kit_reading import read_kit

    asked.out.mkdir(parents=True, exist_ok=True)
    page = asked.out / "report.html"
    check_page(page, "--out")
    target = asked.out / "kit.toml"
    check_target(target)
    simulated, bench = write_demo(asked.out)
    kit = fit_bench(bench)
    write_kit(kit, target)
    write_page(read_kit(target), page)
    rows = compare(kit, simulated)
    curves = compare_curves(kit, simulated, [k * 1e9 for k in (0.5, 1, 2, 3, 4, 5, 6)])
    if asked.json:
        print_json(
            {
                **demo_data(rows, curves),
                "bench_file": str(bench),
                "kit_file": str(target),
                "report_file": str(page),
            }
        )
        return DONE
    say(demo_text(kit, rows, curves))
    say(f"readings and bench file: {bench}")
    say(f"kit file: {target}")
    say(f"report: {page}")
    say(f"next: open {page}   (in a browser: the same, with pictures)")
    say(f"      stdfit show {target}   (what to type in)")
    say("      stdfit new DIR   (DIR holds your own readings)")
    return DONE


def _walkthrough(asked: argparse.Namespace) -> int:
    """Write the readings of the walk-through."""
    from shlex import quote

    from stdfit.trials.workshop import write_workshop

    folders = write_workshop(asked.out)
    if asked.json:
        print_json({"folders": [str(folder) for folder in folders]})
        return DONE
    for folder in folders:
        say(f"readings: {folder}")
    say(f"next: stdfit new {quote(str(folders[0]))}   (step 4 of docs/walkthrough.md)")
    return DONE


def trials(asked: argparse.Namespace) -> int:
    """Score the bounds on simulated benches."""
    from stdfit.base.errors import RequestError
    from stdfit.trials.like import scenario_like
    from stdfit.trials.study import run, study_data, study_table

    if asked.like is not None and asked.family:
        raise RequestError("a bench and families are asked for at once", "leave one of them out")
    like = None if asked.like is None else scenario_like(asked.like)
    with progress("benches", threads=False) as told:
        rows = run(
            asked.family or [], asked.benches, seed=asked.seed, within=asked.within, like=like, tell=told
        )
    if asked.json:
        print_json(study_data(rows))
    else:
        print_text(study_table(rows))
    return DONE
