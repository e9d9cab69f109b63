"""The command that checks a kit with devices: check."""

from __future__ import annotations

from stdfit.cli.exit_codes import ANSWER_IS_NO, DONE
from stdfit.cli.screen import print_csv, print_json, print_text

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    import argparse


def check(asked: argparse.Namespace) -> int:
    """Say whether a kit agrees with devices that it was not made from."""
    from stdfit.base.errors import RequestError
    from stdfit.pipeline.checking import check_kit
    from stdfit.validity.device.check import FAILS, SILENT
    from stdfit.writing.check_text import COLUMNS, check_data, check_rows, check_text

    if asked.csv and asked.json:
        raise RequestError("--csv and --json are asked for at once", "leave one of them out")
    found = check_kit(asked.kit, asked.bench, names=asked.standards, to_hz=asked.to_hz)
    if asked.json:
        print_json(check_data(found))
    elif asked.csv:
        print_csv(COLUMNS, check_rows(found))
    else:
        print_text(check_text(found))
    return ANSWER_IS_NO if found.verdict in (FAILS, SILENT) else DONE
