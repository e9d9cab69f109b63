"""The arguments of every command."""

from __future__ import annotations

from stdfit.cli import argument_types as words
from stdfit.cli.parser import Parser


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
        "--out", metavar="DIR", type=words.a_path, default="stdfit-demo", help="where to write (stdfit-demo)"
    )
    demo.add_argument(
        "--walkthrough",
        action="store_true",
        help="write the readings of docs/walkthrough.md instead, and fit nothing",
    )

    new = add("new", "write a commented bench.toml from the readings found in a folder", "bench_commands")
    new.add_argument("folder", metavar="DIR", type=words.a_path)

    fit = add(
        "fit", "characterise a kit: readings in, a kit file with bounds and a limit out", "bench_commands"
    )
    fit.add_argument(
        "bench",
        metavar="BENCH",
        type=words.a_path,
        nargs="+",
        help="a bench file, or a folder that holds bench.toml; several are fitted at once, on all cores",
    )
    fit.add_argument(
        "-o",
        "--output",
        metavar="KIT",
        type=words.a_path,
        help="kit file to write (kit.toml beside the bench file)",
    )
    _within(fit, "the bench file's, 0.02")
    fit.add_argument(
        "--report",
        metavar="FILE.html",
        type=words.a_path,
        help="write a page for a browser, with pictures, as well",
    )

    fit.add_argument(
        "--monte-carlo",
        metavar="N",
        type=words.draws,
        default=0,
        help="check the linear bounds with N draws (100 or more, better some thousand) and say where they differ",
    )

    plan = add(
        "plan",
        "say what holds a kit back, and what would move its limit; before or after measuring",
        "bench_commands",
    )
    _bench(plan)
    _within(plan, "the bench file's")

    show = add("show", "show a kit file: what to type in, how sure, how far", "kit_commands")
    _kit(show)

    report = add(
        "report",
        "write a page for a browser: what to type in, how sure, how far, and the evidence with pictures",
        "report_commands",
    )
    _kit(report)
    report.add_argument(
        "-o",
        "--output",
        metavar="FILE.html",
        type=words.a_path,
        help="page to write (KIT with .html, beside it)",
    )

    curve = add("curve", "print reflection and 95 % bound over frequency as CSV", "kit_commands")
    _kit(curve)
    curve.add_argument(
        "--standard", metavar="NAME", action="append", help="only this standard; may be repeated"
    )
    curve.add_argument(
        "--points",
        metavar="N",
        type=words.count,
        default=201,
        help="points up to the top of the fit range (201)",
    )
    _at(curve, "these frequencies instead")

    limit = add(
        "limit", "print the frequency-validity limit of kit and standards, with reasons", "kit_commands"
    )
    _kit(limit)
    limit.add_argument(
        "--within", metavar="X", type=words.tolerance, nargs="+", help="tolerances (the kit's own)"
    )
    limit.add_argument(
        "--return-loss",
        metavar=("DB", "WITHIN_DB"),
        type=words.number,
        nargs=2,
        action="append",
        default=[],
        help="up to where a device of that return loss is shown within so many dB; may be repeated",
    )
    limit.add_argument(
        "--impedance",
        metavar=("OHM", "PERCENT"),
        type=words.number,
        nargs=2,
        action="append",
        default=[],
        help="up to where |Z| of a device near that resistance is shown within so many percent; may be repeated",
    )
    limit.add_argument(
        "--phase",
        metavar="DEGREES",
        type=words.number,
        action="append",
        default=[],
        help="up to where the phase of a full reflection is shown within so many degrees; may be repeated",
    )
    _three(limit)

    device = add(
        "device", "print what a kit leaves in an analyser, and the bound on any device", "kit_commands"
    )
    _kit(device)
    device.add_argument(
        "--magnitude",
        metavar="X",
        type=words.magnitude,
        nargs="+",
        default=[0.0, 0.1, 0.3, 1.0],
        help="|Γ| of the devices (0 0.1 0.3 1)",
    )
    _at(device, "frequencies (some round ones)")
    device.add_argument(
        "--points", metavar="N", type=words.count, help="so many frequencies, evenly spaced, instead"
    )
    _csv(device, "print CSV")
    _three(device)

    export = add(
        "export",
        "write each standard as a Touchstone file, with covariances and bounds as CSV",
        "use_commands",
    )
    _kit(export)
    export.add_argument(
        "folder", metavar="DIR", type=words.a_path, help="where to write; made if it is not there"
    )
    export.add_argument(
        "--from",
        dest="from_hz",
        metavar="HZ",
        type=words.number,
        help="lowest frequency (first common reading)",
    )
    export.add_argument(
        "--to", dest="to_hz", metavar="HZ", type=words.number, help="highest frequency (last common reading)"
    )
    export.add_argument("--points", metavar="N", type=words.count, help="so many frequencies (201)")
    export.add_argument(
        "--spacing", metavar="HOW", choices=("even", "log"), help="even steps, or equal ratios: log (even)"
    )
    _at(export, "these frequencies instead")

    compare = add(
        "compare", "say where and by how much two kits differ, in units of their bounds", "use_commands"
    )
    _kit(compare)
    compare.add_argument(
        "other",
        metavar="KIT|ideal",
        type=words.kit_or_ideal,
        help="another kit, or the word 'ideal' for standards at +1, -1 and 0",
    )
    _at(compare, "frequencies (some round ones)")
    _csv(compare, "print all differences over frequency as CSV")

    sheet = add(
        "sheet", "say what to type where not all terms are accepted, and what that costs", "entry_commands"
    )
    _kit(sheet)
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
        "--velocity-factor", metavar="V", type=words.number, help="of delays that are typed as lengths (1)"
    )
    sheet.add_argument(
        "--digits",
        metavar="N",
        nargs="+",
        default=[],
        help="significant digits of all numbers, and of single ones: 3 resistance=5 (4)",
    )
    _within(sheet, "the kit's own")
    sheet.add_argument("--no-negative", action="store_true", help="type no negative number")
    _csv(sheet, "print CSV")

    check = add(
        "check",
        "correct devices with a kit, and say whether they agree with their values within the bounds",
        "check_commands",
    )
    _kit(check)
    check.add_argument(
        "bench", metavar="BENCH", type=words.a_path, help="a bench file with [[device]] tables, or its folder"
    )
    check.add_argument(
        "--to",
        dest="to_hz",
        metavar="HZ",
        type=words.number,
        help="give the verdict up to here (the kit's limit)",
    )
    _csv(check, "print all differences over frequency as CSV")
    _three(check)

    wear = add(
        "wear",
        "say whether standards have changed, in what, and what their old definition is still good for",
        "wear_commands",
    )
    wear.add_argument(
        "old",
        metavar="OLD",
        type=words.a_kit,
        help="the kit file of the standards as they were, or its folder",
    )
    wear.add_argument(
        "new", metavar="NEW", type=words.a_path, help="a newer kit file, a new bench file, or its folder"
    )
    wear.add_argument(
        "--same-calibration",
        action="store_true",
        help="one calibration of the analyser served both: its errors are no change",
    )
    _csv(wear, "print all differences over frequency as CSV")

    drawing = add(
        "drawing",
        "say what dimensions and materials tell of standards, as evidence for a bench file",
        "drawing_commands",
    )
    drawing.add_argument("file", metavar="FILE", type=words.a_path, help="a drawing file")
    drawing.add_argument("--part", metavar="NAME", help="only this part")
    drawing.add_argument(
        "--to", dest="to_hz", metavar="HZ", type=words.number, default=6e9, help="top of the band (6e9)"
    )

    adapter = add(
        "adapter",
        "determine an adapter from known standards that were read through it",
        "adapter_commands",
    )
    _bench(adapter)
    adapter.add_argument(
        "-o",
        "--output",
        metavar="FILE",
        type=words.a_path,
        help="adapter file to write, its .s2p beside it (adapter.toml beside the bench file)",
    )

    history = add(
        "history",
        "say which values drifted or stepped over the kits of a folder, and how long they will serve",
        "history_commands",
    )
    history.add_argument(
        "folder", metavar="DIR", type=words.a_path, help="holds kit files of the same standards"
    )
    _within(history, "the newest kit's")
    history.add_argument(
        "--to",
        dest="to_hz",
        metavar="HZ",
        type=words.number,
        help="definitions have to serve up to here (three quarters of each standard's limit)",
    )
    history.add_argument(
        "--same-calibration",
        action="store_true",
        help="one calibration of the analyser served all kits: its residuals do not scatter",
    )
    history.add_argument("--plot", metavar="FILE.svg", type=words.a_path, help="write a plot there")
    _csv(history, "print all values as CSV")

    repeat = add(
        "repeat",
        "say how readings scatter with repeat, connection and calibration, and how many are worth making",
        "history_commands",
    )
    repeat.add_argument(
        "file",
        metavar="FILE",
        type=words.a_path,
        help="a repeatability file, or a folder with repeatability.toml",
    )
    _at(repeat, "frequencies of |ΔΓ| (quarters of the sweep)")

    trials = add("trials", "score the bounds on simulated benches with a known truth", "simulated_commands")
    trials.add_argument(
        "like",
        metavar="BENCH",
        type=words.a_path,
        nargs="?",
        help="simulate benches like this one (all families)",
    )
    trials.add_argument(
        "--benches", metavar="N", type=words.count, default=25, help="benches of each family (25)"
    )
    trials.add_argument("--family", metavar="NAME", action="append", help="only this family; may be repeated")
    trials.add_argument("--within", metavar="X", type=words.tolerance, default=0.02, help="tolerance (0.02)")
    trials.add_argument("--seed", metavar="S", type=words.seed, default=1, help="seed of all chance (1)")
    return whole


def _kit(command: Parser) -> None:
    """Let a command take a kit."""
    help_ = "a kit file, or a folder that holds kit.toml"
    command.add_argument("kit", metavar="KIT", type=words.a_kit, help=help_)


def _bench(command: Parser) -> None:
    """Let a command take a bench."""
    help_ = "a bench file, or a folder that holds bench.toml"
    command.add_argument("bench", metavar="BENCH", type=words.a_path, help=help_)


def _within(command: Parser, default: str) -> None:
    """Let a command take one tolerance; `default` says what it is otherwise."""
    help_ = f"tolerance on |error of Γ| ({default})"
    command.add_argument("--within", metavar="X", type=words.tolerance, help=help_)


def _at(command: Parser, help_: str) -> None:
    """Let a command take frequencies."""
    command.add_argument("--at", metavar="HZ", type=words.number, nargs="+", help=help_)


def _csv(command: Parser, help_: str) -> None:
    """Let a command print CSV."""
    command.add_argument("--csv", action="store_true", help=help_)


def _three(command: Parser) -> None:
    """Let a command take the three standards of a correction."""
    command.add_argument(
        "--standards",
        metavar="NAME",
        nargs=3,
        default=[],
        help="the three standards that devices are corrected with (an open, a short, a load)",
    )
