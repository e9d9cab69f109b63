"""Commands that take a bench: new, fit, plan."""

from __future__ import annotations

from stdfit.cli.exit_codes import DONE
from stdfit.cli.report_commands import check_page, write_page
from stdfit.cli.screen import print_json, print_text, progress, say, tell, warn
from stdfit.cli.targets import check_target, default_target, refuse_inputs, write_kit

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    import argparse
    from pathlib import Path


def new(asked: argparse.Namespace) -> int:
    """Write a commented bench file."""
    from shlex import quote

    from stdfit.base.errors import RequestError
    from stdfit.writing.bench_draft import draft, find_standards
    from stdfit.writing.safely import write_whole

    target = asked.folder / "bench.toml"
    if target.exists():
        raise RequestError("exists already, and is not overwritten", "edit it, or move it away", file=target)
    found, left_out = find_standards(asked.folder)
    following = f"stdfit fit {quote(str(asked.folder))}"
    write_whole(target, draft(asked.folder.resolve().name, found, following))
    for line in left_out:
        tell(f"left out: {line}")
    if asked.json:
        print_json(
            {
                "bench_file": str(target),
                "standards": [{"name": f.name, "kind": f.kind, "files": list(f.files)} for f in found],
            }
        )
        return DONE
    for one in found:
        kind = "" if one.name == one.kind else f" ({one.kind})"
        guessed = "" if one.by_name else "  (guessed from the readings)"
        say(f"{one.name}{kind}: {', '.join(one.files)}{guessed}")
    say(f"bench file: {target}")
    say(f"next: look at the lines marked '<--' in it, then: {following}")
    return DONE


def fit(asked: argparse.Namespace) -> int:
    """Characterise a kit, or several."""
    if len(asked.bench) > 1:
        from stdfit.cli.many_benches import fit_each

        return fit_each(asked)
    from stdfit.data.bench import read_bench
    from stdfit.pipeline import fit_bench
    from stdfit.pipeline.path import has_few_references
    from stdfit.writing.kit_reading import read_kit
    from stdfit.writing.plain_data import kit_data
    from stdfit.writing.summary import summary, verdict

    bench = read_bench(asked.bench[0])
    target = asked.output if asked.output is not None else default_target(bench.path)
    check_target(target)
    refuse_inputs(bench, target)
    if asked.report is not None:
        _check_report(asked.report, target)
    with progress("draws" if asked.monte_carlo else "fitting") as told:
        kit = fit_bench(bench, within=asked.within, draws=asked.monte_carlo, tell=told)
    write_kit(kit, target)
    if asked.report is not None:
        write_page(read_kit(target), asked.report)
    if asked.json:
        warn(kit)
        report = {} if asked.report is None else {"report_file": str(asked.report)}
        print_json({**kit_data(kit), "kit_file": str(target), **report})
        return DONE
    warn(kit)
    say(summary(kit, warnings=False) + "\n")
    say(f"kit file: {target}")
    if asked.report is not None:
        say(f"report: {asked.report}")
    say(verdict(kit))
    if has_few_references(bench):
        say(f"next: stdfit limit {target} --within 0.01 0.05   (how far at other tolerances)")
        return DONE
    say(f"next: stdfit plan {bench.path}   (what would push it further)")
    say(f"      stdfit limit {target} --within 0.01 0.05   (how far at other tolerances)")
    return DONE


def _check_report(path: Path, kit_file: Path) -> None:
    """Refuse a page that cannot go where it is wanted."""
    from stdfit.base.errors import RequestError

    if path.resolve() == kit_file.resolve():
        raise RequestError("kit file and report would be one file", "name another with --report", file=path)
    check_page(path, "--report")


def plan(asked: argparse.Namespace) -> int:
    """Say what holds a kit back."""
    from dataclasses import replace

    from stdfit.data.bench import read_bench
    from stdfit.pipeline import prepare_bench, read_sweeps
    from stdfit.pipeline.imagined import imagine
    from stdfit.pipeline.plan import plan
    from stdfit.pipeline.plan_text import plan_data, plan_text

    bench = read_bench(asked.bench)
    if asked.within is not None:
        bench = replace(bench, within=asked.within)
    measured = any(entry.files for entry in bench.standards)
    prepared = prepare_bench(bench, read_sweeps(bench)) if measured else imagine(bench)
    with progress("planning") as told:
        found = plan(prepared, told)
    warn(found.kit)
    if asked.json:
        print_json(plan_data(found))
    else:
        print_text(plan_text(found, measured=measured))
    return DONE
