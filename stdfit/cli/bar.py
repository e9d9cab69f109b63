"""A bar on standard error, from two seconds on."""

from __future__ import annotations

from threading import Lock, Timer
from time import monotonic

# typing alone takes as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    from collections.abc import Callable

    from rich.progress import Progress, TaskID

SOON = 2.0
"""Seconds without a bar: most commands are done by then."""


class Bar:
    """A bar that comes up by itself after `SOON` seconds, and is gone without a trace when it ends.

    It moves while nothing is known of how much there is to do, and fills when it is told (done, total).
    """

    def __init__(self, what: str) -> None:
        self._since = monotonic()
        self._lock = Lock()
        self._ended = False
        self._what, self._done, self._total = what, 0, 0
        self._shown: tuple[Progress, TaskID] | None = None
        self._timer = Timer(SOON, self._show)
        # A command that ends by an error must not wait for it.
        self._timer.daemon = True
        self._timer.start()

    def begin(self, what: str, *, threads: bool) -> Callable[[int, int], None]:
        """Name what is going on; return what is to be told (done, total)."""
        self._what, self._done, self._total = what, 0, 0
        if not threads:
            self._hide()
        self._update()
        return self._tell

    def end(self) -> None:
        """Take the bar away for good."""
        self._ended = True
        self._hide()

    def _hide(self) -> None:
        with self._lock:
            self._timer.cancel()
            if self._shown is not None:
                self._shown[0].stop()
                self._shown = None

    def _tell(self, done: int, total: int) -> None:
        self._done, self._total = done, total
        if self._shown is None and monotonic() - self._since >= SOON:
            self._show()
        self._update()

    def _show(self) -> None:
        """Draw the bar; rich leaves colours out where NO_COLOR is set (no-color.org)."""
        from rich.console import Console
        from rich.progress import BarColumn, Progress, TextColumn

        with self._lock:
            if self._ended or self._shown is not None:
                return
            bar = Progress(
                TextColumn("{task.description}"),
                BarColumn(),
                TextColumn("{task.fields[count]}"),
                console=Console(stderr=True),
                transient=True,
                redirect_stdout=False,
                redirect_stderr=False,
            )
            self._shown = (bar, bar.add_task(self._what, total=None, count=""))
            bar.start()
        self._update()

    def _update(self) -> None:
        with self._lock:
            if self._shown is None:
                return
            bar, task = self._shown
            count = f"{self._done} of {self._total}" if self._total else ""
            bar.update(
                task,
                description=self._what,
                completed=self._done,
                total=self._total or None,
                count=count,
            )
