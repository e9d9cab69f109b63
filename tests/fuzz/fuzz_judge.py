"""One call of the command under watch: what came out of it, and was that sound?"""

import contextlib
import hashlib
import io
import json
import os
import re
import signal
import stat
import sys
import warnings
from dataclasses import dataclass, field
from pathlib import Path
from xml.etree import ElementTree

import numpy as np
from fuzz_oracle import expected

from stdfit.base.errors import InputError
from stdfit.cli import main
from stdfit.data.readings import read_reading
from stdfit.writing.kit_reading import read_kit

PATIENCE_S = 20
"""Of processor time; a wait on a pipe takes none, and ends after `WAIT_S`."""
PLAN_PATIENCE_S = 300
"""A plan does many fits."""
WAIT_S = 200
LONGEST_LINE = 20_000
WRITING = os.O_WRONLY | os.O_RDWR | os.O_CREAT | os.O_TRUNC
# Several benches are fitted in processes that are forked; that is no way out.
OUTSIDE = (
    "socket.",
    "subprocess.",
    "os.exec",
    "os.system",
    "os.posix_spawn",
    "ctypes.",
    "urllib.",
    "ftplib.",
)


class Hang(BaseException):
    """The command took too long."""


class Captured(io.TextIOWrapper):
    """What would be the terminal: UTF-8, strict, with a file number of its own."""

    def __init__(self) -> None:
        super().__init__(io.BytesIO(), encoding="utf-8", errors="strict", newline="\n", write_through=True)
        self.number = os.open(os.devnull, os.O_WRONLY)

    def fileno(self) -> int:
        return self.number

    def text(self) -> str:
        self.flush()
        return self.buffer.getvalue().decode("utf-8", "replace")

    def done(self) -> None:
        os.close(self.number)


class Watch:
    """Notes what is opened for writing, and everything that leads out of the process."""

    def __init__(self) -> None:
        self.written: set[str] = set()
        self.outside: list[str] = []
        self.on = False
        sys.addaudithook(self._hear)

    def _hear(self, event: str, arguments) -> None:
        if not self.on:
            return
        if event == "open":
            path, _, flags = arguments
            if isinstance(path, (str, bytes)) and (flags or 0) & WRITING:
                self.written.add(os.fsdecode(path))
        elif event in ("os.rename", "os.link", "os.symlink"):
            self.written.add(os.fsdecode(arguments[1]))
        elif event in ("os.mkdir", "os.remove", "os.rmdir", "os.truncate", "os.chmod"):
            self.written.add(os.fsdecode(arguments[0]) if isinstance(arguments[0], (str, bytes)) else "")
        elif event.startswith(OUTSIDE):
            self.outside.append(event)


WATCH = Watch()


@dataclass
class Outcome:
    """What a call did; `faults` is empty where all of it was sound."""

    code: int
    out: str
    err: str
    faults: list[str] = field(default_factory=list)


def snapshot(folder: Path) -> dict[str, str]:
    """Return what every file below a folder is; large and strange ones by their kind alone."""
    found = {}
    for top, folders, files in os.walk(folder):
        for name in folders + files:
            path = Path(top) / name
            status = path.lstat()
            what = stat.filemode(status.st_mode)[0]
            if what == "l":
                what += str(path.readlink())
            elif what == "-":
                what += str(status.st_size)
                if status.st_size < 4 * 2**20:
                    what += hashlib.sha256(path.read_bytes()).hexdigest()
            found[str(path.relative_to(folder))] = what
    return found


def strange(text: str) -> str:
    """Return the characters that must not reach a terminal."""
    return "".join(sorted(letter for letter in set(text) if letter != "\n" and not letter.isprintable()))


def _call(arguments: list[str]) -> tuple[int, str, str]:
    out, err = Captured(), Captured()

    def too_long(*_):
        raise Hang

    old = [signal.signal(one, too_long) for one in (signal.SIGPROF, signal.SIGALRM)]
    patience = PLAN_PATIENCE_S if arguments[0] == "plan" else PATIENCE_S
    signal.setitimer(signal.ITIMER_PROF, patience)
    signal.setitimer(signal.ITIMER_REAL, max(WAIT_S, 3 * patience))
    WATCH.written, WATCH.outside, WATCH.on = set(), [], True
    try:
        with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err), warnings.catch_warnings():
            warnings.simplefilter("always")
            try:
                code = main(arguments)
            except SystemExit as ended:
                code = int(ended.code or 0)
            except Hang:
                code = -1
            except BaseException as fault:
                err.write(f"stdfit: {type(fault).__name__} came out of main: {fault}\n"[:500])
                code = -2
    finally:
        WATCH.on = False
        signal.setitimer(signal.ITIMER_PROF, 0)
        signal.setitimer(signal.ITIMER_REAL, 0)
        for one, before in zip((signal.SIGPROF, signal.SIGALRM), old, strict=True):
            signal.signal(one, before)
    texts = out.text(), err.text()
    out.done()
    err.done()
    return (code, *texts)


