"""What is done to files and options: pipes, devices, links in rings, folders, names with escape sequences."""

import contextlib
import os
import random
from collections.abc import Callable
from pathlib import Path

from fuzz_bytes import HOSTILE

Change = Callable[[Path, Path, random.Random], None]

NAMES = [name for name in HOSTILE if name not in ("", ".", "..") and "/" not in name and "\0" not in name]
NAMES += ["\udcff", "open-\udc80", "open-1.s1p", "load\n-1.s1p", "short-\x1b[31m"]


def _gone(path: Path) -> None:
    with contextlib.suppress(OSError):
        path.unlink()


def pipe(folder: Path, path: Path, rng: random.Random) -> None:
    _gone(path)
    os.mkfifo(path)


def device(folder: Path, path: Path, rng: random.Random) -> None:
    _gone(path)
    path.symlink_to(
        rng.choice(["/dev/zero", "/dev/null", "/dev/full", "/dev/random", "/proc/self/mem", "/proc/kmsg"])
    )


def folder_instead(folder: Path, path: Path, rng: random.Random) -> None:
    _gone(path)
    path.mkdir()


def dangling(folder: Path, path: Path, rng: random.Random) -> None:
    _gone(path)
    path.symlink_to("nowhere")


def ring(folder: Path, path: Path, rng: random.Random) -> None:
    _gone(path)
    other = path.with_name("ring-" + path.name[-40:])
    path.symlink_to(other.name)
    other.symlink_to(path.name)


def ring_of_folders(folder: Path, path: Path, rng: random.Random) -> None:
    for name in ("a", "b"):
        (folder / name).mkdir(exist_ok=True)
        (folder / name / "up").symlink_to("..")
        (folder / name / "self").symlink_to(".")


def vanished(folder: Path, path: Path, rng: random.Random) -> None:
    _gone(path)


def empty(folder: Path, path: Path, rng: random.Random) -> None:
    path.write_bytes(b"")


def giant_hole(folder: Path, path: Path, rng: random.Random) -> None:
    """A file that is far too large, and takes no room on the disk."""
    os.truncate(path, rng.choice([10 * 2**20, 600 * 2**20, 2**40]))


def renamed(folder: Path, path: Path, rng: random.Random) -> None:
    name = rng.choice(NAMES)
    ends = rng.choice([path.name, path.suffix, ""])
    with contextlib.suppress(OSError):  # too long for this file system
        path.rename(path.with_name(name + ends))


def copied(folder: Path, path: Path, rng: random.Random) -> None:
    """The same file once more, under another name."""
    name = rng.choice([f"{path.stem}-9{path.suffix}", f"open-7{path.suffix}", *NAMES[:8]])
    with contextlib.suppress(OSError):
        path.with_name(name).write_bytes(path.read_bytes())


def exchanged(folder: Path, path: Path, rng: random.Random) -> None:
    """Two files under each other's name."""
    other = rng.choice(sorted(one for one in folder.iterdir() if one.is_file()) or [path])
    if other.is_file() and path.is_file():
        one, two = path.read_bytes(), other.read_bytes()
        path.write_bytes(two)
        other.write_bytes(one)


def hard_link(folder: Path, path: Path, rng: random.Random) -> None:
    with contextlib.suppress(OSError):
        os.link(path, path.with_name(f"{path.stem}-8{path.suffix}"))


def clutter(folder: Path, path: Path, rng: random.Random) -> None:
    """Other things in the folder: leftovers, pipes, devices, many files."""
    os.mkfifo(folder / "fifo")
    (folder / "dangling").symlink_to("nowhere.s1p")
    (folder / "ring").symlink_to("ring")
    (folder / "folder").mkdir(exist_ok=True)
    (folder / ".kit.toml.abcd1234.part").write_bytes(b'format = "stdfit-kit/1"\n[kit')
    (folder / "kit.toml.part").write_bytes(b"x")
    (folder / "pipe.s1p").symlink_to("fifo")
    (folder / "open-77.s1p").symlink_to(rng.choice(["fifo", "dangling", "ring", "folder", "/dev/zero"]))
    for k in range(rng.choice([0, 0, 300])):
        (folder / f"other-{k}.s1p").write_bytes(b"x")


