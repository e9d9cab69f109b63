"""Sound input of every kind, small, from which the fuzz program starts: invented data, made from the formulas."""

import contextlib
import io
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from stdfit.circuits.error_box import seen_raw
from stdfit.circuits.standard import reflection
from stdfit.cli import main

GRID = np.linspace(100e6, 4e9, 13)
VALUES = {
    "open": ("open", [25.0, 1.0, 50.0, 45.0, 0.0, 300.0, 0.0]),
    "short": ("short", [25.0, 1.0, 50.0, 5.0, 0.0, 0.0, 0.0]),
    "load": ("load", [0.0, 0.0, 50.0, 50.3, 20.0, 0.0]),
    "flush": ("short", [0.0, 1.0, 50.0, 1.0, 0.0, 0.0, 0.0]),
    "long": ("short", [55.0, 1.5, 50.0, 3.0, 0.0, 0.0, 0.0]),
    "longer": ("short", [80.0, 1.5, 50.0, 3.0, 0.0, 0.0, 0.0]),
    "mismatch": ("load", [15.0, 0.0, 50.0, 25.0, 50.0, 10.0]),
}
KINDS = ("open", "short", "load")
RESIDUAL = """[analyser.residual]
frequency_hz = [50e6, 3e9, 6e9]
directivity_db = [46, 44, 40]
source_match_db = [46, 39, 34]
reflection_tracking_db = [0.01, 0.09, 0.18]
"""
_SECTION = """
[[part.section]]
length_mm = { value = 7.50, tolerance = 0.05 }
inner_mm = { value = 1.52, tolerance = 0.01 }
outer_mm = { value = 3.50, tolerance = 0.02 }

[part.end]
"""
DRAWING = f"""format = "stdfit-drawing/1"
name = "Hilltop parts (invented)"
connector = "3.5 mm"

[[part]]
name = "open"
kind = "open"
conductor = "brass"
{_SECTION}form = "shielded"
pin_mm = {{ value = 0.0, tolerance = 0.03 }}
pipe_mm = 8.0

[[part]]
name = "short"
kind = "short"
conductor = "brass"
{_SECTION}form = "flat"

[[part]]
name = "load"
kind = "load"

[part.end]
form = "chip"
size = "0603"
count = 2
resistance_ohm = {{ value = 100.0, tolerance = 1.0 }}
"""
HEAD = 'format = "stdfit-bench/1"\n'


@dataclass(frozen=True)
class Scene:
    """A folder of sound input.

    Attributes
    ----------
    name : str
        Of the folder.
    calls : tuple of tuples of str
        Commands that make sense in it; OUT stands for a new file or folder.
    weight : float
        How often it is drawn.
    """

    name: str
    calls: tuple[tuple[str, ...], ...]
    weight: float = 1.0


KIT_CALLS = (
    ("show", "kit.toml"),
    ("show", "kit.toml", "--json"),
    ("curve", "kit.toml"),
    ("curve", "kit.toml", "--standard", "open", "--at", "1e9", "2e9"),
    ("limit", "kit.toml", "--within", "0.01", "0.05"),
    ("limit", "kit.toml", "--return-loss", "20", "1", "--impedance", "75", "3", "--phase", "2", "--json"),
    ("device", "kit.toml"),
    ("device", "kit.toml", "--csv", "--points", "7"),
    ("sheet", "kit.toml", "--accepts", "delay", "c0", "l0", "--json"),
    ("sheet", "kit.toml", "--units", "delay=mm", "--digits", "3", "--no-negative"),
    ("export", "kit.toml", "OUT", "--points", "9"),
    ("compare", "kit.toml", "other.toml"),
    ("compare", "other.toml", "kit.toml", "--json"),
    ("compare", "kit.toml", "ideal"),
    ("wear", "kit.toml", "other.toml"),
)

