"""docs/walkthrough.md: its files are written, its commands run, and what they print is what stands in the page.

The readings are simulated here with a fixed seed (invented data), on parts not made from the models of the fit.
"""

import re
import shlex
import shutil
from pathlib import Path

import numpy as np
import pytest

from stdfit.circuits.error_box import seen_raw
from stdfit.circuits.standard import reflection
from stdfit.cli import main
from stdfit.trials.families import economy_residual, sweep
from stdfit.trials.files import reading_names, touchstone_text
from stdfit.trials.scenario import Scenario
from stdfit.trials.session import connect, draw_connections
from stdfit.trials.wear_pair import Worn, draw_pair

PAGE = Path(__file__).parents[1] / "docs" / "walkthrough.md"
SEED = 7
CLOSE = 0.03
"""Another processor rounds differently, and chance that is drawn anew for a verdict moves its last digit."""

# What the page says of the workshop.
SCENARIO = Scenario(
    frequency_hz=sweep(50e6, 4e9, 159),
    residual=economy_residual(),
    connections=5,
    scatter_ps=0.1,
    scatter_ohm=0.01,
    open_kind="shielded",
    load_reflection=(0.02, 0.03),
    offset_delay_ps=(14.0, 24.0),
    z0_scatter_ohm=0.3,
    given_resistance_u_ohm=0.02,
    given_delay_u_ps=0.4,
)
# A hairline crack in a solder joint, as the load has it by the time of the second session.
CRACK = Worn("load", "contact resistance", series_ohm=0.9)
OFFSET_SHORT = [50.3, 1.4, 50.0, 0.0, 0.0, 0.0, 0.0]


def write_readings(folder, frequency_hz, readings, names):
    folder.mkdir(exist_ok=True)
    for name, gamma in zip(names, readings, strict=True):
        text = touchstone_text(frequency_hz, gamma, 50.0, f"signal box, {name}")
        (folder / name).write_text(text, encoding="utf-8")


def write_workshop(folder):
    """Write three folders of readings: a first session, one after half a year, and raw ones of a check."""
    rng = np.random.default_rng(SEED)
    f = SCENARIO.frequency_hz
    first, second = draw_pair(SCENARIO, rng, same_calibration=False, worn=CRACK)
    for name, session in (("signal-box", first), ("autumn", second)):
        for standard, readings in session.readings.items():
            write_readings(folder / name, f, readings, reading_names(session, standard))
    turn = np.exp(-2j * np.pi * f * 1.1e-9)
    box = np.stack([0.05 * turn, 0.9 * turn - 0.004 * turn**3, 0.08 * turn**2], axis=-1)
    true = {**first.truth, "offset-short": reflection("short", OFFSET_SHORT, f, 50.0)[0]}
    for name, gamma in true.items():
        seen = connect(gamma, f, draw_connections(SCENARIO, "short", rng), 50.0)[:3]
        noise = 1e-4 * (rng.standard_normal(seen.shape) + 1j * rng.standard_normal(seen.shape))
        shown = seen_raw(box, seen + noise)
        write_readings(folder / "check", f, shown, [f"{name}-{k}.s1p" for k in (1, 2, 3)])
    return first


def steps_of(text):
    """Yield what the page does: (line, file, content) and (line, command, what it prints)."""
    for found in re.finditer(r"^```(toml|console)\n(.*?)^```$", text, re.MULTILINE | re.DOTALL):
        line = text.count("\n", 0, found.start()) + 1
        if found[1] == "toml":
            yield line, None, found[2]
            continue
        for command, printed in re.findall(r"^\$ (.*)\n((?:(?!\$ ).*\n)*)", found[2], re.MULTILINE):
            yield line, command, printed


def run(command, capsys):
    """Run one line of the page; return what it prints on standard output."""
    program, *arguments = shlex.split(command)
    if program == "cp":
        shutil.copy(*arguments)
        return ""
    assert program == "stdfit", command
    main(arguments)
    return capsys.readouterr().out


def alike(shown, printed):
    """Return whether two lines say the same, numbers within `CLOSE`; blanks between columns do not matter."""
    number = r"[-+]?\d+(?:\.\d+)?(?:e[-+]?\d+)?"
    if re.sub(number, "0", " ".join(shown.split())) != re.sub(number, "0", " ".join(printed.split())):
        return False
    pairs = zip(re.findall(number, shown), re.findall(number, printed), strict=True)
    return all(abs(float(one) - float(other)) <= CLOSE * abs(float(one)) + 1e-3 for one, other in pairs)


def missing(shown, printed):
    """Return the first line of the page that a command does not print; a line "…" stands for any number of lines."""
    rest = printed.splitlines()
    skip = False
    for line in shown.splitlines():
        if line.strip() == "…":
            skip = True
            continue
        while skip and rest and not alike(line, rest[0]):
            rest.pop(0)
        if not rest or not alike(line, rest[0]):
            return line
        rest.pop(0)
        skip = False
    return None if skip or not rest else f"(and then) {rest[0]}"


def test_the_page_is_what_happens(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    write_workshop(tmp_path)
    text = PAGE.read_text(encoding="utf-8")
    ran = set()
    for line, command, content in steps_of(text):
        if command is None:
            (name,) = re.findall(r"^# (\S+\.toml)", content.splitlines()[0])
            (tmp_path / name).write_text(content, encoding="utf-8")
            continue
        printed = run(command, capsys)
        gap = missing(content, printed)
        assert gap is None, f"walkthrough.md, line {line}, {command}: {gap}\n{printed}"
        ran.add(" ".join(command.split()[:2]))
    assert {f"stdfit {name}" for name in ("new", "fit", "plan", "sheet", "wear", "check")} <= ran


def test_the_page_is_short():
    assert len(PAGE.read_text(encoding="utf-8").splitlines()) <= 200


@pytest.mark.parametrize(
    ("shown", "printed", "gap"),
    [
        ("a 1.00\n…\nc\n", "a 1.01\nb\nc\n", None),
        ("a\n…\n", "a\nb\nc\n", None),
        ("a  1\n", "a 1\n", None),
        ("a 1\n", "a 2\n", "a 1"),
        ("a\nc\n", "a\nb\nc\n", "c"),
        ("a\n", "a\nb\n", "(and then) b"),
        ("…\nd\n", "a\nb\n", "d"),
    ],
)
def test_the_test_sees_what_is_stale(shown, printed, gap):
    assert missing(shown, printed) == gap
