"""The arguments of every command."""

from __future__ import annotations

import argparse

from stdfit.base.shown import shown
from stdfit.cli.exit_codes import WRONG_INPUT

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence
    from pathlib import Path
    from typing import Any, NoReturn


KIT = "a kit file, or a folder that holds kit.toml"

FEWEST_DRAWS = 100
"""Fewer draws say nothing of a 95 % bound."""


class Parser(argparse.ArgumentParser):
    """A parser whose faults are one line and what to do, with the nearest word that it knows."""

    def parse_known_args(self, args=None, namespace=None):  # type: ignore[no-untyped-def]
        """Refuse what a command does not know in that command's own name."""
        known, left = super().parse_known_args(args, namespace)
        if left:
            self.unknown(left)
        return known, left

    def unknown(self, left: Sequence[str]) -> NoReturn:
        """Say which arguments are not known, and stop."""
        options = [one.partition("=")[0] for one in left if one.startswith("-")]
        meant = self._meant(options[0], self._option_string_actions) if options else ""
        self.error(f"unrecognized arguments: {' '.join(left)}", meant)

    def _check_value(self, action: argparse.Action, value: Any) -> None:
        """Refuse a word that is no choice; argparse asks here."""
        if action.choices is not None and value not in action.choices:
            what = "command" if action.dest == "command" else f"choice of {'/'.join(action.option_strings)}"
            meant = self._meant(value, action.choices)
            self.error(f"no {what} '{value}'", meant or f"use one of: {', '.join(action.choices)}; ")

    @staticmethod
    def _meant(word: str, known: Iterable[str]) -> str:
        """Return "did you mean 'x'? " where a known word is near, else nothing."""
        from stdfit.data.words import nearest

        # Dashes are no likeness.
        plain = {one.lstrip("-"): one for one in known}
        best = nearest(word.lstrip("-"), plain)
        return f"did you mean '{plain[best]}'? " if best else ""

    def error(self, message: str, meant: str = "") -> NoReturn:
        """Say what is wrong and stop."""
        self.exit(WRONG_INPUT, f"stdfit: {shown(message)}\n{meant}see '{self.prog} --help'\n")


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
        command.add_argument(
            "--quiet",
            action="store_true",
            help="print results and errors, nothing else",
        )
        return command

    demo = add(
        "demo",
        "simulate a bench with a known truth, characterise it, show fitted against true",
        "simulated_commands",
    )
    demo.add_argument(
        "--out", metavar="DIR", type=_path, default="stdfit-demo", help="where to write (stdfit-demo)"
    )
    demo.add_argument(
        "--walkthrough",
        action="store_true",
        help="write the readings of docs/walkthrough.md instead, and fit nothing",
    )

    new = add("new", "write a commented bench.toml from the readings found in a folder", "bench_commands")
    new.add_argument("folder", metavar="DIR", type=_path)

    fit = add(
        "fit", "characterise a kit: readings in, a kit file with bounds and a limit out", "bench_commands"
    )
    fit.add_argument(
        "bench",
        metavar="BENCH",
        type=_path,
        nargs="+",
        help="a bench file, or a folder that holds bench.toml; several are fitted at once, on all cores",
    )
    fit.add_argument(
        "-o", "--output", metavar="KIT", type=_path, help="kit file to write (kit.toml beside the bench file)"
    )
    fit.add_argument(
        "--within", metavar="X", type=_tolerance, help="tolerance on |error of Γ| (the bench file's, 0.02)"
    )
    fit.add_argument(
        "--report", metavar="FILE.html", type=_path, help="write a page for a browser, with pictures, as well"
    )

    fit.add_argument(
        "--monte-carlo",
        metavar="N",
        type=_draws,
        default=0,
        help="check the linear bounds with N draws (100 or more, better some thousand) and say where they differ",
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
    show.add_argument("kit", metavar="KIT", type=_kit, help=KIT)

    report = add(
        "report",
        "write a page for a browser: what to type in, how sure, how far, and the evidence with pictures",
        "report_commands",
    )
    report.add_argument("kit", metavar="KIT", type=_kit, help=KIT)
    report.add_argument(
        "-o", "--output", metavar="FILE.html", type=_path, help="page to write (KIT with .html, beside it)"
    )

    curve = add("curve", "print reflection and 95 % bound over frequency as CSV", "kit_commands")
    curve.add_argument("kit", metavar="KIT", type=_kit, help=KIT)
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
    limit.add_argument("kit", metavar="KIT", type=_kit, help=KIT)
    limit.add_argument("--within", metavar="X", type=_tolerance, nargs="+", help="tolerances (the kit's own)")
    limit.add_argument(
        "--return-loss",
        metavar=("DB", "WITHIN_DB"),
        type=_number,
        nargs=2,
        action="append",
        default=[],
        help="up to where a device of that return loss is shown within so many dB; may be repeated",
    )
    limit.add_argument(
        "--impedance",
        metavar=("OHM", "PERCENT"),
        type=_number,
        nargs=2,
        action="append",
        default=[],
        help="up to where |Z| of a device near that resistance is shown within so many percent; may be repeated",
    )
    limit.add_argument(
        "--phase",
        metavar="DEGREES",
        type=_number,
        action="append",
        default=[],
        help="up to where the phase of a full reflection is shown within so many degrees; may be repeated",
    )
    _three(limit)

    device = add(
        "device", "print what a kit leaves in an analyser, and the bound on any device", "kit_commands"
    )
    device.add_argument("kit", metavar="KIT", type=_kit, help=KIT)
    device.add_argument(
        "--magnitude",
        metavar="X",
        type=_magnitude,
        nargs="+",
        default=[0.0, 0.1, 0.3, 1.0],
        help="|Γ| of the devices (0 0.1 0.3 1)",
    )
    device.add_argument("--at", metavar="HZ", type=_number, nargs="+", help="frequencies (some round ones)")
    device.add_argument(
        "--points", metavar="N", type=_count, help="so many frequencies, evenly spaced, instead"
    )
    device.add_argument("--csv", action="store_true", help="print CSV")
    _three(device)

    export = add(
        "export",
        "write each standard as a Touchstone file, with covariances and bounds as CSV",
        "use_commands",
    )
    export.add_argument("kit", metavar="KIT", type=_kit, help=KIT)
    export.add_argument("folder", metavar="DIR", type=_path, help="where to write; made if it is not there")
    export.add_argument(
        "--from", dest="from_hz", metavar="HZ", type=_number, help="lowest frequency (first common reading)"
    )
    export.add_argument(
        "--to", dest="to_hz", metavar="HZ", type=_number, help="highest frequency (last common reading)"
    )
    export.add_argument("--points", metavar="N", type=_count, help="so many frequencies (201)")
    export.add_argument(
        "--spacing", metavar="HOW", choices=("even", "log"), help="even steps, or equal ratios: log (even)"
    )
    export.add_argument("--at", metavar="HZ", type=_number, nargs="+", help="these frequencies instead")

    compare = add(
        "compare", "say where and by how much two kits differ, in units of their bounds", "use_commands"
    )
    compare.add_argument("kit", metavar="KIT", type=_kit, help=KIT)
    compare.add_argument(
        "other",
        metavar="KIT|ideal",
        type=_kit_or_word,
        help="another kit, or the word 'ideal' for standards at +1, -1 and 0",
    )
    compare.add_argument("--at", metavar="HZ", type=_number, nargs="+", help="frequencies (some round ones)")
    compare.add_argument("--csv", action="store_true", help="print all differences over frequency as CSV")

    sheet = add(
        "sheet", "say what to type where not all terms are accepted, and what that costs", "entry_commands"
    )
    sheet.add_argument("kit", metavar="KIT", type=_kit, help=KIT)
    sheet.add_argument(
        "--accepts",
        metavar="TERM",
        nargs="+",
        help="what can be typed: nothing, delay, loss, z0, c0 ... c3, l0 ... l3, cubic, resistance, inductance, "
        "capacitance; open.delay means the open alone (everything)",
    )
    sheet.add_argument(
        "--units",
        metavar="QUANTITY=UNIT",
        nargs="+",
        default=[],
        help="delay=ps|ns|s|mm|m|two-way-ps..., loss=GΩ/s|Ω/s|dB|two-way-dB, capacitance=trade|F|pF|fF, "
        "inductance=trade|H|nH|pH",
    )
    sheet.add_argument(
        "--velocity-factor", metavar="V", type=_number, help="of delays that are typed as lengths (1)"
    )
    sheet.add_argument(
        "--digits",
        metavar="N",
        nargs="+",
        default=[],
        help="significant digits of all numbers, and of single ones: 3 resistance=5 (4)",
    )
    sheet.add_argument(
        "--within", metavar="X", type=_tolerance, help="tolerance on |error of Γ| (the kit's own)"
    )
    sheet.add_argument("--no-negative", action="store_true", help="type no negative number")
    sheet.add_argument("--csv", action="store_true", help="print CSV")

    check = add(
        "check",
        "correct devices with a kit, and say whether they agree with their values within the bounds",
        "check_commands",
    )
    check.add_argument("kit", metavar="KIT", type=_kit, help=KIT)
    check.add_argument(
        "bench", metavar="BENCH", type=_path, help="a bench file with [[device]] tables, or its folder"
    )
    check.add_argument(
        "--to", dest="to_hz", metavar="HZ", type=_number, help="give the verdict up to here (the kit's limit)"
    )
    check.add_argument("--csv", action="store_true", help="print all differences over frequency as CSV")
    _three(check)

    wear = add(
        "wear",
        "say whether standards have changed, in what, and what their old definition is still good for",
        "wear_commands",
    )
    wear.add_argument(
        "old", metavar="OLD", type=_kit, help="the kit file of the standards as they were, or its folder"
    )
    wear.add_argument(
        "new", metavar="NEW", type=_path, help="a newer kit file, a new bench file, or its folder"
    )
    wear.add_argument(
        "--same-calibration",
        action="store_true",
        help="one calibration of the analyser served both: its errors are no change",
    )
    wear.add_argument("--csv", action="store_true", help="print all differences over frequency as CSV")

    drawing = add(
        "drawing",
        "say what dimensions and materials tell of standards, as evidence for a bench file",
        "drawing_commands",
    )
    drawing.add_argument("file", metavar="FILE", type=_path, help="a drawing file")
    drawing.add_argument("--part", metavar="NAME", help="only this part")
    drawing.add_argument(
        "--to", dest="to_hz", metavar="HZ", type=_number, default=6e9, help="top of the band (6e9)"
    )

    adapter = add(
        "adapter",
        "determine an adapter from known standards that were read through it",
        "adapter_commands",
    )
    adapter.add_argument(
        "bench", metavar="BENCH", type=_path, help="a bench file, or a folder that holds bench.toml"
    )
    adapter.add_argument(
        "-o",
        "--output",
        metavar="FILE",
        type=_path,
        help="adapter file to write, its .s2p beside it (adapter.toml beside the bench file)",
    )

    history = add(
        "history",
        "say which values drifted or stepped over the kits of a folder, and how long they will serve",
        "history_commands",
    )
    history.add_argument("folder", metavar="DIR", type=_path, help="holds kit files of the same standards")
    history.add_argument(
        "--within", metavar="X", type=_tolerance, help="tolerance on |error of Γ| (the newest kit's)"
    )
    history.add_argument(
        "--to",
        dest="to_hz",
        metavar="HZ",
        type=_number,
        help="definitions have to serve up to here (three quarters of each standard's limit)",
    )
    history.add_argument(
        "--same-calibration",
        action="store_true",
        help="one calibration of the analyser served all kits: its residuals do not scatter",
    )
    history.add_argument("--plot", metavar="FILE.svg", type=_path, help="write a plot there")
    history.add_argument("--csv", action="store_true", help="print all values as CSV")

    repeat = add(
        "repeat",
        "say how readings scatter with repeat, connection and calibration, and how many are worth making",
        "history_commands",
    )
    repeat.add_argument(
        "file", metavar="FILE", type=_path, help="a repeatability file, or a folder with repeatability.toml"
    )
    repeat.add_argument(
        "--at", metavar="HZ", type=_number, nargs="+", help="frequencies of |ΔΓ| (quarters of the sweep)"
    )

    trials = add("trials", "score the bounds on simulated benches with a known truth", "simulated_commands")
    trials.add_argument(
        "like", metavar="BENCH", type=_path, nargs="?", help="simulate benches like this one (all families)"
    )
    trials.add_argument("--benches", metavar="N", type=_count, default=25, help="benches of each family (25)")
    trials.add_argument("--family", metavar="NAME", action="append", help="only this family; may be repeated")
    trials.add_argument("--within", metavar="X", type=_tolerance, default=0.02, help="tolerance (0.02)")
    trials.add_argument("--seed", metavar="S", type=_seed, default=1, help="seed of all chance (1)")
    return whole


def _three(command: Parser) -> None:
    """Let a command take the three standards of a correction."""
    command.add_argument(
        "--standards",
        metavar="NAME",
        nargs=3,
        default=[],
        help="the three standards that devices are corrected with (an open, a short, a load)",
    )


def _magnitude(text: str) -> float:
    value = _number(text)
    if not 0.0 <= value <= 1.0:
        raise argparse.ArgumentTypeError(f"{text!r} is not |Γ| of a passive device, from 0 to 1")
    return value


def _path(text: str) -> Path:
    from pathlib import Path

    if "\0" in text:
        raise argparse.ArgumentTypeError(f"{text!r} is not a possible name")
    return Path(text)


def _kit(text: str) -> Path:
    """Return a kit file: a folder stands for the kit.toml in it."""
    path = _path(text)
    inside = path / "kit.toml"
    try:
        return inside if inside.is_file() else path
    except OSError:  # no possible name: who reads it says so
        return path


def _kit_or_word(text: str) -> Path | str:
    return text if text == "ideal" else _kit(text)


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
    if not (text.isascii() and text.isdecimal() and len(text) < 19):
        raise argparse.ArgumentTypeError(f"{text!r} is no whole number from 0 on")
    return int(text)


def _draws(text: str) -> int:
    value = _count(text)
    if value < FEWEST_DRAWS:
        raise argparse.ArgumentTypeError(
            f"'{text}' draws say too little: take {FEWEST_DRAWS} or more, better some thousand"
        )
    return value
