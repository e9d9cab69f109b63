"""The command: arguments, messages and exit codes; no science.

Nothing heavy is imported before it is needed, so that help and wrong usage answer at once.
"""

from __future__ import annotations

import os
import sys
from importlib import import_module

from stdfit.cli.arguments import parser
from stdfit.cli.exit_codes import ANSWER_IS_NO, DONE, OWN_FAULT, STOPPED_BY_USER, WRONG_INPUT

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    from collections.abc import Sequence

__all__ = ["ANSWER_IS_NO", "DONE", "OWN_FAULT", "STOPPED_BY_USER", "WRONG_INPUT", "main"]


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command; return its exit code."""
    arguments_of_all = parser()
    asked = arguments_of_all.parse_args(arguments)
    from stdfit.base.errors import FitError, StdfitError

    try:
        if asked.version:
            from stdfit.pipeline import program_version

            print(f"stdfit {program_version()}")
            return DONE
        if asked.command is None:
            arguments_of_all.error("no command given")
        code = int(getattr(import_module(f"stdfit.cli.{asked.home}"), asked.command)(asked))
        sys.stdout.flush()
        return code
    except StdfitError as fault:
        print(f"stdfit: {fault}", file=sys.stderr)
        return ANSWER_IS_NO if isinstance(fault, FitError) else WRONG_INPUT
    except KeyboardInterrupt:
        print("stdfit: stopped; nothing was half written", file=sys.stderr)
        return STOPPED_BY_USER
    except BrokenPipeError:
        _drop_output()
        return DONE
    except OSError as fault:
        where = f"{fault.filename}: " if fault.filename else ""
        print(f"stdfit: {where}{fault.strerror or fault}", file=sys.stderr)
        print("check the path, its permissions and the space on the disk", file=sys.stderr)
        _drop_output()
        return WRONG_INPUT
    except Exception:
        print(f"stdfit: a fault of the program; the traceback is in {_save_traceback()}", file=sys.stderr)
        return OWN_FAULT


def _drop_output() -> None:
    """Give up what is still buffered for stdout: it has nowhere to go, and must not fail again at the end."""
    os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())


def _save_traceback() -> str:
    """Save the traceback of the current exception; return where."""
    import tempfile
    import traceback

    with tempfile.NamedTemporaryFile(
        "w", prefix="stdfit-fault-", suffix=".txt", delete=False, encoding="utf-8"
    ) as file:
        file.write(traceback.format_exc())
    return file.name
