"""What commands print: results as JSON, messages and a progress bar on standard error."""

from __future__ import annotations

import sys
from contextlib import contextmanager

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Iterator, Sequence

    from stdfit.validity.kit import Kit


def print_json(data: object) -> None:
    """Print a result as JSON."""
    import json

    print(json.dumps(data, indent=2, ensure_ascii=False, allow_nan=False))


def print_csv(names: Sequence[str], rows: Iterable[Sequence[object]]) -> None:
    """Print rows below their names; numbers with all their digits."""
    import csv

    writer = csv.writer(sys.stdout, lineterminator="\n")
    writer.writerow(names)
    writer.writerows([value if isinstance(value, str) else repr(value) for value in row] for row in rows)


def tell(text: str) -> None:
    """Print a message."""
    print(f"stdfit: {text}", file=sys.stderr)


def warn(kit: Kit) -> None:
    """Print the warnings of a kit."""
    for warning in kit.warnings:
        tell(f"warning: {warning}")


@contextmanager
def progress(what: str) -> Iterator[Callable[[int, int], None] | None]:
    """Show a progress bar on a terminal, and nothing in a pipe."""
    if not sys.stderr.isatty():
        yield None
        return
    from rich.console import Console
    from rich.progress import Progress

    with Progress(console=Console(stderr=True), transient=True) as bar:
        task = bar.add_task(what, total=None)
        yield lambda done, total: bar.update(task, completed=done, total=total)
