"""The arguments of every command."""

from __future__ import annotations

import argparse

from stdfit.cli.exit_codes import WRONG_INPUT

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    from pathlib import Path
    from typing import NoReturn


class Parser(argparse.ArgumentParser):
    """A parser whose faults are one line and what to do."""

    def error(self, message: str) -> NoReturn:
        """Say what is wrong and stop."""
        self.exit(WRONG_INPUT, f"stdfit: {message}\nsee '{self.prog} --help'\n")


def parser() -> Parser:
    """Return the parser of the whole command; a command's `home` is the module that holds its function."""
    whole = Parser(
        prog="stdfit",
        description="Turn readings of home-made open, short and load standards into a calibration kit with "
        "95 % bounds and the frequency up to which it can be trusted.",
    )
    whole.add_argument("--version", action="store_true", help="print the version and stop")
    commands = whole.add_subparsers(dest="command", metavar="COMMAND", parser_class=Parser)

    def add(name: str, what: str, home: str) -> Parser:
        command = commands.add_parser(name, help=what.replace("%", "%%"), description=what)
        command.set_defaults(home=home)
        command.add_argument("--json", action="store_true", help="print the result as JSON")
        return command

    demo = add(
        "demo",
        "simulate a bench with a known truth, characterise it, show fitted against true",
        "simulated_commands",
    )
    demo.add_argument(
        "--out", metavar="DIR", type=_path, default="stdfit-demo", help="where to write (stdfit-demo)"
    )

    new = add("new", "write a commented bench.toml from the readings found in a folder", "bench_commands")
    new.add_argument("folder", metavar="DIR", type=_path)

    fit = add(
        "fit", "characterise a kit: readings in, a kit file with bounds and a limit out", "bench_commands"
    )
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
        "plan",
        "say what holds a kit back, and what would move its limit; before or after measuring",
        "bench_commands",
    )
    plan.add_argument(
        "bench", metavar="BENCH", type=_path, help="a bench file, or a folder that holds bench.toml"
    )
    plan.add_argument(
        "--within", metavar="X", type=_tolerance, help="tolerance on |error of Γ| (the bench file's)"
    )

    show = add("show", "show a kit file: what to type in, how sure, how far", "kit_commands")
    show.add_argument("kit", metavar="KIT", type=_path)

    curve = add("curve", "print reflection and 95 % bound over frequency as CSV", "kit_commands")
    curve.add_argument("kit", metavar="KIT", type=_path)
    curve.add_argument(
        "--standard", metavar="NAME", action="append", help="only this standard; may be repeated"
    )
    curve.add_argument(
        "--points", metavar="N", type=_count, default=201, help="points up to the top of the fit range (201)"
    )
    curve.add_argument("--at", metavar="HZ", type=_number, nargs="+", help="these frequencies instead")

    limit = add(
        "limit", "print the frequency-validity limit of kit and standards, with reasons", "kit_commands"
    )
    limit.add_argument("kit", metavar="KIT", type=_path)
    limit.add_argument("--within", metavar="X", type=_tolerance, nargs="+", help="tolerances (the kit's own)")

    trials = add("trials", "score the bounds on simulated benches with a known truth", "simulated_commands")
    trials.add_argument(
        "like", metavar="BENCH", type=_path, nargs="?", help="simulate benches like this one (all families)"
    )
    trials.add_argument("--benches", metavar="N", type=_count, default=25, help="benches of each family (25)")
    trials.add_argument("--family", metavar="NAME", action="append", help="only this family; may be repeated")
    trials.add_argument("--within", metavar="X", type=_tolerance, default=0.02, help="tolerance (0.02)")
    trials.add_argument("--seed", metavar="S", type=_seed, default=1, help="seed of all chance (1)")
    return whole


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
