"""What commands print: results, where files are, warnings, and a bar on a terminal while they work.

Results go to standard output. Everything else is left out with ``--quiet``, errors apart.
"""

from __future__ import annotations

import sys
from contextlib import contextmanager

from stdfit.base.shown import printable
from stdfit.cli.fold import fold

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Iterator, Sequence
    from typing import TextIO

    from stdfit.cli.bar import Bar
    from stdfit.validity.kit import Kit


class _Screen:
    """What holds for the command that is running."""

    quiet = False
    bar: Bar | None = None


_NOW = _Screen()


@contextmanager
def screen(command: str, *, quiet: bool) -> Iterator[None]:
    """Let a command be quiet or not, and show a bar from two seconds on where standard error is a terminal."""
    from os import environ

    _NOW.quiet = quiet
    # A dumb terminal cannot take back what was drawn.
    if not quiet and sys.stderr.isatty() and environ.get("TERM", "") not in ("dumb", "unknown"):
        from stdfit.cli.bar import Bar

        _NOW.bar = Bar(f"stdfit {command}")
    try:
        yield
    finally:
        _end_bar()


@contextmanager
def progress(what: str, *, threads: bool = True) -> Iterator[Callable[[int, int], None] | None]:
    """Name what is going on, and yield what is to be told (done, total); None where nothing shows it.

    Without threads the bar appears when something is told, never between: for work that forks.
    """
    if _NOW.bar is None:
        yield None
        return
    yield _NOW.bar.begin(what, threads=threads)


def print_json(data: object) -> None:
    """Print a result as JSON."""
    import json

    _end_bar()
    plain = not (sys.stdout.encoding or "").lower().startswith("utf")
    text = json.dumps(data, indent=2, ensure_ascii=plain, allow_nan=False)
    # Names of files may hold anything; what acts on a terminal is written as JSON's own escapes.
    print(printable(text, lambda letter: json.dumps(letter)[1:-1]))


def print_csv(names: Sequence[str], rows: Iterable[Sequence[object]]) -> None:
    """Print rows below their names; numbers with all their digits."""
    import csv

    _end_bar()
    writer = csv.writer(sys.stdout, lineterminator="\n")
    writer.writerow(names)
    writer.writerows(
        [printable(value) if isinstance(value, str) else repr(value) for value in row] for row in rows
    )


def print_text(text: str) -> None:
    """Print a result in words, folded to the width of a terminal; in a pipe as it is."""
    _end_bar()
    print(_fitting(printable(text.removesuffix("\n")), sys.stdout))


def say(text: str) -> None:
    """Print what a command that writes files says of them on standard output; nothing where it has to be quiet."""
    if not _NOW.quiet:
        print_text(text)


def tell(text: str) -> None:
    """Print a message on standard error; nothing where the command has to be quiet."""
    if not _NOW.quiet:
        _end_bar()
        print(_fitting(f"stdfit: {printable(text)}", sys.stderr), file=sys.stderr)


def warn(kit: Kit) -> None:
    """Print the warnings of a kit."""
    for warning in kit.warnings:
        tell(f"warning: {warning}")


def _fitting(text: str, stream: TextIO) -> str:
    """Return text that fits the terminal, where the stream is one."""
    if not stream.isatty():
        return text
    from shutil import get_terminal_size

    return fold(text, get_terminal_size().columns)


def _end_bar() -> None:
    """Take the bar away: what is printed must not run into it."""
    bar, _NOW.bar = _NOW.bar, None
    if bar is not None:
        bar.end()