SCENES = (
    Scene(
        "bench",
        (
            ("fit", ".", "-o", "OUT.toml"),
            ("fit", "bench.toml", "-o", "OUT.toml", "--json"),
            ("fit", "."),
            ("wear", "old.toml", "."),
        ),
        2.0,
    ),
    Scene("new", (("new", "."), ("new", ".", "--json"))),
    Scene("kits", KIT_CALLS, 3.0),
    Scene(
        "sheets",
        tuple(call for call in KIT_CALLS if call[0] in ("show", "curve", "limit", "device", "compare")),
    ),
    Scene("raw", (("fit", ".", "-o", "OUT.toml"),)),
    Scene("bench", (("plan", "."),), 0.3),
    Scene("five", (("fit", ".", "-o", "OUT.toml"),)),
    Scene("through", (("adapter", ".", "-o", "OUT.toml"), ("adapter", ".", "-o", "OUT.toml", "--json"))),
    Scene("behind", (("fit", ".", "-o", "OUT.toml"),)),
    Scene("day", (("check", "kit.toml", "."), ("check", "kit.toml", ".", "--csv"))),
    Scene("repeats", (("repeat", "."), ("repeat", ".", "--json"))),
    Scene("shelf", (("history", "."), ("history", ".", "--csv"), ("history", ".", "--plot", "OUT.svg")), 0.7),
    Scene(
        "kits",
        (("report", "kit.toml", "-o", "OUT.html"), ("report", "kit.toml", "-o", "OUT.html", "--json")),
        0.3,
    ),
    Scene("bench", (("fit", ".", "-o", "OUT.toml", "--report", "OUT.html"),), 0.2),
    Scene(
        "drawn",
        (
            ("drawing", "parts.drawing.toml"),
            ("drawing", "parts.drawing.toml", "--part", "open", "--to", "4e9", "--json"),
            ("fit", ".", "-o", "OUT.toml"),
        ),
    ),
    Scene("planned", (("plan", "."),), 0.1),
)


def truth(name: str, grid=GRID):
    kind, values = VALUES[name]
    return reflection(kind, np.array(values), grid, 50.0)[0]


def touchstone(gamma, grid=GRID, *, ports=1) -> str:
    rows = []
    for f, g in zip(grid.tolist(), gamma.tolist(), strict=True):
        first = f"{f!r} {g.real!r} {g.imag!r}"
        rows.append(first if ports == 1 else f"{first} 0.0 0.0 0.0 0.0 {g.real!r} {g.imag!r}")
    return "\n".join(["! simulated, invented data", "# Hz S RI R 50", *rows, ""])


def columns(gamma, grid=GRID, mark=",") -> str:
    head = mark.join(["frequency_hz", "gamma_re", "gamma_im", "note"])
    rows = zip(grid.tolist(), gamma.tolist(), strict=True)
    return "\n".join([head, *(mark.join([repr(f), repr(g.real), repr(g.imag), "1"]) for f, g in rows), ""])


class Maker:
    """Writes readings that scatter a little, from one seed."""

    def __init__(self, seed: int) -> None:
        self.rng = np.random.default_rng(seed)

    def seen(self, name: str):
        turn = np.exp(-4e-13j * np.pi * GRID * self.rng.standard_normal())
        noise = 1e-4 * (self.rng.standard_normal(GRID.size) + 1j * self.rng.standard_normal(GRID.size))
        return truth(name) * turn + noise

    def write(self, folder: Path, names, *, box=None, prefix="", connections=2, mixed=False) -> None:
        folder.mkdir(exist_ok=True)
        for name in names:
            for k in range(connections):
                gamma = self.seen(name)
                shown = gamma if box is None else seen_raw(box, gamma)
                stem = folder / f"{prefix}{name}-{k + 1}"
                if mixed and k == 1 and name == "short":
                    stem.with_suffix(".csv").write_text(columns(shown), encoding="utf-8")
                elif mixed and k == 1 and name == "load":
                    stem.with_suffix(".s2p").write_text(touchstone(shown, ports=2), encoding="utf-8")
                else:
                    stem.with_suffix(".s1p").write_text(touchstone(shown), encoding="utf-8")


def standards(names, more="", prefix="") -> str:
    return "".join(
        f'\n[[standard]]\nname = "{prefix}{name}"\nkind = "{VALUES[name][0]}"\nreadings = ["{prefix}{name}-*"]\n'
        + more.format(name=name)
        for name in names
    )


