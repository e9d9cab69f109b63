"""The command: arguments, messages and exit codes; no science.

Nothing heavy is imported before it is needed, so that help and wrong usage answer at once.
"""

from __future__ import annotations

import argparse
import os
import sys
from contextlib import contextmanager

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    from collections.abc import Callable, Iterator, Sequence
    from pathlib import Path
    from typing import NoReturn

    from stdfit.validity.kit import Kit

DONE, ANSWER_IS_NO, WRONG_INPUT, OWN_FAULT = 0, 1, 2, 3
STOPPED_BY_USER = 130


class _Parser(argparse.ArgumentParser):
    """A parser whose faults are one line and what to do."""

    def error(self, message: str) -> NoReturn:
        self.exit(WRONG_INPUT, f"stdfit: {message}\nsee '{self.prog} --help'\n")


def _parser() -> _Parser:
    parser = _Parser(
        prog="stdfit",
        description="Turn readings of home-made open, short and load standards into a calibration kit with "
        "95 % bounds and the frequency up to which it can be trusted.",
    )
    parser.add_argument("--version", action="store_true", help="print the version and stop")
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", parser_class=_Parser)

    def add(name: str, what: str, run: Callable[[argparse.Namespace], int]) -> _Parser:
        command = commands.add_parser(name, help=what.replace("%", "%%"), description=what)
        command.set_defaults(run=run)
        command.add_argument("--json", action="store_true", help="print the result as JSON")
        return command

    demo = add(
        "demo", "simulate a bench with a known truth, characterise it, show fitted against true", _demo
    )
    demo.add_argument(
        "--out", metavar="DIR", type=_path, default="stdfit-demo", help="where to write (stdfit-demo)"
    )

    new = add("new", "write a commented bench.toml from the readings found in a folder", _new)
    new.add_argument("folder", metavar="DIR", type=_path)

    fit = add("fit", "characterise a kit: readings in, a kit file with bounds and a limit out", _fit)
    fit.add_argument(
        "bench", metavar="BENCH", type=_path, help="a bench file, or a folder that holds bench.toml"
    )
    fit.add_argument(
        "-o", "--output", metavar="KIT", type=_path, help="kit file to write (kit.toml beside the bench file)"
    )
    fit.add_argument(
        "--within", metavar="X", type=_tolerance, help="tolerance on |error of Γ| (the bench file's, 0.02)"
    )

    fit.add_argument(
        "--monte-carlo",
        metavar="N",
        type=_draws,
        default=0,
        help="check the linear bounds with N draws (some thousand) and say where they differ",
    )

    plan = add(
        "plan", "say what holds a kit back, and what would move its limit; before or after measuring", _plan
    )
    plan.add_argument(
        "bench", metavar="BENCH", type=_path, help="a bench file, or a folder that holds bench.toml"
    )
    plan.add_argument(
        "--within", metavar="X", type=_tolerance, help="tolerance on |error of Γ| (the bench file's)"
    )

    show = add("show", "show a kit file: what to type in, how sure, how far", _show)
    show.add_argument("kit", metavar="KIT", type=_path)

    curve = add("curve", "print reflection and 95 % bound over frequency as CSV", _curve)
    curve.add_argument("kit", metavar="KIT", type=_path)
    curve.add_argument(
        "--standard", metavar="NAME", action="append", help="only this standard; may be repeated"
    )
    curve.add_argument(
        "--points", metavar="N", type=_count, default=201, help="points up to the top of the fit range (201)"
    )
    curve.add_argument("--at", metavar="HZ", type=_number, nargs="+", help="these frequencies instead")

    limit = add("limit", "print the frequency-validity limit of kit and standards, with reasons", _limit)
    limit.add_argument("kit", metavar="KIT", type=_path)
    limit.add_argument("--within", metavar="X", type=_tolerance, nargs="+", help="tolerances (the kit's own)")

    trials = add("trials", "score the bounds on simulated benches with a known truth", _trials)
    trials.add_argument(
        "like", metavar="BENCH", type=_path, nargs="?", help="simulate benches like this one (all families)"
    )
    trials.add_argument("--benches", metavar="N", type=_count, default=25, help="benches of each family (25)")
    trials.add_argument("--family", metavar="NAME", action="append", help="only this family; may be repeated")
    trials.add_argument("--within", metavar="X", type=_tolerance, default=0.02, help="tolerance (0.02)")
    trials.add_argument("--seed", metavar="S", type=_seed, default=1, help="seed of all chance (1)")
    return parser


def _path(text: str) -> Path:
    from pathlib import Path

    return Path(text)


def _tolerance(text: str) -> float:
    value = _number(text)
    if not 0.0 < value < 1.0:
        raise argparse.ArgumentTypeError(f"{text!r} does not lie between 0 and 1")
    return value


def _count(text: str) -> int:
    value = _number(text)
    if not 1 <= value <= 100_000 or value != int(value):
        raise argparse.ArgumentTypeError(f"{text!r} is no whole number between 1 and 100000")
    return int(value)


def _number(text: str) -> float:
    try:
        return float(text)
    except ValueError:
        raise argparse.ArgumentTypeError(f"{text!r} is not a number: write it like 0.02 or 1e9") from None


