"""`stdfit check`: a simulated day at a raw analyser (invented data), written to files and read back."""

import csv
import io
import json
from dataclasses import replace

import numpy as np
import pytest

from stdfit.circuits.error_box import seen_raw
from stdfit.circuits.standard import reflection
from stdfit.cli import main
from stdfit.uncertainty.connections import responses
from stdfit.validity.kit import curve
from stdfit.writing.kit_file import kit_text
from stdfit.writing.kit_reading import read_kit

GRID = np.linspace(50e6, 6e9, 60)
HEAD = """format = "stdfit-bench/1"
kit = {{ name = "A day in the loft (invented)", connector = "SMA" }}
analyser = {{ state = "{state}" }}
"""
STANDARDS = "".join(
    f'[[standard]]\nname = "{kind}"\nkind = "{kind}"\nreadings = ["{kind}-*.s1p"]\n'
    for kind in ("open", "short", "load")
)
OFFSET = """[[device]]
name = "offset short"
readings = ["offset-*.s1p"]
kind = "short"
given.offset_delay_ps = { value = 55.0, u = 0.1 }
given.offset_loss_gohm_per_s = { value = 1.5, u = 0.5 }
given.offset_z0_ohm = { value = 50.0, u = 0.1 }
given.l0 = 3.0
"""
MISMATCH = """[[device]]
name = "mismatch"
readings = ["mismatch-*.s1p"]
value_file = "laboratory.s1p"
value_u95 = 0.004
"""
CAP = """[[device]]
name = "cap"
readings = ["cap-*.s1p"]
from_kit = "other.toml"
standard = "cap"
"""
PIPE = """[[device]]
name = "pipe"
readings = ["offset-*.s1p"]
expect = "line"
"""


def touchstone(gamma, grid=GRID):
    rows = [f"{f:.10g} {g.real!r} {g.imag!r}" for f, g in zip(grid.tolist(), gamma.tolist(), strict=True)]
    return "\n".join(["! simulated, invented data", "# HZ S RI R 50", *rows, ""])


class Loft:
    """A folder with the readings of a day: `write` draws them, `check` runs the command on a bench file."""

    def __init__(self, folder, kit_file, capsys):
        self.folder, self.kit_file, self.capsys = folder, kit_file, capsys
        self.kit = read_kit(kit_file)
        self.rng = np.random.default_rng(8)
        turn = np.exp(-2j * np.pi * GRID * 1e-9)
        directivity, match = 0.056 * turn, 0.1 * turn**2
        self.box = np.stack([directivity, 0.9 * turn - directivity * match, match], axis=-1)

    def true(self):
        """Return standards that are what the kit says, and three devices."""
        cap = self.kit.definition("open")
        parts = {one.kind: curve(self.kit, one, GRID)[0] for one in self.kit.definitions}
        parts["offset"] = reflection("short", [55.0, 1.5, 50.0, 3.0, 0.0, 0.0, 0.0], GRID, 50.0)[0]
        parts["mismatch"] = reflection("load", [15.0, 0.0, 50.0, 25.0, 50.0, 10.0], GRID, 50.0)[0]
        longer = cap.values + np.array([12.0, *np.zeros(cap.values.size - 1)])
        parts["cap"] = reflection("open", longer, GRID, 50.0)[0]
        return parts

    def write(self, true, connections=2, raw=True):
        for name, gamma in true.items():
            for k in range(connections):
                shift = self.rng.standard_normal(3) * [0.005, 0.05, 0.02]
                seen = gamma + responses(gamma, GRID, 50.0) @ shift
                seen = seen + 1e-4 * (self.rng.standard_normal((2, GRID.size)).T @ [1.0, 1j])
                shown = seen_raw(self.box, seen) if raw else seen
                (self.folder / f"{name}-{k + 1}.s1p").write_text(touchstone(shown), encoding="utf-8")
        fine = np.linspace(50e6, 6e9, 301)
        value = reflection("load", [15.0, 0.0, 50.0, 25.0, 50.0, 10.0], fine, 50.0)[0]
        (self.folder / "laboratory.s1p").write_text(touchstone(value, fine), encoding="utf-8")
        cap = self.kit.definition("open")
        delay = cap.parameters[0]
        longer = replace(delay, value=delay.value + 12.0, low=delay.low + 12.0, high=delay.high + 12.0)
        own = replace(cap, name="cap", parameters=(longer, *cap.parameters[1:]))
        order = tuple(name.replace("open.", "cap.") for name in self.kit.order)
        own = replace(
            own, parameters=tuple(replace(p, of=p.of.replace("open.", "cap.")) for p in own.parameters)
        )
        rest = tuple(one for one in self.kit.definitions if one.kind != "open")
        other = replace(
            self.kit, name="Other set", definitions=(own, *rest), order=order, files=(), session=None
        )
        (self.folder / "other.toml").write_text(kit_text(other), encoding="utf-8")

    def bench(self, *parts, state="raw"):
        text = HEAD.format(state=state) + "\n".join(parts)
        (self.folder / "bench.toml").write_text(text, encoding="utf-8")

    def check(self, *options):
        code = main(["check", str(self.kit_file), str(self.folder), *options])
        out, err = self.capsys.readouterr()
        return code, out, err

    def refused(self, *options):
        code, out, err = self.check(*options)
        assert (code, out) == (2, "")
        assert err.startswith("stdfit: ")
        assert err.count("\n") <= 2
        return err