def kit_table(name: str, date: str = "2024-05-01") -> str:
    return f'[kit]\nname = "{name} (invented)"\nconnector = "SMA"\nreference_impedance_ohm = 50.0\ndate = {date}\n'


def run(*arguments: object) -> str:
    """Run a command that must succeed; return what it printed."""
    out, err = io.StringIO(), io.StringIO()
    with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
        code = main([str(one) for one in arguments])
    if code:
        raise RuntimeError(f"{arguments}: {code}: {err.getvalue()}")
    return out.getvalue()


def raw_box():
    turn = np.exp(-2j * np.pi * GRID * 1e-9)
    directivity, match = 0.056 * turn, 0.1 * turn**2
    return np.stack([directivity, 0.9 * turn - directivity * match, match], axis=-1)


def adapter_box():
    turn = np.exp(-2j * np.pi * GRID * 60e-12)
    s11, s21, s22 = 0.02 * turn, 0.98 * turn, 0.03 * turn
    return np.stack([s11, s21**2 - s11 * s22, s22], axis=-1)


def corrected(name: str, tables: str, date: str = "2024-05-01", analyser: str = "") -> str:
    return f'{HEAD}{kit_table(name, date)}[analyser]\nstate = "corrected"\n{analyser}{RESIDUAL}{tables}'


def make_scenes(root: Path) -> None:
    """Write all folders of `SCENES` into a folder."""
    make = Maker(1)
    own = corrected("Hilltop set", standards(KINDS) + "given.resistance_ohm = { value = 50.3, u = 0.02 }\n")
    bench = root / "bench"
    make.write(bench, KINDS, mixed=True)
    (bench / "bench.toml").write_text(own, encoding="utf-8")
    run("fit", bench, "-o", root / "kit.toml")
    kit = (root / "kit.toml").read_text(encoding="utf-8")
    (root / "kit.toml").unlink()
    make.write(root / "new", KINDS, mixed=True)
    (root / "shelf").mkdir()
    for month in range(1, 6):
        folder = root / f"month-{month}"
        make.write(folder, KINDS)
        (folder / "bench.toml").write_text(
            corrected("Hilltop set", standards(KINDS), f"2024-{month:02d}-01"), encoding="utf-8"
        )
        run("fit", folder, "-o", root / "shelf" / f"{month}.toml")
        for path in folder.iterdir():
            path.unlink()
        folder.rmdir()
    (bench / "old.toml").write_bytes((root / "shelf" / "1.toml").read_bytes())
    kits = root / "kits"
    kits.mkdir()
    (kits / "kit.toml").write_text(kit, encoding="utf-8")
    (kits / "other.toml").write_bytes((root / "shelf" / "5.toml").read_bytes())
    sheets = root / "sheets"
    sheets.mkdir()
    (sheets / "kit.toml").write_text(run("sheet", kits / "kit.toml", "--json"), encoding="utf-8")
    (sheets / "other.toml").write_text(kit, encoding="utf-8")
    _raw(root, make, kit)
    _adapters(root, make, kit)
    _day(root, make, kit)
    _repeats(root / "repeats", make)
    _drawn(root / "drawn", make)
    (root / "planned").mkdir()
    plan = "plan = { from_hz = 50e6, to_hz = 6e9, points = 9, connections = 2 }\n"
    tables = "".join(f'\n[[standard]]\nname = "{kind}"\nkind = "{kind}"\n' for kind in KINDS)
    (root / "planned" / "bench.toml").write_text(
        f'{HEAD}{plan}{kit_table("Planned")}[analyser]\nstate = "corrected"\n{tables}', encoding="utf-8"
    )


