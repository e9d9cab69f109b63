"""What is said of an exception, and the exit code that goes with it."""

from __future__ import annotations

from stdfit.base.shown import shown
from stdfit.cli.exit_codes import ANSWER_IS_NO, OWN_FAULT, WRONG_INPUT


def told(fault: Exception) -> tuple[int, str]:
    """Return the exit code of an exception and the lines that are said of it; a traceback is saved, not shown."""
    from stdfit.base.errors import FitError, StdfitError

    if isinstance(fault, StdfitError):
        return ANSWER_IS_NO if isinstance(fault, FitError) else WRONG_INPUT, str(fault)
    if isinstance(fault, OSError):
        where = f"{shown(fault.filename)}: " if fault.filename else ""
        mend = "check the path, its permissions and the space on the disk"
        return WRONG_INPUT, f"{where}{fault.strerror or fault}\n{mend}"
    return OWN_FAULT, f"a fault of the program; the traceback is in {_save_traceback(fault)}"


def _save_traceback(fault: Exception) -> str:
    """Save the traceback of an exception; return where."""
    import tempfile
    import traceback

    with tempfile.NamedTemporaryFile(
        "w", prefix="stdfit-fault-", suffix=".txt", delete=False, encoding="utf-8"
    ) as file:
        file.writelines(traceback.format_exception(fault))
    return file.name