@pytest.fixture
def loft(tmp_path, kit_file, capsys):
    return Loft(tmp_path, kit_file, capsys)


def test_a_good_kit_agrees(loft):
    loft.write(loft.true())
    loft.bench(STANDARDS, OFFSET, MISMATCH, CAP)
    code, out, err = loft.check()
    assert (code, err) == (0, "")
    lines = out.splitlines()
    assert "devices corrected with open, short, load, judged from 50 MHz to 2.57 GHz" in lines[0]
    assert lines[-1].startswith("the kit agrees with offset short, mismatch, cap up to 2.")
    assert "'cap': both kits carry " in out
    code, out, _ = loft.check("--json")
    data = json.loads(out)
    assert (code, data["result"]) == (0, "agrees")
    assert data["verdict"] == lines[-1]
    assert [one["name"] for one in data["devices"]] == ["offset short", "mismatch", "cap"]
    assert all(one["part_inside"] == 1.0 and one["largest_in_bounds"] < 1.0 for one in data["devices"])
    code, out, _ = loft.check("--csv")
    rows = list(csv.DictReader(io.StringIO(out)))
    assert len(rows) == 3 * GRID.size
    one = rows[GRID.size + 5]
    assert one["device"] == "mismatch"
    assert float(one["in_bounds"]) == float(one["difference"]) / float(one["bound"])
    assert {row["judged"] for row in rows} == {"yes", "no"}
    largest = max(float(row["in_bounds"]) for row in rows[: GRID.size] if row["judged"] == "yes")
    assert largest == data["devices"][0]["largest_in_bounds"]


def test_a_kit_with_a_wrong_open_fails(loft):
    true = loft.true()
    bound = curve(loft.kit, loft.kit.definition("open"), GRID)[1]
    loft.write({**true, "open": true["open"] * np.exp(3j * bound)})
    loft.bench(STANDARDS, CAP.replace('from_kit = "other.toml"\nstandard = "cap"\n', CAP_VALUE))
    code, out, err = loft.check()
    assert (code, err) == (1, "")
    assert out.splitlines()[-1].startswith("the check fails up to 2.")
    assert "read the device again" in out
    assert "'cap' against its stated values: judged from 1." in out  # its bound begins at 1 GHz
    data = json.loads(loft.check("--json")[1])
    assert (data["result"], data["devices"][0]["verdict"]) == ("fails", "fails")
    assert data["devices"][0]["largest_in_bounds"] > 1.27


CAP_VALUE = """value_file = "cap-value.s1p"
value_u95 = { frequency_hz = [1e9, 6e9], bound = [0.0005, 0.001] }
"""


@pytest.fixture(autouse=True)
def cap_value(loft):
    (loft.folder / "cap-value.s1p").write_text(touchstone(loft.true()["cap"]), encoding="utf-8")