def _raw(root: Path, make: Maker, kit: str) -> None:
    raw = root / "raw"
    make.write(raw, KINDS, box=raw_box(), prefix="known-")
    make.write(raw, ("long",), box=raw_box())
    (raw / "reference.toml").write_text(kit, encoding="utf-8")
    known = standards(KINDS, 'from_kit = "reference.toml"\nstandard = "{name}"\n', "known-")
    analyser = '[analyser]\nstate = "raw"\n'
    text = f"{HEAD}{kit_table('Raw')}{analyser}{known}{standards(('long',))}"
    (raw / "bench.toml").write_text(text, encoding="utf-8")
    five = root / "five"
    names = ("flush", "open", "load", "long", "longer")
    make.write(five, names, box=raw_box())
    tables = "".join(
        standards((name,)).replace(f'"{name}-*"', f'"{name}-[0-9]*"')
        + (
            f"given.offset_delay_ps = {{ value = {VALUES[name][1][0]}, u = 0.05 }}\n"
            if name != "open"
            else ""
        )
        for name in names
        if name != "load"
    )
    tables += standards(("load",)) + "given.resistance_ohm = { value = 50.3, u = 0.02 }\n"
    (five / "bench.toml").write_text(f"{HEAD}{kit_table('Five')}{analyser}{tables}", encoding="utf-8")


def _adapters(root: Path, make: Maker, kit: str) -> None:
    through = root / "through"
    make.write(through, KINDS, box=adapter_box())
    (through / "reference.toml").write_text(kit, encoding="utf-8")
    known = standards(KINDS, 'from_kit = "reference.toml"\nstandard = "{name}"\nbehind = "barrel"\n')
    text = corrected("Barrel", known + '\n[[adapter]]\nname = "barrel"\n')
    (through / "bench.toml").write_text(text, encoding="utf-8")
    behind = root / "behind"
    make.write(behind, KINDS, box=adapter_box())
    run("adapter", through, "-o", behind / "barrel.adapter.toml")
    tables = standards(KINDS, 'behind = "barrel"\n')
    tables += '\n[[adapter]]\nname = "barrel"\nfile = "barrel.adapter.toml"\n[thru]\nadapter = "barrel"\n'
    (behind / "bench.toml").write_text(corrected("Behind", tables), encoding="utf-8")


def _day(root: Path, make: Maker, kit: str) -> None:
    day = root / "day"
    make.write(day, (*KINDS, "long", "mismatch"), box=raw_box())
    (day / "kit.toml").write_text(kit, encoding="utf-8")
    (day / "laboratory.s1p").write_text(touchstone(truth("mismatch")), encoding="utf-8")
    text = f'{HEAD}{kit_table("Day")}[analyser]\nstate = "raw"\n{standards(KINDS)}'
    text += """
[[device]]
name = "offset short"
readings = ["long-*.s1p"]
kind = "short"
given.offset_delay_ps = { value = 55.0, u = 0.1 }
given.offset_loss_gohm_per_s = { value = 1.5, u = 0.5 }
given.offset_z0_ohm = { value = 50.0, u = 0.1 }
given.l0 = 3.0

[[device]]
name = "mismatch"
readings = ["mismatch-*.s1p"]
value_file = "laboratory.s1p"
value_u95 = 0.004
"""
    (day / "bench.toml").write_text(text, encoding="utf-8")


def _drawn(folder: Path, make: Maker) -> None:
    make.write(folder, KINDS)
    (folder / "parts.drawing.toml").write_text(DRAWING, encoding="utf-8")
    tables = standards(KINDS, 'given.from_drawing = "parts.drawing.toml"\n')
    (folder / "bench.toml").write_text(corrected("Drawn", tables), encoding="utf-8")


def _repeats(folder: Path, make: Maker) -> None:
    folder.mkdir()
    tables = ""
    for day in "ab":
        for connection in "12":
            for repeat in "12":
                path = folder / f"{day}-{connection}-{repeat}.s1p"
                path.write_text(touchstone(make.seen("short")), encoding="utf-8")
        tables += (
            f'\n[[repeatability]]\nstandard = "short"\nkind = "short"\ncalibration = "{day}"\n'
            f'connections = ["{day}-1-*.s1p", "{day}-2-*.s1p"]\n'
        )
    head = 'format = "stdfit-repeatability/1"\nname = "Hilltop (invented)"\nconnector = "SMA"\n'
    (folder / "repeatability.toml").write_text(head + tables, encoding="utf-8")
