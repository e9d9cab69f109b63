"""A parser of arguments whose faults are one line and what to do."""

from __future__ import annotations

import argparse

from stdfit.base.shown import shown
from stdfit.cli.exit_codes import WRONG_INPUT

# typing alone takes as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence
    from typing import Any, NoReturn


class Parser(argparse.ArgumentParser):
    """A parser whose faults are one line and what to do, with the nearest word that it knows."""

    def parse_known_args(self, args=None, namespace=None):  # type: ignore[no-untyped-def]
        """Refuse what a command does not know in that command's own name."""
        known, left = super().parse_known_args(args, namespace)
        if left:
            self.unknown(left)
        return known, left

    def unknown(self, left: Sequence[str]) -> NoReturn:
        """Say which arguments are not known, and stop."""
        options = [one.partition("=")[0] for one in left if one.startswith("-")]
        meant = self._meant(options[0], self._option_string_actions) if options else ""
        self.error(f"unrecognized arguments: {' '.join(left)}", meant)

    def _check_value(self, action: argparse.Action, value: Any) -> None:
        """Refuse a word that is no choice; argparse asks here."""
        if action.choices is not None and value not in action.choices:
            what = "command" if action.dest == "command" else f"choice of {'/'.join(action.option_strings)}"
            meant = self._meant(value, action.choices)
            self.error(f"no {what} '{value}'", meant or f"use one of: {', '.join(action.choices)}; ")

    @staticmethod
    def _meant(word: str, known: Iterable[str]) -> str:
        """Return "did you mean 'x'? " where a known word is near, else nothing."""
        from stdfit.data.words import nearest

        # Dashes are no likeness.
        plain = {one.lstrip("-"): one for one in known}
        best = nearest(word.lstrip("-"), plain)
        return f"did you mean '{plain[best]}'? " if best else ""

    def error(self, message: str, meant: str = "") -> NoReturn:
        """Say what is wrong and stop."""
        self.exit(WRONG_INPUT, f"stdfit: {shown(message)}\n{meant}see '{self.prog} --help'\n")
