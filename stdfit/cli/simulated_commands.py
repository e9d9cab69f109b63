"""Commands that simulate: demo, trials."""

from __future__ import annotations

from stdfit.cli.exit_codes import DONE
from stdfit.cli.screen import print_json, progress
from stdfit.cli.targets import write_kit

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    import argparse


def demo(asked: argparse.Namespace) -> int:
    """Simulate a bench and characterise it."""
    from stdfit.pipeline import fit_bench
    from stdfit.trials.demo import compare, compare_curves, write_demo
    from stdfit.trials.demo_text import demo_data, demo_text

    asked.out.mkdir(parents=True, exist_ok=True)
    simulated, bench = write_demo(asked.out)
    kit = fit_bench(bench)
    target = asked.out / "kit.toml"
    write_kit(kit, target)
    rows = compare(kit, simulated)
    curves = compare_curves(kit, simulated, [k * 1e9 for k in (0.5, 1, 2, 3, 4, 5, 6)])
    if asked.json:
        print_json({**demo_data(rows, curves), "bench_file": str(bench), "kit_file": str(target)})
        return DONE
    print(demo_text(kit, rows, curves))
    print(f"readings and bench file: {bench}")
    print(f"kit file: {target}")
    print(f"next: stdfit show {target}   (what to type in)")
    print("      stdfit new DIR         (DIR holds your own readings)")
    return DONE


def trials(asked: argparse.Namespace) -> int:
    """Score the bounds on simulated benches."""
    from stdfit.base.errors import RequestError
    from stdfit.trials.like import scenario_like
    from stdfit.trials.study import run, study_data, study_table

    if asked.like is not None and asked.family:
        raise RequestError("a bench and families are asked for at once", "leave one of them out")
    like = None if asked.like is None else scenario_like(asked.like)
    with progress("benches") as told:
        rows = run(
            asked.family or [], asked.benches, seed=asked.seed, within=asked.within, like=like, tell=told
        )
    if asked.json:
        print_json(study_data(rows))
    else:
        print(study_table(rows))
    return DONE