def test_readings_that_the_kit_corrected_need_no_standards(loft):
    loft.write(loft.true(), raw=False)
    loft.bench(OFFSET, MISMATCH, state="corrected")
    code, out, _ = loft.check()
    assert code == 0
    assert "devices corrected by the analyser itself" in out.splitlines()[0]
    loft.bench(OFFSET, MISMATCH, state="raw")
    assert "raw readings of devices, and none of the kit's standards" in loft.refused()


def test_standards_are_named_by_the_kit_they_come_from(loft):
    """A bench of raw readings may call them what it likes, and hold other standards."""
    loft.write(loft.true())
    (loft.folder / "kit.toml").write_bytes(loft.kit_file.read_bytes())
    named = "".join(
        f'[[standard]]\nname = "my {kind}"\nkind = "{kind}"\nreadings = ["{kind}-*.s1p"]\n'
        f'from_kit = "kit.toml"\nstandard = "{kind}"\n'
        for kind in ("open", "short", "load")
    )
    new = '[[standard]]\nname = "new short"\nkind = "short"\nreadings = ["offset-1.s1p"]\n'
    loft.bench(named, new, MISMATCH)
    assert loft.check()[0] == 0
    loft.bench(named.replace("kit.toml", "other.toml"), MISMATCH)
    assert "no readings of the kit's 'open', 'short', 'load'" in loft.refused()


def test_several_tables_of_one_standard_are_more_connections_of_it(loft):
    loft.write(loft.true())
    (loft.folder / "kit.toml").write_bytes(loft.kit_file.read_bytes())
    again = (
        '[[standard]]\nname = "open in the evening"\nkind = "open"\nreadings = ["open-2.s1p"]\n'
        'from_kit = "kit.toml"\nstandard = "open"\n'
    )
    loft.bench(STANDARDS.replace("open-*", "open-1"), again, MISMATCH)
    split = json.loads(loft.check("--json")[1])
    loft.bench(STANDARDS, MISMATCH)
    assert split == json.loads(loft.check("--json")[1])


def test_a_device_of_which_nothing_is_known(loft):
    true = loft.true()
    loft.write(true)
    loft.bench(STANDARDS, PIPE, '[[device]]\nname = "piece"\nreadings = ["mismatch-*.s1p"]\n')
    code, out, _ = loft.check()
    assert code == 0
    data = json.loads(loft.check("--json")[1])
    told = [(one["against"], one["verdict"]) for one in data["devices"]]
    assert told == [
        ("|Γ| ≤ 1", "agrees"),
        ("steady loss", "agrees"),
        ("a plain line", "agrees"),
        ("|Γ| ≤ 1", "tells nothing"),
    ]
    assert "'piece' against |Γ| ≤ 1: too far inside the circle" in out
    # A kit whose standards reflect less than it says shows gain.
    loft.write({**true, "open": 0.8 * true["open"], "short": 0.8 * true["short"]})
    code, out, _ = loft.check()
    assert code == 1
    assert "the check fails" in out


def test_nothing_that_tells_anything_is_no_yes(loft):
    loft.write(loft.true())
    loft.bench(STANDARDS, '[[device]]\nname = "piece"\nreadings = ["mismatch-*.s1p"]\n')
    code, out, _ = loft.check()
    assert code == 1
    assert out.splitlines()[-1] == "nothing was checked: no device could show an error of the kit"


def test_a_connection_that_does_not_belong_is_left_out(loft):
    true = loft.true()
    loft.write(true, connections=4)
    bad = seen_raw(loft.box, true["mismatch"] * np.exp(-4j * np.pi * GRID * 8e-12))
    (loft.folder / "mismatch-5.s1p").write_text(touchstone(bad), encoding="utf-8")
    loft.bench(STANDARDS, MISMATCH.replace("mismatch-*", "mismatch-?"))
    code, out, _ = loft.check()
    assert code == 0
    assert "connection 5 of 'mismatch' lies 0." in out


def test_a_fit_does_not_mind_devices(loft, demo):
    folder = demo[0] / "bench"
    loft.write(loft.true())
    for file in folder.glob("*.s1p"):
        (loft.folder / file.name).write_bytes(file.read_bytes())
    text = (folder / "bench.toml").read_text(encoding="utf-8")
    (loft.folder / "bench.toml").write_text(text + MISMATCH, encoding="utf-8")
    assert main(["fit", str(loft.folder)]) == 0
    assert read_kit(loft.folder / "kit.toml").limit == loft.kit.limit