def judge(arguments: list[str], folder: Path, may_write: set[str], asks_help: bool = False) -> Outcome:
    """Call the command in a folder, and say what was wrong with what it did.

    Parameters
    ----------
    arguments : list of str
    folder : path
        The current folder, below one of its own; nothing outside may change.
    may_write : set of str
        Beginnings of the names, relative to the folder, that may appear or change.
    asks_help : bool
        Whether help may be the answer.
    """
    before = snapshot(folder.parent)
    code, out, err = _call(arguments)
    result = Outcome(code, out, err)
    fault = result.faults.append
    if code == -1:
        fault("hang")
    elif code == -2:
        fault(f"escaped: {err[-200:]}")
    elif code == 3:
        fault(_saved(err))
    elif code not in (0, 1, 2):
        fault(f"exit code {code}")
    if "Traceback" in out + err and code != 3:
        fault("a traceback reached the user")
    _check_texts(result, asks_help)
    after = snapshot(folder.parent)
    changed = {name for name in before.keys() | after.keys() if before.get(name) != after.get(name)}
    wrote = code in (0, 1) or "benches fitted" in out
    allowed = tuple(f"{folder.name}/{name}" for name in may_write) if wrote else ()
    for name in sorted(changed):
        if not (allowed and name.startswith(allowed)):
            fault(f"changed with exit code {code}: {name[:80]!r}")
    if WATCH.outside:
        fault(f"led out of the process: {WATCH.outside[0]}")
    _check_written(result, folder, may_write)
    return result


def _saved(err: str) -> str:
    """Return where a fault of the program lies, from the traceback that it saved."""
    found = re.search(r"the traceback is in (.*\.txt)", err)
    if not found:
        return "code 3 without a traceback"
    path = Path(found[1])
    text = path.read_text(encoding="utf-8", errors="replace")
    path.unlink()
    frames = re.findall(r'File "[^"]*/(stdfit/[^"]*)", line (\d+)', text)
    last = ", ".join(":".join(frame) for frame in frames[-2:])
    return f"traceback: {text.strip().splitlines()[-1][:150]} [{last}]"


def _check_texts(result: Outcome, asks_help: bool) -> None:
    fault = result.faults.append
    for where, text in (("stdout", result.out), ("stderr", result.err)):
        if strange(text):
            fault(f"characters on {where} that act on a terminal: {strange(text)[:10]!r}")
    lines = result.err.splitlines()
    told = [
        line
        for line in lines
        if not re.match(r"stdfit: (warning: |left out: |plot: )|stdfit: .* is of an earlier export", line)
    ]
    if result.code in (0, 1) and result.out and told:
        fault(f"beside a result on stderr: {told[0][:120]}")
    if result.code == 2 and re.search(r'\d+ of \d+ benches fitted|"failed": ', result.out):
        return  # several benches: each bad one is told, and the good ones are a result
    if result.code == 2 and not asks_help:
        if not 1 <= len(told) <= 2 or not told[0].startswith("stdfit: "):
            fault(f"a message of {len(told)} lines: {told[:1]}")
        if result.out:
            fault("wrong input, and yet a result")
    if any(len(line) > LONGEST_LINE for line in lines):
        fault("a line of a message that is far too long")
    if result.code == 0 and not result.out:
        fault("done, and nothing said")
    if result.code in (0, 1) and result.out.startswith("{"):
        try:
            json.loads(result.out, parse_constant=lambda word: fault(f"{word} in JSON"))
        except ValueError as broken:
            fault(f"no JSON: {broken}")
    if result.code == 0 and re.search(r"(?i)(?<![\w./-])(nan|inf)(?![\w./-])", result.out):
        fault("nan or inf in a result")


def _check_written(result: Outcome, folder: Path, may_write: set[str]) -> None:
    """Every path that was opened for writing lies where the command was told to write."""
    allowed = tuple(str(folder / name) for name in may_write)
    for path in WATCH.written:
        if path in ("", os.devnull) or "stdfit-fault-" in path or "/.cache/" in path or "matplotlib" in path:
            continue
        whole = os.path.join(folder, path)  # noqa: PTH118 - a path need not be one
        name = os.path.basename(whole)  # noqa: PTH119
        plain = os.path.join(os.path.dirname(whole), name.removeprefix("."))  # noqa: PTH118, PTH120
        if not os.path.normpath(plain).startswith(allowed):
            result.faults.append(f"opened for writing: {path[:120]!r}")


def wrong_numbers(path: Path) -> str | None:
    """Compare the program's reading of a file with that of a second reader; return what is wrong."""
    for port in (1, 2) if path.suffix == ".s2p" else (1,):
        try:
            read = read_reading(path, port=port)
        except InputError:
            continue
        other = expected(path.name, path.read_bytes(), port)
        if other is None:
            return "wrong: a second reader refuses it"
        if len(other) != read.frequency_hz.size:
            return "wrong: another number of rows"
        f, gamma = (np.array(one) for one in zip(*other, strict=True))
        if not np.allclose(f, read.frequency_hz, rtol=1e-12) or not np.allclose(
            gamma, read.gamma, rtol=1e-9, atol=1e-12
        ):
            return "wrong: other numbers"
    return None


def broken_page(path: Path) -> str | None:
    """Return what is wrong with a page or picture that was written."""
    # The page's own marks for a browser, where a line may not be broken.
    text = re.sub("[\N{NO-BREAK SPACE}\N{WORD JOINER}]", " ", path.read_text(encoding="utf-8"))
    if strange(text):
        return f"a page with characters that are none: {strange(text)[:10]!r}"
    if "<script>alert" in text or "<b>x" in text:
        return "text from outside acts as markup"
    if path.suffix == ".svg":
        try:
            ElementTree.fromstring(text)
        except ElementTree.ParseError as fault:
            return f"no XML: {fault}"
    return None


def broken_kit(path: Path) -> str | None:
    """Return why a kit file that was written cannot be read back."""
    try:
        read_kit(path)
    except InputError as fault:
        return f"the kit file that was written does not read: {fault.what}"
    return None