FILE_CHANGES: tuple[Change, ...] = (
    *(pipe, device, folder_instead, dangling, ring, ring_of_folders, vanished, empty, giant_hole),
    *(renamed, renamed, copied, exchanged, hard_link, clutter),
)

_WORDS = """nan inf -inf -1 0 1e400 -1e400 1e-400 1e308 1e-308 0.5 1 2 1e9 1e10 5e8 1000000 99999999999999999999 0x10
1_0 two '' 1,5 1e9Hz √ ٣ 3e3 0.0001 0.999999 open short load cubic nothing delay=mm delay=xx loss=dB resistance=5
resistance=0 open.delay ideal even log --json --csv --help -h --at --points"""
VALUES = _WORDS.split()
TEXTS = [*VALUES, *(text for text in HOSTILE if "\0" not in text), "\udcff", "9" * 5000, "x" * 100_000]

PLACES = [
    *(
        ".",
        "..",
        "bench.toml",
        "kit.toml",
        "none.toml",
        "none",
        "fifo",
        "ring",
        "dangling",
        "folder",
        "",
        "-",
        "./",
        "//",
    ),
    *(
        "/dev/zero",
        "/dev/null",
        "/dev/full",
        "/proc/self/mem",
        "/etc/passwd",
        "x" * 300,
        "x" * 5000,
        "a/" * 3000,
        "a\0b",
    ),
    *("\x1b[31m", "a\nb", "\u202e", "\udcff", "none/OUT.toml", "open-1.s1p", "open-1.s1p/x", "\x9b31m/none"),
]
"""Names that are put in place of those of files and folders; none of them can be written to by a sound program."""

OPTIONS = {
    "fit": (("--within",),),
    "plan": (("--within",),),
    "show": ((),),
    "curve": (("--standard",), ("--points",), ("--at",)),
    "limit": (("--within",), ("--return-loss", 2), ("--impedance", 2), ("--phase",), ("--standards", 3)),
    "device": (("--magnitude",), ("--at",), ("--points",), ("--standards", 3), ("--csv", 0)),
    "sheet": (
        ("--accepts",),
        ("--units",),
        ("--digits",),
        ("--velocity-factor",),
        ("--within",),
        ("--csv", 0),
    ),
    "export": (("--from",), ("--to",), ("--points",), ("--spacing",), ("--at",)),
    "compare": (("--at",), ("--csv", 0)),
    "check": (("--to",), ("--standards", 3), ("--csv", 0)),
    "wear": (("--same-calibration", 0), ("--csv", 0)),
    "adapter": ((),),
    "history": (("--within",), ("--to",), ("--same-calibration", 0), ("--csv", 0)),
    "repeat": (("--at",),),
    "report": ((),),
    "drawing": (("--part",), ("--to",)),
    "new": ((),),
}


def hostile_option(call: list[str], rng: random.Random) -> None:
    """Add an option with values that make no sense, or little."""
    option = rng.choice(OPTIONS[call[0]])
    if not option:
        call.append(rng.choice(["--json", "--csv", "--unknown", "--x=\x1b[31m", "extra", "\x1b[31m"]))
        return
    count = option[1] if len(option) > 1 else rng.choice([1, 1, 1, 2, 0])
    if count == 1 and rng.random() < 0.3:
        call.append(f"{option[0]}={rng.choice(TEXTS)}")
    else:
        call += [option[0], *(rng.choice(TEXTS) for _ in range(count))]


def hostile_place(call: list[str], rng: random.Random) -> None:
    """Name another file or folder."""
    places = [k for k, one in enumerate(call) if k and (one == "." or one.endswith(".toml") or one == "OUT")]
    if places:
        call[rng.choice(places)] = rng.choice(PLACES)


CALL_CHANGES = (hostile_option, hostile_option, hostile_option, hostile_place)