def _seed(text: str) -> int:
    value = int(text)
    if not 0 <= value < 2**63:
        raise argparse.ArgumentTypeError(f"'{text}' is no whole number from 0 on")
    return value


def _draws(text: str) -> int:
    value = _count(text)
    if value < 100:
        raise argparse.ArgumentTypeError(f"'{text}' draws say too little: take 1000 or more")
    return value


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command; return its exit code."""
    parser = _parser()
    asked = parser.parse_args(arguments)
    from stdfit.base.errors import FitError, StdfitError

    try:
        if asked.version:
            from stdfit.pipeline import program_version

            print(f"stdfit {program_version()}")
            return DONE
        if asked.command is None:
            parser.error("no command given")
        code = int(asked.run(asked))
        sys.stdout.flush()
        return code
    except StdfitError as fault:
        print(f"stdfit: {fault}", file=sys.stderr)
        return ANSWER_IS_NO if isinstance(fault, FitError) else WRONG_INPUT
    except KeyboardInterrupt:
        print("stdfit: stopped; nothing was half written", file=sys.stderr)
        return STOPPED_BY_USER
    except BrokenPipeError:
        _drop_output()
        return DONE
    except OSError as fault:
        where = f"{fault.filename}: " if fault.filename else ""
        print(f"stdfit: {where}{fault.strerror or fault}", file=sys.stderr)
        print("check the path, its permissions and the space on the disk", file=sys.stderr)
        _drop_output()
        return WRONG_INPUT
    except Exception:
        print(f"stdfit: a fault of the program; the traceback is in {_save_traceback()}", file=sys.stderr)
        return OWN_FAULT


def _drop_output() -> None:
    """Give up what is still buffered for stdout: it has nowhere to go, and must not fail again at the end."""
    os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())


def _save_traceback() -> str:
    """Save the traceback of the current exception; return where."""
    import tempfile
    import traceback

    with tempfile.NamedTemporaryFile(
        "w", prefix="stdfit-fault-", suffix=".txt", delete=False, encoding="utf-8"
    ) as file:
        file.write(traceback.format_exc())
    return file.name


def _print_json(data: object) -> None:
    import json

    print(json.dumps(data, indent=2, ensure_ascii=False, allow_nan=False))


def _tell(text: str) -> None:
    print(f"stdfit: {text}", file=sys.stderr)


def _warn(kit: Kit) -> None:
    for warning in kit.warnings:
        _tell(f"warning: {warning}")


def _check_target(path: Path) -> None:
    """Refuse a place where no kit file can go, before the work is done: only kit files are overwritten."""
    from stdfit.base.errors import RequestError
    from stdfit.writing.kit_file import is_kit_file

    if path.is_dir():
        raise RequestError("a folder stands where the file should go", "name a file", file=path)
    if not path.parent.is_dir():
        raise RequestError("no such folder", "make it, or name another place with -o", file=path.parent)
    if path.exists() and not is_kit_file(path):
        raise RequestError("exists and is no kit file", "name another file with -o", file=path)


def _write_kit(kit: Kit, path: Path) -> None:
    """Write a kit file, over nothing but a kit file."""
    from stdfit.writing.kit_file import kit_text
    from stdfit.writing.safely import write_whole

    _check_target(path)
    write_whole(path, kit_text(kit))


def _default_target(bench: Path) -> Path:
    """Return where the kit of a bench file goes: kit.toml beside bench.toml, NAME.kit.toml beside NAME.toml."""
    name = "kit.toml" if bench.name == "bench.toml" else f"{bench.stem}.kit.toml"
    return bench.parent / name


def _fit(asked: argparse.Namespace) -> int:
    from stdfit.data.bench import read_bench
    from stdfit.pipeline import fit_bench
    from stdfit.writing.plain_data import kit_data
    from stdfit.writing.summary import summary, verdict

    bench = read_bench(asked.bench)
    target = asked.output if asked.output is not None else _default_target(bench.path)
    _check_target(target)
    with _progress("draws") as tell:
        kit = fit_bench(bench, within=asked.within, draws=asked.monte_carlo, tell=tell)
    _write_kit(kit, target)
    if asked.json:
        _warn(kit)
        _print_json({**kit_data(kit), "kit_file": str(target)})
        return DONE
    _warn(kit)
    print(summary(kit, warnings=False))
    print(f"kit file: {target}")
    print(verdict(kit))
    print(f"next: stdfit plan {bench.path}   (what would push it further)")
    print(f"      stdfit limit {target} --within 0.01 0.05   (how far at other tolerances)")
    return DONE


def _plan(asked: argparse.Namespace) -> int:
    from dataclasses import replace

    from stdfit.data.bench import read_bench
    from stdfit.pipeline import prepare, read_sweeps
    from stdfit.pipeline.imagined import imagine
    from stdfit.pipeline.plan import plan
    from stdfit.pipeline.plan_text import plan_data, plan_text

    bench = read_bench(asked.bench)
    if asked.within is not None:
        bench = replace(bench, within=asked.within)
    measured = any(entry.files for entry in bench.standards)
    prepared = prepare(bench, read_sweeps(bench)) if measured else imagine(bench)
    with _progress("remedies") as tell:
        found = plan(prepared, tell)
    _warn(found.kit)
    if asked.json:
        _print_json(plan_data(found))
    else:
        print(plan_text(found, measured=measured), end="")
    return DONE


def _show(asked: argparse.Namespace) -> int:
    from stdfit.writing.kit_reading import read_kit
    from stdfit.writing.plain_data import kit_data
    from stdfit.writing.summary import summary

    kit = read_kit(asked.kit)
    if asked.json:
        _print_json(kit_data(kit))
    else:
        print(summary(kit), end="")
    return DONE


def _curve(asked: argparse.Namespace) -> int:
    import csv

    import numpy as np

    from stdfit.writing.kit_reading import read_kit
    from stdfit.writing.plain_data import COLUMNS, curve_rows

    kit = read_kit(asked.kit)
    names = asked.standard or [definition.name for definition in kit.definitions]
    rows = curve_rows(kit, names, asked.points, None if asked.at is None else np.array(asked.at))
    if asked.json:
        _print_json({"curve": [dict(zip(COLUMNS, row, strict=True)) for row in rows]})
        return DONE
    writer = csv.writer(sys.stdout, lineterminator="\n")
    writer.writerow(COLUMNS)
    writer.writerows([name, *(repr(value) for value in values)] for name, *values in rows)
    return DONE


def _limit(asked: argparse.Namespace) -> int:
    from stdfit.validity.limits import limits
    from stdfit.writing.kit_reading import read_kit
    from stdfit.writing.plain_data import limit_data
    from stdfit.writing.summary import limit_lines

    kit = read_kit(asked.kit)
    found = limits(kit, asked.within or [kit.within])
    if asked.json:
        _print_json(limit_data(kit, found))
    else:
        print(limit_lines(kit, found), end="")
    return DONE


def _new(asked: argparse.Namespace) -> int:
    from stdfit.base.errors import RequestError
    from stdfit.writing.bench_draft import draft, find_standards
    from stdfit.writing.safely import write_whole

    target = asked.folder / "bench.toml"
    if target.exists():
        raise RequestError("exists already, and is not overwritten", "edit it, or move it away", file=target)
    found, left_out = find_standards(asked.folder)
    write_whole(target, draft(asked.folder.resolve().name, found))
    for line in left_out:
        _tell(f"left out: {line}")
    if asked.json:
        _print_json(
            {
                "bench_file": str(target),
                "standards": [{"kind": f.kind, "files": list(f.files)} for f in found],
            }
        )
        return DONE
    for one in found:
        print(f"{one.kind}: {', '.join(one.files)}{'' if one.by_name else '  (guessed from the readings)'}")
    print(f"bench file: {target}")
    print(f"next: look at the lines marked '<--' in it, then: stdfit fit {asked.folder}")
    return DONE


def _trials(asked: argparse.Namespace) -> int:
    from stdfit.base.errors import RequestError
    from stdfit.trials.like import scenario_like
    from stdfit.trials.study import run, study_data, study_table

    if asked.like is not None and asked.family:
        raise RequestError("a bench and families are asked for at once", "leave one of them out")
    like = None if asked.like is None else scenario_like(asked.like)
    with _progress("benches") as tell:
        rows = run(
            asked.family or [], asked.benches, seed=asked.seed, within=asked.within, like=like, tell=tell
        )
    if asked.json:
        _print_json(study_data(rows))
    else:
        print(study_table(rows))
    return DONE


@contextmanager
def _progress(what: str) -> Iterator[Callable[[int, int], None] | None]:
    """Show a progress bar on a terminal, and nothing in a pipe."""
    if not sys.stderr.isatty():
        yield None
        return
    from rich.console import Console
    from rich.progress import Progress

    with Progress(console=Console(stderr=True), transient=True) as bar:
        task = bar.add_task(what, total=None)
        yield lambda done, total: bar.update(task, completed=done, total=total)


def _demo(asked: argparse.Namespace) -> int:
    from stdfit.pipeline import fit_bench
    from stdfit.trials.demo import compare, compare_curves, write_demo
    from stdfit.trials.demo_text import demo_data, demo_text

    asked.out.mkdir(parents=True, exist_ok=True)
    simulated, bench = write_demo(asked.out)
    kit = fit_bench(bench)
    target = asked.out / "kit.toml"
    _write_kit(kit, target)
    rows = compare(kit, simulated)
    curves = compare_curves(kit, simulated, [k * 1e9 for k in (0.5, 1, 2, 3, 4, 5, 6)])
    if asked.json:
        _print_json({**demo_data(rows, curves), "bench_file": str(bench), "kit_file": str(target)})
        return DONE
    print(demo_text(kit, rows, curves))
    print(f"readings and bench file: {bench}")
    print(f"kit file: {target}")
    print(f"next: stdfit show {target}   (what to type in)")
    print("      stdfit new DIR         (DIR holds your own readings)")
    return DONE


if __name__ == "__main__":
    sys.exit(main())
