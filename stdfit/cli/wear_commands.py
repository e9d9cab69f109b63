"""The command that compares a kit with its own past: wear."""

from __future__ import annotations

from stdfit.cli.exit_codes import ANSWER_IS_NO, DONE
from stdfit.cli.screen import print_csv, print_json, print_text, tell

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    import argparse


def wear(asked: argparse.Namespace) -> int:
    """Say whether standards have changed, in what, and what the old definition is still good for."""
    from stdfit.base.errors import RequestError
    from stdfit.pipeline.wearing import wear_of
    from stdfit.validity.change.wear import CHANGED
    from stdfit.writing.wear_text import COLUMNS, wear_data, wear_rows, wear_text

    if asked.csv and asked.json:
        raise RequestError("--csv and --json are asked for at once", "leave one of them out")
    found = wear_of(asked.old, asked.new, same_calibration=asked.same_calibration)
    for warning in found.new.warnings:
        tell(f"warning: {warning}")
    if asked.json:
        print_json(wear_data(found))
    elif asked.csv:
        print_csv(COLUMNS, wear_rows(found))
    else:
        print_text(wear_text(found))
    return ANSWER_IS_NO if found.verdict == CHANGED else DONE
