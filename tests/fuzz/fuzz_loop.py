"""Draw inputs, run the command on each, count what comes out."""

import os
import random
import shutil
import tempfile
import time
from collections import Counter
from collections.abc import Callable, Iterable
from dataclasses import dataclass, field
from itertools import pairwise
from pathlib import Path

from fuzz_bytes import BYTE_CHANGES
from fuzz_files import CALL_CHANGES, FILE_CHANGES
from fuzz_judge import Outcome, broken_kit, broken_page, judge, wrong_numbers
from fuzz_seeds import SCENES, make_scenes
from fuzz_tables import TABLE_CHANGES

READINGS = (".s1p", ".s2p", ".csv")


@dataclass
class Case:
    """One input: a call in a folder, and what was done to both."""

    index: int
    scene: str
    call: list[str]
    done: list[str] = field(default_factory=list)
    touched: list[str] = field(default_factory=list)


@dataclass
class Counts:
    """What came out of all inputs."""

    inputs: int = 0
    codes: Counter = field(default_factory=Counter)
    calls: Counter = field(default_factory=Counter)
    changes: Counter = field(default_factory=Counter)
    readings: Counter = field(default_factory=Counter)
    faults: dict[str, list[int]] = field(default_factory=dict)
    seconds: float = 0.0
    slowest: tuple[float, int] = (0.0, 0)


def _mutate(case: Case, folder: Path, rng: random.Random) -> None:
    for _ in range(rng.choice([1, 1, 1, 2, 3])):
        files = sorted(path for path in folder.iterdir() if path.is_file() and not path.is_symlink())
        kind = rng.random()
        if kind < 0.15:
            change = rng.choice(CALL_CHANGES)
            change(case.call, rng)
        elif kind < 0.27 and files:
            change = rng.choice(FILE_CHANGES)
            try:
                change(folder, rng.choice(files), rng)
            except FileExistsError:
                continue
        elif files:
            tables = [path for path in files if path.suffix == ".toml"]
            path = rng.choice(tables) if tables and rng.random() < 0.6 else rng.choice(files)
            if path.stat().st_size > 4 * 2**20:
                continue
            change = rng.choice(
                TABLE_CHANGES if path.suffix == ".toml" and rng.random() < 0.6 else BYTE_CHANGES
            )
            path.write_bytes(change(path.read_bytes(), rng))
            case.touched.append(path.name)
        else:
            continue
        case.done.append(change.__name__)


def run_case(root: Path, seed: int, index: int, keep: Path | None = None) -> tuple[Case, Outcome, list[str]]:
    """Draw one input from (seed, index), run it, and return it with what came out and how its readings were read."""
    rng = random.Random(f"{seed}:{index}")
    (scene,) = rng.choices(SCENES, [one.weight for one in SCENES])
    case = Case(index, scene.name, list(rng.choice(scene.calls)))
    outer = Path(tempfile.mkdtemp(prefix="stdfit-fuzz-"))
    folder = outer / "case"
    here = Path.cwd()
    try:
        shutil.copytree(root / scene.name, folder)
        for name in ("kit.toml", "keep.s1p", "notes.txt"):
            (outer / name).write_text("mine\n", encoding="utf-8")
        _mutate(case, folder, rng)
        os.chdir(folder)
        call = [one.replace("OUT", "out") for one in case.call]
        outcome = judge(call, folder, may_write(case), asks_help=any(one in ("-h", "--help") for one in call))
        read = []
        for name in sorted(set(case.touched)):
            path = folder / name
            if path.suffix in READINGS and path.is_file() and path.stat().st_size < 4 * 2**20:
                said = wrong_numbers(path)
                read.append(said or "alike")
                if said:
                    outcome.faults.append(f"{said} in a mutated reading")
        for name in ("out.html", "out.svg"):
            fault = broken_page(folder / name) if (folder / name).is_file() else None
            if fault:
                outcome.faults.append(fault)
        for name in ("out.toml", "kit.toml"):
            path = folder / name
            if (
                case.call[0] == "fit"
                and outcome.code == 0
                and path.is_file()
                and f"kit file: {name}" in outcome.out
            ):
                fault = broken_kit(path)
                if fault:
                    outcome.faults.append(fault)
        return case, outcome, read
    finally:
        os.chdir(here)
        if keep is not None:
            shutil.copytree(outer, keep, symlinks=True, dirs_exist_ok=True, ignore=_strange_files)
        shutil.rmtree(outer, ignore_errors=True)


def _strange_files(top: str, names: list[str]) -> list[str]:
    paths = ((name, Path(top) / name) for name in names)
    return [name for name, path in paths if not (path.is_symlink() or path.is_file() or path.is_dir())]


def may_write(case: Case) -> set[str]:
    """The names that the call may write to: OUT, or what it says in its help."""
    allowed = {"out"} if any("OUT" in one for one in case.call) else set()
    targets = [after for before, after in pairwise(case.call) if before in ("-o", "--plot", "--report")]
    targets += case.call[2:3] if case.call[0] == "export" else []
    inside = [one.split("/")[0] for one in targets if not one.startswith(("/", ".."))]
    allowed |= {one.removesuffix(".toml") for one in inside if one not in ("", ".")}
    if case.call[0] == "fit":
        allowed.add("kit.toml")
    return allowed | ({"bench.toml"} if case.call[0] == "new" else set())


def run_many(indices: Iterable[int], seed: int, tell: Callable[[str], None] | None = None) -> Counts:
    """Run inputs; return what came out of them."""
    counts = Counts()
    root = Path(tempfile.mkdtemp(prefix="stdfit-scenes-"))
    start = time.perf_counter()
    try:
        make_scenes(root)
        for index in indices:
            began = time.perf_counter()
            case, outcome, read = run_case(root, seed, index)
            took = time.perf_counter() - began
            counts.inputs += 1
            counts.slowest = max(counts.slowest, (took, index))
            counts.codes[outcome.code] += 1
            counts.calls[case.call[0], outcome.code] += 1
            counts.changes.update(case.done)
            counts.readings.update(read)
            for fault in outcome.faults:
                known = counts.faults.setdefault(f"{case.call[0]}: {fault}", [])
                known.append(index)
                if len(known) == 1 and tell is not None:
                    tell(
                        f"input {index}: {case.scene} {[one[:60] for one in case.call]} {case.done}: {fault}"
                    )
    finally:
        counts.seconds = time.perf_counter() - start
        shutil.rmtree(root, ignore_errors=True)
    return counts
