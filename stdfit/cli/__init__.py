"""The command: arguments, messages and exit codes; no science.

Nothing heavy is imported before it is needed, so that help and wrong usage answer at once.
"""

from __future__ import annotations

import os
import sys
from importlib import import_module

from stdfit.cli.arguments import parser
from stdfit.cli.exit_codes import ANSWER_IS_NO, DONE, OWN_FAULT, STOPPED_BY_USER, WRONG_INPUT
from stdfit.cli.faults import told

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    from collections.abc import Sequence

__all__ = ["ANSWER_IS_NO", "DONE", "OWN_FAULT", "STOPPED_BY_USER", "WRONG_INPUT", "main"]


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command; return its exit code."""
    for stream in (sys.stdout, sys.stderr):
        # A terminal that knows few letters shows escapes for the others.
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="backslashreplace")
    arguments_of_all = parser()
    asked = arguments_of_all.parse_args(arguments)
    try:
        if asked.version:
            from stdfit.pipeline import program_version

            print(f"stdfit {program_version()}")
            return DONE
        if asked.command is None:
            arguments_of_all.error("no command given")
        from stdfit.cli.screen import screen

        with screen(asked.command, quiet=asked.quiet):
            code = int(getattr(import_module(f"stdfit.cli.{asked.home}"), asked.command)(asked))
        sys.stdout.flush()
        return code
    except KeyboardInterrupt:
        print("stdfit: stopped; nothing was half written", file=sys.stderr)
        return STOPPED_BY_USER
    except BrokenPipeError:
        _drop_output()
        return DONE
    except Exception as fault:
        code, text = told(fault)
        print(f"stdfit: {text}", file=sys.stderr)
        if isinstance(fault, OSError):
            _drop_output()
        return code


def _drop_output() -> None:
    """Give up what is still buffered for stdout: it has nowhere to go, and must not fail again at the end."""
    nowhere = os.open(os.devnull, os.O_WRONLY)
    try:
        os.dup2(nowhere, sys.stdout.fileno())
    except (OSError, ValueError):  # it is no file: somebody catches it, or has closed it
        pass
    finally:
        os.close(nowhere)