def test_a_device_that_the_kit_was_made_from(loft, demo):
    loft.write(loft.true())
    made = demo[0] / "bench" / "open-1.s1p"
    loft.bench(STANDARDS, f"[[device]]\nname = 'x'\nreadings = ['{made.as_posix()}']\n")
    err = loft.refused()
    assert "the kit was made from these readings, as its 'open'" in err


HOSTILE = {
    "no device": ([STANDARDS], "names no device to check the kit with"),
    "two standards": (
        [STANDARDS.partition('[[standard]]\nname = "load"')[0], MISMATCH],
        "no readings of the kit's 'load'",
    ),
    "other kind": (
        [STANDARDS.replace('kind = "load"', 'kind = "open"'), MISMATCH],
        "called open, and the kit knows it as load",
    ),
    "same file": (
        [STANDARDS, MISMATCH, MISMATCH.replace('"mismatch"', '"again"')],
        "the same readings as mismatch-1.s1p",
    ),
    "own kit": ([STANDARDS, CAP.replace("other.toml", "kit.toml")], "this is the kit that is to be checked"),
    "no such standard": ([STANDARDS, CAP.replace('"cap"\n', '"cup"\n')], "no standard named 'cup'"),
    "two-port": ([STANDARDS, "[[device]]\nname = 'x'\nport = 2\nreadings = ['cap-1.s1p']\n"], "cap-1.s1p"),
    "other grid": (
        [STANDARDS, "[[device]]\nname = 'x'\nreadings = ['laboratory.s1p']\n"],
        "differ from those of",
    ),
    "not to be solved": (
        [STANDARDS.replace("open-*", "short-1").replace("short-*", "short-2"), MISMATCH],
        "read the same",
    ),
    "highest": (["goal.highest_hz = 2e8\n" + STANDARDS, MISMATCH], "fewer than 8 frequencies"),
}


@pytest.mark.parametrize("parts, words", HOSTILE.values(), ids=HOSTILE)
def test_wrong_benches(loft, parts, words):
    loft.write(loft.true())
    (loft.folder / "kit.toml").write_bytes(loft.kit_file.read_bytes())
    loft.bench(*parts)
    assert words in loft.refused()


@pytest.mark.parametrize(
    "options, words",
    [
        (["--csv", "--json"], "--csv and --json are asked for at once"),
        (["--to", "1e8"], "frequencies lie within 0.1 GHz, too few for a verdict"),
        (["--to", "nan"], "too few for a verdict"),
        (["--standards", "open", "short", "lid"], "no standard named 'lid'"),
        (["--standards", "open", "open", "load"], "2 different standards are named"),
    ],
)
def test_wrong_requests(loft, options, words):
    loft.write(loft.true())
    loft.bench(STANDARDS, MISMATCH)
    assert words in loft.refused(*options)


def test_a_verdict_further_up(loft):
    loft.write(loft.true())
    loft.bench(STANDARDS, MISMATCH)
    data = json.loads(loft.check("--json", "--to", "inf")[1])
    assert (data["judged_to_hz"], data["devices"][0]["part_inside_beyond"]) == (6e9, None)


def test_a_bench_in_another_impedance(loft):
    loft.write(loft.true())
    loft.bench(STANDARDS, MISMATCH)
    path = loft.folder / "bench.toml"
    text = path.read_text(encoding="utf-8").replace('"SMA" }', '"SMA", reference_impedance_ohm = 75 }')
    path.write_text(text, encoding="utf-8")
    assert "the kit was made for 50 Ω, not 75 Ω" in loft.refused()


def test_the_installed_command(loft, command, tmp_path):
    loft.write(loft.true())
    loft.bench(STANDARDS, MISMATCH)
    done = command(tmp_path, "check", loft.kit_file, tmp_path)
    assert (done.returncode, done.stderr) == (0, "")
    assert done.stdout.splitlines()[-1].startswith("the kit agrees with mismatch")
