"""Runs of `stdfit fit` over an existing kit file, killed at any instant: is the file whole ever after?"""

import os
import random
import signal
import time
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, field
from pathlib import Path

from fuzz_seeds import KINDS, Maker, corrected, run, standards

from stdfit.cli import main
from stdfit.pipeline.history_folder import find_kits
from stdfit.writing.bench_draft import find_standards
from stdfit.writing.kit_reading import read_kit

TOLERANCES = ("0.02", "0.03")


@dataclass
class Workshop:
    """A folder with a bench, and the two kit files that it gives, whole."""

    folder: Path
    whole: dict[str, bytes]

    @property
    def kit(self) -> Path:
        return self.folder / "kit.toml"

    def left_behind(self) -> list[str]:
        return sorted(path.name for path in self.folder.glob(".kit.toml.*.part"))


def workshop(folder: Path) -> Workshop:
    """Make a bench, and both of its kits."""
    Maker(1).write(folder, KINDS)
    (folder / "bench.toml").write_text(corrected("Hilltop set", standards(KINDS)), encoding="utf-8")
    whole = {}
    for within in TOLERANCES:
        run("fit", folder, "--within", within)
        whole[within] = (folder / "kit.toml").read_bytes()
    return Workshop(folder, whole)


def start(arguments: Sequence[str], limit_bytes: int | None = None) -> int:
    """Run a command in a process of its own, in which all is imported already; return its number."""
    number = os.fork()
    if number:
        return number
    code = 70
    try:
        quiet = os.open(os.devnull, os.O_WRONLY)
        os.dup2(quiet, 1)
        os.dup2(quiet, 2)
        if limit_bytes is not None:
            import resource

            resource.setrlimit(resource.RLIMIT_FSIZE, (limit_bytes, limit_bytes))
        code = main(list(arguments))
    finally:
        os._exit(code)


def _writes(shop: Workshop, known: set[str], until: float) -> bool:
    """Wait until a new temporary file shows that the writing has begun."""
    while time.perf_counter() < until:
        if any(name not in known and name.endswith(".part") for name in os.listdir(shop.folder)):  # noqa: PTH208
            return True
    return False


@dataclass
class Kills:
    """What stood there after each kill."""

    after: Counter = field(default_factory=Counter)
    torn: int = 0
    left_behind: int = 0
    while_writing: int = 0


def kill_many(shop: Workshop, kills: int, seed: int) -> Kills:
    """Kill runs at random instants, every second one from the moment on at which its temporary file is there."""
    rng, found = random.Random(seed), Kills()
    began = time.perf_counter()
    run("fit", shop.folder)
    usual = time.perf_counter() - began
    for k in range(kills):
        old = shop.kit.read_bytes()
        new = shop.whole[TOLERANCES[k % 2]]
        known = set(shop.left_behind())
        began = time.perf_counter()
        child = start(["fit", str(shop.folder), "--within", TOLERANCES[k % 2]])
        if k % 2 == rng.randrange(2):
            time.sleep(rng.uniform(0.0, 1.3 * usual))
        elif _writes(shop, known, began + 30.0):
            time.sleep(rng.choice([0.0, 0.0, 0.0002, 0.001, 0.003]) * rng.random())
        os.kill(child, signal.SIGKILL)
        _, status = os.waitpid(child, 0)
        killed = os.WIFSIGNALED(status)
        now = shop.kit.read_bytes()
        if now not in (old, new) or now not in shop.whole.values():
            found.torn += 1
        read_kit(shop.kit)
        what = "was done before" if not killed else "same" if old == new else "old" if now == old else "new"
        found.after[what] += 1
        found.while_writing += len(shop.left_behind()) - len(known)
    found.left_behind = len(shop.left_behind())
    return found


def passed_over(shop: Workshop) -> bool:
    """Tell whether the commands that look through folders take a leftover for nothing at all."""
    kits, left_out = find_kits(shop.folder)
    standards, unread = find_standards(shop.folder)
    named = [name for name, _ in left_out] + unread + [file for one in standards for file in one.files]
    return len(kits) == 1 and not any(".part" in name for name in named)


def clear_away(shop: Workshop) -> int:
    """Let the leftovers be of two hours ago, write the kit once more; return how many are left."""
    long_ago = time.time() - 7200.0
    for name in shop.left_behind():
        os.utime(shop.folder / name, (long_ago, long_ago))
    run("fit", shop.folder)
    return len(shop.left_behind())


def at_once(shop: Workshop, rounds: int) -> Counter:
    """Let two runs write the same kit at the same time; return which of the two kits stood there."""
    found: Counter = Counter()
    for _ in range(rounds):
        children = [start(["fit", str(shop.folder), "--within", within]) for within in TOLERANCES]
        codes = [os.waitstatus_to_exitcode(os.waitpid(child, 0)[1]) for child in children]
        now = shop.kit.read_bytes()
        names = [within for within, whole in shop.whole.items() if whole == now]
        found[names[0] if names and codes == [0, 0] else f"torn, exit codes {codes}"] += 1
    return found


def full_disk(shop: Workshop, limits: Sequence[int]) -> Counter:
    """Let the disk be full after so many bytes; return exit code and whether the old file is there."""
    found: Counter = Counter()
    for limit in limits:
        old = shop.kit.read_bytes()
        known = shop.left_behind()
        child = start(["fit", str(shop.folder), "--within", TOLERANCES[1]], limit)
        code = os.waitstatus_to_exitcode(os.waitpid(child, 0)[1])
        kept = shop.kit.read_bytes() == old and shop.left_behind() == known
        found[code, "kept" if kept else "changed"] += 1
    return found
